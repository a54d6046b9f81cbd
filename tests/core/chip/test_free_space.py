"""Free places are free: measured by polygons of a library that shares nothing with the search."""

from __future__ import annotations

import numpy as np
import pytest
import shapely
from hypothesis import given
from hypothesis import strategies as st

from core.chip.bodies import wanted_body
from core.chip.build import furniture_of
from core.chip.free_space import Obstacle, free_places
from core.chip.marks import words_stamp
from core.chip.plan import ChipChannel, ChipPlan
from core.chip.scene import Layer
from tests.core.chip.seen import CAST, SMALL, as_polygon, flattened

ENTRY = ChipChannel(set_name="A", turn_deg=20.0)
OUTLINE = wanted_body(ChipPlan(), ENTRY, SMALL, CAST).outline
EVERYWHERE = (-1e6, -1e6, 1e6, 1e6)


@given(
    x=st.floats(-5000, 5000), y=st.floats(-3000, 3000), width=st.floats(1, 3000), height=st.floats(1, 2000),
    clearance=st.floats(0, 500),
)  # fmt: skip
def test_a_box_is_clear_only_when_it_keeps_its_distance(x, y, width, height, clearance):
    obstacle = Obstacle(outline=OUTLINE, shift_um=(100.0, -50.0))
    box = (x, y, x + width, y + height)
    apart = as_polygon(OUTLINE, 100.0, -50.0, sagitta_um=0.01).distance(shapely.box(*box))
    if obstacle.is_clear_of(box, clearance):
        assert apart >= clearance
    else:
        assert apart <= 1.5 * (clearance + 10.0)  # corners of the grown box are farther away


def test_a_box_inside_the_fluid_or_round_the_channel_is_not_clear_but_one_in_an_island_is():
    wide = Obstacle(outline=OUTLINE, shift_um=(0.0, 0.0))
    port = wanted_body(ChipPlan(), ENTRY, SMALL, CAST).ends_um[0]
    assert not wide.is_clear_of((port[0] - 5, port[1] - 5, port[0] + 5, port[1] + 5), 0.0)
    assert not wide.is_clear_of((-9000, -9000, 9000, 9000), 0.0)
    x, y = shapely.Polygon(as_polygon(OUTLINE).interiors[0]).representative_point().coords[0]
    assert wide.is_clear_of((x - 5, y - 5, x + 5, y + 5), 0.0)


def test_places_are_tried_in_order_within_bounds_and_beside_what_is_taken():
    places = np.array([[0.0, 0.0], [50.0, 0.0], [100.0, 0.0], [5000.0, 0.0]])
    free = free_places(
        places, (0, 0, 10, 10), taken=[(-5, -5, 5, 5)], obstacles=[], within=(0, 0, 110, 10), clearance_um=0.0
    )
    assert list(free) == [(50.0, 0.0), (100.0, 0.0)]


@pytest.mark.parametrize("height", [2300.0, 2800.0, 3400.0])
def test_marks_slip_between_channels_only_where_their_gap_is_kept(height):
    """Two channels leave a lane of varying width along the middle of the chip, and no room at its edges."""
    pair = (ChipChannel(set_name="A", y_um=height / 2), ChipChannel(set_name="A", y_um=-height / 2))
    chip = {"chip_width_um": 8200.0, "chip_height_um": height + 1700.0, "edge_clearance_um": 0.0}
    plan = ChipPlan(channels=pair, text_height_um=500.0, pad_margin_um=50.0, **chip)
    furniture = furniture_of(plan, {"A": SMALL}, CAST, chip_name="Rinse 7")
    marks = [p for o in furniture.placed for ps in flattened(o.block, o.dx_um, o.dy_um).values() for p in ps]
    outline = wanted_body(plan, pair[0], SMALL, CAST).outline
    channels = shapely.union_all([as_polygon(outline, entry.x_um, entry.y_um, sagitta_um=0.01) for entry in pair])
    assert channels.distance(shapely.union_all(marks)) >= CAST.min_wall_um
    assert furniture.missing or height > 2800.0


@pytest.mark.parametrize("width", [7000.0, 9000.0, 12000.0, 20000.0])
@pytest.mark.parametrize("height", [2200.0, 3000.0, 8000.0])
@pytest.mark.parametrize("text", [350.0, 800.0])
def test_words_of_different_things_never_read_as_one(width, height, text):
    """They stay apart by at least the height of their letters."""
    plan = ChipPlan(
        channels=(ChipChannel(set_name="A"),), chip_width_um=width, chip_height_um=height, text_height_um=text,
        pad_margin_um=50.0, port_diameter_um=300.0,
    )  # fmt: skip
    furniture = furniture_of(plan, {"A": SMALL}, CAST, chip_name="G1")
    named = {each.block.name: each for each in furniture.placed}
    groups = [
        shapely.union_all([p for ps in flattened(each.block, each.dx_um, each.dy_um).values() for p in ps])
        for each in (named[name] for name in ("SCALE_BAR", "TEST_BARS") if name in named)
    ]
    if furniture.label_at_um is not None:
        x, y = furniture.label_at_um
        letters = flattened(words_stamp(("G1",), height_um=text).block, x, y)
        groups.append(shapely.union_all(letters[Layer.TEXT]))
    assert groups
    for number, one in enumerate(groups):
        for other in groups[:number]:
            assert one.distance(other) >= text - 0.01
