"""What a round pen draws along lines and arcs: exact areas bounded by lines and arcs.

Every stroke contributes the two curves at half its width; every node where strokes meet
contributes the pen's own circle. The curves are cut where they cross, the pieces that lie inside
another stroke are dropped, and the rest is joined into rings with the fluid on their left.

Rounding is part of the same step. Rounding all inner corners with radius r is what remains when
the pen is r wider on each side and the result is then shrunk by r (a morphological closing): a
wide curve moves back by r, and a corner of the wide outline becomes an arc of radius r about it.
This is exact, and arcs can never overlap one another.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from itertools import pairwise
from math import atan2, hypot, pi
from typing import TYPE_CHECKING

import numpy as np

from core.errors import GeometryError
from core.geometry.crossings import cut_lengths
from core.geometry.curves import Curve, Ring, Wall, arc_curve

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    from core.geometry.contour import Flags, Floats

# Features below one nanometre are below the finest mask grid: ends closer than this are one.
JOIN_UM = 1e-3
_INSIDE_UM = 1e-9  # how deep inside a stroke a piece must lie to be dropped


@dataclass(frozen=True, slots=True)
class PenLine:
    """A straight or curved centre line with the half width drawn along it.

    Attributes
    ----------
    start, end : tuple of float
        Ends [um].
    half_width : float
        Half of the pen's width [um].
    centre, radius, angle, sweep :
        As in ``Curve``; radius 0 for a straight line.
    is_start_open, is_end_open : bool
        True where the end is cut square and open.
    """

    start: tuple[float, float]
    end: tuple[float, float]
    half_width: float
    centre: tuple[float, float] = (0.0, 0.0)
    radius: float = 0.0
    angle: float = 0.0
    sweep: float = 0.0
    is_start_open: bool = False
    is_end_open: bool = False

    def end_headings(self) -> tuple[float, float]:
        """Return the directions that lead into the line from its start and from its end."""
        if self.radius == 0.0:
            heading = atan2(self.end[1] - self.start[1], self.end[0] - self.start[0])
            return heading, heading + pi
        quarter = pi / 2 if self.sweep > 0 else -pi / 2
        return self.angle + quarter, self.angle + self.sweep - quarter


def drawn_rings(lines: Sequence[PenLine], *, rounding_um: float) -> list[Ring]:
    """Return the rings around everything that a round pen draws.

    Parameters
    ----------
    lines : sequence of PenLine
        Centre lines; open ends are cut square, all others are round.
    rounding_um : float
        Radius given to every inner corner [um]; 0 leaves them sharp.

    Returns
    -------
    list of Ring
        Outer rings run counter-clockwise, holes clockwise.

    Raises
    ------
    GeometryError
        If walls touch in a point or run so close that the area cannot be told.
    """
    r = rounding_um if rounding_um >= JOIN_UM else 0.0
    pen = _Pen(lines, r)
    curves = pen.curves()
    cuts = cut_lengths(curves, tolerance=JOIN_UM)
    pieces = [
        curve.part(first, last)
        for curve, lengths in zip(curves, cuts, strict=True)
        for first, last in pairwise(lengths)
    ]
    # two samples, because a piece may just touch a wall in one point
    inside = np.zeros(len(pieces), dtype=bool)
    for share in (0.38, 0.61):
        inside |= pen.is_inside(np.array([piece.at(share * piece.length) for piece in pieces]))
    kept = [piece for piece, drop in zip(pieces, inside, strict=True) if not drop]
    return [_rounded(ring, r) if r else ring for ring in _joined(kept)]


class _Pen:
    """The strokes of a pen that is ``extra`` wider on each side."""

    def __init__(self, lines: Sequence[PenLine], extra: float) -> None:
        self.lines = lines
        self.extra = extra
        self.nodes = self._nodes()

    def _nodes(self) -> list[tuple[tuple[float, float], float, list[tuple[float, float, float]]]]:
        """Return (point, pen radius, incident lines as (direction, half width, length))."""
        places: dict[tuple[int, int], tuple[tuple[float, float], list[tuple[float, float, float]]]] = {}
        for line in self.lines:
            length = hypot(line.end[0] - line.start[0], line.end[1] - line.start[1])
            into_start, into_end = line.end_headings()
            ends = ((line.start, into_start, line.is_start_open), (line.end, into_end, line.is_end_open))
            for point, heading, is_open in ends:
                if not is_open:
                    key = round(point[0] / JOIN_UM / 10), round(point[1] / JOIN_UM / 10)
                    near = next((k for k in _neighbours(key) if k in places), key)
                    places.setdefault(near, (point, []))[1].append((heading, line.half_width + self.extra, length))
        return [
            (point, half, incident)
            for point, incident in places.values()
            for half in _distinct(half for _, half, _ in incident)
        ]

    def curves(self) -> list[Curve]:
        """Return all walls, ends and caps before cutting."""
        found: list[Curve] = []
        for index, line in enumerate(self.lines):
            found += self._faces(index, line)
        for point, half, incident in self.nodes:
            found += _caps(point, half, incident)
        return found

    def _faces(self, index: int, line: PenLine) -> Iterable[Curve]:
        h = line.half_width + self.extra
        left, right = Wall(index, "left"), Wall(index, "right")
        if line.radius == 0.0:
            length = hypot(line.end[0] - line.start[0], line.end[1] - line.start[1])
            nx, ny = h * (line.start[1] - line.end[1]) / length, h * (line.end[0] - line.start[0]) / length
            a_left, b_left = (line.start[0] + nx, line.start[1] + ny), (line.end[0] + nx, line.end[1] + ny)
            a_right, b_right = (line.start[0] - nx, line.start[1] - ny), (line.end[0] - nx, line.end[1] - ny)
            yield Curve(right, a_right, b_right)
            yield Curve(left, b_left, a_left)
            if line.is_start_open:
                yield Curve(Wall(index, "end"), a_left, a_right)
            if line.is_end_open:
                yield Curve(Wall(index, "end"), b_right, b_left)
            return
        turn = 1.0 if line.sweep > 0 else -1.0
        yield arc_curve(right, line.centre, line.radius + turn * h, line.angle, line.sweep)
        yield arc_curve(left, line.centre, line.radius - turn * h, line.angle + line.sweep, -line.sweep)

    def is_inside(self, points: Floats) -> Flags:
        """Return whether each point lies well inside some stroke; shape (n,) of bool."""
        inside = np.zeros(len(points), dtype=bool)
        straight = [line for line in self.lines if line.radius == 0.0]
        curved = [line for line in self.lines if line.radius != 0.0]
        if straight:
            inside |= self._in_straight(points, straight)
        if curved:
            inside |= self._in_curved(points, curved)
        if self.nodes:
            centres = np.array([point for point, _, _ in self.nodes])
            halves = np.array([half for _, half, _ in self.nodes])
            away = np.hypot(*(points[:, None] - centres[None]).transpose(2, 0, 1))
            inside |= (away < halves - _INSIDE_UM).any(axis=1)
        return inside

    def _in_straight(self, points: Floats, lines: list[PenLine]) -> Flags:
        start = np.array([line.start for line in lines])
        d = np.array([line.end for line in lines]) - start
        length = np.hypot(d[:, 0], d[:, 1])
        d = d / length[:, None]
        rel = points[:, None] - start[None]
        along = rel[..., 0] * d[:, 0] + rel[..., 1] * d[:, 1]
        across = np.abs(rel[..., 1] * d[:, 0] - rel[..., 0] * d[:, 1])
        half = np.array([line.half_width for line in lines]) + self.extra
        # an open end is a wall: lying on it is not inside
        low = np.array([_INSIDE_UM if line.is_start_open else -_INSIDE_UM for line in lines])
        high = length - np.array([_INSIDE_UM if line.is_end_open else -_INSIDE_UM for line in lines])
        hit: Flags = ((across < half - _INSIDE_UM) & (along >= low) & (along <= high)).any(axis=1)
        return hit

    def _in_curved(self, points: Floats, lines: list[PenLine]) -> Flags:
        rel = points[:, None] - np.array([line.centre for line in lines])[None]
        away = np.hypot(rel[..., 0], rel[..., 1])
        sweep = np.array([line.sweep for line in lines])
        turn = (np.arctan2(rel[..., 1], rel[..., 0]) - np.array([line.angle for line in lines])) * np.sign(sweep)
        turn = (turn + 1e-12) % (2.0 * pi)
        half = np.array([line.half_width for line in lines]) + self.extra
        radius = np.array([line.radius for line in lines])
        hit: Flags = ((np.abs(away - radius) < half - _INSIDE_UM) & (turn <= np.abs(sweep) + 2e-12)).any(axis=1)
        return hit


def _distinct(halves: Iterable[float]) -> list[float]:
    """Return half widths in order, without those that a mask could not tell from the one before."""
    found: list[float] = []
    for half in sorted(halves):
        if not found or half - found[-1] >= JOIN_UM:
            found.append(half)
    return found


def _neighbours(key: tuple[int, int]) -> Iterable[tuple[int, int]]:
    return ((key[0] + i, key[1] + j) for i in (0, -1, 1) for j in (0, -1, 1))


def _caps(point: tuple[float, float], half: float, incident: list[tuple[float, float, float]]) -> Iterable[Curve]:
    """Yield the arcs of the pen's circle, cut where they touch the strokes' walls.

    A stroke at least as wide and long enough covers the half of the circle on its own side.
    """
    # where the walls of strokes of this very width touch the circle
    marks = sorted(
        {
            round((heading + quarter) % (2 * pi), 12)
            for heading, other, _ in incident
            for quarter in (-pi / 2, pi / 2)
            if abs(other - half) < JOIN_UM
        }
    )
    cover = [(heading, length) for heading, other, length in incident if other > half - JOIN_UM and length >= half]
    for first, last in zip(marks, [*marks[1:], marks[0] + 2 * pi], strict=True):
        if (last - first) * half < 1e-9:
            continue
        middle = 0.5 * (first + last)
        if any(abs((middle - heading + pi) % (2 * pi) - pi) < pi / 2 - 1e-9 for heading, _ in cover):
            continue
        yield arc_curve(Wall(-1, "cap"), point, half, first, last - first)


def _joined(pieces: list[Curve]) -> list[Ring]:
    """Return closed rings made of pieces that follow one another end to start."""
    starts = np.array([piece.start for piece in pieces])
    ends = np.array([piece.end for piece in pieces])
    gaps = np.hypot(ends[:, 0, None] - starts[None, :, 0], ends[:, 1, None] - starts[None, :, 1])
    following = np.argmin(gaps, axis=1)
    if np.any(gaps[np.arange(len(pieces)), following] > 3.0 * JOIN_UM):
        raise GeometryError("walls touch or run too close together to tell the area")
    if len(set(following.tolist())) != len(pieces):
        raise GeometryError("walls touch in a point")
    rings: list[Ring] = []
    left = set(range(len(pieces)))
    while left:
        walk = [min(left)]
        left.remove(walk[0])
        while (after := int(following[walk[-1]])) != walk[0]:
            walk.append(after)
            left.remove(after)
        rings.append(Ring(_whole_walls([pieces[i] for i in walk])))
    return rings


def _whole_walls(pieces: list[Curve]) -> tuple[Curve, ...]:
    """Return the same closed run with pieces of one wall made one again where nothing lies between."""
    first = next((i for i, piece in enumerate(pieces) if not _goes_on(pieces[i - 1], piece)), 0)
    whole: list[Curve] = []
    for piece in pieces[first:] + pieces[:first]:
        if whole and _goes_on(whole[-1], piece):
            old = whole[-1]
            whole[-1] = replace(old, end=piece.end, sweep=old.sweep + piece.sweep)
        else:
            whole.append(piece)
    return tuple(whole)


def _goes_on(piece: Curve, following: Curve) -> bool:
    is_same_curve = (piece.radius, piece.centre) == (following.radius, following.centre)
    return piece.wall == following.wall and is_same_curve and piece.end == following.start


def _rounded(ring: Ring, r: float) -> Ring:
    """Return the ring moved back by r, with an arc of radius r at every inner corner."""
    moved = [curve.shrunk(r) for curve in ring.curves]
    result: list[Curve] = []
    for index, curve in enumerate(moved):
        previous, following = moved[index - 1], moved[(index + 1) % len(moved)]
        if curve.wall.face == "end":
            result.append(Curve(curve.wall, previous.end, following.start))
            continue
        result.append(curve)
        gap = hypot(following.start[0] - curve.end[0], following.start[1] - curve.end[1])
        if following.wall.face != "end" and gap > JOIN_UM:
            corner = ring.curves[index].end
            angle, to = (atan2(y - corner[1], x - corner[0]) for x, y in (curve.end, following.start))
            turn = (angle - to) % (2 * pi)
            if turn < pi:  # else the walls go on smoothly, and missed one another by a hair
                result.append(arc_curve(Wall(-1, "round"), corner, r, angle, -turn))
    return Ring(tuple(result))
