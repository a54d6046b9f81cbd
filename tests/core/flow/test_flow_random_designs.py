"""Random channels at random flows: every solve ends in a result or in a named reason.

Truth: what a result must be by its meaning, at any flow: finite and positive drops, loop shares
between none and all of the flow, a diodicity that creeping flow holds at 1, no drop below what the
shortest straight path through the channel takes.

The suite solves some; a thorough run (tests/thorough.py) 500, in one go.
"""

from __future__ import annotations

import math
import tempfile
import time
from pathlib import Path

import numpy as np
import pytest

from core.errors import SolveError
from core.flow import FlowStopped
from core.flow.channel import solve_channel
from tests.core.flow.processes import children
from tests.core.flow.random_channels import WATER, trial
from tests.thorough import cases

CHANNELS = cases(500, share=25)
LIMIT_S = 60.0  # of processor time, which a busy machine stretches least; fifty times what most take


def outcome(seed: int) -> tuple[str, str]:
    """Return what became of one random channel, in a word, and what speaks against it, empty if nothing.

    Parameters
    ----------
    seed : int
        Of channel and flow.
    """
    drawn = trial(np.random.default_rng(seed))
    end = time.process_time() + LIMIT_S
    try:
        found = solve_channel(
            drawn.channel,
            fluid=WATER,
            flows_ul_min=[drawn.flow_ul_min],
            quality="coarse",
            should_stop=lambda: time.process_time() > end,
        )
    except FlowStopped:
        return "slow", f"not done after {LIMIT_S:g} s"
    except SolveError as refusal:
        text = str(refusal)
        return "refused", "" if text and "\n" not in text and "Traceback" not in text else f"no plain reason: {text!r}"
    (point,) = found.points
    if not point.valid:
        return "not reached", _faults_of_a_failure(point, drawn.reynolds)
    return "solved", _faults_of_a_result(point, drawn)


def _faults_of_a_failure(point, reynolds: float) -> str:
    reached = (point.reached_reynolds_forward, point.reached_reynolds_reverse)
    if not all(0.0 <= each <= reynolds * (1 + 1e-9) for each in reached):
        return f"reached {reached} of {reynolds}"
    if min(reached) < reynolds * (1 - 1e-9) and not any("highest reached is" in note for note in point.notes):
        return f"does not say how far it came: {point.notes}"
    return "" if point.notes else "no note"


def _faults_of_a_result(point, drawn) -> str:
    drops = (point.forward_pressure_pa, point.reverse_pressure_pa)
    shares = (*point.loop_shares_forward, *point.loop_shares_reverse)
    numbers = (*drops, *shares, point.diodicity, point.error_band_percent, point.diodicity_band, point.reynolds)
    if not all(number is not None and math.isfinite(number) for number in numbers):
        return f"not finite: {numbers}"
    if not all(np.all(np.isfinite(f.pressure_modes_pa)) for f in (point.forward_field, point.reverse_field)):
        return "a field is not finite"
    if abs(point.reynolds / drawn.reynolds - 1) > 1e-9:
        return f"Reynolds number {point.reynolds}, asked for {drawn.reynolds}"
    # Forward flow that leaves one stage may drive a stream backwards around the loop of the next: a negative
    # share. Seen at a run bend of 81 degrees, Re 142 (channel 58 here): -0.144 coarse, -0.129 normal. With
    # two of its stages and sharp corners -0.104 by modes, -0.096 by ``solid_flow`` on the same triangles.
    if not all(-0.5 < share < 1.0 for share in shares):
        return f"loop shares {shares}"
    if drawn.reynolds < 2.0 and abs(point.diodicity - 1.0) > 0.002:  # creeping flow is the same run backwards
        return f"diodicity {point.diodicity} at Reynolds number {drawn.reynolds}"
    if min(drops) < 0.95 * _leads_pa(drawn):
        return f"drops {drops}, the leads alone take {_leads_pa(drawn)}"
    return ""


def _leads_pa(drawn) -> float:
    """Return the drop of the leads as straight channels, a lower bound of any drop [Pa].

    Source: R = 12 mu L / (w d^3 (1 - 0.63 d / w)) with d the shorter side, Bruus, Theoretical
    Microfluidics, 2008; within 0.2 % up to d = w / 2, 13 % for a square, where it is too high: hence
    without the bracket, which makes it too low everywhere.
    """
    p = drawn.channel
    short, long = sorted((p.depth_um * 1e-6, p.channel_width_um * 1e-6))
    length = (p.lead_in_um + p.lead_out_um) * 1e-6
    flow = drawn.flow_ul_min / 60e9
    return 12.0 * WATER.viscosity_pa_s * length * flow / (long * short**3)


@pytest.mark.slow
def test_random_channels_end_in_a_result_or_a_reason(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    monkeypatch.setattr(tempfile, "tempdir", str(tmp_path))
    found = {seed: outcome(seed) for seed in range(CHANNELS)}
    faults = {seed: text for seed, (_, text) in found.items() if text}
    assert not faults
    solved = sum(word == "solved" for word, _ in found.values())
    assert solved >= 0.8 * CHANNELS  # else the channels are not the ones people draw, or the solve gives up early
    assert list(Path(tmp_path).iterdir()) == []  # no file is left
    assert children() == []
