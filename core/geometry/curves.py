"""Walls of a channel as lines and arcs that know which stroke they belong to."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from math import ceil, cos, hypot, sin, tan

import numpy as np

from core.geometry.contour import LARGEST_SWEEP, Contour


@dataclass(frozen=True, slots=True)
class Wall:
    """Where a piece of outline comes from.

    Attributes
    ----------
    stroke : int
        Index of the stroke; -1 for the rounding of a corner.
    face : str
        ``left`` or ``right`` of the stroke, ``cap`` (the pen's circle at a node), ``end`` (open
        end) or ``round``.
    """

    stroke: int
    face: str


@dataclass(slots=True)
class Curve:
    """A straight line (radius 0) or an arc, walked with the fluid on its left.

    A value like all others here, but left unfrozen: thousands are made on every slider move.
    """

    wall: Wall
    start: tuple[float, float]
    end: tuple[float, float]
    centre: tuple[float, float] = (0.0, 0.0)
    radius: float = 0.0
    angle: float = 0.0
    sweep: float = 0.0

    @property
    def length(self) -> float:
        """Length along the curve [um]."""
        if self.radius == 0.0:
            return hypot(self.end[0] - self.start[0], self.end[1] - self.start[1])
        return self.radius * abs(self.sweep)

    def at(self, length: float) -> tuple[float, float]:
        """Return the point at a length from the start."""
        share = length / self.length
        if self.radius == 0.0:
            return (
                self.start[0] + share * (self.end[0] - self.start[0]),
                self.start[1] + share * (self.end[1] - self.start[1]),
            )
        turn = self.angle + share * self.sweep
        return self.centre[0] + self.radius * cos(turn), self.centre[1] + self.radius * sin(turn)

    def part(self, first: float, last: float) -> Curve:
        """Return the piece between two lengths from the start."""
        whole = self.length
        start = self.start if first <= 0.0 else self.at(first)
        end = self.end if last >= whole else self.at(last)
        if self.radius == 0.0:
            return Curve(self.wall, start, end)
        angle = self.angle + self.sweep * first / whole
        return Curve(self.wall, start, end, self.centre, self.radius, angle, self.sweep * (last - first) / whole)

    def shrunk(self, r: float) -> Curve:
        """Return the curve moved by r into the fluid (to its left)."""
        if r == 0.0 or self.wall.face == "end":
            return self
        if self.radius == 0.0:
            length = self.length
            nx, ny = (self.start[1] - self.end[1]) / length * r, (self.end[0] - self.start[0]) / length * r
            return Curve(self.wall, (self.start[0] + nx, self.start[1] + ny), (self.end[0] + nx, self.end[1] + ny))
        radius = self.radius - r if self.sweep > 0 else self.radius + r
        return arc_curve(self.wall, self.centre, radius, self.angle, self.sweep)


def arc_curve(wall: Wall, centre: tuple[float, float], radius: float, angle: float, sweep: float) -> Curve:
    """Return an arc with its ends worked out."""
    start = centre[0] + radius * cos(angle), centre[1] + radius * sin(angle)
    end = centre[0] + radius * cos(angle + sweep), centre[1] + radius * sin(angle + sweep)
    return Curve(wall, start, end, centre, radius, angle, sweep)


@dataclass(frozen=True)
class Ring:
    """A run of curves with the fluid on the left, closed as a rule."""

    curves: tuple[Curve, ...]

    @cached_property
    def contour(self) -> Contour:
        """Vertices and bulges, long arcs split."""
        vertices: list[tuple[float, float]] = []
        bulges: list[float] = []
        for curve in self.curves:
            vertices.append(curve.start)
            if curve.radius == 0.0:
                bulges.append(0.0)
                continue
            count = max(1, ceil(abs(curve.sweep) / LARGEST_SWEEP - 1e-9))
            vertices += [curve.at(curve.length * i / count) for i in range(1, count)]
            bulges += [tan(curve.sweep / count / 4.0)] * count
        return Contour(np.array(vertices), np.array(bulges))

    @cached_property
    def strokes(self) -> set[int]:
        """Indices of the strokes whose walls the ring touches."""
        return {curve.wall.stroke for curve in self.curves if curve.wall.stroke >= 0}
