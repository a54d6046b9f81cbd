"""Takes a solved flow from one mesh, and number of modes, to another."""

from __future__ import annotations

from typing import TYPE_CHECKING

from core.flow.sampling import Sampler

if TYPE_CHECKING:
    import numpy as np

    from core.flow.assembly import Assembler


class Transfer:
    """Interpolation between the states of two assemblers; modes that only one of them has are left out.

    Parameters
    ----------
    source, target : Assembler
        Of the same outline.
    """

    def __init__(self, source: Assembler, target: Assembler) -> None:
        self._source, self._target = source, target
        self._matrices = None
        if source.mesh is not target.mesh:
            self._matrices = Sampler(source.mesh).matrices(target.positions, target.layout.corners)

    def __call__(self, state: np.ndarray) -> np.ndarray:
        """Return the state of the target that is nearest to one of the source."""
        source, target = self._source.layout, self._target.layout
        out = self._target.blank()
        plane, vertical = target.velocity(out)
        old_plane, old_vertical = source.velocity(state)
        modes = min(source.in_plane, target.in_plane)
        for c in (0, 1):
            plane[c, :modes] = self._moved(old_plane[c, :modes], 0)
        modes = min(source.vertical, target.vertical)
        vertical[:modes] = self._moved(old_vertical[:modes], 0)
        modes = min(source.pressure, target.pressure)
        target.pressures(out)[:modes] = self._moved(source.pressures(state)[:modes], 1)
        return out

    def _moved(self, fields: np.ndarray, kind: int) -> np.ndarray:
        return fields if self._matrices is None else (self._matrices[kind] @ fields.T).T
