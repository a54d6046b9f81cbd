"""Fields of a solved flow on their way from the child process to the window."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from core.flow.result import FlowField

if TYPE_CHECKING:
    from collections.abc import Mapping
    from pathlib import Path

DIRECTIONS = ("forward", "reverse")
_REALS = ("points_um", "in_plane_m_s", "vertical_m_s", "pressure_modes_pa")


def save_fields(path: Path, fields: Mapping[str, FlowField | None]) -> None:
    """Write the fields of the directions that were found; raises ``OSError``, then without leaving a file."""
    arrays = {}
    for direction, field in fields.items():
        if field is not None:
            arrays |= {f"{direction}_{name}": getattr(field, name).astype(np.float32) for name in _REALS}
            arrays[f"{direction}_triangles"] = field.triangles.astype(np.int32)
    try:
        np.savez(path, **arrays)  # type: ignore[arg-type]
    except OSError:
        path.unlink(missing_ok=True)
        raise


def read_fields(path: Path) -> dict[str, FlowField]:
    """Return the fields in a file, by direction."""
    with np.load(path, allow_pickle=False) as arrays:
        return {
            direction: FlowField(
                triangles=arrays[f"{direction}_triangles"],
                **{name: arrays[f"{direction}_{name}"] for name in _REALS},
            )
            for direction in DIRECTIONS
            if f"{direction}_triangles" in arrays
        }
