"""The plan of a chip: one table for every number, odd values refused in one line."""

from __future__ import annotations

import dataclasses
from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.chip.plan import (
    CHIP_FIELDS,
    MOST_CHANNELS,
    PLACE_FIELDS,
    SERIES_FIELDS,
    ChipChannel,
    ChipPlan,
    SteppedField,
)  # fmt: skip
from core.errors import DesignValueError

ODD = [
    None,
    True,
    "",
    "x",
    [],
    {},
    (1,),
    float("nan"),
    float("inf"),
    1e308,
    -1e308,
    "\ud800",
    pytest.param(object(), id="object"),
]


def test_tables_and_values_name_the_same_fields_and_defaults():
    numbers = [field.name for field in dataclasses.fields(ChipPlan)]
    assert numbers == [*CHIP_FIELDS, "label", "channels", "series"]
    assert ChipPlan().as_dict() == {name: field.default for name, field in CHIP_FIELDS.items()}
    placed = ChipChannel(set_name="A")
    assert placed.as_dict() == {name: field.default for name, field in PLACE_FIELDS.items()}
    stepped = SteppedField(name="loop_radius_um", first=100, last=200, steps=3)
    assert list(stepped.as_dict()) == list(SERIES_FIELDS)


def refused(make, **values) -> DesignValueError:
    with pytest.raises(DesignValueError) as caught:
        make(**values)
    assert "\n" not in str(caught.value)
    assert "\n" not in caught.value.way_out
    return caught.value


@pytest.mark.parametrize("odd", ODD, ids=repr)
@pytest.mark.parametrize("name", [*PLACE_FIELDS, "set_name", "is_control"])
def test_odd_values_of_a_place_are_refused_by_name(name, odd):
    if (name, odd) in ((("is_control", True)), ("set_name", "x")):
        return
    assert refused(ChipChannel, **{"set_name": "A", name: odd}).field == name


@pytest.mark.parametrize("odd", ODD, ids=repr)
@pytest.mark.parametrize("name", [*SERIES_FIELDS, "name"])
def test_odd_values_of_a_series_are_refused(name, odd):
    values = {"name": "loop_radius_um", "first": 100.0, "last": 200.0, "steps": 3, name: odd}
    assert refused(SteppedField, **values).field in (name, "series name", "loop_radius_um")


@pytest.mark.parametrize(
    ("values", "field"),
    [
        ({"name": "sides"}, "series name"),  # a word, not a number
        ({"name": "loop_radius"}, "series name"),
        ({"first": 1.0}, "loop_radius_um"),  # below the field's own bounds
        ({"last": 1e5}, "loop_radius_um"),
        ({"steps": 1}, "steps"),
        ({"steps": 51}, "steps"),
        ({"last": 100.0}, "steps"),  # all chips alike
        ({"name": "stages", "first": 1, "last": 3, "steps": 5}, "steps"),  # whole numbers run out
    ],
)
def test_a_series_that_steps_nothing_is_refused(values, field):
    usual = {"name": "loop_radius_um", "first": 100.0, "last": 200.0, "steps": 3}
    assert refused(SteppedField, **(usual | values)).field == field


@given(first=st.floats(50, 500), by=st.floats(1, 400), steps=st.integers(2, 50))
def test_a_series_runs_from_first_to_last_in_equal_steps(first, by, steps):
    values = SteppedField(name="loop_radius_um", first=first, last=first + by, steps=steps).values
    assert len(values) == steps
    assert values[0] == pytest.approx(first, rel=1e-8)
    assert values[-1] == pytest.approx(first + by, rel=1e-8)
    gaps = [b - a for a, b in pairwise(values)]
    assert gaps == pytest.approx([by / (steps - 1)] * (steps - 1), abs=1e-5)


def test_counts_step_in_whole_numbers():
    assert SteppedField(name="stages", first=1, last=10, steps=4).values == (1, 4, 7, 10)


def test_lists_have_limits_and_the_right_parts():
    one = ChipChannel(set_name="A")
    step = SteppedField(name="loop_radius_um", first=100, last=200, steps=3)
    assert len(ChipPlan(channels=(one,) * MOST_CHANNELS).channels) == MOST_CHANNELS
    assert refused(ChipPlan, channels=(one,) * (MOST_CHANNELS + 1)).field == "channels"
    assert refused(ChipPlan, channels=("A",)).field == "channels"
    assert refused(ChipPlan, channels=None).field == "channels"
    assert refused(ChipPlan, series=(step, step)).field == "series"
    other = SteppedField(name="stages", first=1, last=3, steps=3)
    angle = SteppedField(name="loop_angle_deg", first=40, last=60, steps=3)
    assert len(ChipPlan(series=[step, other]).series) == 2
    assert refused(ChipPlan, series=(step, other, angle)).field == "series"
    assert refused(ChipPlan, label="a\nb").field == "label"
    assert refused(ChipPlan, label="x" * 61).field == "label"
    assert refused(ChipPlan, label=None).field == "label"


def test_rows_stay_within_their_bounds():
    assert ChipChannel(set_name="A", rows=20).rows == 20
    for rows in (0, 21, 1.5):
        assert refused(ChipChannel, set_name="A", rows=rows).field == "rows"
