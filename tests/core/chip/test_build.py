"""The scene of a chip: clean figures, right sizes, one scaling, shared blocks."""

from __future__ import annotations

from dataclasses import replace
from math import pi

import numpy as np
import pytest
import shapely
from hypothesis import given
from hypothesis import strategies as st

from core.chip.build import chip_scene, furniture_of
from core.chip.fitting import packed, wanted_stamps
from core.chip.furniture import chip_box
from core.chip.plan import ChipChannel, ChipPlan, SteppedField
from core.chip.plate import plate_grid, steps_of
from core.chip.scene import BlockKind, Layer
from core.errors import DesignValueError, GeometryError
from core.fabrication.making import making_of, scale_of
from core.fabrication.process import ProcessKind
from core.fabrication.shipped import shipped_process
from core.parameters import ChannelParameters
from tests.core.chip.seen import CAST, SMALL, all_placed, assert_clean, flattened, random_plan, random_sets

WIDE = ChannelParameters(
    channel_width_um=1000, loop_width_um=1000, loop_radius_um=2500, stage_gap_um=3000, lead_in_um=6000,
    lead_out_um=6000, depth_um=100, stages=2,
)  # fmt: skip
PAIR = {"A": SMALL, "B": replace(SMALL, stages=5)}


def scene_of(plan: ChipPlan, sets=PAIR, process=CAST, **options):
    return chip_scene(plan, sets, process=process, chip_name="Rinse 7", **options)


@given(st.integers(0, 10**6))
def test_every_figure_of_a_random_chip_is_clean_and_free_of_the_channels(seed):
    rng = np.random.default_rng(seed)
    plan = random_plan(rng)
    sets = random_sets(rng, plan, CAST)
    scene = scene_of(plan, sets, drawn=False)
    seen = flattened(scene.top)
    assert len(seen[Layer.CHANNELS]) == len(sets)
    assert len(seen[Layer.PORTS]) == 2 * len(sets)
    for layer, polygons in seen.items():
        assert_clean(polygons, apart_um=1.0)
        assert layer is Layer.CHANNELS or all(not polygon.interiors for polygon in polygons)
    full = packed(plan, sets, CAST, chip_name="Rinse 7")
    chip = shapely.box(*chip_box(full))
    everything = [polygon for polygons in seen.values() for polygon in polygons]
    assert all(chip.buffer(1e-6).contains(polygon) for polygon in everything)
    stamps = wanted_stamps(full, sets, CAST, chip_name="Rinse 7")
    furniture = shapely.STRtree(seen[Layer.MARKS] + seen[Layer.TEXT])
    near = furniture.query(seen[Layer.CHANNELS], predicate="dwithin", distance=0.999 * stamps.gap_um)
    assert near.size == 0


@pytest.mark.parametrize("kind", ProcessKind)
def test_each_process_draws_its_chip_once_enlarged_and_gets_what_was_wanted(kind):
    process = shipped_process(kind)
    sets = {"A": WIDE}
    plan = packed(ChipPlan(), sets, process)
    drawn, made = scene_of(plan, sets, process), scene_of(plan, sets, process, drawn=False)
    assert drawn.scale == scale_of(process)
    assert made.scale == 1.0
    assert drawn.top.kind is BlockKind.CHIP
    one, other = flattened(drawn.top), flattened(made.top)
    making = making_of(WIDE, process)
    shift = 0.0 if process.allowance != "in the drawing" else making.wall_shift_um
    # the areas: as made shrunk by 1/scale, then walls moved outwards, by a construction of its own
    (mask,), (part,) = one[Layer.CHANNELS], other[Layer.CHANNELS]
    mask = shapely.affinity.scale(mask, 1 / drawn.scale, 1 / drawn.scale, origin=(0, 0))
    grown = mask.buffer(shift, quad_segs=64)
    assert grown.symmetric_difference(part).area < 2e-4 * part.area + 2.0 * part.length
    for layer in (Layer.MARKS, Layer.TEXT):
        a, b = shapely.union_all(one[layer]), shapely.union_all(other[layer])
        if layer is Layer.TEXT or not shift:
            assert a.area == pytest.approx(b.area * drawn.scale**2, rel=1e-9)
    if len(one[Layer.CUT]) == 1:
        assert one[Layer.CUT][0].area >= other[Layer.CUT][0].area


def test_scaling_is_once_about_the_middle():
    plan = packed(ChipPlan(), PAIR, CAST)
    drawn, made = scene_of(plan), scene_of(plan, drawn=False)
    s = 1.0 / (1.0 - CAST.shrink_percent / 100.0)
    assert s > 1.01
    ports = [flattened(scene.top)[Layer.PORTS] for scene in (drawn, made)]
    centres = [np.array([port.centroid.coords[0] for port in each]) for each in ports]
    assert np.abs(centres[0] - s * centres[1]).max() < 2e-3
    ticks = shapely.union_all(flattened(drawn.top)[Layer.CUT]).bounds
    assert ticks[2] - ticks[0] == pytest.approx(s * plan.chip_width_um, abs=2e-3)


