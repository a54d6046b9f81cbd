"""Values on the screen. Truth: the definitions of the units (1 psi = 6894.757 Pa), and plain reading."""

from __future__ import annotations

from types import SimpleNamespace

import pytest

from app.shown_values import ShownUnits, diodicity_text, entry_text, number_text, screen_words, value_text
from core.errors import DesignValueError
from core.parameters import CHANNEL_FIELDS

MM = ShownUnits(length="mm", flow="mL/min", pressure="psi")


@pytest.mark.parametrize(
    ("value", "text"),
    [(0.0, "0"), (1234.56, "1235"), (123456.0, "123500"), (0.000123456, "0.0001235"), (-2.5, "\N{MINUS SIGN}2.5")],
)
def test_numbers_have_few_digits_and_no_powers_of_ten(value, text):
    assert number_text(value) == text


def test_entries_keep_the_digits_that_were_given():
    assert entry_text(320.125) == "320.125"
    assert entry_text(4) == "4"


def test_units_go_there_and_back():
    assert MM.shown(320.0, "um") == pytest.approx(0.32)
    assert MM.shown(6894.757293168, "Pa") == pytest.approx(1.0)
    for base in ("um", "uL/min", "Pa"):
        assert MM.stored(MM.shown(777.0, base), base) == pytest.approx(777.0)
    assert MM.shown(45.0, "deg") == 45.0


def test_limits_are_told_in_the_unit_of_the_screen():
    shown = MM.field(CHANNEL_FIELDS["loop_radius_um"])
    assert shown.limit == "0.005 to 10 mm"
    with pytest.raises(DesignValueError, match="lower it to at most 10"):
        shown.checked("20")


def test_values_with_units():
    assert value_text(CHANNEL_FIELDS["loop_radius_um"], 320.0, MM) == "0.32 mm"
    assert value_text(CHANNEL_FIELDS["stages"], 4, MM) == "4"
    assert value_text(CHANNEL_FIELDS["sides"], "same", MM) == "all on one side"


def test_fields_are_called_what_the_screen_calls_them():
    assert screen_words("raise loop_radius_um to 40 um") == "raise 'Loop radius' to 40 µm"
    assert screen_words("at 300 uL/min") == "at 300 µL/min"
    assert screen_words("nothing to replace in aluminium 40 um2") == "nothing to replace in aluminium 40 um2"


@pytest.mark.parametrize(
    ("valid", "band_percent", "diodicity", "text"),
    [
        (True, 50.0, 1.23456, "Di 1.235"),
        (False, 60.0, 1.23456, "Di about 1.2"),
        (False, 100.0, 1.23456, "Di unknown"),
        (False, 160.0, 1.0157, "Di about 1.0"),
    ],
)
def test_di_is_told_as_surely_as_it_is_known(valid, band_percent, diodicity, text):
    score = SimpleNamespace(
        diodicity=diodicity, rectification=diodicity - 1.0, valid=valid, rectification_band_percent=band_percent
    )
    assert diodicity_text(score) == text
