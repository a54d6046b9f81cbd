"""The flow solve of a channel as parameters describe it: domain, both directions, long chains.

Truth: the exact areas of the outline, an independent three-dimensional solve of one stage (numbers
beside the check), a full solve of the chain that is extended elsewhere, and plain invariants.
"""

from __future__ import annotations

import json

import numpy as np
import pytest
import shapely

from core.errors import SolveError
from core.flow import FlowStopped
from core.flow.channel import channel_answers, solve_channel
from core.flow.channel_places import channel_domain, curve_flows_ul_min, streamline_seeds_um
from core.geometry.shape import build_shape
from core.operating import OperatingPoint
from core.parameters import ChannelParameters
from core.units import M3_S_PER_UL_MIN

WATER = OperatingPoint().fluid_state()
SHAPES = {
    "default": ChannelParameters(),
    "one side, shallow": ChannelParameters(sides="same", run_bend_deg=20.0, depth_um=60.0, stages=5),
    "long return, sharp": ChannelParameters(
        loop_turn_deg=150.0, return_length_um=300.0, nose_radius_um=0.0, corner_radius_um=0.0, stages=3
    ),
    "plain": ChannelParameters(stages=0),
}
# one stage, square section, radius 1.6 widths, leads of 3 widths, sharp corners: the reference design
REFERENCE = ChannelParameters(
    stages=1, lead_in_um=600.0, lead_out_um=600.0, nose_radius_um=0.0, corner_radius_um=0.0, loop_radius_um=320.0
)


def flow_at(reynolds: float, parameters: ChannelParameters) -> float:
    """Return the flow [uL/min] at a Reynolds number on the channel width."""
    speed = reynolds * WATER.kinematic_viscosity_m2_s / (parameters.channel_width_um * 1e-6)
    area_m2 = parameters.channel_width_um * parameters.depth_um * 1e-12
    return speed * area_m2 / M3_S_PER_UL_MIN


def liquid(domain) -> shapely.Polygon:
    return shapely.Polygon(domain.outer_um, domain.islands_um)


# --- the domain -----------------------------------------------------------------------------


@pytest.mark.parametrize("name", SHAPES)
def test_the_domain_is_the_outline(name):
    shape = build_shape(SHAPES[name])
    domain = channel_domain(shape)
    assert liquid(domain).is_valid
    assert liquid(domain).area == pytest.approx(shape.outline.area_um2, rel=1e-3)  # exact area; arcs as chords
    assert liquid(channel_domain(shape, sagitta_um=0.01)).area == pytest.approx(shape.outline.area_um2, rel=2e-5)
    assert domain.stages == shape.parameters.stages
    assert (domain.depth_um, domain.channel_width_um) == (shape.parameters.depth_um, shape.parameters.channel_width_um)


@pytest.mark.parametrize("name", SHAPES)
def test_open_ends_lie_on_the_outline_at_opposite_ends(name):
    domain = channel_domain(build_shape(SHAPES[name]))
    wall = shapely.LinearRing(domain.outer_um)
    for end in (domain.forward_inlet_um, domain.forward_outlet_um):
        chord = shapely.LineString(end)
        assert chord.length == pytest.approx(domain.channel_width_um, rel=1e-9)
        assert wall.buffer(1e-6).covers(chord)
    assert domain.forward_outlet_um[:, 0].mean() < domain.forward_inlet_um[:, 0].mean()  # reverse flow runs to +x


@pytest.mark.parametrize("name", SHAPES)
def test_sections_cross_the_liquid_from_wall_to_wall(name):
    domain = channel_domain(build_shape(SHAPES[name]))
    area = liquid(domain).buffer(0.2)
    for pair in domain.sections:
        for chord, width in zip(pair, (domain.channel_width_um, SHAPES[name].loop_width_um), strict=True):
            line = shapely.LineString(chord)
            assert area.covers(line)
            assert line.length == pytest.approx(width, rel=1e-6)
            assert all(liquid(domain).boundary.distance(shapely.Point(end)) < 0.2 for end in chord)


def test_an_unusable_shape_is_refused_with_its_finding():
    blocked = ChannelParameters(loop_radius_um=20.0)
    with pytest.raises(SolveError, match="loop_radius_um"):
        channel_domain(build_shape(blocked))
    with pytest.raises(SolveError, match="loop_radius_um"):
        solve_channel(blocked, fluid=WATER, flows_ul_min=[100.0])


