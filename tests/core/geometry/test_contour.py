"""Contours against closed forms of plane geometry and against a polygon library."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from shapely import Polygon

from core.geometry.contour import Contour, Placement, arc_run

FINITE = st.floats(-1e4, 1e4)
PLACEMENTS = st.builds(Placement, angle=st.floats(-10, 10), dx_um=FINITE, dy_um=FINITE, is_mirrored=st.booleans())


def circle(radius: float = 5.0) -> Contour:
    return Contour(*arc_run(np.array([1.0, 2.0]), radius, 0.3, 2 * np.pi))


def slot() -> Contour:
    """Return a rectangle 10 x 4 with a half circle at each end."""
    return Contour(
        np.array([[0.0, 0.0], [10.0, 0.0], [10.0, 4.0], [0.0, 4.0]]), np.array([0.0, np.tan(np.pi / 4), 0.0, 1.0])
    )


def test_area_of_circle_and_slot_are_the_closed_forms() -> None:
    assert circle().area_um2 == pytest.approx(np.pi * 25.0, rel=1e-14)
    assert slot().area_um2 == pytest.approx(40.0 + np.pi * 4.0, rel=1e-14)


def test_bounds_include_the_bellies_of_arcs() -> None:
    assert circle().bounds_um == pytest.approx((-4.0, -3.0, 6.0, 7.0))
    assert slot().bounds_um == pytest.approx((-2.0, 0.0, 12.0, 4.0))


def test_area_far_from_the_origin_keeps_its_digits() -> None:
    far = slot().placed(Placement(dx_um=1e6, dy_um=-3e5))
    assert far.area_um2 == pytest.approx(slot().area_um2, rel=1e-9)


@given(PLACEMENTS)
def test_a_rigid_move_keeps_area_and_sense(placement: Placement) -> None:
    assert slot().placed(placement).area_um2 == pytest.approx(slot().area_um2, rel=1e-8)


@given(PLACEMENTS, PLACEMENTS)
def test_two_moves_are_one(first: Placement, second: Placement) -> None:
    points = slot().vertices_um
    assert second.after(first).points(points) == pytest.approx(second.points(first.points(points)), abs=1e-7)


def test_reversing_changes_only_the_sense() -> None:
    assert slot().reversed().area_um2 == pytest.approx(-slot().area_um2, rel=1e-14)
    assert slot().reversed().reversed().bulges == pytest.approx(slot().bulges)


@given(st.floats(1e-4, 0.5))
def test_chords_stay_within_the_sagitta(sagitta: float) -> None:
    points = circle(50.0).chords(sagitta_um=sagitta)
    middles = 0.5 * (points + np.roll(points, -1, axis=0))
    depth = 50.0 - np.hypot(*(middles - [1.0, 2.0]).T)
    assert depth.max() <= sagitta * (1 + 1e-6)
    assert Polygon(points).area < circle(50.0).area_um2


def test_chords_keep_every_vertex_exactly() -> None:
    points = slot().chords(sagitta_um=0.01)
    for vertex in slot().vertices_um:
        assert np.any(np.all(points == vertex, axis=1))
