"""How the diodicity goes with stages, gap and flow, against what was published for loops beside a bypass.

Sources, all read as abstracts or as quoted there; none gives the outline to the last number, so that
only trends and bands can be compared, not values:
S. M. Thompson, B. J. Paudel, T. Jamal, D. K. Walters, J. Fluids Eng. 136, 2014, 081102 (three-dimensional
computation, up to 20 stages: no dependence on stages and gap below Re of about 50, growth with stages above,
smaller gap gives more); P. Wiley and H. Huang, Fluids 9, 2024, 294 (less than linear growth with stages;
1.2 for one stage at Re 300); C. Liosis et al., Micromachines 16, 2025, 1329 (at most 1.43, 2.76 and 3.58
for 2, 6 and 10 stages up to Re 450).
"""

from __future__ import annotations

import pytest

from core.flow.channel import solve_channel
from core.parameters import ChannelParameters
from tests.core.flow.random_channels import WATER, flow_ul_min

pytestmark = pytest.mark.slow


def solved(*reynolds, quality="coarse", **fields):
    """Return the points for the default channel with some fields changed and leads of three widths."""
    channel = ChannelParameters(lead_in_um=600.0, lead_out_um=600.0, **fields)
    flows = [flow_ul_min(channel, each) for each in reynolds]
    return solve_channel(channel, fluid=WATER, flows_ul_min=flows, quality=quality).points


@pytest.fixture(scope="module")
def by_stages():
    return {stages: dict(zip((20, 100), solved(20.0, 100.0, stages=stages), strict=True)) for stages in (1, 2, 4)}


def test_growth_with_stages_is_below_linear(by_stages):
    """At Re 100: Di is 1.088, 1.112 and 1.143 with 1, 2 and 4 stages.

    That is stages to the power of 0.035, where the published 1.43, 2.76 and 3.58 follow a power of 0.57:
    those are the largest values up to Re 450, and the growth is said to be stronger at higher flow.
    """
    one, two, four = (by_stages[stages][100].diodicity - 1.0 for stages in (1, 2, 4))
    assert one < two < four
    assert two < 2.0 * one
    assert four < 2.0 * two


def test_stages_hardly_matter_in_slow_flow(by_stages):
    """At Re 20: within 0.005 of 1 whatever the number of stages."""
    assert all(abs(points[20].diodicity - 1.0) < 0.005 for points in by_stages.values())


def test_a_longer_gap_gives_no_more():
    """At Re 100, from one to four widths: 1.147 and 1.124 with an error of 0.006 when this was written."""
    near, far = (solved(100.0, quality="normal", stages=2, stage_gap_um=gap)[0] for gap in (200.0, 800.0))
    assert far.diodicity < near.diodicity + near.diodicity_band
    assert near.diodicity_band < 0.01


def test_bands_of_one_stage():
    """Slow flow at most 1.3; at Re 300 published 1.2, here 1.22 with an error of 0.2 from this coarse solve.

    The outlines are not the same: what agrees is the size of the effect.
    """
    points = dict(zip((20, 50, 300), solved(20.0, 50.0, 300.0, stages=1), strict=True))
    assert 0.999 < points[20].diodicity < 1.3
    assert 0.999 < points[50].diodicity < 1.3
    assert points[300].diodicity == pytest.approx(1.2, abs=0.1)


def test_band_of_two_stages():
    """At Re 200 below the 1.43 that were published as the most up to Re 450.

    Not held at Re 300: 1.51 with an error of 0.47 at quality coarse, 1.65 with an error of 0.04 at normal
    (four modes; the tolerance of that quality is not met), where no disturbance that is symmetrical about
    mid-depth grows. So it is no matter of coarse triangles: the steady solution of this outline does exceed
    what was published for others. What may end it on the bench are disturbances that are not symmetrical,
    or large ones: the real flow is likely to fluctuate there (J. Fluids Eng. 2021, doi 10.1115/1.4051401).
    The program warns above Re 200. Of Re 400 and 450 nothing is said: no steady flow is found beyond Re 370
    with one or two modes, nor beyond 340 with three, in either direction. At Re 200 quality normal gives
    1.366 with an error of 0.011.
    """
    (point,) = solved(200.0, stages=2)
    assert 1.0 < point.diodicity < 1.43
