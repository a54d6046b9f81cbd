"""The panel of the flow solve says what the result holds, no more; it asks and never acts."""

from __future__ import annotations

from dataclasses import replace

import pytest
from PySide6.QtCore import Qt

from app.drawing.flow_overlay import Shown
from app.panels.solve import SolvePanel, Standing
from app.shown_values import ShownUnits
from core.operating import OperatingPoint
from core.parameters import ChannelParameters
from core.project import SolvedResult

UNITS = ShownUnits()
RESULT = SolvedResult(
    set_name="Alpha",
    channel=ChannelParameters(),
    operating=OperatingPoint(),
    reynolds=99.66,
    forward_pressure_pa=2187.9,
    reverse_pressure_pa=2443.7,
    loop_share_forward=0.2182,
    loop_share_reverse=0.5161,
    error_band_percent=0.84,
    diodicity_band=0.0043,
    reached_reynolds=99.66,
    valid=True,
    notes=("raise lead_in_um to 1200 um",),
)
LOST = replace(
    RESULT,
    reverse_pressure_pa=None,
    loop_share_reverse=None,
    error_band_percent=None,
    diodicity_band=None,
    valid=False,
    notes=("no steady reverse flow was found at Reynolds number 99.7; the highest reached is 61.2",),
)


@pytest.fixture
def panel(qtbot):
    made = SolvePanel()
    qtbot.addWidget(made)
    made.resize(258, 500)
    with qtbot.waitExposed(made):
        made.show()
    return made


def texts(panel):
    return {name: label.text() for name, label in panel.values.items()}


def test_it_fits_into_the_narrowest_column(panel):
    panel.show_result(RESULT, UNITS, standing=Standing.STALE, remark="These figures belong to earlier parameters.")
    assert panel.minimumSizeHint().width() <= 258
    panel.show_running(True)
    assert panel.minimumSizeHint().width() <= 258


def test_every_figure_has_its_band(panel):
    panel.show_result(RESULT, UNITS, standing=Standing.CURRENT, remark="")
    assert texts(panel) == {
        "di": "1.117 ±0.0043",
        "forward": "2.188 kPa ±0.84 %",
        "reverse": "2.444 kPa ±0.84 %",
        "shares": "21.8 % / 51.6 %",
        "reynolds": "99.7",
    }
    assert "'Lead in'" in panel.notes_label.text()
    panel.show_result(RESULT, ShownUnits(pressure="mbar"), standing=Standing.CURRENT, remark="")
    assert texts(panel)["forward"] == "21.88 mbar ±0.84 %"


def test_what_was_not_found_is_no_number(panel):
    panel.show_result(LOST, UNITS, standing=Standing.LOST, remark="")
    shown = texts(panel)
    assert shown["di"] == shown["reverse"] == "\N{EM DASH}"
    assert shown["forward"] == "2.188 kPa"
    assert "highest reached is 61.2" in panel.notes_label.text()


@pytest.mark.parametrize("standing", list(Standing))
def test_every_standing_is_said_in_words_with_a_sign(panel, standing):
    panel.show_result(RESULT, UNITS, standing=standing, remark="why")
    sign, words = panel.standing_label.text().split(" ", 1)
    assert len(sign) == 1
    assert words
    assert panel.remark_label.text() == "why"


def test_buttons_ask(panel, qtbot):
    for button, signal in (
        (panel.solve_button, panel.solve_requested),
        (panel.curve_button, panel.curve_requested),
        (panel.picture_button, panel.picture_requested),
    ):
        with qtbot.waitSignal(signal):
            qtbot.mouseClick(button, Qt.MouseButton.LeftButton)
    panel.show_running(True)
    with qtbot.waitSignal(panel.cancel_requested):
        qtbot.mouseClick(panel.cancel_button, Qt.MouseButton.LeftButton)


def test_progress_is_shown_while_it_runs(panel):
    assert not panel.progress.isVisible()
    panel.show_running(True)
    assert panel.progress.maximum() == 0, "busy until the first word"
    panel.show_progress(250, 1000, "coarse answer: meshing; about 30 s left")
    assert (panel.progress.value(), panel.progress.maximum()) == (250, 1000)
    assert panel.progress_label.text() == "coarse answer: meshing; about 30 s left"
    panel.show_running(False)
    assert not panel.progress.isVisible()
    assert not panel.progress_label.isVisible()


def test_choices_ask_for_another_picture(panel, qtbot):
    for choose in (
        lambda: panel.picture.shown_box.setCurrentIndex(2),
        lambda: panel.picture.direction_box.setCurrentIndex(1),
        lambda: panel.picture.show_height(20.0),
    ):
        with qtbot.waitSignal(panel.picture.changed):
            choose()
    assert (panel.picture.shown, panel.picture.is_forward, panel.picture.height_share) == (Shown.PRESSURE, True, 0.2)
