"""Lettering: every sign is closed shapes without holes that do not touch, and nothing is drawn silently wrong."""

from __future__ import annotations

from itertools import combinations

import pytest
import shapely
from hypothesis import given
from hypothesis import strategies as st

from core.chip.glyphs import LEAST_GAP, STAND_INS, STROKES, UNITS_HIGH
from core.chip.lettering import THINNEST, UNKNOWN, drawable, lettered
from core.chip.scene import Layer
from tests.core.chip.seen import as_polygon, assert_clean, flattened


def polygons_of(text: str, height_um: float = UNITS_HIGH) -> list[shapely.Polygon]:
    return [
        as_polygon(figure.outline, placed.dx_um, placed.dy_um)
        for placed in lettered(text, height_um=height_um).placed
        for figure in placed.block.figures
    ]


@pytest.mark.parametrize("sign", STROKES)
def test_a_sign_is_simple_shapes_without_holes_that_keep_their_gap(sign):
    shapes = polygons_of(sign)
    assert all(shape.is_valid and not shape.interiors for shape in shapes)
    assert all(one.distance(other) >= LEAST_GAP - 1e-9 for one, other in combinations(shapes, 2))


@pytest.mark.parametrize("sign", STROKES)
def test_no_island_can_drop_out_of_a_sign(sign):
    """The solid round a sign is one piece, and no neck of a stroke or of that solid is thinner than a gap."""
    ink = shapely.union_all(polygons_of(sign))
    around = shapely.box(-3, -3, 12, 10) - ink
    assert isinstance(around, shapely.Polygon)
    thick = ink.buffer(-0.49, join_style="mitre").buffer(0.49, join_style="mitre")
    assert thick.symmetric_difference(ink).area < 0.3  # acute tips only


@pytest.mark.parametrize("sign", STROKES)
def test_a_sign_stays_within_its_height(sign):
    x0, y0, _, y1 = shapely.union_all(polygons_of(sign)).bounds
    assert x0 >= -1e-9
    assert y0 >= -1e-9
    assert y1 <= UNITS_HIGH + 1e-9


def test_signs_differ_from_one_another_and_from_their_mirror_image():
    """A reader must tell them apart; and the words as a whole must show a mirrored plate."""
    areas = {sign: shapely.union_all(polygons_of(sign)) for sign in STROKES}
    for one, other in combinations(areas, 2):
        overlap = areas[one].intersection(areas[other]).area / areas[one].union(areas[other]).area
        assert overlap < 0.95, (one, other)  # 0 and O differ by the dot alone
    word = shapely.union_all(polygons_of("R 25"))
    mirrored = shapely.transform(word, lambda xy: xy * [-1, 1] + [word.bounds[2], 0])
    assert word.symmetric_difference(mirrored).area > 0.3 * word.area


def test_equal_signs_share_one_block_and_heights_scale():
    line = lettered("NOON", height_um=700.0)
    assert line.placed[0].block is line.placed[3].block
    assert line.placed[0].block is lettered("N", height_um=700.0).placed[0].block
    twice = lettered("NOON", height_um=1400.0)
    assert twice.width_um == pytest.approx(2.0 * line.width_um, abs=0.01)
    assert_clean(polygons_of("NOON 8/B", 700.0), apart_um=0.999 * THINNEST * 700.0)


def test_small_letters_and_accents_become_capitals():
    assert drawable("Größe 5 µm") == ("GROSSE 5 UM", "")
    assert drawable("½ in. \N{MULTIPLICATION SIGN} 20 °C") == ("1/2 IN. X 20 DEG C", "")
    assert drawable("  a\t b ")[0] == "A B"


def test_unknown_signs_become_question_marks_and_are_told_once():
    assert drawable("a☃b☃\N{CJK UNIFIED IDEOGRAPH-6C34}") == ("A?B??", "☃\N{CJK UNIFIED IDEOGRAPH-6C34}")
    assert lettered("☃", height_um=100.0).placed[0].block is lettered(UNKNOWN, height_um=100.0).placed[0].block


def test_blank_text_draws_nothing():
    assert lettered(" ", height_um=100.0).placed == ()
    assert lettered("", height_um=100.0).width_um == 0.0


def test_stand_ins_are_drawable():
    assert all(sign in STROKES or sign == " " for text in STAND_INS.values() for sign in text)


@given(st.text(max_size=30))
def test_any_text_is_drawn_with_known_signs(text):
    signs, unknown = drawable(text)
    assert all(sign in STROKES or sign == " " for sign in signs)
    assert signs.count(UNKNOWN) >= len(set(unknown))


@given(st.text(alphabet=[*sorted(STROKES), " "], max_size=12), st.floats(20, 20000))
def test_any_words_are_disjoint_whole_nanometre_shifts(text, height_um):
    line = lettered(text, height_um=height_um)
    for placed in line.placed:
        assert round(placed.dx_um * 1000.0) == pytest.approx(placed.dx_um * 1000.0, abs=1e-6)
        assert set(flattened(placed.block)) == {Layer.TEXT}
    assert_clean(polygons_of(text, height_um), apart_um=0.99 * THINNEST * height_um - 0.002)
