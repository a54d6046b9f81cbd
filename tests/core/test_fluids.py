"""Fluids against published and independently computed properties."""

from __future__ import annotations

import subprocess
import sys

import pytest

from core.errors import DesignValueError
from core.fluids import FLUID_RANGES_C, fluid_state

# IAPWS-95 density and IAPWS R12-08 viscosity at 101.325 kPa, from two independent libraries that
# agree to all digits: degC, kg/m^3, mPa s
WATER = [
    (10, 999.7025, 1.305900),
    (20, 998.2072, 1.001596),
    (25, 997.0476, 0.890022),
    (30, 995.6495, 0.797222),
    (37, 993.3298, 0.691304),
    (40, 992.2164, 0.652729),
]
# Glycerol: mass percent, mPa s at 20, 25 and 37 degC from the formula of Cheng 2008, worked out separately
GLYCEROL = [
    (0, 1.0049, 0.8927, 0.6932),
    (10, 1.2972, 1.1456, 0.8779),
    (20, 1.7414, 1.5245, 1.1468),
    (30, 2.4550, 2.1238, 1.5578),
    (40, 3.6848, 3.1372, 2.2253),
    (50, 6.0023, 5.0037, 3.3958),
    (60, 10.9115, 8.8478, 5.6661),
    (80, 60.859, 45.350, 24.300),
    (100, 1413.8, 905.7, 350.0),
]
# Measured mixtures at 20 degC as printed in handbooks: mass percent, mPa s
GLYCEROL_MEASURED = [
    (0, 1.005), (10, 1.31), (20, 1.76), (30, 2.50), (40, 3.72), (50, 6.00), (60, 10.8), (80, 60.1), (100, 1410.0),
]  # fmt: skip
# Density of mixtures at 20 degC from a property library: mass percent, kg/m^3
GLYCEROL_DENSITY = [(0, 998.2), (10, 1022.0), (20, 1046.8), (30, 1072.4), (40, 1098.9), (50, 1126.1), (60, 1153.5)]
# From a property library at 101.325 kPa: fluid, degC, kg/m^3, mPa s, tolerance of each
OTHERS = [
    ("ethanol", 20, 789.42, 1.1938, 2e-3, 2e-2),
    ("ethanol", 25, 785.13, 1.0824, 2e-3, 2e-2),
    ("ethanol", 37, 774.73, 0.8648, 2e-3, 2e-2),
    ("air", 20, 1.2046, 0.018206, 1e-4, 1e-4),
    ("air", 25, 1.1843, 0.018448, 1e-4, 1e-4),
    ("air", 37, 1.1384, 0.019023, 1e-4, 1e-4),
    ("saline", 20, 1004.6, 1.0135, 5e-4, 1e-2),
    ("saline", 25, 1003.5, 0.8995, 5e-4, 1e-2),
    ("saline", 37, 999.6, 0.7030, 5e-4, 1e-2),
]


@pytest.mark.parametrize(("temperature_c", "density", "viscosity"), WATER)
def test_water_matches_iapws(temperature_c, density, viscosity):
    state = fluid_state(fluid="water", temperature_c=temperature_c)
    assert state.density_kg_m3 == pytest.approx(density, rel=1e-6)
    assert state.viscosity_pa_s * 1e3 == pytest.approx(viscosity, rel=1e-6)


@pytest.mark.slow  # loading that library takes seconds
def test_water_matches_second_library():
    """CoolProp holds the same formulations, written by other people."""
    props = pytest.importorskip("CoolProp.CoolProp").PropsSI
    for temperature_c in (1.0, 20.0, 60.0, 99.0):
        state = fluid_state(fluid="water", temperature_c=temperature_c)
        at = ("T", temperature_c + 273.15, "P", 101325.0, "Water")
        assert state.density_kg_m3 == pytest.approx(props("D", *at), rel=1e-7)
        assert state.viscosity_pa_s == pytest.approx(props("V", *at), rel=1e-7)


