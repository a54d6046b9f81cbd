"""Findings of width and gap against growing and shrinking of fine polygons by a general clipping library.

Truth: where the fluid, shrunk by half a limit on all sides, falls apart, some width lies below the limit; where the
solid does, some gap. Nothing is asked within 1 nm of the limit.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import pytest

from core.fabrication.channel_findings import channel_findings
from core.fabrication.process import Process, ProcessKind
from core.fabrication.shipped import shipped_process
from core.geometry.clearances import narrowest
from tests.core.geometry.test_clearances import moved_out, random_channels, rings_of, solids_of, topology
from tests.thorough import cases

if TYPE_CHECKING:
    from core.geometry.contour import Outline
    from core.parameters import ChannelParameters

CHANNELS = cases(500, share=40)
FARTHEST_UM = 4e-3
DOUBT_UM = 1e-3


def process_with(min_width_um: float, min_gap_um: float) -> Process:
    """Return a process that leaves walls where they are drawn and asks for nothing but these."""
    return shipped_process(ProcessKind.CAST_CHROME).with_values(
        {"min_width_um": min_width_um, "min_gap_um": min_gap_um, "min_drawn_um": 0.1, "min_radius_um": 0.0,
         "bias_um": 0.0, "wall_lean_deg": 0.0}
    )  # fmt: skip


def is_too_narrow(outline: Outline, limit_um: float) -> bool:
    return topology(moved_out(rings_of(outline), -0.5 * limit_um)) != (1, len(outline.islands))


def has_narrow_gap(outline: Outline, limit_um: float) -> bool:
    return any(topology(moved_out(rings, sense * 0.5 * limit_um)) != (1, 0) for rings, sense in solids_of(outline))


def codes(channel: ChannelParameters, process: Process) -> set[str]:
    return {finding.code for finding in channel_findings(channel, process, with_cures=False)}


@pytest.mark.slow
def test_nothing_is_missed_and_nothing_cried_for_nothing() -> None:
    rng = np.random.default_rng(31)
    asked = 0
    for shape in random_channels(CHANNELS, seed=22):
        assert shape.outline is not None
        known = narrowest(shape)  # only tells which limits are worth asking about
        sides = rng.choice([-1.0, 1.0], size=2) * rng.uniform(1.2 * DOUBT_UM, FARTHEST_UM, size=2)
        width_um, gap_um = known.width_um + sides[0], known.gap_um + sides[1]
        found = codes(shape.parameters, process_with(width_um, gap_um))
        assert ("width_below_min" in found) == is_too_narrow(shape.outline, width_um), shape.parameters
        is_narrow = has_narrow_gap(shape.outline, gap_um)
        if is_narrow or sides[1] < 0.0:  # a slot that is open at one end fills without breaking: see test_clearances
            assert ("gap_below_min" in found) == is_narrow, shape.parameters
            asked += 1
    assert asked > 0.8 * CHANNELS
