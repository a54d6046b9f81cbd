"""The view keeps places where the hand expects them.

Truth everywhere: the map x -> (x - left) / scale and its inverse.
"""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st
from PySide6.QtCore import QPointF, QRectF

from app.drawing.camera import COARSEST_UM_PER_PX, FINEST_UM_PER_PX, Camera
from core.units import round_length_um

PLACES = st.floats(-1e5, 1e5)
PIXELS = st.floats(0.0, 4000.0)
CAMERAS = st.builds(
    lambda left, top, size: Camera(left_um=left, top_um=top, um_per_px=size), PLACES, PLACES, st.floats(0.05, 500.0)
)


@given(CAMERAS, PLACES, PLACES)
def test_there_and_back(camera, x, y):
    """A place turned into a pixel and back is the same place."""
    assert camera.to_um(camera.to_px((x, y))) == pytest.approx((x, y), abs=1e-6)


@given(CAMERAS, PLACES, PLACES)
def test_transform_is_the_same_map(camera, x, y):
    """The painter's transform and the camera agree."""
    expected = camera.to_px((x, y))
    found = camera.transform().map(QPointF(x, y))
    assert (found.x(), found.y()) == pytest.approx((expected.x(), expected.y()), rel=1e-9, abs=1e-5)


def test_up_is_up():
    """Larger y is nearer to the upper rim, where pixels count from 0."""
    camera = Camera()
    assert camera.to_px((0.0, 10.0)).y() < camera.to_px((0.0, 0.0)).y()


@given(CAMERAS, st.floats(0.01, 100.0), PIXELS, PIXELS)
def test_zoom_stays_at_the_pointer(camera, factor, px, py):
    """The place under the pointer stays there, also where the zoom meets its limits."""
    pointer = QPointF(px, py)
    zoomed = camera.zoomed(factor, pointer)
    assert zoomed.to_um(pointer) == pytest.approx(camera.to_um(pointer), abs=1e-6)
    assert FINEST_UM_PER_PX <= zoomed.um_per_px <= COARSEST_UM_PER_PX


@given(CAMERAS, st.floats(0.1, 10.0), PIXELS, PIXELS, st.floats(0.0, 1.0))
def test_gliding_zoom_stays_at_the_pointer(camera, factor, px, py, share):
    """Half way through an animation the pointer is still on its place."""
    pointer = QPointF(px, py)
    between = camera.blended(camera.zoomed(factor, pointer), share)
    assert between.to_um(pointer) == pytest.approx(camera.to_um(pointer), abs=1e-6)


@given(PLACES, PLACES, st.floats(100.0, 1e5), st.floats(100.0, 1e5))
def test_fit_shows_all_and_fills_one_way(x, y, width, height):
    """Fitted bounds lie within the area, centred, and touch two of its sides."""
    area = QRectF(80.0, 50.0, 900.0, 500.0)
    camera = Camera.fitting((x, y, x + width, y + height), area)
    shown = QRectF(camera.to_px((x, y)), camera.to_px((x + width, y + height))).normalized()
    assert area.adjusted(-1e-3, -1e-3, 1e-3, 1e-3).contains(shown)
    assert max(shown.width() / area.width(), shown.height() / area.height()) == pytest.approx(1.0, rel=1e-6)
    assert (shown.center() - area.center()).manhattanLength() < 1e-3


@given(CAMERAS, st.floats(-500, 500), st.floats(-500, 500))
def test_dragging_takes_the_paper_along(camera, dx, dy):
    """A place moves by the same pixels as the pointer."""
    before, after = camera.to_px((7.0, 9.0)), camera.moved(dx, dy).to_px((7.0, 9.0))
    assert (after.x() - before.x(), after.y() - before.y()) == pytest.approx((dx, dy), rel=1e-6, abs=1e-5)


@pytest.mark.parametrize(
    ("longest", "expected"),
    [(1.0, 1.0), (1.99, 1.0), (2.0, 2.0), (49.0, 20.0), (50.0, 50.0), (999.0, 500.0), (1000.0, 1000.0), (0.07, 0.05)],
)
def test_round_lengths(longest, expected):
    """Written by hand: the largest of 1, 2, 5 times a power of ten that is not longer."""
    assert round_length_um(longest) == pytest.approx(expected)


@given(st.floats(1e-3, 1e7))
def test_round_length_uses_most_of_the_room(longest):
    """Of neighbours 1, 2, 5, 10 the worst ratio is 2.5."""
    assert longest / 2.5 * (1 - 1e-6) <= round_length_um(longest) <= longest * (1 + 1e-6)
