"""The estimate as a whole: exact limits, the law at low Reynolds number, reference solves, trends, manners."""

from __future__ import annotations

import json
import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.errors import DesignValueError
from core.fluids import fluid_state
from core.hydraulics.ducts import resistance_pa_s_m3
from core.hydraulics.estimate import estimate
from core.operating import OPERATING_FIELDS
from core.parameters import CHANNEL_FIELDS, ChannelParameters

WATER_LIKE = fluid_state(fluid="own", own_density_kg_m3=1000.0, own_viscosity_mpa_s=1.0)  # nu = 1e-6 m^2/s


def _at_reynolds(parameters, reynolds):
    """Estimate at Reynolds numbers on the hydraulic diameter."""
    width, depth = parameters.channel_width_um * 1e-6, parameters.depth_um * 1e-6
    flow_m3_s = np.asarray(reynolds, dtype=float) * 1e-6 * (width + depth) / 2.0
    return estimate(parameters, fluid=WATER_LIKE, flows_ul_min=flow_m3_s * 60e9)


def _slopes(values, reynolds):
    return np.diff(np.log(values)) / np.diff(np.log(reynolds))


# ---- limits that are exact


@pytest.mark.parametrize(("width_um", "depth_um"), [(100, 100), (300, 60), (50, 400)])
def test_without_stages_it_is_the_duct_series(width_um, depth_um):
    plain = ChannelParameters(stages=0, channel_width_um=width_um, depth_um=depth_um, lead_in_um=3000, lead_out_um=2000)
    flows = np.array([0.01, 10.0, 5000.0])
    result = estimate(plain, fluid=WATER_LIKE, flows_ul_min=flows)
    duct = resistance_pa_s_m3(length_m=5e-3, width_m=width_um * 1e-6, depth_m=depth_um * 1e-6, viscosity_pa_s=1e-3)
    assert result.forward_pressure_pa == pytest.approx(flows / 60e9 * duct, rel=1e-12)
    assert np.array_equal(result.forward_pressure_pa, result.reverse_pressure_pa)
    assert np.all(result.diodicity == 1.0)
    assert np.all(result.loop_share_forward == 0.0)


def test_absolute_drop_of_a_control_channel():
    """Series worked out separately: water at 20 degC (1.0016 mPa s), 100 x 100 um, 10 mm, 1 uL/s: 2849.97 Pa."""
    fluid = fluid_state(fluid="own", own_density_kg_m3=998.2, own_viscosity_mpa_s=1.0016)
    plain = ChannelParameters(stages=0, channel_width_um=100, depth_um=100, lead_in_um=5000, lead_out_um=5000)
    assert estimate(plain, fluid=fluid, flows_ul_min=60.0).forward_pressure_pa[0] == pytest.approx(2849.97, abs=0.005)


def test_creeping_flow_divides_alike_in_both_directions():
    """Stokes flow is reversible."""
    result = _at_reynolds(ChannelParameters(), [1e-6])
    assert result.loop_share_forward == pytest.approx(result.loop_share_reverse, abs=1e-7)
    assert result.forward_pressure_pa == pytest.approx(result.stokes_pressure_pa, rel=1e-9)


# ---- the law at low Reynolds number

LAW_DESIGNS = [
    ChannelParameters(),
    ChannelParameters(stages=1),
    ChannelParameters(stages=20, depth_um=60),
    ChannelParameters(loop_angle_deg=70, run_bend_deg=20, depth_um=400),
    ChannelParameters(loop_width_um=260, loop_turn_deg=200, run_bend_deg=30),
]


@pytest.mark.parametrize("parameters", LAW_DESIGNS)
def test_excess_grows_with_the_square_and_rectification_with_the_cube(parameters):
    """Energy balance and reciprocity of Stokes flow: slopes 2 and 3 on log axes for Re 0.05 to 0.5."""
    reynolds = np.geomspace(0.05, 0.5, 11)
    result = _at_reynolds(parameters, reynolds)
    for pressure in (result.forward_pressure_pa, result.reverse_pressure_pa):
        excess = pressure / result.stokes_pressure_pa - 1.0
        assert np.all(excess > 0.0)
        assert _slopes(excess, reynolds) == pytest.approx(2.0, abs=0.1)
    assert _slopes(np.abs(result.rectification), reynolds) == pytest.approx(3.0, abs=0.2)


