"""Centre lines against the closed forms of the glossary's loop."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.geometry.centreline import Part, build_centreline
from core.geometry.measures import stage_measures
from core.parameters import ChannelParameters


@given(st.floats(15, 89), st.floats(50, 2000))
def test_half_circle_loop_has_its_closed_form(angle: float, radius: float) -> None:
    # t = 180 deg without return: leg 2R/tan a, mouth 2R/sin a from the fork (plane trigonometry)
    measures = stage_measures(ChannelParameters(loop_angle_deg=angle, run_bend_deg=0, loop_radius_um=radius))
    assert measures.leg_length_um == pytest.approx(2 * radius / np.tan(np.radians(angle)), rel=1e-9)
    assert measures.bypass_length_um == pytest.approx(2 * radius / np.sin(np.radians(angle)), rel=1e-9)
    assert measures.turn_length_um == pytest.approx(np.pi * radius, rel=1e-12)


def test_strokes_follow_one_another_from_end_to_end() -> None:
    parameters = ChannelParameters(stages=5, return_length_um=100, loop_turn_deg=170)
    line = build_centreline(parameters)
    main = [s for s in line.strokes if s.part in (Part.LEAD_OUT, Part.BYPASS, Part.GAP, Part.LEAD_IN)]
    for before, after in itertools.pairwise(main):
        assert before.end_um == pytest.approx(after.start_um, abs=1e-9)
    for stage, place in enumerate(line.stages):
        loop = [s for s in line.strokes if s.stage == stage and s.part in (Part.LEG, Part.TURN, Part.RETURN)]
        assert loop[0].start_um == pytest.approx(place.fork_um, abs=1e-9)
        assert loop[-1].end_um == pytest.approx(place.mouth_um, abs=1e-9)


def test_loop_parts_join_without_a_kink() -> None:
    line = build_centreline(ChannelParameters(stages=2, return_length_um=150))
    for stage in (0, 1):
        leg, turn, back = [s for s in line.strokes if s.stage == stage and s.part in (Part.LEG, Part.TURN, Part.RETURN)]
        turn_points = turn.points(1e-6)
        for straight, touching in ((leg, turn_points[1] - turn_points[0]), (back, turn_points[-1] - turn_points[-2])):
            d = straight.end_um - straight.start_um
            cross = d[0] * touching[1] - d[1] * touching[0]
            assert abs(cross) / np.hypot(*d) / np.hypot(*touching) < 1e-3


def test_total_length_is_the_sum_of_its_parts() -> None:
    p = ChannelParameters(stages=3)
    line, measures = build_centreline(p), stage_measures(p)
    total = sum(s.length_um for s in line.strokes)
    expected = p.lead_in_um + p.lead_out_um + 2 * p.stage_gap_um
    expected += 3 * (measures.bypass_length_um + measures.loop_length_um)
    assert total == pytest.approx(expected, rel=1e-12)


@pytest.mark.parametrize("sides", ["alternate", "same"])
def test_chain_runs_along_x(sides: str) -> None:
    line = build_centreline(ChannelParameters(stages=6, sides=sides))
    two_stages = line.stages[4].fork_um - line.stages[2].fork_um
    assert two_stages[0] > 0
    assert two_stages[1] == pytest.approx(0.0, abs=1e-9)


def test_sides_alternate_or_stay() -> None:
    assert [s.side for s in build_centreline(ChannelParameters(stages=4)).stages] == [1, -1, 1, -1]
    assert {s.side for s in build_centreline(ChannelParameters(stages=4, sides="same")).stages} == {1}


def test_no_stages_is_a_plain_straight_channel() -> None:
    line = build_centreline(ChannelParameters(stages=0, lead_in_um=300, lead_out_um=700))
    assert [s.length_um for s in line.strokes] == [1000.0]
    assert line.forward_inlet.point_um == pytest.approx([1000.0, 0.0])


def test_impossible_loops_are_told() -> None:
    assert not stage_measures(ChannelParameters(loop_turn_deg=80)).is_possible
    assert not stage_measures(ChannelParameters(run_bend_deg=46)).is_possible
    assert stage_measures(ChannelParameters()).is_possible
