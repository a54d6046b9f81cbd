"""From a slider's move to the painted window: 20 stages, window of 1600 x 1000.

Prints the median and the 95th percentile. Aims on an ordinary desk computer: 16 and 33 ms. Nothing
is asserted about time, because the machine may be busy; run it alone.
"""

from __future__ import annotations

import time

import numpy as np
import pytest
from PySide6.QtCore import QEvent, QObject
from PySide6.QtWidgets import QApplication

from core.parameters import ChannelParameters
from core.project import ChipProject, ParameterSet

pytest_plugins = ["tests.app.windows"]
pytestmark = [pytest.mark.benchmark, pytest.mark.gui, pytest.mark.qt_log_ignore("propagateSizeHints")]

MOVES = 200


class PaintWatch(QObject):
    """Notes when the drawing was painted."""

    def __init__(self):
        super().__init__()
        self.painted = 0

    def eventFilter(self, watched, event):
        if event.type() == QEvent.Type.Paint:
            self.painted += 1
        return False


@pytest.mark.parametrize("field", ["loop_radius_um", "loop_angle_deg"])
def test_slider_to_paint(window, capsys, field):
    channel = ChannelParameters(stages=20, run_bend_deg=30.0)
    window.document.load(ChipProject(name="Long chip", sets=(ParameterSet(name="Twenty", channel=channel),)), path=None)
    QApplication.processEvents()
    watch = PaintWatch()
    window.parts.drawing.installEventFilter(watch)
    slider = window.parts.sliders.editors[field].slider
    start = slider.value()
    slider.setSliderDown(True)  # as a press of the mouse does
    times_ms, cpu_ms = [], []
    for move in range(MOVES):
        watch.painted = 0
        begun, begun_cpu = time.perf_counter(), time.process_time()
        slider.setSliderPosition(start + move % 20 + 1)
        while not watch.painted:
            QApplication.processEvents()
        QApplication.processEvents()  # verdict and, when it is their turn, curves
        times_ms.append(1000.0 * (time.perf_counter() - begun))
        cpu_ms.append(1000.0 * (time.process_time() - begun_cpu))
    slider.setSliderDown(False)
    window.parts.drawing.removeEventFilter(watch)
    assert window.document.shape.is_usable
    assert window.document.undo_stack.count() == 1
    with capsys.disabled():
        print(
            f"\n{field}, 20 stages, 1600 x 1000: median {np.median(times_ms):.1f} ms, "
            f"95th percentile {np.percentile(times_ms, 95):.1f} ms; of the processor alone "
            f"{np.median(cpu_ms):.1f} and {np.percentile(cpu_ms, 95):.1f} ms"
        )