def test_a_cut_outline_is_drawn_outside_by_what_the_beam_takes():
    process = shipped_process(ProcessKind.LASER_ACRYLIC)
    plan = packed(ChipPlan(cut_lines="outline"), {"A": WIDE}, process)
    (outline,) = flattened(scene_of(plan, {"A": WIDE}, process).top)[Layer.CUT]
    part = outline.buffer(-0.5 * process.kerf_um - process.bias_um, join_style="mitre")
    assert part.bounds == pytest.approx(chip_box(plan), abs=1e-6)


def test_ports_of_cut_parts_come_out_at_their_diameter():
    process = shipped_process(ProcessKind.LASER_FILM)
    plan = packed(ChipPlan(), {"A": WIDE}, process)
    for hole in flattened(scene_of(plan, {"A": WIDE}, process).top)[Layer.PORTS]:
        made = hole.buffer(0.5 * process.kerf_um + process.bias_um, quad_segs=64)
        assert made.area == pytest.approx(pi * (plan.port_diameter_um / 2) ** 2, rel=2e-3)


def test_channels_come_first_in_the_order_of_the_plan():
    plan = ChipPlan(channels=(ChipChannel(set_name="B", y_um=3000.0), ChipChannel(set_name="A", x_um=1000.0)))
    top = scene_of(plan, drawn=False).top
    first, second, marks = top.placed[:3]
    assert (first.channel, second.channel, marks.channel) == (0, 1, None)
    assert (first.dx_um, first.dy_um) == (0.0, 3000.0)
    assert (second.dx_um, second.dy_um) == (1000.0, 0.0)
    assert first.block.title == "B"
    assert marks.block.kind is BlockKind.MARKS
    assert all(placed.block.kind is BlockKind.SIGN for placed in top.placed[3:])
    x0, y0, x1, y1 = first.block.body.bounds_um
    assert [x0 + x1, y0 + y1] == pytest.approx([0.0, 0.0], abs=1e-6)


@pytest.mark.parametrize("grid_nm", [1, 50])
def test_everything_is_shifted_by_whole_steps_of_the_grid(grid_nm):
    process = CAST.with_values({"grid_nm": grid_nm})
    plan = ChipPlan(plate="wafer", chip_width_um=17123.4, chip_height_um=9876.5)
    shifts = np.array(all_placed(scene_of(packed(plan, PAIR, process), process=process).top))
    steps = shifts * 1000.0 / grid_nm
    assert np.abs(steps - np.round(steps)).max() < 1e-6


def test_copies_share_one_block_and_lie_on_a_regular_grid():
    plan = ChipPlan(plate="wafer", chip_width_um=17000.0, chip_height_um=9000.0)
    full = packed(plan, {"A": SMALL}, CAST)
    scene = scene_of(full, {"A": SMALL})
    copies = [placed for placed in scene.top.placed if placed.block.kind is BlockKind.CHIP]
    assert scene.top.kind is BlockKind.PLATE
    assert len(copies) == len(plate_grid(full))
    assert len({id(placed.block) for placed in copies}) == 1
    for at in (sorted({placed.dx_um for placed in copies}), sorted({placed.dy_um for placed in copies})):
        assert np.ptp(np.round(np.diff(at), 3)) == 0.0  # so that an array reference can stand for them


def test_a_chip_without_marks_has_no_empty_block():
    bare = ChipPlan(alignment_pairs=0, corner_marks="no", cut_lines="none", scale_bar="no", test_bars="no")
    blocks = scene_of(packed(bare, PAIR, CAST)).blocks()
    assert not [block for block in blocks if block.kind is BlockKind.MARKS]
    assert all(block.body or block.figures or block.placed for block in blocks)


def test_marks_of_a_plate_stand_outside_its_chips():
    for plate in ("wafer", "plate"):
        plan = packed(ChipPlan(plate=plate, chip_width_um=12000.0, chip_height_um=9000.0), {"A": SMALL}, CAST)
        scene = scene_of(plan, {"A": SMALL})
        others = [placed for placed in scene.top.placed if placed.block.kind is not BlockKind.CHIP]
        title = "".join(placed.block.title for placed in others if placed.block.kind is BlockKind.SIGN)
        assert title == "RINSE7SCALE1.01523"
        shapes = [p for o in others for ps in flattened(o.block, o.dx_um, o.dy_um).values() for p in ps]
        chips = [shapely.box(*(np.array(chip_box(plan)) * scene.scale + [o.dx_um, o.dy_um] * 2))
                 for o in scene.top.placed if o.block.kind is BlockKind.CHIP]  # fmt: skip
        assert shapely.union_all(chips).distance(shapely.union_all(shapes)) > 100.0
        assert_clean(shapes, apart_um=1.0)
        if plate == "wafer":
            circle = shapely.Point(0, 0).buffer(50000.0 * scene.scale, quad_segs=256)
            assert not circle.buffer(-10.0).intersects(shapely.union_all(shapes))


