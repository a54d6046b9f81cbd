"""What the user is told: bands, validity and notes."""

from __future__ import annotations

import numpy as np
import pytest

from core.fluids import fluid_state
from core.hydraulics.estimate import estimate
from core.parameters import ChannelParameters

WATER = fluid_state(fluid="water")


def _notes(flow_ul_min=1200.0, fluid=WATER, **values):
    return estimate(ChannelParameters(**values), fluid=fluid, flows_ul_min=flow_ul_min).score(0).notes


def _has(notes, words):
    return any(words in note for note in notes)


def test_creeping_flow_is_told_plainly():
    notes = _notes(flow_ul_min=20.0)
    assert _has(notes, "rectification below 0.1 %; no geometry helps at this flow; raise the flow or the depth")
    assert not _has(_notes(flow_ul_min=1200.0), "below 0.1 %")


def test_a_rectifier_leaks():
    assert _has(_notes(), "always leaks backwards")
    assert not _has(_notes(stages=0), "leaks")


def test_unsteady_flow_is_told():
    assert _has(_notes(flow_ul_min=4000.0), "may be unsteady")
    assert not _has(_notes(flow_ul_min=4000.0, stages=0), "unsteady")
    result = estimate(ChannelParameters(), fluid=WATER, flows_ul_min=[1200.0, 4000.0])
    assert result.valid.tolist() == [True, False]


@pytest.mark.parametrize(
    ("values", "words"),
    [
        ({"depth_um": 4.0}, "depth over channel width"),
        ({"loop_width_um": 500.0}, "loop width over channel width"),
        ({"loop_radius_um": 2000.0}, "loop radius over channel width"),
        ({"loop_angle_deg": 15.0, "run_bend_deg": 15.0}, "loop angle"),
        ({"loop_turn_deg": 100.0}, "loop turn"),
        ({"run_bend_deg": 5.0}, "run bend over loop angle"),
        ({"stage_gap_um": 20.0}, "stage gap over channel width"),
    ],
)
def test_designs_outside_the_compared_range(values, words):
    """Named in words, not valid, and with a wider band."""
    result = estimate(ChannelParameters(**values), fluid=WATER, flows_ul_min=600.0)
    inside = estimate(ChannelParameters(), fluid=WATER, flows_ul_min=600.0)
    assert _has(result.notes, words)
    assert _has(result.notes, "run the flow solve")
    assert not result.valid[0]
    assert result.error_band_percent[0] > inside.error_band_percent[0]


def test_loop_that_cannot_close_is_not_valid():
    result = estimate(
        ChannelParameters(loop_angle_deg=120, loop_turn_deg=60, run_bend_deg=0), fluid=WATER, flows_ul_min=600.0
    )
    assert not result.valid[0]
    assert _has(result.notes, "does not close")


def test_gas_cautions():
    air = fluid_state(fluid="air")
    assert _has(_notes(fluid=air), "incompressible")
    assert _has(_notes(fluid=air, depth_um=5.0, channel_width_um=40.0, flow_ul_min=1.0), "slips")
    assert _has(_notes(fluid=air, depth_um=20.0, flow_ul_min=60000.0), "gas expands")
    assert not _has(_notes(), "gas")


def test_soft_chip_caution_follows_pressure():
    assert _has(_notes(depth_um=40.0, stages=10), "soft chip")
    assert not _has(_notes(), "soft chip")


def test_wide_and_shallow_roof_caution():
    assert _has(_notes(depth_um=15.0), "roof may sag")
    assert not _has(_notes(), "roof may sag")


def test_viscosity_error_widens_the_band():
    glycerol = fluid_state(fluid="glycerol-water", glycerol_percent=50)
    bands = [
        estimate(ChannelParameters(), fluid=f, flows_ul_min=600.0).error_band_percent[0] for f in (WATER, glycerol)
    ]
    assert bands[1] - bands[0] == pytest.approx(glycerol.error_percent - WATER.error_percent)


def test_band_of_tiny_rectification_is_wide():
    """Flow solves found Di - 1 as small as a few thousandths with either sign: no estimate is surer than that."""
    result = estimate(ChannelParameters(), fluid=WATER, flows_ul_min=[100.0, 1200.0])
    assert result.rectification_band_percent[0] > 100.0
    assert result.rectification_band_percent[1] < 60.0
    assert result.diodicity_band == pytest.approx(result.rectification_band_percent / 100.0 * result.rectification)


def test_control_channel_has_the_duct_band():
    result = estimate(ChannelParameters(stages=0), fluid=WATER, flows_ul_min=[100.0, 1200.0])
    assert np.all(result.error_band_percent <= 3.0)
    assert np.all(result.rectification_band_percent == 0.0)


@pytest.mark.parametrize("flow_ul_min", [0.001, 30.0, 1200.0, 1e6])
def test_notes_are_single_lines(flow_ul_min):
    for note in _notes(flow_ul_min=flow_ul_min, depth_um=30.0):
        assert "\n" not in note
        assert note.endswith(".")


def test_stiff_walls_do_not_bulge():
    """Truth: silicone of some MPa bulges, glass and silicon of some 100 GPa do not (common practice, no source)."""
    channel = ChannelParameters(depth_um=40.0, stages=10)
    stiff = estimate(channel, fluid=WATER, flows_ul_min=1200.0, has_stiff_walls=True).score(0)
    assert stiff.highest_pressure_pa > 2e4
    assert not _has(stiff.notes, "soft chip")
