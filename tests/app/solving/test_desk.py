"""Flow solves as a user meets them in the window: start, see, stop, go stale, keep, save, close.

The children are quick and made up (Di 1.1 coarse, 1.2 normal); one test solves in earnest.
"""

from __future__ import annotations

import csv
import errno
import tempfile
from pathlib import Path

import numpy as np
import pytest
from PySide6.QtCore import QEvent, QPoint, Qt
from PySide6.QtGui import QImage
from PySide6.QtWidgets import QApplication

from app.drawing.flow_overlay import Shown
from app.panels.solve import Standing
from core.project import read_project
from tests.app.solving.children import command, is_gone, left_folders

pytest_plugins = ["tests.app.windows"]
pytestmark = pytest.mark.qt_log_ignore("propagateSizeHints")


@pytest.fixture
def solving(window, tmp_path, monkeypatch):
    """Return the desk of a window whose children are quick, and see that they leave nothing."""
    (tmp_path / "temporary").mkdir()
    monkeypatch.setattr(tempfile, "tempdir", str(tmp_path / "temporary"))
    window.solving.command = command("ok")
    yield window.solving
    window.solving.end_now()
    assert not left_folders()


def solved(qtbot, solving, start="solve_button"):
    """Press a button and wait for the end."""
    qtbot.mouseClick(getattr(solving.panel, start), Qt.MouseButton.LeftButton)
    qtbot.waitUntil(lambda: solving.process is None, timeout=10_000)


def begun(qtbot, solving, manner):
    """Start a child that does not end by itself, and wait for its first answer."""
    solving.command = command(manner)
    qtbot.mouseClick(solving.panel.solve_button, Qt.MouseButton.LeftButton)
    process = solving.process
    with qtbot.waitSignal(process.answered, timeout=10_000):
        pass
    return process


def test_nothing_is_promised_before(solving):
    assert solving.panel.standing_label.text() == Standing.NONE
    assert not solving.panel.figures.isVisible()
    assert not solving.panel.numbers_button.isEnabled()
    assert solving.panel.solve_button.isVisible()
    assert not solving.panel.cancel_button.isVisible()


def test_the_key_solves_and_the_figures_come_with_their_bands(window, solving, qtbot):
    qtbot.keyClick(QApplication.focusWidget() or window, Qt.Key.Key_F5)
    qtbot.waitUntil(lambda: solving.process is None, timeout=10_000)
    values = {name: label.text() for name, label in solving.panel.values.items()}
    assert values["di"] == "1.2 ±0.02"
    assert values["forward"] == "1.2 kPa ±1.5 %"
    assert values["reverse"] == "1.44 kPa ±1.5 %"
    assert values["shares"] == "25.0 % / 55.0 %"
    assert solving.panel.standing_label.text() == Standing.CURRENT
    assert "made up" in solving.panel.notes_label.text()
    assert window.parts.drawing._picture.shares(0) == (0.25, 0.55)  # the solved ones take the estimate's place
    assert window.parts.verdict.diodicity_label.text().startswith("Di 1."), "the estimate stays beside it"


def test_the_first_answer_is_shown_as_coarse(solving, qtbot):
    begun(qtbot, solving, "deaf")
    assert solving.panel.standing_label.text() == Standing.COARSE
    assert solving.panel.values["di"].text().startswith("1.1 ")
    assert solving.panel.cancel_button.isVisible()
    assert "meshing" in solving.panel.progress_label.text()


@pytest.mark.parametrize("manner", ["polite", "deaf"])
def test_stopping_keeps_what_was_found(solving, qtbot, manner):
    process = begun(qtbot, solving, manner)
    child = process.process_id
    qtbot.mouseClick(solving.panel.cancel_button, Qt.MouseButton.LeftButton)
    qtbot.waitUntil(lambda: solving.process is None, timeout=2_000)
    assert is_gone(child)
    assert solving.panel.standing_label.text() == Standing.COARSE_ONLY
    assert solving.panel.solve_button.isVisible()


def test_a_dead_child_is_told_and_harms_nothing(window, solving, qtbot):
    before = window.document.project
    solving.command = command("crash")
    solved(qtbot, solving)
    assert "project is unharmed" in solving.panel.remark_label.text()
    assert window.document.project == before
    solving.command = command("ok")
    solved(qtbot, solving)
    assert solving.panel.remark_label.text() == ""
    assert solving.panel.standing_label.text() == Standing.CURRENT


def test_a_refusal_is_told_in_the_words_of_the_screen(solving, qtbot):
    solving.command = command("refuse")
    solved(qtbot, solving)
    assert "would need 9 GB" in solving.panel.remark_label.text()