@pytest.mark.parametrize("flows", [[], [0.0], [-1.0], [float("nan")]])
def test_unusable_flows_are_named(flows):
    with pytest.raises(SolveError, match="flow_ul_min"):
        solve_channel(REFERENCE, fluid=WATER, flows_ul_min=flows)


@pytest.mark.parametrize("name", SHAPES)
@pytest.mark.parametrize("is_forward", [True, False])
def test_streamlines_start_in_the_liquid(name, is_forward):
    shape = build_shape(SHAPES[name])
    area = liquid(channel_domain(shape))
    seeds = streamline_seeds_um(shape, is_forward=is_forward, lines=7, per_path=2)
    assert len(seeds) == 7 + 4 * shape.parameters.stages
    assert all(area.contains(shapely.Point(seed)) for seed in seeds)


def test_flows_of_a_curve_rise_to_the_top_through_the_operating_flow():
    flows = curve_flows_ul_min(2000.0, through_ul_min=1200.0)
    assert flows == tuple(sorted(flows))
    assert (len(flows), flows[-1]) == (8, 2000.0)
    assert 1200.0 in flows
    assert 3.0 in curve_flows_ul_min(5.0, through_ul_min=3.0)


# --- one stage ------------------------------------------------------------------------------


@pytest.fixture(scope="module")
def coarse_curve():
    flows = [flow_at(100.0, REFERENCE), flow_at(50.0, REFERENCE)]
    steps = []
    found = solve_channel(
        REFERENCE, fluid=WATER, flows_ul_min=flows, quality="coarse", report=lambda *step: steps.append(step)
    )
    return found, steps


@pytest.mark.slow
@pytest.mark.parametrize(
    ("index", "forward", "reverse"),  # drops in rho U^2; three-dimensional elements, independent code, about 1 %
    [(0, 2.786, 3.094), (1, 5.207, 5.341)],
)
def test_one_stage_against_three_dimensions(coarse_curve, index, forward, reverse):
    point = coarse_curve[0].points[index]
    speed = point.flow_ul_min * M3_S_PER_UL_MIN / (REFERENCE.channel_width_um * REFERENCE.depth_um * 1e-12)
    unit = WATER.density_kg_m3 * speed**2
    # coarse: 1 % of the reference and 2 % of the mesh
    assert point.forward_pressure_pa / unit == pytest.approx(forward, rel=0.03)
    assert point.reverse_pressure_pa / unit == pytest.approx(reverse, rel=0.03)
    assert abs(point.diodicity - reverse / forward) < point.diodicity_band + 0.005
    assert point.reynolds == pytest.approx((100.0, 50.0)[index], rel=1e-9)  # square: D_h is the width
    assert 0.0 < point.loop_share_forward < point.loop_share_reverse < 1.0
    assert point.valid


@pytest.mark.slow
def test_points_come_in_the_order_asked_for_and_as_plain_data(coarse_curve):
    found, steps = coarse_curve
    assert [p.flow_ul_min for p in found.points] == [flow_at(100.0, REFERENCE), flow_at(50.0, REFERENCE)]
    data = json.loads(json.dumps(found.as_dict(), allow_nan=False))
    assert [p["diodicity"] for p in data["points"]] == [p.diodicity for p in found.points]
    assert all(p["method"] == "flow solve" and p["unknowns"] > 1000 and p["seconds"] > 0 for p in data["points"])
    done = [step / total for step, total, _ in steps]
    assert done == sorted(done)
    assert done[0] < 0.2
    assert done[-1] == 1.0


@pytest.mark.slow
def test_fields_fill_the_outline(coarse_curve):
    point = coarse_curve[0].points[0]
    area = liquid(channel_domain(build_shape(REFERENCE)))
    for field in (point.forward_field, point.reverse_field):
        corners = field.points_um[field.triangles]
        a, b, c = corners[:, 0], corners[:, 1], corners[:, 2]
        sizes = np.abs((b - a)[:, 0] * (c - a)[:, 1] - (b - a)[:, 1] * (c - a)[:, 0]) / 2
        assert sizes.sum() == pytest.approx(area.area, rel=5e-3)
        speed = np.hypot(*field.velocity_m_s().T)
        mean = point.flow_ul_min * M3_S_PER_UL_MIN / 4e-8
        assert 1.5 * mean < speed.max() < 3.5 * mean  # a square duct has 2.1 in its middle
    pressure = point.reverse_field.pressure_pa()
    assert np.ptp(pressure) == pytest.approx(point.reverse_pressure_pa, rel=0.3)


