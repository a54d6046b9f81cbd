"""A short chain drawn exactly, and the places where it may be cut to be repeated.

Stages repeat, so a long channel is a short chain whose middle is placed many times. Cuts run
across the bypass and across the turn of a stage, through its island: what lies between two cuts
has no hole, whatever the gap between the stages looks like.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property
from math import atan2, pi
from typing import TYPE_CHECKING

import numpy as np

from core.errors import GeometryError
from core.geometry.centreline import Centreline, Part, build_centreline
from core.geometry.contour import Contour
from core.geometry.curves import Curve, Ring, Wall
from core.geometry.pen import PenLine, drawn_rings

if TYPE_CHECKING:
    from core.geometry.contour import Floats
    from core.parameters import ChannelParameters

# Least free wall for a cut [um along the bypass, rad along the turn].
SHORTEST_SPAN = 0.01

# a place on a ring: index of the curve and length from its start [um]
Spot = tuple[int, float]


@dataclass(frozen=True, slots=True)
class Cut:
    """Where one stage is cut: four spots, on the outer ring and on the stage's island."""

    outer_bypass: Spot
    island_bypass: Spot
    outer_turn: Spot
    island_turn: Spot


@dataclass(frozen=True, slots=True)
class Tag:
    """What a pen line is: its stage and part; bypass and the straight after it are one line."""

    stage: int
    part: Part


@dataclass(frozen=True)
class Chain:
    """A chain of few stages as rings of curves.

    Attributes
    ----------
    parameters : ChannelParameters
        With the number of stages that is really drawn.
    centreline : Centreline
        Its centre lines.
    tags : tuple of Tag
        For each pen line.
    outers, holes : tuple of Ring
        Rings round the fluid and round solid inside it.
    """

    parameters: ChannelParameters
    centreline: Centreline
    tags: tuple[Tag, ...]
    outers: tuple[Ring, ...]
    holes: tuple[Ring, ...]

    def stages_of(self, ring: Ring) -> set[int]:
        """Return the stages whose walls a ring touches."""
        return {self.tags[stroke].stage for stroke in ring.strokes}

    def face(self, stage: int, part: Part, *, is_outer: bool) -> Wall:
        """Return the wall of a bypass or turn that looks away from the island, or at it."""
        is_left_loop = self.centreline.stages[stage].side > 0
        if part is Part.BYPASS:
            face = "right" if is_left_loop == is_outer else "left"
        else:
            face = "left" if is_left_loop == is_outer else "right"
        return Wall(self.tags.index(Tag(stage, part)), face)

    @cached_property
    def islands(self) -> tuple[Ring, ...]:
        """One hole for each stage, in order; only where ``is_regular`` holds."""
        return tuple(sorted(self.holes, key=lambda ring: min(self.stages_of(ring))))

    @cached_property
    def cuts(self) -> tuple[Cut, ...]:
        """One cut for each stage.

        Raises
        ------
        GeometryError
            If a wall to cut at is not there.
        """
        far = [self._bypass_span(self.outers[0], stage, is_outer=True) for stage in self._stages]
        near = [self._bypass_span(self.islands[stage], stage, is_outer=False) for stage in self._stages]
        wide = [self._turn_span(self.outers[0], stage, is_outer=True) for stage in self._stages]
        tight = [self._turn_span(self.islands[stage], stage, is_outer=False) for stage in self._stages]
        # all stages are cut alike, so that what lies between two cuts repeats
        swept = _middle_of([*wide, *tight])
        along_far, along_near = _middle_of(far), _middle_of(near)
        if max(span[1] for span in far + near) < min(span[2] for span in far + near):
            along_far = along_near = _middle_of(far + near)
        return tuple(
            Cut(
                self._bypass_spot(self.outers[0], stage, far[stage][0], along_far),
                self._bypass_spot(self.islands[stage], stage, near[stage][0], along_near),
                self._turn_spot(self.outers[0], stage, wide[stage][0], swept),
                self._turn_spot(self.islands[stage], stage, tight[stage][0], swept),
            )
            for stage in self._stages
        )

    @property
    def _stages(self) -> range:
        return range(self.parameters.stages)

    def _bypass_span(self, ring: Ring, stage: int, *, is_outer: bool) -> tuple[int, float, float]:
        """Return the longest free wall of the bypass: curve index and range from the fork [um]."""
        wall = self.face(stage, Part.BYPASS, is_outer=is_outer)
        place = self.centreline.stages[stage]
        length = float(np.hypot(*(place.mouth_um - place.fork_um)))
        spans = []
        for index, curve in enumerate(ring.curves):
            if curve.wall == wall:
                low, high = sorted((self._along(stage, curve.start), self._along(stage, curve.end)))
                spans.append((index, max(low, 0.0), min(high, length)))
        return _longest(spans)

    def _along(self, stage: int, point: tuple[float, float]) -> float:
        place = self.centreline.stages[stage]
        d = place.mouth_um - place.fork_um
        return float(np.dot(np.asarray(point) - place.fork_um, d) / np.hypot(*d))

    def _bypass_spot(self, ring: Ring, stage: int, index: int, along: float) -> Spot:
        return index, abs(along - self._along(stage, ring.curves[index].start))

    def _turn_span(self, ring: Ring, stage: int, *, is_outer: bool) -> tuple[int, float, float]:
        """Return the longest free arc of the turn: curve index and range of the sweep from its start [rad]."""
        wall = self.face(stage, Part.TURN, is_outer=is_outer)
        spans = []
        for index, curve in enumerate(ring.curves):
            if curve.wall == wall:
                start = self._swept(stage, curve.angle)
                low, high = sorted((start, start + self._sense(stage, curve)))
                spans.append((index, low, high))
        return _longest(spans)

    @cached_property
    def _turns(self) -> dict[int, tuple[float, float]]:
        """Start angle and signed sweep of each turn's centre line [rad]."""
        return {s.stage: s.arc()[2:] for s in self.centreline.strokes if s.part is Part.TURN}

    def _swept(self, stage: int, angle: float) -> float:
        start, sweep = self._turns[stage]
        turn = (angle - start) * (1.0 if sweep > 0 else -1.0)
        return (turn + 0.1) % (2 * pi) - 0.1

    def _sense(self, stage: int, curve: Curve) -> float:
        """Return the sweep of a curve counted in the sense of the turn."""
        return curve.sweep if self._turns[stage][1] > 0 else -curve.sweep

    def _turn_spot(self, ring: Ring, stage: int, index: int, swept: float) -> Spot:
        curve = ring.curves[index]
        return index, abs(swept - self._swept(stage, curve.angle)) * curve.radius