def test_changed_parameters_make_it_stale_and_undo_makes_it_good(window, solving, qtbot):
    solved(qtbot, solving)
    window.document.change_channel({"loop_radius_um": 340})
    window.document.settle()
    assert solving.panel.standing_label.text() == Standing.STALE
    assert "earlier parameters" in solving.panel.remark_label.text()
    assert window.parts.drawing._picture.shares(0) != (0.25, 0.55)
    window.document.undo_stack.undo()
    window.document.settle()
    assert solving.panel.standing_label.text() == Standing.CURRENT
    window.document.change_operating({"flow_ul_min": 900})
    window.document.settle()
    assert solving.panel.standing_label.text() == Standing.STALE
    assert "solved at 1200 µL/min, water" in solving.panel.remark_label.text()


def test_the_picture_follows_and_says_when_it_is_stale(window, solving, qtbot):
    panel, overlay, drawing = solving.panel, solving.overlay, window.parts.drawing
    panel.picture.shown_box.setCurrentIndex(panel.picture.shown_box.findData(Shown.SPEED))
    assert "solve here" in panel.picture.hint_label.text()
    assert not overlay.is_shown
    solved(qtbot, solving)
    assert overlay.is_shown
    assert panel.picture.hint_label.text() == ""
    place = drawing.camera.to_px((100.0, 0.0)).toPoint()
    qtbot.mouseMove(drawing, QPoint(5, 5))
    qtbot.mouseMove(drawing, place)
    qtbot.waitUntil(lambda: "speed" in window.place_label.text(), timeout=2_000)
    assert "m/s" in window.place_label.text()
    window.document.change_operating({"flow_ul_min": 900})
    window.document.settle()
    assert "Stale" in overlay.remark
    window.document.change_channel({"loop_radius_um": 340})
    window.document.settle()
    assert not overlay.is_shown, "never another channel's picture"
    assert "solve here" in panel.picture.hint_label.text()


def test_the_height_slider_works_by_key(solving, qtbot):
    solving.panel.picture.height_slider.setFocus()
    qtbot.keyClick(solving.panel.picture.height_slider, Qt.Key.Key_PageUp)
    assert solving.panel.picture.height_share == pytest.approx(0.6)
    assert "60 %" in solving.panel.picture.height_label.text()
    qtbot.keyClick(solving.panel.picture.height_slider, Qt.Key.Key_End)
    assert solving.panel.picture.height_share == pytest.approx(0.95)


def test_the_curve_shows_solved_points_beside_the_estimate(window, solving, qtbot):
    solved(qtbot, solving, "curve_button")
    flows = window.parts.curves.pressure_plot.points["forward"].getData()[0]
    assert len(flows) == 8
    assert list(flows) == sorted(flows)
    assert window.document.operating.flow_ul_min in flows
    assert solving.panel.standing_label.text() == Standing.CURRENT


def test_results_are_saved_with_the_chip_and_come_back(window, solving, qtbot, tmp_path):
    path = tmp_path / "chip.sideloop"
    window.document.save(path)
    assert not window.isWindowModified()
    solved(qtbot, solving)
    assert window.isWindowModified()
    assert not window.document.undo_stack.can_undo, "a fact is no step of the user's"
    window.files.save()
    assert not window.isWindowModified()
    (kept,) = read_project(path).solved
    assert kept.diodicity == pytest.approx(1.2)
    window.files.new()
    assert solving.panel.standing_label.text() == Standing.NONE
    window.files.open_path(path)
    window.document.settle()
    assert solving.panel.standing_label.text() == Standing.CURRENT


@pytest.mark.parametrize("shown", [Shown.SPEED, Shown.PRESSURE, Shown.STREAMLINES])
@pytest.mark.parametrize("suffix", [".png", ".svg"])
def test_the_picture_is_saved_as_it_is_seen(window, solving, qtbot, tmp_path, shown, suffix):
    solved(qtbot, solving)
    solving.panel.picture.shown_box.setCurrentIndex(solving.panel.picture.shown_box.findData(shown))
    window.ask.path = tmp_path / f"flow{suffix}"
    qtbot.mouseClick(solving.panel.picture_button, Qt.MouseButton.LeftButton)
    if suffix == ".svg":
        assert "<svg" in window.ask.path.read_text(encoding="utf-8")[:500]
    else:
        assert QImage(str(window.ask.path)).width() == 2 * window.parts.drawing.width()


def test_the_numbers_are_saved_as_a_table(window, solving, qtbot, tmp_path):
    solved(qtbot, solving, "curve_button")
    window.ask.path = tmp_path / "numbers.csv"
    qtbot.mouseClick(solving.panel.numbers_button, Qt.MouseButton.LeftButton)
    with window.ask.path.open(encoding="utf-8", newline="") as file:
        rows = list(csv.DictReader(file))
    assert len(rows) == 8
    assert float(rows[0]["diodicity"]) == pytest.approx(1.2)
    assert float(rows[0]["loop_radius_um"]) == 320.0
    assert rows[0]["fluid"] == "water"


