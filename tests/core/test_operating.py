"""The operating point: checked fields, copies, and the fluid it stands for."""

from __future__ import annotations

import pytest

from core.errors import DesignValueError
from core.operating import OPERATING_FIELDS, OperatingPoint


def test_defaults_come_from_the_field_table():
    assert OperatingPoint().as_dict() == {name: field.default for name, field in OPERATING_FIELDS.items()}


def test_text_is_read_as_numbers():
    """Values from the command line arrive as text."""
    point = OperatingPoint().with_values({"flow_ul_min": "250", "fluid": "air"})
    assert (point.flow_ul_min, point.fluid) == (250.0, "air")
    assert OperatingPoint().flow_ul_min == 1200.0


@pytest.mark.parametrize(
    ("name", "value"),
    [
        ("flow_ul_min", 0.0),
        ("flow_ul_min", float("nan")),
        ("flow_ul_min", float("inf")),
        ("flow_ul_min", "fast"),
        ("flow_ul_min", 1e7),
        ("temperature_c", -1.0),
        ("glycerol_percent", 101.0),
        ("own_viscosity_mpa_s", 0.0),
        ("own_density_kg_m3", None),
        ("fluid", "watre"),
        ("fluid", 3),
    ],
)
def test_bad_values_name_their_field(name, value):
    with pytest.raises(DesignValueError, match=name) as caught:
        OperatingPoint(**{name: value})
    assert caught.value.field == name
    assert "\n" not in str(caught.value)


def test_unknown_field_gets_a_hint():
    with pytest.raises(DesignValueError, match="did you mean 'flow_ul_min'"):
        OperatingPoint().with_values({"flow_ul_mn": 3})


def test_fluid_state_uses_temperature_and_mixture():
    """Cheng 2008 at 37 degC and 50 %: 3.3958 mPa s."""
    point = OperatingPoint(fluid="glycerol-water", temperature_c=37, glycerol_percent=50)
    assert point.fluid_state().viscosity_pa_s == pytest.approx(3.3958e-3, rel=1e-4)


def test_temperature_outside_the_fluids_range_is_refused():
    """95 degC is a good field value, but ethanol boils at 78 degC."""
    point = OperatingPoint(fluid="ethanol", temperature_c=95)
    with pytest.raises(DesignValueError, match="0 to 77 degC for ethanol"):
        point.fluid_state()