def _longest(spans: list[tuple[int, float, float]]) -> tuple[int, float, float]:
    best = max(spans, key=lambda span: span[2] - span[1], default=None)
    if best is None or best[2] - best[1] < SHORTEST_SPAN:
        raise GeometryError("a wall that should be free is covered")
    return best


def _middle_of(spans: list[tuple[int, float, float]]) -> float:
    low, high = max(span[1] for span in spans), min(span[2] for span in spans)
    if high - low < SHORTEST_SPAN:
        raise GeometryError("the stages have no free wall in common")
    return 0.5 * (low + high)


def period(parameters: ChannelParameters) -> int:
    """Return after how many stages the chain repeats."""
    return 2 if parameters.sides == "alternate" else 1


def drawn_stages(parameters: ChannelParameters) -> int:
    """Return how many stages must be drawn to know every neighbourhood of a longer chain."""
    step = period(parameters)
    least = 2 + step
    return min(parameters.stages, least + (parameters.stages - least) % step)


def draw_chain(parameters: ChannelParameters) -> Chain:
    """Return a chain drawn exactly, with islands and other corners rounded by their own radii.

    Parameters
    ----------
    parameters : ChannelParameters
        A set with possible stages; cost grows with the square of their number.

    Returns
    -------
    Chain
        May be irregular (too few or too many holes): see ``core.geometry.shape``.

    Raises
    ------
    GeometryError
        If walls touch in a point.
    """
    centreline = build_centreline(parameters)
    tags, lines = _pen_lines(centreline)
    rings = drawn_rings(lines, rounding_um=parameters.corner_radius_um)
    outers = tuple(ring for ring in rings if ring.contour.area_um2 > 0.0)
    if parameters.nose_radius_um != parameters.corner_radius_um:
        rings = drawn_rings(lines, rounding_um=parameters.nose_radius_um)
    holes = tuple(ring for ring in rings if ring.contour.area_um2 <= 0.0)
    return Chain(parameters, centreline, tags, outers, holes)


def _pen_lines(centreline: Centreline) -> tuple[tuple[Tag, ...], list[PenLine]]:
    tags: list[Tag] = []
    lines: list[PenLine] = []
    for stroke in centreline.strokes:
        start, end = _pair(stroke.start_um), _pair(stroke.end_um)
        half = 0.5 * stroke.width_um
        if stroke.bulge != 0.0:
            centre, radius, angle, sweep = stroke.arc()
            lines.append(PenLine(start, end, half, _pair(centre), radius, angle, sweep))
        elif (index := _straight_before(tags, lines, stroke.stage, start, end)) is not None:
            lines[index] = replace(lines[index], end=end)
            continue
        else:
            lines.append(PenLine(start, end, half))
        tags.append(Tag(stroke.stage, stroke.part))
    if centreline.strokes[-1].part in (Part.LEAD_IN, Part.LEAD_OUT):
        last = max(i for i, tag in enumerate(tags) if tag.part in (Part.BYPASS, Part.LEAD_OUT, Part.GAP))
        lines[last] = replace(lines[last], is_end_open=True)
    lines[0] = replace(lines[0], is_start_open=True)
    return tuple(tags), lines


def _straight_before(
    tags: list[Tag], lines: list[PenLine], stage: int, start: tuple[float, float], end: tuple[float, float]
) -> int | None:
    """Return the index of this stage's bypass if the new straight simply carries it on."""
    for index, tag in enumerate(tags):
        if tag == Tag(stage, Part.BYPASS) and lines[index].end == start:
            line = lines[index]
            before = atan2(line.end[1] - line.start[1], line.end[0] - line.start[0])
            after = atan2(end[1] - start[1], end[0] - start[0])
            if abs((after - before + pi) % (2 * pi) - pi) < 1e-9:
                return index
    return None


def _pair(point: Floats) -> tuple[float, float]:
    return float(point[0]), float(point[1])


def walk(ring: Ring, first: Spot, last: Spot) -> Contour:
    """Return the run of a ring between two spots as vertices and bulges, both ends included.

    The result is an open run: its last vertex is the end spot and has bulge 0.
    """
    (i, a), (j, b) = first, last
    curves = ring.curves
    if i == j and b > a:
        parts = [curves[i].part(a, b)]
    else:
        count = (j - i - 1) % len(curves) if i != j else len(curves) - 1
        between = [curves[(i + 1 + n) % len(curves)] for n in range(count)]
        parts = [curves[i].part(a, curves[i].length), *between, curves[j].part(0.0, b)]
    run = Ring(tuple(part for part in parts if part.length > 0.0)).contour
    end = np.array([parts[-1].end])
    return Contour(np.concatenate((run.vertices_um, end)), np.append(run.bulges, 0.0))
