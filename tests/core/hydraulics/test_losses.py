"""Local losses against worked values of the published formulas and their limits."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.hydraulics.losses import combining_losses, corner_reach, curved_friction_ratio, dividing_loss

# 1 + u^2 - 2 u cos(0.75 delta) worked out separately: delta in deg, then K at u = 0, 0.5, 1, 1.5
DIVIDING = [
    (0, 1, 0.2500, 0, 0.2500),
    (30, 1, 0.3261, 0.1522, 0.4784),
    (45, 1, 0.4185, 0.3371, 0.7556),
    (60, 1, 0.5429, 0.5858, 1.1287),
    (90, 1, 0.8673, 1.2346, 2.1019),
    (135, 1, 1.4451, 2.3902, 3.8353),
]


@pytest.mark.parametrize("row", DIVIDING)
def test_dividing_loss_as_published(row):
    turn, *losses = row
    assert dividing_loss(np.array([0.0, 0.5, 1.0, 1.5]), turn_deg=turn) == pytest.approx(np.array(losses), abs=6e-5)


def test_dividing_loss_in_straight_line_is_an_abrupt_expansion():
    """Borda and Carnot: (1 - u)^2 for a stream that slows down."""
    u = np.linspace(0.0, 1.0, 11)
    assert dividing_loss(u, turn_deg=0.0) == pytest.approx((1.0 - u) ** 2, abs=1e-15)


def test_combining_at_45_degrees_as_in_the_handbook():
    """Idelchik, converging wye of equal sections, half the flow from each side: run 0.396 (from memory)."""
    run, branch = combining_losses((0.5, 0.5), turns_deg=(0.0, 45.0), area_ratios=(1.0, 1.0))
    assert float(run) == pytest.approx(0.396, abs=5e-4)
    assert float(branch) == pytest.approx(float(run), rel=1e-12)


def test_combining_without_side_stream_loses_nothing():
    """The run alone, straight on: nothing is turned or mixed."""
    run, _ = combining_losses((1.0, 0.0), turns_deg=(0.0, 90.0), area_ratios=(1.0, 1.0))
    assert float(run) == pytest.approx(0.0, abs=1e-15)


@given(share=st.floats(0.0, 1.0), turn=st.floats(0.0, 180.0), width=st.floats(0.5, 2.0))
def test_combining_never_gains_energy(share, turn, width):
    """Weighted by flow, mixing can only lose (second law); one stream alone may gain."""
    run, branch = combining_losses((1.0 - share, share / width), turns_deg=(0.0, turn), area_ratios=(1.0, width))
    assert (1.0 - share) * float(run) + share * float(branch) >= -1e-12


# White 1929, from an independent library: De, ratio
WHITE = [(0.0, 1.0), (11.6, 1.0), (20.0, 1.03484), (100.0, 1.53023), (500.0, 2.75250)]


@pytest.mark.parametrize(("dean", "ratio"), WHITE)
def test_curved_friction_as_published(dean, ratio):
    assert float(curved_friction_ratio(dean)) == pytest.approx(ratio, abs=6e-6)


def test_curved_friction_starts_smoothly():
    """No step where the formula takes over at De = 11.6."""
    dean = np.array([11.6, 11.7])
    assert np.diff(curved_friction_ratio(dean))[0] < 1e-4


@pytest.mark.parametrize(("angle", "reach"), [(180.0, 0.0), (90.0, 0.5), (45.0, 1.2071068), (60.0, 0.8660254)])
def test_corner_reach_of_equal_channels(angle, reach):
    """Two strips of unit width part where their edges cross: cot(phi / 2) / 2 from the crossing of the middles."""
    assert corner_reach(angle_deg=angle, width_ratio=1.0) == pytest.approx(reach, abs=1e-7)