@pytest.mark.parametrize("button", ["picture_button", "numbers_button"])
def test_a_full_disk_is_told_and_leaves_no_file(window, solving, qtbot, tmp_path, monkeypatch, button):
    solved(qtbot, solving)
    window.ask.path = tmp_path / "file.out"

    def full(self, *_arguments, **_settings):
        raise OSError(errno.ENOSPC, "No space left on device")

    for name in ("write_bytes", "open"):
        monkeypatch.setattr(Path, name, full)
    qtbot.mouseClick(getattr(solving.panel, button), Qt.MouseButton.LeftButton)
    monkeypatch.undo()
    assert "No space left on device" in window.ask.told[-1][1]
    assert not window.ask.path.exists()


def test_a_blocked_shape_is_not_solved(window, solving):
    window.document.change_channel({"loop_radius_um": 20})
    window.document.settle()
    solving.solve_here()
    assert solving.process is None


def test_closing_the_window_ends_the_child(window, solving, qtbot):
    process = begun(qtbot, solving, "deaf")
    child = process.process_id
    window.document.solved.mark_saved()
    assert window.close()
    assert is_gone(child)
    assert not left_folders()


@pytest.mark.slow
def test_one_solve_in_earnest(window, qtbot):
    window.document.change_channel({"stages": 1, "lead_in_um": 400, "lead_out_um": 400})
    solving = window.solving
    solving.solve_here()
    with qtbot.waitSignal(solving.process.answered, timeout=120_000) as answered:
        pass
    solving.cancel()
    qtbot.waitUntil(lambda: solving.process is None, timeout=2_000)
    (result,) = answered.args[0].results
    score = window.document.assessment.score
    assert result.forward_pressure_pa == pytest.approx(score.forward_pressure_pa, rel=0.15)  # the estimate
    panel = solving.panel
    panel.picture.shown_box.setCurrentIndex(panel.picture.shown_box.findData(Shown.SPEED))
    end = window.document.shape.centreline.forward_outlet
    inside = end.point_um - 100.0 * np.array([np.cos(end.outward_heading_rad), np.sin(end.outward_heading_rad)])
    mean_m_s = 1200.0 * 1e-9 / 60.0 / 4e-8
    speed = float(solving.text_at(*inside).split()[1])
    assert speed == pytest.approx(2.096 * mean_m_s, rel=0.05)  # middle of a square duct: series solution


# --- as it will be made


def test_what_is_solved_is_what_is_made(window, solving, qtbot):
    """Truth: walls 10 um further out on both sides make widths 20 um larger; the set itself asks for 200 um."""
    window.document.change_process({"bias_um": 10.0, "allowance": "not at all"})
    solved(qtbot, solving)
    (*_, result) = window.document.solved.results
    assert result.channel.channel_width_um == 220.0
    assert window.document.channel.channel_width_um == 200.0
    assert solving.panel.standing_label.text() == Standing.CURRENT


def test_a_process_that_makes_another_channel_makes_it_stale(window, solving, qtbot):
    solved(qtbot, solving)
    document, label = window.document, solving.panel.standing_label
    document.change_process({"bond_limit_kpa": 150.0})
    document.settle()
    assert label.text() == Standing.CURRENT, "the same channel is made"
    document.change_process({"bias_um": 10.0, "allowance": "not at all"})
    document.settle()
    assert label.text() == Standing.STALE
    assert "process" in solving.panel.remark_label.text()
    document.undo_stack.undo()
    document.settle()
    assert label.text() == Standing.CURRENT


def test_results_of_what_is_made_are_kept_in_the_file(window, solving, qtbot, tmp_path):
    window.document.change_process({"bias_um": 10.0, "allowance": "not at all"})
    solved(qtbot, solving)
    window.document.rename_set(0, "Another name")
    window.document.save(tmp_path / "chip.sideloop")
    assert len(read_project(tmp_path / "chip.sideloop").solved) == len(window.document.solved.results) > 0


def test_a_child_wakes_when_the_pointer_comes_near_and_is_asked(window, solving, qtbot):
    QApplication.sendEvent(solving.panel, QEvent(QEvent.Type.Enter))
    waiting = solving._waiting.process_id
    assert waiting
    solving.solve_here()
    assert solving.process.process_id == waiting
    qtbot.waitUntil(lambda: solving.process is None, timeout=10_000)
    assert is_gone(waiting)


def test_a_child_that_waits_in_vain_ends_with_the_window(window, solving):
    QApplication.sendEvent(solving.panel, QEvent(QEvent.Type.Enter))
    waiting = solving._waiting.process_id
    assert waiting
    window.close()
    assert is_gone(waiting)


def test_a_waiting_child_of_another_command_is_not_asked(window, solving, qtbot):
    QApplication.sendEvent(solving.panel, QEvent(QEvent.Type.Enter))
    waiting = solving._waiting.process_id
    begun(qtbot, solving, "deaf")
    assert solving.process.process_id != waiting
    assert is_gone(waiting)
