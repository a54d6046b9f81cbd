"""A full update at 100 stages against rebuilding the outline as one union of buffered lines.

Baseline: every centre line of the same channel as a polyline, buffered by half its width and united by
a general geometry library, 16 chords to a quarter turn (about 0.5 um off at a width of 200 um). Both
are timed in turn in one run; the ratio is printed. Aim: at most 1/5.
"""

from __future__ import annotations

import time

import numpy as np
import pytest
from PySide6.QtCore import QEvent, QObject
from PySide6.QtWidgets import QApplication
from shapely import LineString, unary_union

from core.geometry.shape import build_shape
from core.parameters import ChannelParameters
from core.project import ChipProject, ParameterSet

pytest_plugins = ["tests.app.windows"]
pytestmark = [pytest.mark.benchmark, pytest.mark.gui, pytest.mark.qt_log_ignore("propagateSizeHints")]

ROUNDS = 15
LONG = ChannelParameters(stages=100, run_bend_deg=30.0)


class PaintWatch(QObject):
    """Counts how often the drawing was painted."""

    def __init__(self):
        super().__init__()
        self.painted = 0

    def eventFilter(self, watched, event):
        self.painted += event.type() == QEvent.Type.Paint
        return False


def rebuilt_area_um2(parameters: ChannelParameters) -> float:
    strokes = build_shape(parameters).centreline.strokes
    begun = time.perf_counter()
    lines = [LineString(s.points(0.5)).buffer(0.5 * s.width_um, quad_segs=16) for s in strokes]
    united = unary_union(lines)
    rebuilt_area_um2.seconds.append(time.perf_counter() - begun)
    return united.area


rebuilt_area_um2.seconds = []


def test_full_update_against_rebuild(window, capsys):
    window.document.load(ChipProject(name="Long chip", sets=(ParameterSet(name="Hundred", channel=LONG),)), path=None)
    QApplication.processEvents()
    slider = window.parts.sliders.editors["loop_radius_um"].slider
    start = slider.value()
    slider.setSliderDown(True)
    watch = PaintWatch()
    window.parts.drawing.installEventFilter(watch)
    ours = []
    for move in range(ROUNDS):
        begun = time.perf_counter()
        slider.setSliderPosition(start + move % 10 + 1)
        while watch.painted <= move:
            QApplication.processEvents()
        ours.append(time.perf_counter() - begun)
        area = rebuilt_area_um2(window.document.shape.parameters)
        outline = window.document.shape.outline
        assert outline is not None
        assert len(outline.islands) == 100
        assert area == pytest.approx(outline.area_um2, rel=2e-3)
    slider.setSliderDown(False)
    window.parts.drawing.removeEventFilter(watch)
    rebuilt = rebuilt_area_um2.seconds
    with capsys.disabled():
        print(
            f"\n100 stages: full update {1e3 * np.median(ours):.1f} ms, union of buffered lines "
            f"{1e3 * np.median(rebuilt):.1f} ms, median ratio {np.median(np.array(ours) / np.array(rebuilt)):.3f}"
        )
