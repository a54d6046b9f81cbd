"""Rectangular ducts against the exact series, worked out independently."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.errors import DesignValueError
from core.hydraulics.ducts import (
    flow_factor,
    friction_product,
    hydraulic_diameter_m,
    profile_factors,
    resistance_pa_s_m3,
    section_aspect,
)

# Series of Shah and London 1978 summed separately: side ratio, F, f Re (Darcy)
SERIES = [
    (1.0, 0.42173104, 56.908308),
    (0.9, 0.46618109, 57.043923),
    (0.75, 0.54137183, 57.902789),
    (0.5, 0.68604503, 62.192225),
    (0.25, 0.84243887, 72.931107),
    (0.2, 0.87395026, 76.281992),
    (0.125, 0.92121889, 82.338576),
    (0.1, 0.93697511, 84.675507),
    (0.05, 0.96848756, 89.908052),
    (0.0, 1.0, 96.0),
]
# Integrals of the same series: side ratio, momentum, kinetic, peak; plates in closed form
PROFILES = [
    (1.0, 1.37842, 2.15418, 2.09626),
    (0.9, 1.37764, 2.15124, 2.09371),
    (0.75, 1.37266, 2.13255, 2.07738),
    (0.5, 1.34746, 2.03892, 1.99180),
    (0.25, 1.28760, 1.82557, 1.77368),
    (0.2, 1.27135, 1.77034, 1.71497),
    (0.125, 1.24540, 1.68479, 1.62827),
    (0.1, 1.23646, 1.65610, 1.60090),
    (0.0, 6 / 5, 54 / 35, 1.5),
]
# Water at 20 degC (1.0016 mPa s), 10 mm long, 100 um deep: width in um, Pa s/m^3
RESISTANCES = [(100, 2.849968e12), (200, 8.759775e11), (400, 3.566787e11), (1000, 1.282766e11)]


@pytest.mark.parametrize(("aspect", "factor", "product"), SERIES)
def test_every_row_of_the_series(aspect, factor, product):
    assert float(flow_factor(aspect)) == pytest.approx(factor, abs=6e-9)
    assert float(friction_product(aspect)) == pytest.approx(product, rel=1e-6)
    assert 12.0 / float(flow_factor(aspect)) == pytest.approx(12.0 / factor, rel=1e-6)


@pytest.mark.parametrize(("aspect", "momentum", "kinetic", "peak"), PROFILES)
def test_profile_factors(aspect, momentum, kinetic, peak):
    """Printed to five decimals."""
    factors = profile_factors(aspect)
    assert factors.momentum == pytest.approx(momentum, abs=6e-6)
    assert factors.kinetic == pytest.approx(kinetic, abs=6e-6)
    assert factors.peak == pytest.approx(peak, abs=6e-6)


def test_shah_and_london_print():
    """Fanning f Re as printed in their table for side ratios 1, 1/2, 1/4, 1/8 and 0 (from memory)."""
    printed = [14.22708, 15.54806, 18.23278, 20.58464, 24.0]
    assert friction_product(np.array([1, 1 / 2, 1 / 4, 1 / 8, 0])) / 4 == pytest.approx(np.array(printed), rel=1e-6)


@pytest.mark.parametrize(("width_um", "resistance"), RESISTANCES)
def test_absolute_resistance(width_um, resistance):
    got = resistance_pa_s_m3(length_m=0.01, width_m=width_um * 1e-6, depth_m=1e-4, viscosity_pa_s=1.0016e-3)
    assert float(got) == pytest.approx(resistance, rel=1e-6)


def test_plain_sum_of_the_series():
    """The slowly converging series itself, 20,000 terms, at a ratio that no table holds."""
    n = np.arange(1.0, 40001.0, 2.0)
    plain = 1.0 - 192.0 * 0.37 / np.pi**5 * np.sum(np.tanh(n * np.pi / 0.74) / n**5)
    assert float(flow_factor(0.37)) == pytest.approx(plain, rel=1e-13)


def test_arrays_give_the_same_as_numbers():
    aspects = np.linspace(0.0, 1.0, 12).reshape(3, 4)
    assert flow_factor(aspects).shape == (3, 4)
    assert flow_factor(aspects).ravel() == pytest.approx([float(flow_factor(a)) for a in aspects.ravel()], rel=1e-15)
    assert flow_factor(np.array([])).shape == (0,)


@given(width=st.floats(1e-6, 1e-2), depth=st.floats(1e-6, 1e-2))
def test_turning_the_section_changes_nothing(width, depth):
    """Width and depth play the same part in a straight duct."""
    sides = resistance_pa_s_m3(
        length_m=1.0, width_m=np.array([width, depth]), depth_m=np.array([depth, width]), viscosity_pa_s=1e-3
    )
    assert sides[0] == pytest.approx(sides[1], rel=1e-12)
    assert sides[0] > 0


@given(width=st.floats(1e-6, 1e-2), depth=st.floats(1e-6, 1e-2))
def test_friction_product_agrees_with_resistance(width, depth):
    """Two ways to the same drop: f L/D rho U^2/2 and R Q."""
    diameter = float(hydraulic_diameter_m(width, depth))
    by_factor = float(friction_product(section_aspect(width, depth))) / (2 * diameter**2 * width * depth)
    direct = float(resistance_pa_s_m3(length_m=1.0, width_m=width, depth_m=depth, viscosity_pa_s=1.0))
    assert by_factor == pytest.approx(direct, rel=1e-12)


@pytest.mark.parametrize("aspect", [-0.1, 1.1, float("nan")])
def test_bad_ratio_is_refused(aspect):
    with pytest.raises(DesignValueError, match="aspect"):
        flow_factor(aspect)
    with pytest.raises(DesignValueError, match="aspect"):
        profile_factors(aspect)


@pytest.mark.parametrize("name", ["width_m", "depth_m"])
def test_bad_side_is_refused(name):
    sides = {"width_m": 1e-4, "depth_m": 1e-4, name: 0.0}
    with pytest.raises(DesignValueError, match=name):
        resistance_pa_s_m3(length_m=1.0, viscosity_pa_s=1e-3, **sides)
