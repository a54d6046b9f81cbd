"""Dimensions say what the parameter set says, at the place it says it of."""

from __future__ import annotations

import numpy as np
import pytest

from app.drawing.dimensions import Kind, dimensions_of, length_text
from core.geometry.shape import build_shape
from core.parameters import CHANNEL_FIELDS, ChannelParameters

SHAPE = build_shape(ChannelParameters())


def by_text(shape, stage=0, unit="um"):
    """Return the dimensions by the first words of their text."""
    return {d.text.rsplit(" ", 2)[0]: d for d in dimensions_of(shape, stage=stage, unit=unit)}


@pytest.mark.parametrize(
    ("value", "unit", "expected"),
    [(320.0, "um", "320 µm"), (320.0, "mm", "0.32 mm"), (122130.4, "um", "122130 µm"), (5.25, "um", "5.25 µm")],
)
def test_lengths_as_text(value, unit, expected):
    """Written by hand."""
    assert length_text(value, unit) == expected


@pytest.mark.parametrize(
    ("name", "start", "end"),
    [("loop_radius_um", "radius", "320 µm"), ("channel_width_um", "width", "200 µm"), ("stage_gap_um", "gap", "400 µm"),
     ("loop_angle_deg", "angle", "45°"), ("lead_in_um", "lead in", "1000 µm"), ("nose_radius_um", "nose", "10 µm")],
)  # fmt: skip
def test_texts_are_the_values(name, start, end):
    """Truth: the defaults of the field table, read by eye."""
    found = [d.text for d in dimensions_of(SHAPE, stage=0, unit="um") if d.field == name]
    assert len(found) == 1
    assert found[0].startswith(start)
    assert found[0].endswith(end)


def test_leg_is_the_closed_form():
    """Truth: leg = 2 R / tan a for a half turn without return, 640 um for R 320 and a 45."""
    assert by_text(SHAPE)["leg"].text == "leg 640 µm"


@pytest.mark.parametrize("stage", [0, 1, 3])
def test_lines_have_the_length_they_name(stage):
    """Truth: a drawn length is the named one."""
    for dimension in dimensions_of(SHAPE, stage=stage, unit="um"):
        if dimension.kind in (Kind.ALONG, Kind.ACROSS, Kind.RADIUS, Kind.SPAN):
            drawn = float(np.hypot(*np.diff(dimension.points_um, axis=0).T).sum())
            assert length_text(drawn, "um") == dimension.text.split(" ", dimension.text.count(" ") - 1)[-1]


@pytest.mark.parametrize("stage", [0, 1])
def test_bypass_label_keeps_off_the_loop(stage):
    """Truth: the first end of the bypass's section is the one farther from the loop."""
    width = next(d for d in dimensions_of(SHAPE, stage=stage, unit="um") if d.field == "channel_width_um")
    loop = SHAPE.centreline.stages[stage].loop_section_um.mean(axis=0)
    first, second = np.hypot(*(width.points_um - loop).T)
    assert first > second


def test_every_drawable_field_has_a_dimension():
    """Truth: the field table less counts, words and the depth."""
    named = {d.field for d in dimensions_of(build_shape(ChannelParameters(return_length_um=80.0)), stage=0, unit="um")}
    assert set(CHANNEL_FIELDS) - named == {"stages", "sides", "depth_um"}


def test_plain_channel():
    """Truth: overall length is lead in plus lead out; nothing of a stage is there."""
    texts = [d.text for d in dimensions_of(build_shape(ChannelParameters(stages=0)), stage=0, unit="mm")]
    assert texts == ["overall 2 mm", "width 0.2 mm"]