def test_rectification_keeps_its_digits_where_the_pressures_have_lost_them():
    """Down to Re 0.001 the cube law holds, though Di - 1 is then below the rounding of the pressures."""
    result = _at_reynolds(ChannelParameters(), [0.001, 0.002])
    assert 0.0 < result.rectification[0] < 1e-15
    assert result.rectification[1] / result.rectification[0] == pytest.approx(8.0, rel=1e-3)


def test_shares_part_in_proportion_to_the_flow():
    """First effect of inertia: forward and reverse share move apart by equal amounts, as Re^1."""
    result = _at_reynolds(ChannelParameters(stages=1), [0.1, 0.2])
    middle = _at_reynolds(ChannelParameters(stages=1), [1e-6]).loop_share_forward[0]
    up, down = result.loop_share_reverse - middle, middle - result.loop_share_forward
    assert up == pytest.approx(down, rel=0.02)
    assert up[1] / up[0] == pytest.approx(2.0, rel=0.02)


# ---- against the reference solves

# Three-dimensional reference solutions made with separate code: square section, one stage, 45 deg, run
# bend 45 deg, R = 1.6 w, leads 3 w, sharp corners; drops over rho U^2, good to about 1 %.
SOLVED = [(50.0, 5.198, 5.337, 0.0267), (100.0, 2.780, 3.098, 0.1145)]


@pytest.mark.parametrize(("reynolds", "forward", "reverse", "rectification"), SOLVED)
def test_reference_solves(reynolds, forward, reverse, rectification):
    w = 200.0
    one = ChannelParameters(
        stages=1, channel_width_um=w, loop_width_um=w, depth_um=w, loop_radius_um=1.6 * w, lead_in_um=3 * w,
        lead_out_um=3 * w, nose_radius_um=0, corner_radius_um=0,
    )  # fmt: skip
    result = _at_reynolds(one, [reynolds])
    head = 1000.0 * (reynolds * 1e-6 / (w * 1e-6)) ** 2
    assert result.forward_pressure_pa[0] / head == pytest.approx(forward, rel=0.05)
    assert result.reverse_pressure_pa[0] / head == pytest.approx(reverse, rel=0.05)
    assert result.rectification[0] == pytest.approx(rectification, rel=0.30)


# ---- trends


def test_diodicity_grows_with_stages_and_ever_more_slowly():
    """Published chains: growth less than in proportion to N, towards a limit (Physics of Fluids 2023)."""
    stages = [1, 2, 4, 8, 16, 32]
    gained = np.array([_at_reynolds(ChannelParameters(stages=n), [100.0]).rectification[0] for n in stages])
    assert np.all(np.diff(gained) > 0.0)
    assert np.all(gained[1:] / gained[:-1] < 2.0)


@pytest.mark.parametrize("reynolds", [20.0, 50.0, 150.0])
def test_diodicity_does_not_grow_with_gap(reynolds):
    """Published: longer spacing lowers Di."""
    gaps = np.arange(0.0, 3000.0, 100.0)
    found = [_at_reynolds(ChannelParameters(stages=4, stage_gap_um=gap), [reynolds]).rectification[0] for gap in gaps]
    assert np.all(np.diff(found) <= 0.0)


@pytest.mark.parametrize("reynolds", [30.0, 100.0])
def test_shallower_channels_rectify_less(reynolds):
    """Floor and roof brake the streams before they can tell directions apart."""
    depths = [200.0, 150.0, 100.0, 70.0, 50.0, 30.0, 20.0]
    found = [_at_reynolds(ChannelParameters(depth_um=depth), [reynolds]).rectification[0] for depth in depths]
    assert np.all(np.diff(found) < 0.0)
    assert found[-1] < 0.1 * found[0]


def test_shares_part_as_the_flow_grows():
    """Reverse flow is pushed into the loop and forward flow kept out of it."""
    result = _at_reynolds(ChannelParameters(stages=1), np.linspace(1.0, 150.0, 30))
    assert np.all(np.diff(result.loop_share_reverse) > 0.0)
    assert np.all(np.diff(result.loop_share_forward) < 0.0)


@pytest.mark.parametrize("stages", [1, 4, 10])
def test_plausible_bands(stages):
    """Published bands: Di 1.0 to 1.3 below Re 50; at Re 200 not above what 10 stages reach at Re 450 (3.6)."""
    result = _at_reynolds(ChannelParameters(stages=stages), [10.0, 50.0, 200.0])
    assert np.all(result.diodicity >= 1.0)
    assert np.all(result.diodicity[:2] < 1.3)
    assert result.diodicity[2] < 3.6


