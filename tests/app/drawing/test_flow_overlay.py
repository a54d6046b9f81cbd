"""The flow in the drawing: colours where values are, a legend that says what they mean, and speed.

Truth: a made-up field that is linear in x, so that every colour is known.
"""

from __future__ import annotations

import time

import numpy as np
import pytest
from PySide6.QtCore import QPointF
from PySide6.QtGui import QColor

from app.drawing.flow_legend import band_colours
from app.drawing.flow_overlay import FlowOverlay, Shown
from app.look import DARK, LIGHT
from app.shown_values import ShownUnits
from core.flow.result import FlowField

LEFT, RIGHT = 1000.0, 3000.0


def strip(columns=2, height_um=200.0) -> FlowField:
    """Return a strip whose speed is 1 m/s at its left end and 2 m/s at its right; pressure falls by 1 kPa."""
    x = np.repeat(np.linspace(LEFT, RIGHT, columns), 2)
    y = np.tile([0.0, height_um], columns)
    a = 2 * np.arange(columns - 1)
    triangles = np.concatenate((np.stack((a, a + 2, a + 3), 1), np.stack((a, a + 3, a + 1), 1)))
    share = (x - LEFT) / (RIGHT - LEFT)
    return FlowField(
        points_um=np.stack((x, y), 1),
        triangles=triangles,
        in_plane_m_s=np.stack((1.0 + share, 0.0 * share))[:, None, :],
        vertical_m_s=np.zeros((0, len(x))),
        pressure_modes_pa=1000.0 * (1.0 - share)[None, :],
        plain=True,
    )


@pytest.fixture
def overlay(view):
    made = FlowOverlay(view)
    seeds = np.array([[LEFT + 50.0, 60.0], [LEFT + 50.0, 140.0]])
    made.set_field(strip(), seeds_um=seeds, cell_um=10.0, caption="reverse flow")
    view.use_overlay(made)
    return made


def colour_at(view, x_um, y_um) -> QColor:
    return QColor(view.grab().toImage().pixel(view.camera.to_px((x_um, y_um)).toPoint()))


def test_nothing_is_painted_unless_asked_for(view, overlay):
    before = view.grab().toImage()
    overlay.set_view(Shown.SPEED, height_share=0.5)
    assert overlay.is_shown
    assert view.grab().toImage() != before
    overlay.set_view(Shown.NOTHING, height_share=0.5)
    assert view.grab().toImage() == before


@pytest.mark.parametrize("palette", [LIGHT, DARK])
def test_the_colour_is_that_of_the_band_of_the_value(view, overlay, palette):
    view.use_palette(palette)
    view.set_dimensions_shown(False)
    overlay.set_view(Shown.SPEED, height_share=0.5)
    # speed 1.55 m/s lies in the eighth of ten bands of 0.2 m/s
    colours = band_colours(palette, 10)
    assert colour_at(view, LEFT + 0.55 * (RIGHT - LEFT), 100.0).name() == colours[7]


def test_colours_differ_in_lightness_so_that_they_read_without_colour():
    for palette in (LIGHT, DARK):
        greys = [QColor(name).lightnessF() for name in band_colours(palette, 10)]
        assert len(set(greys)) == 10
        steps = np.diff(greys)
        assert (steps < 0.0).all() or (steps > 0.0).all()


def test_the_pointer_reads_the_value_with_its_unit(overlay):
    assert overlay.text_at(2000.0, 100.0) == ""
    overlay.set_view(Shown.SPEED, height_share=0.5)
    assert overlay.text_at(2000.0, 100.0) == "speed 1.5 m/s"
    overlay.set_view(Shown.PRESSURE, height_share=0.5)
    assert overlay.text_at(2000.0, 100.0) == "pressure 0.5 kPa"
    overlay.set_units(ShownUnits(pressure="mbar"))
    overlay.set_view(Shown.SPEED, height_share=0.5)
    overlay.set_view(Shown.PRESSURE, height_share=0.5)
    assert overlay.text_at(2000.0, 100.0) == "pressure 5 mbar"
    assert overlay.text_at(0.0, 0.0) == ""


def test_other_units_are_read_at_once(overlay):
    overlay.set_view(Shown.PRESSURE, height_share=0.5)
    assert overlay.text_at(2000.0, 100.0) == "pressure 0.5 kPa"
    overlay.set_units(ShownUnits(pressure="Pa"))
    assert overlay.text_at(2000.0, 100.0) == "pressure 500 Pa"


def test_streamlines_are_drawn_and_point_with_the_flow(view, overlay):
    overlay.set_view(Shown.STREAMLINES, height_share=0.5)
    view.grab()
    first, second = overlay._lines
    for line, y in ((first, 60.0), (second, 140.0)):
        assert (np.diff(line[:, 0]) > 0.0).all()
        np.testing.assert_allclose(line[:, 1], y, atol=1.0)
        assert line[0, 0] < LEFT + 30.0
        assert line[-1, 0] > RIGHT - 30.0


def test_a_moved_view_shows_the_old_picture_and_then_a_sharp_one(view, overlay, qtbot):
    overlay.set_view(Shown.SPEED, height_share=0.5)
    view.grab()
    made_for = overlay._picture[0]
    view.zoom(1.3, QPointF(400.0, 300.0))
    view.grab()
    assert overlay._picture[0] == made_for, "only moved along"
    qtbot.waitUntil(lambda: overlay._picture is None or overlay._picture[0] == view.camera, timeout=2_000)
    view.grab()
    assert overlay._picture[0] == view.camera


def test_a_remark_is_written_into_the_legend(view, overlay):
    overlay.set_view(Shown.SPEED, height_share=0.5)
    plain = view.grab().toImage()
    with_remark = []
    overlay.changed.connect(lambda: with_remark.append(True))
    overlay.set_remark("Stale: solved at 900 µL/min")
    assert with_remark
    assert view.grab().toImage() != plain


@pytest.mark.benchmark
def test_a_still_picture_is_painted_fast(view, overlay):
    overlay.set_field(strip(columns=10_000), seeds_um=np.empty((0, 2)), cell_um=10.0, caption="reverse flow")
    overlay.set_view(Shown.SPEED, height_share=0.5)
    began = time.perf_counter()
    view.grab()
    first = time.perf_counter() - began
    began = time.perf_counter()
    view.grab()
    again = time.perf_counter() - began
    # common practice, no source: under a tenth of a second feels immediate; 20,000 triangles
    assert first < 1.0
    assert again < 0.1
