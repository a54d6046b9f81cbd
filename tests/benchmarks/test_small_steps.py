"""Small steps that follow every move of a slider, each against the named baseline of drawing the channels once.

Drawing (``build_shape``, what is kept left aside) is what any move of a slider costs anyway.
"""

from __future__ import annotations

import time
import tracemalloc
from dataclasses import replace
from statistics import median
from typing import TYPE_CHECKING

import numpy as np
import pytest

from core.chip.build import chip_scene
from core.chip.fitting import packed
from core.chip.plan import ChipPlan
from core.chip.plate import plate_grid
from core.chip.scene import BlockKind
from core.fabrication.making import making_of
from core.fabrication.process import ProcessKind
from core.fabrication.shipped import shipped_process
from core.fluids import fluid_state
from core.geometry.shape import build_shape
from core.hydraulics.estimate import estimate
from core.parameters import ChannelParameters

if TYPE_CHECKING:
    from collections.abc import Callable

pytestmark = pytest.mark.benchmark

CAST = shipped_process(ProcessKind.CAST_FILM)
SMALL = ChannelParameters(
    channel_width_um=60.0, loop_width_um=60.0, depth_um=60.0, loop_radius_um=150.0, lead_in_um=600.0, lead_out_um=600.0,
    stage_gap_um=200.0, nose_radius_um=8.0, corner_radius_um=8.0,
)  # fmt: skip


def seconds(work: Callable[[], object], *, repeats: int = 9) -> float:
    """Return the median processor time of a step."""
    spent = []
    for _ in range(repeats):
        start = time.process_time()
        work()
        spent.append(time.process_time() - start)
    return median(spent)


def drawing(*channels: ChannelParameters) -> float:
    """Return how long it takes to draw some channels."""
    return seconds(lambda: [build_shape.__wrapped__(channel) for channel in channels])


def told(what: str, took: float, baseline: float) -> float:
    print(f"\n{what}: {1e3 * took:.2f} ms, {took / baseline:.2f} of drawing")
    return took / baseline


def test_what_is_drawn_and_made_costs_little_beside_the_drawing():
    channel, film = ChannelParameters(), shipped_process(ProcessKind.LASER_FILM)
    took = seconds(lambda: [making_of(channel, film) for _ in range(20)]) / 20
    assert told("as drawn and as made", took, drawing(channel)) < 0.2


def test_two_hundred_flows_through_a_hundred_stages_cost_less_than_the_drawing():
    flows, channel, water = np.linspace(1.0, 3000.0, 200), ChannelParameters(stages=100), fluid_state(fluid="water")
    took = seconds(lambda: estimate(channel, fluid=water, flows_ul_min=flows), repeats=30)
    assert told("estimate of 200 flows", took, drawing(channel)) < 1.0


def test_counting_chips_costs_less_than_drawing_a_channel():
    plan = ChipPlan(plate="wafer", chip_width_um=2000.0, chip_height_um=2000.0)
    assert told("counting 1,300 chips", seconds(lambda: plate_grid(plan)), drawing(SMALL)) < 2.0


def test_packing_costs_less_than_drawing_what_is_packed():
    sets = {f"S{number}": replace(SMALL, loop_radius_um=150.0 + number) for number in range(20)}
    packed(ChipPlan(), sets, CAST)  # shapes are known then, as they are in the window
    spacings = iter(range(600, 700))
    took = seconds(lambda: packed(ChipPlan(spacing_um=float(next(spacings))), sets, CAST))
    assert told("packing 20 channels", took, drawing(*sets.values())) < 1.0


def test_a_wafer_of_ten_thousand_stages_costs_as_little_as_its_chip():
    """Equal chips share one block: neither time nor memory grows with the stages."""
    chrome = shipped_process(ProcessKind.CAST_CHROME)
    sets = {f"S{n}": replace(SMALL, stages=26, loop_radius_um=150.0 + n) for n in range(4)}
    plan = ChipPlan(plate="wafer", chip_width_um=27000.0, chip_height_um=500.0, text_height_um=400.0)
    plan = replace(packed(plan, sets, chrome), wafer_diameter_um=300000.0)
    scene = chip_scene(plan, sets, process=chrome, chip_name="Bench wafer")
    stages = 26 * 4 * sum(placed.block.kind is BlockKind.CHIP for placed in scene.top.placed)
    took = seconds(lambda: chip_scene(plan, sets, process=chrome, chip_name="Bench wafer"))
    tracemalloc.start()
    chip_scene(plan, sets, process=chrome, chip_name="Bench wafer")
    _, peak = tracemalloc.get_traced_memory()
    tracemalloc.stop()
    assert stages >= 10_000
    assert peak < 10e6
    assert told(f"scene of {stages} stages, {peak / 1e6:.1f} MB", took, drawing(*sets.values())) < 3.0