# ---- manners


def _field(field):
    if field.choices:
        return st.sampled_from(field.choices)
    if field.whole:
        return st.integers(int(field.minimum), int(field.maximum))
    return st.floats(field.minimum, field.maximum)


ANY_CHANNEL = st.fixed_dictionaries({name: _field(field) for name, field in CHANNEL_FIELDS.items()})


@settings(max_examples=300, deadline=None)
@given(values=ANY_CHANNEL)
def test_any_parameter_set_gives_sound_numbers(values):
    """No exception, no NaN, no negative drop, shares between 0 and 1, at any flow the fields allow."""
    field = OPERATING_FIELDS["flow_ul_min"]
    flows = np.geomspace(field.minimum, field.maximum, 12)
    result = estimate(ChannelParameters(**values), fluid=WATER_LIKE, flows_ul_min=flows)
    for name in ("reynolds", "stokes_pressure_pa", "forward_pressure_pa", "reverse_pressure_pa", "diodicity",
                 "error_band_percent", "rectification_band_percent"):  # fmt: skip
        array = getattr(result, name)
        assert array.shape == flows.shape
        assert np.all(np.isfinite(array))
    # minimum dissipation: no flow drops less than Stokes flow would
    assert np.all(result.forward_pressure_pa >= result.stokes_pressure_pa * (1.0 - 1e-12))
    assert np.all(result.reverse_pressure_pa >= result.stokes_pressure_pa * (1.0 - 1e-12))
    assert np.all(result.stokes_pressure_pa > 0.0)
    for share in (result.loop_share_forward, result.loop_share_reverse):
        assert np.all((share >= 0.0) & (share <= 1.0))
    # exact agreement of the two ways to the diodicity
    ratio = result.reverse_pressure_pa / result.forward_pressure_pa
    assert result.diodicity == pytest.approx(ratio, rel=1e-12)
    json.dumps(result.score(0).as_dict(), allow_nan=False)


@settings(max_examples=200, deadline=None)
@given(values=ANY_CHANNEL, reynolds=st.floats(1e-4, 0.5))
def test_no_channel_rectifies_in_creeping_flow(values, reynolds):
    """Re below 0.5: any rigid channel has Di = 1 but for a term in Re^3, small in the oddest shape."""
    assert abs(_at_reynolds(ChannelParameters(**values), [reynolds]).rectification[0]) < 1e-2 * reynolds**3


@pytest.mark.parametrize("flow", [0.0, -1.0, math.nan, math.inf])
def test_bad_flow_is_refused(flow):
    with pytest.raises(DesignValueError, match="flow_ul_min") as caught:
        estimate(ChannelParameters(), fluid=WATER_LIKE, flows_ul_min=[1.0, flow])
    assert caught.value.field == "flow_ul_min"


def test_no_flows_give_empty_arrays():
    assert estimate(ChannelParameters(), fluid=WATER_LIKE, flows_ul_min=np.array([])).diodicity.shape == (0,)


def test_one_flow_or_many_is_the_same():
    flows = np.array([10.0, 1200.0, 3000.0])
    many = estimate(ChannelParameters(), fluid=WATER_LIKE, flows_ul_min=flows)
    for index, flow in enumerate(flows):
        one = estimate(ChannelParameters(), fluid=WATER_LIKE, flows_ul_min=flow)
        assert one.rectification[0] == pytest.approx(many.rectification[index], rel=1e-9)


def test_score_has_the_keys_of_machine_readable_output():
    score = estimate(ChannelParameters(), fluid=WATER_LIKE, flows_ul_min=1200.0).score(0).as_dict()
    wanted = "flow_ul_min reynolds forward_pressure_pa reverse_pressure_pa diodicity loop_share_forward"
    wanted = {*wanted.split(), "loop_share_reverse", "method", "error_band_percent", "valid", "notes"}
    assert wanted <= set(score)
    assert score["method"] == "estimate"
    assert type(score["valid"]) is bool
    assert all(type(note) is str for note in score["notes"])


def test_notes_write_large_numbers_out():
    fast = estimate(ChannelParameters(), fluid=fluid_state(fluid="water"), flows_ul_min=[40000.0]).score(0)
    assert fast.reynolds > 1000.0
    assert any("unsteady" in note for note in fast.notes)
    assert not any("e+" in note for note in fast.notes)
