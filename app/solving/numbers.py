"""Results of flow solves as a table that spreadsheets read."""

from __future__ import annotations

import csv
from typing import TYPE_CHECKING

from core.operating import OPERATING_FIELDS
from core.parameters import CHANNEL_FIELDS
from core.project.solved import LISTS

if TYPE_CHECKING:
    from collections.abc import Sequence
    from pathlib import Path

    from core.project.solved import SolvedResult

_NUMBERS = (
    "flow_ul_min", "reynolds", "forward_pressure_pa", "reverse_pressure_pa", "error_band_percent", "diodicity",
    "diodicity_band", "loop_share_forward", "loop_share_reverse", "reached_reynolds", "valid", "quality",
)  # fmt: skip
_CONDITIONS = tuple(name for name in OPERATING_FIELDS if name != "flow_ul_min")


def write_numbers(results: Sequence[SolvedResult], path: Path) -> None:
    """Write one row for each result, with the design and the conditions it belongs to.

    Parameters
    ----------
    results : sequence of SolvedResult
        In the order of the rows.
    path : Path
        CSV file, UTF-8; column names carry the units.

    Raises
    ------
    OSError
        If the file cannot be written; nothing is left of it then.
    """
    try:
        with path.open("w", encoding="utf-8", newline="") as file:
            table = csv.writer(file)
            table.writerow(["set_name", *_NUMBERS, *LISTS, *_CONDITIONS, *CHANNEL_FIELDS, "notes"])
            for each in results:
                numbers = [getattr(each, name) for name in _NUMBERS]
                stages = ["; ".join(f"{value:.6g}" for value in getattr(each, name)) for name in LISTS]
                conditions = [getattr(each.operating, name) for name in _CONDITIONS]
                table.writerow(
                    [
                        each.set_name,
                        *numbers,
                        *stages,
                        *conditions,
                        *each.channel.as_dict().values(),
                        "; ".join(each.notes),
                    ]
                )
    except OSError:
        path.unlink(missing_ok=True)
        raise
