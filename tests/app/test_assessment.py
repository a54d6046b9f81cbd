"""What is scored is what will be made.

Truth: walls that all move outwards by d make every width larger by 2 d (a theorem of outlines drawn by a round
pen); the section of an isotropic etch is w d + pi d^2 / 2 for a mask opening w (check values, 7.1).
"""

from __future__ import annotations

from dataclasses import replace
from math import pi

import numpy as np
import pytest

from app.assessment import NOT_MADE, Checked, assessment_of, cured_findings_of, findings_of, making_by, score_of
from core.fabrication.process import ProcessKind
from core.fabrication.shipped import shipped_process
from core.findings import Severity
from core.hydraulics.estimate import estimate
from core.operating import OperatingPoint
from core.parameters import ChannelParameters

WATER = OperatingPoint()
FILM = shipped_process("cast, film mask")


def alone(channel: ChannelParameters):
    """Score a channel without any process."""
    flows = np.array([WATER.flow_ul_min])
    return estimate(channel, fluid=WATER.fluid_state(), flows_ul_min=flows).score(0)


def test_walls_that_nobody_allows_for_are_scored_where_they_come_out():
    channel = ChannelParameters(nose_radius_um=20.0, corner_radius_um=20.0)
    process = FILM.with_values({"bias_um": 6.0, "allowance": "not at all", "min_radius_um": 0.0})
    made = replace(channel, channel_width_um=212.0, loop_width_um=212.0, nose_radius_um=14.0, corner_radius_um=14.0)
    assert score_of(channel, process, WATER) == alone(made)
    assessment = assessment_of(channel, process, WATER, 2000.0)
    assert assessment.score == alone(made)
    assert assessment.making.drawn == channel


def test_walls_that_the_drawing_allows_for_come_out_as_wanted():
    channel = ChannelParameters(nose_radius_um=20.0, corner_radius_um=20.0)
    process = FILM.with_values({"bias_um": 6.0, "min_radius_um": 0.0})
    assert score_of(channel, process, WATER) == alone(channel)


def test_round_etched_sides_are_scored_with_the_width_of_equal_area():
    depth, opening = 60.0, 200.0
    channel = ChannelParameters(
        channel_width_um=opening + 2 * depth, loop_width_um=opening + 2 * depth, depth_um=depth, loop_radius_um=600.0,
        nose_radius_um=80.0, corner_radius_um=80.0,
    )  # fmt: skip
    making = making_by(channel, shipped_process("wet-etched glass"))
    assert making.flow.channel_width_um == pytest.approx((opening * depth + pi * depth**2 / 2) / depth, rel=1e-9)
    score = score_of(channel, shipped_process("wet-etched glass"), WATER)
    assert score.forward_pressure_pa > alone(channel).forward_pressure_pa, "the floor is narrower than the roof"


def test_a_channel_that_cannot_be_made_has_findings_and_no_score():
    """Truth: an etch 200 um deep undercuts 200 um on each side, so nothing is left of a mask for 200 um."""
    glass = shipped_process("wet-etched glass")
    assessment = assessment_of(ChannelParameters(), glass, WATER, 2000.0)
    assert assessment.score is None
    assert assessment.obstacle == NOT_MADE
    found = findings_of(Checked(channel=ChannelParameters(), process=glass))
    assert any(finding.severity is Severity.ERROR for finding in found)


def test_findings_of_a_shape_that_is_none_are_those_of_the_shape():
    channel = ChannelParameters(loop_radius_um=20.0)
    found = findings_of(Checked(channel=channel, process=FILM))
    assert [finding.code for finding in found] == ["bypass_vanishes"]


def test_the_search_for_cures_changes_no_finding_and_can_be_ended():
    """Truth: every cure, applied, leaves the finding out; what is raised at a try comes through."""
    checked = Checked(channel=ChannelParameters(channel_width_um=45.0, loop_width_um=60.0, depth_um=50.0), process=FILM)
    plain, tries = findings_of(checked), []
    cured = cured_findings_of(checked, lambda: tries.append(1))
    assert [each.code for each in cured] == [each.code for each in plain]
    assert tries
    for finding in cured:
        if finding.cure is not None:
            name, value = finding.cure
            better = findings_of(replace(checked, channel=checked.channel.with_values({name: value})))
            assert finding.code not in [each.code for each in better if each.field == finding.field]

    def stop():
        raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        cured_findings_of(checked, stop)


@pytest.mark.parametrize("kind", ProcessKind)
def test_what_has_no_score_has_a_finding_that_blocks(kind):
    """Truth: nothing is refused without a reason."""
    process = shipped_process(kind)
    sizes = ((30.0, 20.0, 40.0), (100.0, 60.0, 110.0), (200.0, 200.0, 320.0), (600.0, 100.0, 800.0))
    for width, depth, radius in sizes:
        channel = ChannelParameters(
            channel_width_um=width, loop_width_um=width, depth_um=depth, loop_radius_um=radius, stage_gap_um=4 * width
        )
        found = findings_of(Checked(channel=channel, process=process))
        if score_of(channel, process, WATER) is None:
            assert any(finding.severity is Severity.ERROR for finding in found)
