"""A scene flattened to polygons by a few lines that share nothing with the writers, and random plans, for tests."""

from __future__ import annotations

from collections import defaultdict
from typing import TYPE_CHECKING

import numpy as np
import shapely

from core.chip.bodies import wanted_body
from core.chip.plan import ChipChannel, ChipPlan
from core.chip.scene import Layer
from core.errors import GeometryError
from core.fabrication.shipped import shipped_process
from core.parameters import ChannelParameters

if TYPE_CHECKING:
    from core.chip.scene import Block
    from core.geometry.contour import Outline

CAST = shipped_process("cast, chrome mask")
SMALL = ChannelParameters(
    channel_width_um=100, loop_width_um=100, loop_radius_um=160, stage_gap_um=200, depth_um=60, stages=3
)  # fmt: skip


def as_polygon(outline: Outline, dx: float = 0.0, dy: float = 0.0, *, sagitta_um: float = 0.5) -> shapely.Polygon:
    shell, *holes = (ring.chords(sagitta_um=sagitta_um) + np.array([dx, dy]) for ring in outline.contours)
    return shapely.Polygon(shell, holes)


def flattened(block: Block, dx: float = 0.0, dy: float = 0.0) -> dict[Layer, list[shapely.Polygon]]:
    """Return every figure of a block and of the blocks in it, by layer."""
    found: dict[Layer, list[shapely.Polygon]] = defaultdict(list)
    if block.body is not None:
        found[Layer.CHANNELS].append(as_polygon(block.body.outline, dx, dy))
    for figure in block.figures:
        found[figure.layer].append(as_polygon(figure.outline, dx, dy))
    for placed in block.placed:
        for layer, polygons in flattened(placed.block, dx + placed.dx_um, dy + placed.dy_um).items():
            found[layer] += polygons
    return found


def all_placed(block: Block) -> list[tuple[float, float]]:
    """Return the shifts of everything placed in a block, at any depth."""
    below = [shift for placed in block.placed for shift in all_placed(placed.block)]
    return [(placed.dx_um, placed.dy_um) for placed in block.placed] + below


def assert_clean(polygons: list[shapely.Polygon], *, apart_um: float) -> None:
    """Assert that figures are simple and that no two of them touch, overlap or come too near."""
    assert all(polygon.is_valid for polygon in polygons)
    if not polygons:
        return
    tree = shapely.STRtree(polygons)
    one, other = tree.query(polygons, predicate="dwithin", distance=apart_um)
    assert np.array_equal(one, other)


def random_sets(rng: np.random.Generator, plan: ChipPlan, process) -> dict[str, ChannelParameters]:
    """Return up to six sets of usual proportions that go with the pads of a plan."""
    sets: dict[str, ChannelParameters] = {}
    while len(sets) < rng.integers(1, 6):
        width = float(rng.choice([60.0, 100.0, 250.0]))
        angle = float(rng.uniform(25, 80))
        channel = ChannelParameters(
            channel_width_um=width, loop_width_um=width, loop_angle_deg=angle,
            run_bend_deg=float(rng.choice([angle, 0.0, 0.5 * angle])),
            loop_radius_um=width * float(rng.uniform(1.2, 3)), stages=int(rng.integers(0, 7)),
            stage_gap_um=width * float(rng.uniform(1.5, 4)), sides=str(rng.choice(["alternate", "same"])),
            depth_um=0.5 * width, lead_in_um=4000.0, lead_out_um=4000.0,
        )  # fmt: skip
        name = f"Set {len(sets)}"
        try:
            wanted_body(plan, ChipChannel(set_name=name), channel, process)
        except GeometryError:
            continue
        sets[name] = channel
    return sets


def random_plan(rng: np.random.Generator) -> ChipPlan:
    """Return a plan that places nothing yet."""
    return ChipPlan(
        chip_width_um=float(rng.choice([5000.0, 20000.0, 45000.0])),
        chip_height_um=float(rng.choice([5000.0, 15000.0])),
        edge_clearance_um=float(rng.choice([0.0, 500.0, 2000.0])), spacing_um=float(rng.choice([0.0, 300.0, 1500.0])),
        port_diameter_um=float(rng.choice([300.0, 1000.0, 2000.0])), pad_margin_um=float(rng.choice([50.0, 300.0])),
        port_pitch_um=float(rng.choice([0.0, 2250.0, 4500.0])), port_clearance_um=float(rng.choice([0.0, 500.0])),
        alignment_pairs=int(rng.integers(0, 4)), cut_lines=str(rng.choice(["ticks", "outline", "none"])),
        corner_marks=str(rng.choice(["yes", "no"])), text_height_um=float(rng.choice([500.0, 1200.0])),
        label=str(rng.choice(["", "Fernhollow 12/B"])),
    )  # fmt: skip
