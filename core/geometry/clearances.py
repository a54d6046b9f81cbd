"""The narrowest places of a channel: its smallest width, its smallest gap, and the wall between two channels.

A width is a neck: two points of the walls that face one another squarely (each wall is normal to the
line between them), with no wall inside the circle that has this line for a diameter. A channel eroded
by slightly more than half of its smallest width breaks there. A gap is the same through the solid; an
island without a neck is as thin as the largest circle that fits into it, and vanishes with that.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from core.errors import GeometryError
from core.geometry.chain import period
from core.geometry.distances import Nearest, nearest
from core.geometry.double_normals import Through, double_normals
from core.geometry.edges import Edges, edges_before
from core.geometry.incircle import has_inside, incircle
from core.geometry.pads import end_index
from core.geometry.shape import repeat_vector

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

    from core.geometry.contour import Contour, Floats, Outline
    from core.geometry.shape import ChannelShape

# A circle is still empty when a wall reaches this little into it [um].
_EMPTY_UM = 1e-6
_BATCH = 16  # circles looked at together
_ASIDE = 1e-3  # how far beside a place it is looked whether walls open or close, as a part of their distance
_LEVEL = 1e-9  # relative change of their distance that counts: a thousandth of what a curve makes of it
_SLACK = 1.001  # so that a width as wide as drawn is not missed for rounding
_TIE_UM = 1e-5  # lengths that differ by less are equal
_ON_WALL_UM = 1e-3


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Gap:
    """The smallest solid between two walls of one channel.

    Attributes
    ----------
    um : float
        Its width, or the thickness of an island without a neck [um].
    at_um : array, shape (2, 2)
        Points on the two walls, or ends of a diameter of the island's largest circle [um].
    is_in_island : bool
        Whether the solid is an island.
    """

    um: float
    at_um: Floats
    is_in_island: bool


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Narrowest:
    """The narrowest places of one channel.

    Attributes
    ----------
    width_um : float
        Smallest width of the fluid [um]; infinite where there is no neck.
    width_at_um : array, shape (2, 2)
        Points on the two walls [um]; NaN where there is none.
    gap_um, gap_at_um, is_gap_in_island :
        As in ``Gap``; infinite and NaN for a channel that never faces itself.
    """

    width_um: float
    width_at_um: Floats
    gap_um: float
    gap_at_um: Floats
    is_gap_in_island: bool


def narrowest(shape: ChannelShape) -> Narrowest:
    """Return the narrowest places of a channel.

    Only the short chain is measured, so that the cost does not depend on the number of stages.

    Parameters
    ----------
    shape : ChannelShape
        A usable shape.

    Returns
    -------
    Narrowest
        Exact up to rounding, islands without a neck to 0.1 nm; on the drawing of the set.

    Raises
    ------
    GeometryError
        If the shape has no outline.
    """
    rings = _Rings(_short_rings(shape))
    line = shape.centreline if shape.chain is None else shape.chain.centreline
    ends = [end_index(rings.contours[0], end.section_um) for end in (line.forward_outlet, line.forward_inlet)]
    p = shape.parameters
    likely_um = max(p.channel_width_um, p.loop_width_um if p.stages else 0.0) * _SLACK
    width_um, width_at = rings.neck_um(likely_um=likely_um, open_ends=ends)
    gap = narrowest_gap(shape)
    nowhere = np.full((2, 2), np.nan)
    return Narrowest(
        width_um=width_um,
        width_at_um=on_long_chain(shape, width_at) if np.isfinite(width_um) else nowhere,
        gap_um=gap.um if gap else np.inf,
        gap_at_um=gap.at_um if gap else nowhere,
        is_gap_in_island=gap is not None and gap.is_in_island,
    )


def narrowest_gap(shape: ChannelShape, *, below_um: float = np.inf) -> Gap | None:
    """Return the smallest solid between two walls of a channel, if it is smaller than a limit.

    Parameters
    ----------
    shape : ChannelShape
        A usable shape.
    below_um : float
        Larger gaps are of no interest [um]; a small limit is quickly looked through.

    Returns
    -------
    Gap or None
        As in ``narrowest``.

    Raises
    ------
    GeometryError
        If the shape has no outline.
    """
    gap = gap_of(_short_rings(shape), below_um=below_um)
    return gap if gap is None or gap.is_in_island else replace(gap, at_um=on_long_chain(shape, gap.at_um))


def gap_of(rings: Sequence[Contour], *, below_um: float = np.inf) -> Gap | None:
    """Return the smallest gap of few rings, the outer one first; the cost grows with the square of their edges."""
    return _Rings(rings).gap(below_um)


class _Rings:
    """The rings of one area, measured together."""

    def __init__(self, contours: Sequence[Contour]) -> None:
        self.contours = contours
        self.edges = Edges.of(contours)
        counts = [len(contour.bulges) for contour in contours]
        self.owner = np.repeat(np.arange(len(counts)), counts)
        self.before = edges_before(counts)

    def neck_um(self, *, likely_um: float, open_ends: Sequence[int]) -> tuple[float, Floats]:
        """Return the smallest width and its ends; open ends are no walls, as fluid goes on there.

        Where there is a width of at most ``likely_um``, it is quickly found.
        """
        walls = np.delete(np.arange(len(self.edges)), open_ends)
        renumbered = np.cumsum(np.isin(np.arange(len(self.edges)), walls)) - 1
        before = np.where(np.isin(self.before[walls], open_ends), np.arange(len(walls)), renumbered[self.before[walls]])
        edges = self.edges.take(walls)
        for below_um in (likely_um, np.inf):
            facing = double_normals(edges, before, Through.FLUID, below_um=below_um)
            for length, at, _ in _empty_circles(edges, *facing):
                if _is_neck(edges, at):
                    return length, at
        return np.inf, np.full((2, 2), np.nan)

    def gap(self, below_um: float) -> Gap | None:
        """Return the smallest gap below a limit."""
        facing = double_normals(self.edges, self.before, Through.SOLID, below_um=below_um)
        gap: Gap | None = None
        left = self._distinct_islands()
        for length, at, edge in _empty_circles(self.edges, *facing):
            ring = int(self.owner[edge])
            if gap is None and _is_neck(self.edges, at):
                gap = Gap(um=length, at_um=at, is_in_island=ring > 0)
            if gap is not None:
                left.discard(ring)  # a circle as large as the gap fits into it
                if not left:
                    break
        for ring in sorted(left):
            thin = incircle(self.contours[ring], at_most_um=0.5 * (gap.um if gap else below_um))
            if thin is not None:
                gap = Gap(um=2.0 * thin.radius_um, at_um=thin.diameter_um, is_in_island=True)
        return gap

    def _distinct_islands(self) -> set[int]:
        """Return the numbers of islands of which none is an earlier one turned or mirrored."""
        areas = [round(contour.area_um2, 3) for contour in self.contours]
        return {number for number in range(1, len(areas)) if areas[number] not in areas[1:number]}


def _empty_circles(edges: Edges, first: Floats, second: Floats) -> Iterator[tuple[float, Floats, int]]:
    """Yield pairs of points in whose circle no wall lies, the nearest first: length, ends, a wall that is touched."""
    length = np.hypot(*(second - first).T)
    order = np.lexsort((first[:, 0], np.round(length / _TIE_UM)))  # of equal ones the first along the chain
    for at in range(0, len(order), _BATCH):
        batch = order[at : at + _BATCH]
        away = edges.distance(0.5 * (first[batch] + second[batch])[:, None])
        for row in np.flatnonzero(away.min(axis=1) > 0.5 * length[batch] - _EMPTY_UM):
            k = batch[row]
            yield float(length[k]), np.stack((first[k], second[k])), int(np.argmin(away[row]))


def _is_neck(edges: Edges, at_um: Floats) -> bool:
    """Return whether walls that face one another squarely open or close in the same sense to both sides.

    Where they close to one side and open to the other, as where a round end goes over into a widening part,
    nothing breaks there.
    """
    across = at_um[1] - at_um[0]
    length = np.hypot(*across)
    aside = _ASIDE * np.array([-across[1], across[0]])
    opens = []
    for point in (at_um.mean(axis=0) + aside, at_um.mean(axis=0) - aside):
        width = sum(edges.ahead(point, sense * across / length) for sense in (1.0, -1.0))
        opens.append((width - length) / length)
    return not min(opens) < -_LEVEL < _LEVEL < max(opens)


def _short_rings(shape: ChannelShape) -> list[Contour]:
    """Return the rings of the short chain, the outer one first."""
    if shape.outline is None or shape.chain is None:
        raise GeometryError("a shape with error findings cannot be measured")
    return [shape.chain.outers[0].contour, *(ring.contour for ring in shape.chain.holes)]


def on_long_chain(shape: ChannelShape, points_um: Floats) -> Floats:
    """Return points of the short chain on the long one: where they are, or shifted to its far end."""
    chain, outline = shape.chain, shape.outline
    if chain is None or outline is None or chain.parameters.stages == shape.parameters.stages:
        return points_um
    short = Edges.of([chain.outers[0].contour])
    outer = points_um[short.distance(points_um[:, None]).min(axis=1) < _ON_WALL_UM]
    if not len(outer) or Edges.of([outline.outer]).distance(outer[:, None]).min(axis=1).max() < _ON_WALL_UM:
        return points_um
    periods = (shape.parameters.stages - chain.parameters.stages) // period(chain.parameters)
    return points_um + periods * repeat_vector(chain)


def wall_between(first: Outline, second: Outline) -> Nearest:
    """Return the smallest distance between two areas.

    Parameters
    ----------
    first, second : Outline
        In the same coordinates, anywhere.

    Returns
    -------
    Nearest
        Distance and the point on each [um]; 0 where they overlap, even where no walls cross.
    """
    found = nearest(Edges.of([first.outer]), Edges.of([second.outer]))
    if found.um == 0.0:
        return found
    for outside, inside, is_turned in ((first, second, False), (second, first, True)):
        point = inside.outer.vertices_um[:1]
        if not has_inside(outside.outer, point, sagitta_um=0.5 * found.um)[0]:
            continue
        around = [island for island in outside.islands if _holds(island, point, found.um)]
        if not around:
            return Nearest(um=0.0, at_um=np.repeat(point, 2, axis=0))
        within = nearest(Edges.of(around), Edges.of([inside.outer]))
        return Nearest(um=within.um, at_um=within.at_um[::-1] if is_turned else within.at_um)
    return found


def _holds(island: Contour, point: Floats, distance_um: float) -> bool:
    return bool(has_inside(island, point, sagitta_um=0.5 * distance_um)[0])
