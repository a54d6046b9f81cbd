"""The dimensions of a drawing: what is measured where, as values in micrometres.

Every number comes from the parameter set, from its measures or from the outline's bounds; here
they are only given a place on the drawing. ``labels`` finds them a place on the screen.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum, auto
from typing import TYPE_CHECKING, Any

import numpy as np

from core.geometry.centreline import Part
from core.geometry.measures import stage_measures
from core.parameters import CHANNEL_FIELDS
from core.units import base_unit, convert, unit_symbol

if TYPE_CHECKING:
    from collections.abc import Iterator

    from core.fields import Field
    from core.geometry.centreline import Stroke
    from core.geometry.contour import Contour, Floats
    from core.geometry.shape import ChannelShape


class Kind(Enum):
    """How a dimension is drawn."""

    ALONG = auto()  # arrows at both ends of a line or arc
    ACROSS = auto()  # arrows on two walls
    RADIUS = auto()  # arrow at the far end, dot at the near one
    ANGLE = auto()  # arc of fixed size on the screen
    SPAN = auto()  # moved off the drawing, with lines back to what is measured
    RING = auto()  # circle round a small detail


@dataclass(frozen=True, slots=True, kw_only=True)
class Dimension:
    """One measured thing.

    Attributes
    ----------
    field : str
        Parameter it shows; empty for what follows from several.
    text : str
        Name and value with unit.
    kind : Kind
        How it is drawn.
    points_um : array, shape (n, 2)
        Line it is drawn along; apex alone for an angle; centre alone for a ring [um].
    clear_um : float
        Half the width of what lies around the line, to keep the label off it; for an angle, the
        length of its shorter side [um].
    side : int
        Where the label should rather be, seen along the line: +1 left, -1 right.
    start_rad, sweep_rad : float
        For an angle: where it starts and how far it goes, counter-clockwise [rad].
    least_px : float
        Shown unasked only if its line is at least this long on the screen.
    """

    field: str
    text: str
    kind: Kind
    points_um: Floats
    clear_um: float = 0.0
    side: int = -1
    start_rad: float = 0.0
    sweep_rad: float = 0.0
    least_px: float = 44.0


ONLY_WHEN_HANDLED = float("inf")


def length_text(value_um: float, unit: str) -> str:
    """Return a length with its unit, four digits at most, as in ``320 µm``."""
    value = convert(value_um, quantity="length", from_unit=base_unit("length"), to_unit=unit)
    return f"{value:.4g} {unit_symbol(unit)}" if abs(value) < 1e4 else f"{value:.0f} {unit_symbol(unit)}"


def value_text(field: Field, value: float, unit: str) -> str:
    """Return the value of a field with its unit; lengths in the unit asked for."""
    return length_text(value, unit) if field.unit == base_unit("length") else f"{value:.4g}{unit_symbol(field.unit)}"


def dimensions_of(shape: ChannelShape, *, stage: int, unit: str) -> tuple[Dimension, ...]:
    """Return what can be measured on a shape, the most telling first.

    Parameters
    ----------
    shape : ChannelShape
        A shape with centre lines and an outline.
    stage : int
        Stage on which the stage's own dimensions are shown.
    unit : str
        Unit of lengths, ``um`` or ``mm``.
    """
    chain = _chain_dimensions(shape, unit)
    return (*_stage_dimensions(shape, stage, unit), *chain) if shape.parameters.stages else tuple(chain)


def _named(shape: ChannelShape, name: str, word: str, unit: str) -> dict[str, Any]:
    value = value_text(CHANNEL_FIELDS[name], getattr(shape.parameters, name), unit)
    return {"field": name, "text": f"{word} {value}"}


def _chain_dimensions(shape: ChannelShape, unit: str) -> Iterator[Dimension]:
    assert shape.outline is not None
    x_min, y_min, x_max, _ = shape.outline.bounds_um
    yield Dimension(
        field="", text=f"overall {length_text(x_max - x_min, unit)}", kind=Kind.SPAN,
        points_um=np.array([[x_min, y_min], [x_max, y_min]]), least_px=120.0,
    )  # fmt: skip
    for stroke in shape.centreline.strokes:
        if stroke.part in (Part.LEAD_OUT, Part.LEAD_IN) and shape.parameters.stages:
            word = "lead out" if stroke.part is Part.LEAD_OUT else "lead in"
            named = _named(shape, f"{stroke.part}_um", word, unit)
            side = shape.centreline.stages[max(stroke.stage, 0)].side
            yield _along(stroke, least_px=110.0, side=-side, **named)
    if not shape.parameters.stages:
        yield Dimension(
            **_named(shape, "channel_width_um", "width", unit), kind=Kind.ACROSS,
            points_um=shape.centreline.forward_outlet.section_um, least_px=12.0,
        )  # fmt: skip


def _along(stroke: Stroke, *, least_px: float, side: int, field: str, text: str) -> Dimension:
    return Dimension(
        field=field, text=text, kind=Kind.ALONG, points_um=np.array([stroke.start_um, stroke.end_um]),
        clear_um=stroke.width_um / 2.0, side=side, least_px=least_px,
    )  # fmt: skip


def _stage_dimensions(shape: ChannelShape, stage: int, unit: str) -> Iterator[Dimension]:
    place = shape.centreline.stages[stage]
    strokes = [stroke for stroke in shape.centreline.strokes if stroke.stage == stage]
    turn = next(stroke for stroke in strokes if stroke.part is Part.TURN)
    yield from _turn_dimensions(shape, turn, unit)
    yield Dimension(
        **_named(shape, "channel_width_um", "width", unit), kind=Kind.ACROSS,
        points_um=place.bypass_section_um, least_px=10.0,
    )  # fmt: skip
    yield Dimension(
        **_named(shape, "loop_angle_deg", "angle", unit), kind=Kind.ANGLE, points_um=place.fork_um[None, :],
        start_rad=place.bypass_heading_rad, sweep_rad=np.radians(place.side * shape.parameters.loop_angle_deg),
        clear_um=stage_measures(shape.parameters).bypass_length_um, least_px=90.0,
    )  # fmt: skip
    gap = [stroke for stroke in strokes if stroke.part is Part.GAP]
    if gap:
        points = np.array([gap[0].start_um, *(stroke.end_um for stroke in gap)])
        yield Dimension(**_named(shape, "stage_gap_um", "gap", unit), kind=Kind.ALONG, points_um=points,
                        clear_um=gap[0].width_um / 2.0, side=-place.side, least_px=40.0)  # fmt: skip
    for stroke in strokes:
        if stroke.part is Part.LEG:
            text = f"leg {length_text(stage_measures(shape.parameters).leg_length_um, unit)}"
            yield _along(stroke, least_px=70.0, side=place.side, field="", text=text)
        if stroke.part is Part.RETURN:
            yield _along(stroke, least_px=50.0, side=place.side, **_named(shape, "return_length_um", "return", unit))
    yield Dimension(
        **_named(shape, "run_bend_deg", "bend", unit), kind=Kind.ANGLE, points_um=place.fork_um[None, :],
        start_rad=place.bypass_heading_rad, sweep_rad=np.radians(place.side * shape.parameters.run_bend_deg),
        least_px=ONLY_WHEN_HANDLED,
    )  # fmt: skip
    yield from _rounding_dimensions(shape, stage, unit)


def _turn_dimensions(shape: ChannelShape, turn: Stroke, unit: str) -> Iterator[Dimension]:
    centre, radius, start, sweep = turn.arc()
    path = turn.points(radius * 0.01)
    yield Dimension(
        **_named(shape, "loop_radius_um", "radius", unit), kind=Kind.RADIUS,
        points_um=np.array([centre, path[len(path) // 4]]), least_px=30.0,
    )  # fmt: skip
    yield Dimension(
        **_named(shape, "loop_width_um", "loop width", unit), kind=Kind.ACROSS,
        points_um=shape.centreline.stages[turn.stage].loop_section_um[::-1], least_px=16.0,
    )  # fmt: skip
    yield Dimension(
        **_named(shape, "loop_turn_deg", "turn", unit), kind=Kind.ANGLE, points_um=centre[None, :],
        start_rad=start, sweep_rad=sweep, least_px=ONLY_WHEN_HANDLED,
    )  # fmt: skip


def _rounding_dimensions(shape: ChannelShape, stage: int, unit: str) -> Iterator[Dimension]:
    assert shape.outline is not None
    fork = shape.centreline.stages[stage].fork_um
    for name, word, contour in (
        ("nose_radius_um", "nose radius", shape.outline.islands[stage]),
        ("corner_radius_um", "corner radius", shape.outline.outer),
    ):
        yield Dimension(**_named(shape, name, word, unit), kind=Kind.RING, points_um=_nearest(contour, fork),
                        least_px=ONLY_WHEN_HANDLED)  # fmt: skip


def _nearest(contour: Contour, point_um: Floats) -> Floats:
    distance = np.hypot(*(contour.vertices_um - point_um).T)
    return contour.vertices_um[np.argmin(distance)][None, :]
