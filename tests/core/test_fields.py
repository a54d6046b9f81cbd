"""One field: what it accepts, what it says about the rest."""

from __future__ import annotations

import pytest

from core.errors import DesignValueError
from core.fields import Field, table_of, unknown_field

WIDTH = Field(
    name="width_um", label="Width", help="h", group="g", default=200.0, unit="um", minimum=5.0, maximum=3000.0
)
COUNT = Field(name="count", label="Count", help="h", group="g", default=4, minimum=0, maximum=100, whole=True)
SIDE = Field(name="side", label="Side", help="h", group="g", default="left", choices=("left", "right"))
TABLE = table_of(WIDTH, COUNT, SIDE)


@pytest.mark.parametrize(
    ("field", "given", "kept"),
    [
        (WIDTH, 5, 5.0),
        (WIDTH, 3000.0, 3000.0),
        (WIDTH, "12.5", 12.5),
        (WIDTH, " 1e2 ", 100.0),
        (COUNT, 3.0, 3),
        (COUNT, "7", 7),
        (SIDE, "right", "right"),
    ],
)
def test_accepted_values_get_the_field_s_own_type(field, given, kept):
    value = field.checked(given)
    assert value == kept
    assert type(value) is type(kept)


@pytest.mark.parametrize(
    ("field", "given", "limit", "way_out"),
    [
        (WIDTH, 4.999, "5 to 3000 um", "raise it to at least 5"),
        (WIDTH, 3001, "5 to 3000 um", "lower it to at most 3000"),
        (WIDTH, "wide", "5 to 3000 um", "give a number such as 200"),
        (WIDTH, float("nan"), "5 to 3000 um", "give a finite number"),
        (WIDTH, float("inf"), "5 to 3000 um", "give a finite number"),
        (WIDTH, "-inf", "5 to 3000 um", "give a finite number"),
        (WIDTH, 10**400, "5 to 3000 um", "give a number such as 200"),
        (WIDTH, True, "5 to 3000 um", "give a number"),
        (WIDTH, None, "5 to 3000 um", "give a number"),
        (WIDTH, [5], "5 to 3000 um", "give a number"),
        (COUNT, 2.5, "whole number from 0 to 100", "give a whole number"),
        (COUNT, -1, "whole number from 0 to 100", "raise it to at least 0"),
        (SIDE, "rihgt", "left, right", "did you mean 'right'?"),
        (SIDE, 1, "left, right", "known names: left, right"),
        (SIDE, None, "left, right", "known names: left, right"),
    ],
)
def test_refused_values_are_told_with_limit_and_way_out(field, given, limit, way_out):
    with pytest.raises(DesignValueError) as caught:
        field.checked(given)
    assert caught.value.field == field.name
    assert caught.value.value is given
    assert caught.value.limit == limit
    assert caught.value.way_out == way_out


def test_an_unknown_field_is_answered_with_the_nearest():
    assert unknown_field("widht_um", 5, TABLE).way_out == "did you mean 'width_um'?"


def test_a_table_keeps_its_order():
    assert list(TABLE) == ["width_um", "count", "side"]
