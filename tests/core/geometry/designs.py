"""Random parameter sets and an independent construction of their areas, for tests."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import pyclipper
from shapely import Polygon

from core.parameters import CHANNEL_FIELDS, ChannelParameters

if TYPE_CHECKING:
    from core.geometry.contour import Outline


def anywhere(rng: np.random.Generator) -> ChannelParameters:
    """Return a set drawn evenly from all that the bounds allow."""
    values: dict[str, object] = {}
    for field in CHANNEL_FIELDS.values():
        if field.choices:
            values[field.name] = str(rng.choice(field.choices))
        elif field.whole:
            values[field.name] = int(rng.integers(field.minimum, field.maximum + 1))
        else:
            values[field.name] = float(rng.uniform(field.minimum, field.maximum))
    return ChannelParameters(**values)


def sensible(rng: np.random.Generator, *, most_stages: int = 12) -> ChannelParameters:
    """Return a set of the proportions that are really drawn."""
    w = float(10 ** rng.uniform(1.2, 2.7))
    angle = float(rng.uniform(15, 90))
    few = [n for n in (1, 2, 3, 4, 5, 7, 12, 40, 100) if n <= most_stages]
    return ChannelParameters(
        channel_width_um=w,
        loop_width_um=w * float(rng.choice([1, 1, rng.uniform(0.5, 1.4)])),
        loop_angle_deg=angle,
        run_bend_deg=float(rng.choice([angle, 0, rng.uniform(0, angle)])),
        loop_turn_deg=float(rng.choice([180, rng.uniform(120, 230)])),
        loop_radius_um=w * float(rng.uniform(0.8, 3)),
        return_length_um=w * float(rng.choice([0, rng.uniform(0, 3)])),
        stages=int(rng.choice(few)),
        sides=str(rng.choice(["alternate", "same"])),
        stage_gap_um=w * float(rng.choice([1, 2, rng.uniform(0.2, 6)])),
        lead_in_um=w * 40,
        lead_out_um=w * 40,
        depth_um=w * float(rng.uniform(0.1, 2)),
        nose_radius_um=w * float(rng.choice([0, 0.05, rng.uniform(0, 0.2)])),
        corner_radius_um=w * float(rng.choice([0, 0.05, rng.uniform(0, 0.2)])),
    )


def round_numbers(rng: np.random.Generator) -> ChannelParameters:
    """Return a set of whole and simple numbers, where walls like to coincide."""
    w = float(rng.choice([50, 100, 200]))
    angle = float(rng.choice([30, 45, 60, 90]))
    return ChannelParameters(
        channel_width_um=w,
        loop_width_um=w * float(rng.choice([0.5, 1, 2])),
        loop_angle_deg=angle,
        run_bend_deg=float(rng.choice([0, angle / 2, angle])),
        loop_turn_deg=float(rng.choice([90, 135, 150, 180, 225])),
        loop_radius_um=w * float(rng.choice([0.5, 1, 1.5, 2, 4])),
        return_length_um=w * float(rng.choice([0, 1, 2])),
        stages=int(rng.integers(0, 8)),
        sides=str(rng.choice(["alternate", "same"])),
        stage_gap_um=w * float(rng.choice([0, 0.5, 1, 1.5, 2, 4])),
        lead_in_um=w * float(rng.choice([1, 2, 10])),
        lead_out_um=w * float(rng.choice([1, 2, 10])),
        nose_radius_um=w * float(rng.choice([0, 0.05, 0.1, 0.5])),
        corner_radius_um=w * float(rng.choice([0, 0.05, 0.1, 0.5])),
    )


def polygon(outline: Outline, *, sagitta_um: float) -> Polygon:
    """Return an outline as a polygon of straight edges."""
    return Polygon(
        outline.outer.chords(sagitta_um=sagitta_um),
        [island.chords(sagitta_um=sagitta_um) for island in outline.islands],
    )


def walked_centre_lines(p: ChannelParameters) -> list[tuple[np.ndarray, float, bool, bool]]:
    """Return (points, width, is start open, is end open) of every centre line, by small steps.

    Worked out here from the words of the glossary alone: the walker turns by the angles that
    the fields name and closes the loop by a line-line intersection.
    """
    walks: list[tuple[np.ndarray, float, bool, bool]] = []
    position, heading = 0j, 0.0
    w = p.channel_width_um

    def step(length: float) -> complex:
        return length * np.exp(1j * heading)

    def add(points: list[complex], width: float, is_start_open: bool = False, is_end_open: bool = False) -> None:
        array = np.array([[z.real, z.imag] for z in points])
        walks.append((array, width, is_start_open, is_end_open))

    if p.stages == 0:
        add([0j, step(p.lead_out_um + p.lead_in_um)], w, True, True)
        return walks
    add([position, position + step(p.lead_out_um)], w, True, False)
    position += step(p.lead_out_um)
    for stage in range(p.stages):
        left = 1.0 if p.sides == "same" or stage % 2 == 0 else -1.0
        heading -= left * np.radians(p.run_bend_deg)
        fork, along = position, np.exp(1j * heading)
        # the loop relative to the fork with a leg of length zero, in the bypass's own frame
        a, t, radius = np.radians(p.loop_angle_deg), np.radians(p.loop_turn_deg), p.loop_radius_um
        angles = np.linspace(0.0, t, 801)
        arc = radius * np.exp(1j * (a - np.pi / 2)) + radius * np.exp(1j * (a + np.pi / 2 - angles))
        tip = arc[-1] + p.return_length_um * np.exp(1j * (a - t))
        leg = -tip.imag / np.sin(a)
        offset = leg * np.exp(1j * a)
        loop = [0j, *(offset + arc), offset + tip]
        if left < 0:
            loop = [z.conjugate() for z in loop]
        add([fork + along * z for z in loop], p.loop_width_um)
        mouth = fork + along * (offset + tip).real
        add([fork, mouth], w)
        is_last = stage == p.stages - 1
        position = mouth
        if is_last:
            add([position, position + step(p.lead_in_um)], w, False, True)
            continue
        legs = [p.stage_gap_um] if p.sides == "alternate" else [p.stage_gap_um / 2] * 2
        for number, length in enumerate(legs):
            if number:
                heading += left * np.radians(p.run_bend_deg)
            if length:
                add([position, position + step(length)], w)
                position += step(length)
    return walks


# Finest step of the integer grid on which the independent construction works.
GRID_PER_UM = 1e6


def independent_area_um2(p: ChannelParameters) -> float:
    """Return the area by fattening fine polylines on an integer grid; no arcs anywhere.

    A general polygon-clipping library draws every centre line with a round pen, joins the
    strokes, and rounds inner corners by growing and shrinking the whole.
    """
    arc_step = 2e-6 * p.channel_width_um * GRID_PER_UM
    strokes: list[list[list[int]]] = []
    for points, width, is_start_open, is_end_open in walked_centre_lines(p):
        is_flat = is_start_open or is_end_open
        strokes += _fat_lines(
            [points], width / 2, arc_step, pyclipper.ET_OPENBUTT if is_flat else pyclipper.ET_OPENROUND
        )
        ends = ((points[0], is_start_open), (points[-1], is_end_open))
        for end, is_open in ends if is_flat else ():
            if not is_open:
                strokes += _fat_lines([np.array([end, end + 1e-6])], width / 2, arc_step, pyclipper.ET_OPENROUND)
    raw = _united(strokes)
    outer = max(_closed(raw, p.corner_radius_um, arc_step), key=pyclipper.Area)
    holes = [ring for ring in _closed(raw, p.nose_radius_um, arc_step) if pyclipper.Area(ring) < 0]
    area = pyclipper.Area(outer) + sum(pyclipper.Area(hole) for hole in holes)
    return float(area / GRID_PER_UM**2)


def _fat_lines(lines: list[np.ndarray], half: float, arc_step: float, ends: int) -> list[list[list[int]]]:
    pen = pyclipper.PyclipperOffset(2.0, arc_step)
    for points in lines:
        pen.AddPath(np.round(points * GRID_PER_UM).astype(np.int64).tolist(), pyclipper.JT_ROUND, ends)
    return pen.Execute(half * GRID_PER_UM)


def _united(rings: list[list[list[int]]]) -> list[list[list[int]]]:
    joiner = pyclipper.Pyclipper()
    joiner.AddPaths(rings, pyclipper.PT_SUBJECT, True)
    return joiner.Execute(pyclipper.CT_UNION, pyclipper.PFT_NONZERO, pyclipper.PFT_NONZERO)


def _closed(rings: list[list[list[int]]], r: float, arc_step: float) -> list[list[list[int]]]:
    """Return the area grown and shrunk by r."""
    for delta in (r, -r) if r else ():
        pen = pyclipper.PyclipperOffset(2.0, arc_step)
        pen.AddPaths(rings, pyclipper.JT_ROUND, pyclipper.ET_CLOSEDPOLYGON)
        rings = pen.Execute(delta * GRID_PER_UM)
    return rings
