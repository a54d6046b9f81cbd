"""Seconds and unknowns of the flow solve; limits are generous because the machine may be busy."""

from __future__ import annotations

import pytest

from core.flow import solve
from tests.core.flow.flow_shapes import chain

WATER = {"density_kg_m3": 1000.0, "viscosity_pa_s": 1e-3}


@pytest.mark.benchmark
@pytest.mark.slow
def test_first_coarse_answer_of_a_four_stage_chain():
    result = solve(chain(stages=4), flow_m3_s=0.5e-8, quality="coarse", **WATER)
    print(f"4 stages, coarse: {result.seconds:.2f} s, {result.unknowns} unknowns")
    assert result.valid
    assert result.seconds < 6  # aim 1.5 s on a free machine


@pytest.mark.benchmark
@pytest.mark.slow
def test_sixteen_stages_against_four():
    """Cost grows little faster than the number of stages: at most 5 times for 4 times the stages."""
    seconds = {}
    for stages in (4, 16):
        result = solve(chain(stages=stages), flow_m3_s=0.5e-8, quality="coarse", memory_limit_mb=8000, **WATER)
        assert result.valid
        seconds[stages] = result.seconds
    print(f"4 stages {seconds[4]:.2f} s, 16 stages {seconds[16]:.2f} s")
    assert seconds[16] < 6 * seconds[4]