@pytest.mark.slow  # loading that library takes seconds
def test_ethanol_matches_second_library_over_its_range():
    """Reference equations in CoolProp; the handbook correlations are good to 2 % (density 0.3 %)."""
    props = pytest.importorskip("CoolProp.CoolProp").PropsSI
    for temperature_c in (0.0, 10.0, 30.0, 50.0, 77.0):
        state = fluid_state(fluid="ethanol", temperature_c=temperature_c)
        at = ("T", temperature_c + 273.15, "P", 101325.0, "Ethanol")
        assert state.density_kg_m3 == pytest.approx(props("D", *at), rel=3e-3)
        assert state.viscosity_pa_s == pytest.approx(props("V", *at), rel=2e-2)


@pytest.mark.parametrize(("percent", "at_20", "at_25", "at_37"), GLYCEROL)
def test_glycerol_water_matches_formula(percent, at_20, at_25, at_37):
    for temperature_c, viscosity in ((20, at_20), (25, at_25), (37, at_37)):
        state = fluid_state(fluid="glycerol-water", temperature_c=temperature_c, glycerol_percent=percent)
        assert state.viscosity_pa_s * 1e3 == pytest.approx(viscosity, rel=1e-4)


@pytest.mark.parametrize(("percent", "viscosity"), GLYCEROL_MEASURED)
def test_glycerol_water_matches_measurement_within_its_stated_error(percent, viscosity):
    state = fluid_state(fluid="glycerol-water", temperature_c=20, glycerol_percent=percent)
    assert state.viscosity_pa_s * 1e3 == pytest.approx(viscosity, rel=state.error_percent / 100)


@pytest.mark.parametrize(("percent", "density"), GLYCEROL_DENSITY)
def test_glycerol_water_density(percent, density):
    state = fluid_state(fluid="glycerol-water", temperature_c=20, glycerol_percent=percent)
    assert state.density_kg_m3 == pytest.approx(density, rel=6e-3)


@pytest.mark.parametrize(("fluid", "temperature_c", "density", "viscosity", "near_density", "near_viscosity"), OTHERS)
def test_other_fluids(fluid, temperature_c, density, viscosity, near_density, near_viscosity):
    state = fluid_state(fluid=fluid, temperature_c=temperature_c)
    assert state.density_kg_m3 == pytest.approx(density, rel=near_density)
    assert state.viscosity_pa_s * 1e3 == pytest.approx(viscosity, rel=near_viscosity)


def test_own_values_are_taken_as_they_are():
    state = fluid_state(fluid="own", own_density_kg_m3=1025.0, own_viscosity_mpa_s=1.2)
    assert (state.density_kg_m3, state.viscosity_pa_s) == (1025.0, pytest.approx(1.2e-3))


@pytest.mark.parametrize("fluid", FLUID_RANGES_C)
def test_temperature_range_is_kept(fluid):
    """Both limits work; a step beyond either is refused with field, limit and way out."""
    low, high = FLUID_RANGES_C[fluid]
    for temperature_c in (low, high):
        assert fluid_state(fluid=fluid, temperature_c=temperature_c).viscosity_pa_s > 0
    for temperature_c in (low - 0.1, high + 0.1, float("nan")):
        with pytest.raises(DesignValueError, match="temperature_c") as caught:
            fluid_state(fluid=fluid, temperature_c=temperature_c)
        assert fluid in caught.value.limit
        assert "another fluid" in caught.value.way_out


def test_liquids_thin_as_they_warm():
    """Every liquid loses viscosity with temperature, and air gains it (kinetic theory)."""
    for fluid in ("water", "glycerol-water", "ethanol", "saline"):
        cold, warm = (fluid_state(fluid=fluid, temperature_c=t).viscosity_pa_s for t in (20.0, 40.0))
        assert warm < cold
    cold, warm = (fluid_state(fluid="air", temperature_c=t).viscosity_pa_s for t in (20.0, 40.0))
    assert warm > cold


def test_unknown_fluid_gets_a_hint():
    with pytest.raises(DesignValueError, match="did you mean 'water'"):
        fluid_state(fluid="watr")


def test_gas_carries_its_caution():
    state = fluid_state(fluid="air")
    assert state.is_gas
    assert any("incompressible" in note for note in state.notes)


def test_importing_fluids_loads_no_property_library():
    """The command line must answer at once: libraries are loaded by the first fluid that needs one."""
    code = "import sys, core.operating; print([m for m in ('chemicals', 'fluids', 'numpy') if m in sys.modules])"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
