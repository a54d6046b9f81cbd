"""How far an area that was read from a file is from the outlines that were meant."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from core.geometry.contour import arc_data

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray
    from shapely.geometry.base import BaseGeometry

    from core.geometry.contour import Contour, Floats, Outline


@dataclass(frozen=True, slots=True, kw_only=True)
class Agreement:
    """Measured differences between what one block of a file holds on one layer and what was meant.

    Attributes
    ----------
    area_um2 : float
        Area in the file [um^2].
    bounds_um : tuple of float
        (x_min, y_min, x_max, y_max) in the file [um].
    corner_error_um : float
        Largest distance of a corner in the file from the lines and true arcs that were drawn [um].
    gap_um : float
        Largest distance of a point of the drawn outline from the outline in the file [um].
    edge_length_um : float
        Length of all edges in the file [um].
    part_count, island_count : int
        Separate areas, and holes in them.
    """

    area_um2: float
    bounds_um: tuple[float, float, float, float]
    corner_error_um: float
    gap_um: float
    edge_length_um: float
    part_count: int
    island_count: int


def compared(area: BaseGeometry, outlines: Sequence[Outline], *, sagitta_um: float) -> Agreement:
    """Measure an area from a file against outlines.

    Parameters
    ----------
    area : shapely geometry
        Union of all figures, islands taken out [um].
    outlines : sequence of Outline
        What was meant, at least one.
    sagitta_um : float
        How closely points are set on the drawn arcs: largest distance of their chords [um].

    Returns
    -------
    Agreement
        All measures; distances are infinite when the file holds no area.
    """
    import shapely

    parts = [part for part in shapely.get_parts(area) if part.geom_type == "Polygon"]
    found = [np.asarray(ring.coords) for part in parts for ring in (part.exterior, *part.interiors)]
    meant = _Meant(outlines, sagitta_um)
    x0, y0, x1, y1 = (float(value) for value in area.bounds)
    return Agreement(
        area_um2=float(area.area),
        bounds_um=(x0, y0, x1, y1),
        corner_error_um=meant.largest_distance(np.concatenate(found)) if found else np.inf,
        gap_um=float(_nearest(_chords(found), meant.points)[1].max()) if found else np.inf,
        edge_length_um=float(area.length),
        part_count=len(parts),
        island_count=sum(len(part.interiors) for part in parts),
    )


class _Meant:
    """The drawn outline, edge by edge, for measuring distances from it.

    Parameters
    ----------
    outlines : sequence of Outline
        Areas of lines and arcs.
    sagitta_um : float
        Chord tolerance at which the nearest edge is looked for [um].
    """

    def __init__(self, outlines: Sequence[Outline], sagitta_um: float) -> None:
        lines: list[Floats] = []
        centres, radii = [], []
        for contour in (ring for outline in outlines for ring in outline.contours):
            centre, radius, _, _ = arc_data(contour)
            centres.append(centre)
            radii.append(radius)
            lines += _edge_lines(contour, sagitta_um)
        self.points = np.concatenate(lines)
        owner = np.repeat(np.arange(len(lines)), [len(line) - 1 for line in lines])
        self._centre, self._radius = np.concatenate(centres)[owner], np.concatenate(radii)[owner]
        self._chords = _chords(lines)

    def largest_distance(self, points: Floats) -> float:
        """Return the largest distance of points from the nearest drawn line or true arc [um]."""
        nearest, distance = _nearest(self._chords, points)
        radius = self._radius[nearest]
        is_arc = np.isfinite(radius)
        spoke = np.hypot(*(points - self._centre[nearest]).T)
        return float(np.where(is_arc, np.abs(spoke - np.where(is_arc, radius, 0.0)), distance).max())


def _chords(lines: list[Floats]) -> Floats:
    """Return the straight edges of open lines, shape (n, 2 ends, 2)."""
    return np.concatenate([np.stack((line[:-1], line[1:]), axis=1) for line in lines])


def _nearest(chords: Floats, points: Floats) -> tuple[NDArray[np.int64], Floats]:
    """Return for each point the number of the nearest chord, and its distance [um]."""
    import shapely

    tree = shapely.STRtree(shapely.linestrings(chords))
    pairs, distance = tree.query_nearest(shapely.points(points), return_distance=True, all_matches=False)
    return pairs[1], distance


def _edge_lines(contour: Contour, sagitta_um: float) -> list[Floats]:
    """Return the points of every edge, both ends included; those of an arc lie on it."""
    centre, radius, start, sweep = arc_data(contour)
    ends = np.roll(contour.vertices_um, -1, axis=0)
    lines = []
    for k, vertex in enumerate(contour.vertices_um):
        if not np.isfinite(radius[k]):
            lines.append(np.stack((vertex, ends[k])))
            continue
        step = 2.0 * np.arccos(max(0.0, 1.0 - sagitta_um / radius[k]))
        angle = start[k] + np.linspace(0.0, sweep[k], max(2, int(np.ceil(abs(sweep[k]) / step)) + 1))
        lines.append(centre[k] + radius[k] * np.stack((np.cos(angle), np.sin(angle)), axis=1))
    return lines
