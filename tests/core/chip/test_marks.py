"""Marks: disjoint, without holes, of the right size, and told from their mirror image."""

from __future__ import annotations

import numpy as np
import pytest
import shapely
from hypothesis import given
from hypothesis import strategies as st

from core.chip.marks import (
    FINEST_UM,
    alignment_mark,
    corner_mark,
    mark_unit_um,
    measuring_bars,
    scale_bar,
    words_stamp,
)  # fmt: skip
from core.chip.scene import Layer
from core.fabrication.process import ProcessKind
from core.fabrication.shipped import shipped_process
from core.units import round_length_um
from tests.core.chip.seen import assert_clean, flattened


def of_layer(stamp, layer=Layer.MARKS) -> list[shapely.Polygon]:
    return flattened(stamp.block)[layer]


def assert_in_its_box(stamp) -> None:
    everything = shapely.union_all([polygon for layer in flattened(stamp.block).values() for polygon in layer])
    assert shapely.box(*stamp.box_um).buffer(1e-6).contains(everything)


@given(unit=st.floats(20, 300), number=st.integers(1, 4), finest=st.floats(0.1, 300))
def test_alignment_marks_are_clean_and_nested(unit, number, finest):
    stamp = alignment_mark(unit_um=unit, number=number, finest_um=finest)
    shapes = of_layer(stamp)
    assert_clean(shapes, apart_um=0.2 * unit)
    assert all(not shape.interiors for shape in shapes)
    assert_in_its_box(stamp)
    sides = [shape.length / 4 for shape in shapes if len(shape.exterior.coords) == 5]
    squares = sorted({round(side, 6) for side in sides}, reverse=True)
    assert len(sides) - number == sum(2.0 * unit * 0.5**n >= max(finest, FINEST_UM) for n in range(4))
    assert squares[0] == pytest.approx(2.0 * unit if 2.0 * unit >= finest else unit)


def test_alignment_marks_show_a_plate_that_is_turned_or_mirrored():
    shapes = shapely.union_all(of_layer(alignment_mark(unit_um=50.0, number=1, finest_um=10.0)))
    for matrix in ([-1, 0, 0, 1], [1, 0, 0, -1], [-1, 0, 0, -1], [0, 1, 1, 0], [0, -1, 1, 0]):
        moved = shapely.transform(shapes, lambda xy, m=matrix: xy @ np.array(m, float).reshape(2, 2))
        assert shapes.symmetric_difference(moved).area > 0.02 * shapes.area


def test_figures_of_alignment_marks_are_as_large_as_advised_for_thick_resist():
    """3 um to 500 um: a published design note for thick resist, for films of 50 um and chrome of 3 um."""
    for finest in (3.0, 50.0):
        unit = max(finest, 20.0)
        for shape in of_layer(alignment_mark(unit_um=unit, number=4, finest_um=finest)):
            x0, y0, x1, y1 = shape.bounds
            assert min(x1 - x0, y1 - y0) >= 3.0
            assert max(x1 - x0, y1 - y0) <= 500.0


def test_pairs_for_different_layers_differ():
    one, two = (alignment_mark(unit_um=50.0, number=n, finest_um=10.0) for n in (1, 2))
    assert len(of_layer(two)) == len(of_layer(one)) + 1


@pytest.mark.parametrize("across", [-1, 1])
@pytest.mark.parametrize("up", [-1, 1])
def test_corner_marks_run_inwards_from_the_corner(across, up):
    stamp = corner_mark(arm_um=400.0, unit_um=50.0, across=across, up=up)
    (shape,) = of_layer(stamp)
    x0, x1 = sorted((0.0, -400.0 * across))
    y0, y1 = sorted((0.0, -400.0 * up))
    assert shape.bounds == (x0, y0, x1, y1)
    assert shape.area == pytest.approx(400 * 50 * 2 - 50 * 50)
    assert shapely.union_all([shapely.box(*part) for part in stamp.parts_um]).symmetric_difference(shape).area < 1e-6


@given(st.floats(1.0, 1e5))
def test_round_lengths_are_the_longest_of_one_two_five(most):
    length = round_length_um(most)
    digits = f"{length:.0e}"
    assert digits[0] in "125"
    assert float(digits) == pytest.approx(length)
    assert length <= most * (1 + 1e-9) < 2.5 * length * (1 + 1e-9)


def test_the_scale_bar_is_as_long_as_it_says():
    stamp = scale_bar(length_um=5000.0, unit_um=50.0, text_height_um=800.0)
    (bar,) = of_layer(stamp)
    assert bar.bounds[2] - bar.bounds[0] == 5000.0
    assert "".join(placed.block.title for placed in stamp.block.placed) == "5MM"
    words = shapely.union_all(flattened(stamp.block)[Layer.TEXT])
    assert words.bounds[0] > bar.bounds[2] + 300.0
    assert_in_its_box(stamp)
    small = scale_bar(length_um=500.0, unit_um=50.0, text_height_um=800.0)
    assert "".join(placed.block.title for placed in small.block.placed) == "500UM"


def test_measuring_bars_have_lines_and_gaps_of_the_critical_width_and_its_neighbours():
    stamp = measuring_bars(width_um=100.0, drawn_um=100.0, least_um=50.0, length_um=600.0, text_height_um=500.0)
    spans = sorted((shape.bounds[0], shape.bounds[2]) for shape in of_layer(stamp))
    assert [right - left for left, right in spans] == pytest.approx([75] * 3 + [100] * 3 + [125] * 3)
    gaps = [spans[n + 1][0] - spans[n][1] for n in range(8)]
    assert [gaps[n] for n in (0, 1, 3, 4, 6, 7)] == pytest.approx([75, 75, 100, 100, 125, 125])
    assert min(gaps[2], gaps[5]) >= 300.0
    assert_in_its_box(stamp)


def test_measuring_bars_come_out_alike_when_walls_move_by_the_bias():
    """Every wall moves outwards by 10 um in making, so 100 um wanted is drawn as 80 um: both widths become 100."""
    stamp = measuring_bars(width_um=100.0, drawn_um=80.0, least_um=50.0, length_um=600.0, text_height_um=500.0)
    made = [shape.buffer(10.0, join_style="mitre") for shape in of_layer(stamp)]
    spans = sorted((shape.bounds[0], shape.bounds[2]) for shape in made)
    middle = spans[3:6]
    assert [right - left for left, right in middle] == pytest.approx([100.0] * 3)
    assert [middle[1][0] - middle[0][1], middle[2][0] - middle[1][1]] == pytest.approx([100.0] * 2)


def test_groups_below_the_smallest_drawn_feature_are_left_out():
    stamp = measuring_bars(width_um=100.0, drawn_um=100.0, least_um=90.0, length_um=600.0, text_height_um=500.0)
    widths = sorted({round(shape.bounds[2] - shape.bounds[0]) for shape in of_layer(stamp)})
    assert widths == [100, 125, 150]


@pytest.mark.parametrize("kind", ProcessKind)
def test_the_unit_never_falls_below_what_a_process_draws(kind):
    process = shipped_process(kind)
    assert mark_unit_um(process, depth_um=50.0) >= max(process.min_drawn_um, 20.0)


def test_words_stand_below_one_another_in_order():
    stamp = words_stamp(("AB", "", "C"), height_um=700.0)
    heights = {placed.block.title: placed.dy_um for placed in stamp.block.placed}
    assert heights["A"] == heights["B"] > heights["C"] + 700.0
    assert_in_its_box(stamp)
    assert_clean(flattened(stamp.block)[Layer.TEXT], apart_um=70.0)
