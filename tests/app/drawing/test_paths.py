"""Paths are the contours: same area, arcs on their circles, islands left out."""

from __future__ import annotations

import numpy as np
import pytest
from PySide6.QtCore import QPointF, Qt
from PySide6.QtGui import QTransform

from app.drawing.paths import outline_path, ring_paths, strokes_path
from core.geometry.contour import Contour, Outline, Placement, arc_run
from core.geometry.shape import build_shape
from core.parameters import ChannelParameters

STADIUM = Contour.joined(
    (
        arc_run(np.array([100.0, 0.0]), 50.0, -np.pi / 2, np.pi),
        (np.array([[100.0, 50.0]]), np.zeros(1)),
        arc_run(np.array([-100.0, 0.0]), 50.0, np.pi / 2, np.pi),
        (np.array([[-100.0, -50.0]]), np.zeros(1)),
    )
)


def points_on(path, count=400):
    """Return points along a path, shape (count, 2)."""
    return np.array([path.pointAtPercent(share).toTuple() for share in np.linspace(0.0, 1.0, count)])


def polygon_area(path):
    """Shoelace sum of the tool kit's own polygons, drawn a thousand times larger to make its chords fine."""
    total = 0.0
    for polygon in path.toSubpathPolygons(QTransform.fromScale(1e3, 1e3)):
        xy = np.array([point.toTuple() for point in polygon]) / 1e3
        x, y = (xy - xy[0]).T
        total += 0.5 * float(np.sum(x * np.roll(y, -1) - y * np.roll(x, -1)))
    return total


def test_arcs_lie_on_their_circles():
    """Truth: every point of a stadium is 50 from its middle segment."""
    xy = points_on(ring_paths([STADIUM])[0])
    distance = np.hypot(np.maximum(np.abs(xy[:, 0]) - 100.0, 0.0), xy[:, 1])
    assert np.max(np.abs(distance - 50.0)) < 50.0 * 1e-5


def test_area_of_a_stadium():
    """Truth: pi r^2 + 2 r l; counter-clockwise is positive with y upwards."""
    assert polygon_area(ring_paths([STADIUM])[0]) == pytest.approx(np.pi * 50.0**2 + 100.0 * 200.0, rel=1e-5)


@pytest.mark.parametrize("turn", [0.0, 1.0, 2.5])
@pytest.mark.parametrize("is_mirrored", [False, True])
def test_area_of_moved_contours(turn, is_mirrored):
    """Truth: the contour's exact area, which no move changes."""
    moved = STADIUM.placed(Placement(angle=turn, dx_um=1e4, dy_um=-3.0, is_mirrored=is_mirrored))
    assert polygon_area(ring_paths([moved])[0]) == pytest.approx(STADIUM.area_um2, rel=1e-5)
    assert polygon_area(ring_paths([moved.reversed()])[0]) == pytest.approx(-STADIUM.area_um2, rel=1e-5)


@pytest.mark.parametrize("values", [{}, {"stages": 0}, {"stages": 7, "sides": "same", "run_bend_deg": 20.0}])
def test_area_of_channels(values):
    """Truth: the outline's exact area, islands subtracted."""
    outline = build_shape(ChannelParameters(**values)).outline
    assert polygon_area(outline_path(outline)) == pytest.approx(outline.area_um2, rel=1e-5)


def test_each_ring_is_its_own():
    """Truth: two rings apart keep their areas and their order."""
    moved = STADIUM.placed(Placement(dx_um=500.0)).reversed()
    areas = [polygon_area(path) for path in ring_paths([STADIUM, moved, STADIUM])]
    assert areas == pytest.approx([STADIUM.area_um2, -STADIUM.area_um2, STADIUM.area_um2], rel=1e-5)


def test_islands_are_outside():
    """Truth: a point in the island's middle, one between island and wall, one beyond the wall."""
    island = Contour(STADIUM.vertices_um * 0.3, STADIUM.bulges).reversed()
    path = outline_path(Outline(STADIUM, (island,)))
    assert path.fillRule() == Qt.FillRule.OddEvenFill
    assert [path.contains(QPointF(x, 0.0)) for x in (0.0, 100.0, 160.0)] == [False, True, False]


def test_centre_lines_run_along_the_strokes():
    """Truth: total length of the strokes; the tool kit measures a curve to 0.01."""
    strokes = build_shape(ChannelParameters(return_length_um=50.0)).centreline.strokes
    assert strokes_path(strokes).length() == pytest.approx(sum(stroke.length_um for stroke in strokes), rel=1e-4)