def test_a_series_labels_every_chip_with_its_own_values():
    radius = SteppedField(name="loop_radius_um", first=150, last=200, steps=2)
    stages = SteppedField(name="stages", first=1, last=2, steps=2)
    plan = ChipPlan(plate="wafer", chip_width_um=22000.0, chip_height_um=9000.0, series=(radius, stages))
    full = packed(plan, {"A": SMALL}, CAST, chip_name="Rinse 7")
    scene = scene_of(full, {"A": SMALL})
    copies = [placed.block for placed in scene.top.placed if placed.block.kind is BlockKind.CHIP]
    steps = steps_of(full, plate_grid(full))
    assert len({id(block) for block in copies}) == len(set(steps)) == 4
    for block, (first, second) in zip(copies, steps, strict=True):
        assert block.title == f"Rinse 7, Loop radius {(150, 200)[first]} um, Stages {(1, 2)[second]}"
        body = block.placed[0].block.body
        assert (
            body.channel
            == making_of(replace(SMALL, loop_radius_um=(150.0, 200.0)[first], stages=(1, 2)[second]), CAST).drawn
        )
        signs = "".join(placed.block.title for placed in block.placed if placed.block.kind is BlockKind.SIGN)
        assert f"LOOPRADIUS{(150, 200)[first]}UM" in signs
        assert_clean(flattened(block)[Layer.TEXT], apart_um=1.0)


def test_blocks_that_did_not_change_are_the_same_objects():
    plan = packed(ChipPlan(), PAIR, CAST)
    before = {id(block) for block in scene_of(plan).blocks() if block.kind in (BlockKind.CHANNEL, BlockKind.SIGN)}
    moved = replace(plan, channels=(replace(plan.channels[0], x_um=plan.channels[0].x_um + 10.0), *plan.channels[1:]))
    after = {id(block) for block in scene_of(moved).blocks() if block.kind in (BlockKind.CHANNEL, BlockKind.SIGN)}
    assert before == after


def test_equal_channels_share_one_block():
    plan = packed(ChipPlan(channels=(ChipChannel(set_name="A"),) * 3), PAIR, CAST)
    top = scene_of(plan).top
    assert len({id(placed.block) for placed in top.placed[:3]}) == 1


def test_a_channel_that_cannot_be_built_stops_the_scene_or_is_left_out():
    sets = PAIR | {"Bad": replace(SMALL, run_bend_deg=90.0)}
    plan = ChipPlan(channels=(ChipChannel(set_name="Bad"), ChipChannel(set_name="A")))
    with pytest.raises(GeometryError, match="'Bad' cannot be put on the chip"):
        scene_of(plan, sets)
    top = scene_of(plan, sets, leave_out_impossible=True).top
    assert [placed.channel for placed in top.placed if placed.channel is not None] == [1]
    with pytest.raises(DesignValueError, match="set_name is 'Aa'"):
        scene_of(ChipPlan(channels=(ChipChannel(set_name="Aa"),)))


def test_work_is_reported_and_can_be_stopped():
    radius = SteppedField(name="loop_radius_um", first=150, last=200, steps=3)
    plan = packed(ChipPlan(plate="wafer", series=(radius,), chip_width_um=15000.0, chip_height_um=9000.0), PAIR, CAST)
    told = []
    scene_of(plan, report=lambda step, total, text: told.append((step, total)))
    assert told == [(0, 3), (1, 3), (2, 3)]

    def stop(step: int, total: int, text: str) -> None:
        raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        scene_of(plan, report=stop)


def test_marks_that_find_no_place_are_left_out_and_told():
    plan = ChipPlan(chip_width_um=7500.0, chip_height_um=1900.0, channels=(ChipChannel(set_name="A", turn_deg=2.0),))
    furniture = furniture_of(plan, PAIR, CAST, chip_name="Rinse 7")
    assert furniture.label_at_um is None
    assert {each.field for each in furniture.missing} >= {"text_height_um", "scale_bar", "test_bars"}
    seen = flattened(scene_of(plan, drawn=False).top)
    assert not seen[Layer.TEXT]


def test_a_slanted_channel_leaves_the_corners_of_its_bounds_to_the_marks():
    """Marks keep clear of walls, not of boxes: a long chain across the chip takes both corners of its box."""
    sets = {"L": replace(SMALL, stages=14)}
    plan = ChipPlan(chip_width_um=9400.0, chip_height_um=11200.0, channels=(ChipChannel(set_name="L", turn_deg=45.0),))
    assert furniture_of(plan, sets, CAST, chip_name="Rinse 7").missing == ()
    seen = flattened(scene_of(plan, sets, drawn=False).top)
    marks = shapely.union_all(seen[Layer.MARKS] + seen[Layer.TEXT])
    assert shapely.box(*seen[Layer.CHANNELS][0].bounds).intersects(marks)
    assert seen[Layer.CHANNELS][0].distance(marks) >= CAST.min_wall_um
