"""What was measured, shown where it was measured.

Truth: the ends given with the finding, through the camera's own transform.
"""

from __future__ import annotations

from dataclasses import replace

import pytest
from PySide6.QtCore import QPointF
from PySide6.QtGui import QColor

from app.look import DARK, LIGHT
from core.findings import Severity
from tests.app.drawing.samples import GOOD, finding

NECK = replace(
    finding(Severity.ERROR, 2000.0, 100.0, "the gap is 30 um"), value_um=30.0, limit_um=50.0,
    ends_um=(1985.0, 100.0, 2015.0, 100.0),
)  # fmt: skip
PLACE = finding(Severity.WARNING, 1000.0, 0.0)


def colours_near(view, point_px, reach_px):
    """Return the colours painted within some pixels of a point."""
    image, x, y = view.grab().toImage(), round(point_px.x()), round(point_px.y())
    span = range(-reach_px, reach_px + 1)
    return {image.pixelColor(x + dx, y + dy).name() for dx in span for dy in span}


def test_the_view_goes_so_near_that_the_measured_line_is_seen(view):
    view.show_findings((NECK, PLACE))
    assert 30.0 / view.camera.um_per_px < 5.0, "of the whole channel it is a speck"
    view.show_finding(0)
    assert 30.0 / view.camera.um_per_px == pytest.approx(70.0)
    middle = view.camera.to_px((2000.0, 100.0))
    assert (middle - QPointF(view.rect().center())).manhattanLength() < 3.0


def test_a_view_that_shows_it_stays(view):
    view.show_findings((NECK, PLACE))
    view.show_finding(0)
    view.zoom(0.7)
    view.pan(30.0, 20.0)
    before = view.camera
    view.show_finding(-1)
    view.show_finding(0)
    assert view.camera == before


def test_a_place_without_a_measure_does_not_zoom(view):
    view.show_findings((NECK, PLACE))
    before = view.camera
    view.show_finding(1)
    assert view.camera == before


@pytest.mark.parametrize("palette", [LIGHT, DARK])
def test_ring_line_and_mark(view, palette):
    """Truth: line in ink from end to end, ring in the accent beyond both ends, mark off the place."""
    view.use_palette(palette)
    view.clearFocus()
    view.set_dimensions_shown(False)
    view.show_findings((NECK,))
    view.show_finding(0)
    left, right = view.camera.to_px(NECK.ends_um[:2]), view.camera.to_px(NECK.ends_um[2:])
    assert QColor(palette.ink).name() in colours_near(view, (left + right) / 2.0, 1)
    assert QColor(palette.accent).name() in colours_near(view, right + QPointF(6.0, 0.0), 2)
    assert not view.finding_boxes()[0].contains((left + right) / 2.0)
    view.mark_finding(-1)
    assert QColor(palette.error).name() in colours_near(view, right + QPointF(6.0, 0.0), 2)
    assert QColor(palette.ink).name() not in colours_near(view, (left + right) / 2.0 + QPointF(9.0, 0.0), 1)


def test_findings_stay_while_a_drag_changes_the_shape(view):
    view.show_findings((NECK,))
    view.show_shape(GOOD, keeps_findings=True)
    assert view.findings == (NECK,)
    view.show_shape(GOOD)
    assert view.findings == ()


def test_what_is_marked_is_said_in_words(view):
    view.show_findings((NECK,))
    assert "The gap is 30 µm" in view.accessibleDescription()
