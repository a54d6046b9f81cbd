"""Units and their conversion. Truth: definitions of the units (1 psi = 6894.757293168 Pa from lbf and inch)."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.errors import DesignValueError
from core.units import M3_S_PER_UL_MIN, M_PER_UM, UNITS, base_unit, convert, unit_symbol

every_pair = pytest.mark.parametrize(
    ("quantity", "unit", "other"),
    [(quantity, unit, other) for quantity, table in UNITS.items() for unit in table for other in table],
)


@pytest.mark.parametrize(
    ("value", "quantity", "from_unit", "to_unit", "expected"),
    [
        (2.5, "length", "mm", "um", 2500.0),
        (1.0, "flow", "mL/min", "uL/min", 1000.0),
        (1.0, "pressure", "kPa", "mbar", 10.0),
        (1.0, "pressure", "psi", "Pa", 0.45359237 * 9.80665 / 0.0254**2),
        (1013.25, "pressure", "mbar", "kPa", 101.325),
    ],
)
def test_definitions(value, quantity, from_unit, to_unit, expected):
    assert convert(value, quantity=quantity, from_unit=from_unit, to_unit=to_unit) == pytest.approx(expected, rel=1e-10)


def test_factors_to_si():
    assert pytest.approx(1.0, rel=1e-15) == M_PER_UM * 1e6
    assert pytest.approx(1e-9, rel=1e-15) == M3_S_PER_UL_MIN * 60.0


@every_pair
@given(value=st.floats(-1e6, 1e6))
def test_there_and_back(quantity, unit, other, value):
    there = convert(value, quantity=quantity, from_unit=unit, to_unit=other)
    assert convert(there, quantity=quantity, from_unit=other, to_unit=unit) == pytest.approx(
        value, rel=1e-12, abs=1e-300
    )


@pytest.mark.parametrize(("from_unit", "to_unit"), [("kpa", "Pa"), ("Pa", "kpa")])
def test_an_unknown_unit_is_answered_with_the_nearest(from_unit, to_unit):
    with pytest.raises(DesignValueError, match="did you mean 'kPa'") as caught:
        convert(1.0, quantity="pressure", from_unit=from_unit, to_unit=to_unit)
    assert caught.value.field == "pressure_unit"


def test_base_units_have_the_size_one():
    for quantity, table in UNITS.items():
        assert table[base_unit(quantity)] == 1.0


def test_symbols_on_the_screen():
    assert unit_symbol("um") == "µm"
    assert unit_symbol("kPa") == "kPa"