@pytest.mark.slow
def test_a_plain_channel_has_no_easy_direction():
    plain = ChannelParameters(stages=0, lead_in_um=500.0, lead_out_um=500.0)
    (point,) = solve_channel(plain, fluid=WATER, flows_ul_min=[500.0], quality="coarse").points
    assert abs(point.diodicity - 1.0) <= point.diodicity_band < 0.003  # the two ends are not meshed alike
    assert point.loop_share_forward == point.loop_share_reverse == 0.0
    # square duct: R = 28.454 mu L / w^4 (series solution of the Poisson equation)
    exact = 28.454 * WATER.viscosity_pa_s * 1e-3 / (200e-6) ** 4 * 500.0 * M3_S_PER_UL_MIN
    assert point.forward_pressure_pa == pytest.approx(exact, rel=0.01)


# --- stopping -------------------------------------------------------------------------------


def test_it_stops_when_asked():
    with pytest.raises(FlowStopped):
        solve_channel(REFERENCE, fluid=WATER, flows_ul_min=[100.0], quality="coarse", should_stop=lambda: True)


# --- one quality after another ------------------------------------------------------------------


@pytest.mark.slow
def test_answers_in_turn_are_those_of_separate_solves():
    """The better answer begins where the coarse one ended; the equations are the same."""
    flow, steps = flow_at(40.0, REFERENCE), []
    found = list(
        channel_answers(REFERENCE, fluid=WATER, flows_ul_min=[flow], report=lambda *step: steps.append(step[0]))
    )
    assert [each.points[0].quality for each in found] == ["coarse", "normal"]
    for answer in found:
        (alone,) = solve_channel(REFERENCE, fluid=WATER, flows_ul_min=[flow], quality=answer.points[0].quality).points
        (point,) = answer.points
        assert point.forward_pressure_pa == pytest.approx(alone.forward_pressure_pa, rel=1e-5)
        assert point.reverse_pressure_pa == pytest.approx(alone.reverse_pressure_pa, rel=1e-5)
        assert point.diodicity_band == pytest.approx(alone.diodicity_band, rel=1e-2)
        assert (point.modes, point.unknowns) == (alone.modes, alone.unknowns)
    assert steps == sorted(steps)  # over both answers
    assert (steps[0], steps[-1]) == (0, 1000)


def test_an_answer_that_nobody_waits_for_is_not_computed():
    answers = channel_answers(REFERENCE, fluid=WATER, flows_ul_min=[flow_at(5.0, REFERENCE)])
    assert next(answers).points[0].quality == "coarse"
    answers.close()


# --- long chains ----------------------------------------------------------------------------


@pytest.mark.slow
def test_eight_stages_by_extension_agree_with_eight_in_full():
    chain = ChannelParameters(stages=8, lead_in_um=600.0, lead_out_um=600.0)
    flow = flow_at(80.0, chain)
    (full,) = solve_channel(chain, fluid=WATER, flows_ul_min=[flow], quality="coarse", solved_stages=8).points
    (short,) = solve_channel(chain, fluid=WATER, flows_ul_min=[flow], quality="coarse", solved_stages=6).points
    assert short.solved_stages == 6
    for name in ("forward_pressure_pa", "reverse_pressure_pa"):
        assert getattr(short, name) == pytest.approx(getattr(full, name), rel=0.005)
    assert abs(short.diodicity - full.diodicity) < short.diodicity_band
    assert len(short.loop_shares_reverse) == len(full.loop_shares_reverse) == 8
    np.testing.assert_allclose(short.loop_shares_reverse, full.loop_shares_reverse, atol=0.01)
    np.testing.assert_allclose(short.loop_shares_forward, full.loop_shares_forward, atol=0.01)
    assert any("6 stages were solved" in note for note in short.notes)
    for one, other in zip(short.stages[:-1], full.stages[:-1], strict=True):
        assert one.to_next_forward_pa == pytest.approx(other.to_next_forward_pa, rel=0.05)
        assert one.to_next_reverse_pa == pytest.approx(other.to_next_reverse_pa, rel=0.05)
    # the field of the stages solved lies where they are in the whole chain, at the pressure they have there
    inlet = build_shape(chain).centreline.forward_inlet.point_um
    near = np.hypot(*(short.forward_field.points_um - inlet).T).min()
    assert near < 0.1 * chain.channel_width_um
    assert short.forward_field.pressure_pa().max() == pytest.approx(full.forward_field.pressure_pa().max(), rel=0.01)
