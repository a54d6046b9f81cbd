"""The chip in the window: placed, moved, turned, folded, removed and packed by hand and by keys, each one step.

Truth: the plan in the document; what can be done by key is done by key.
"""

from __future__ import annotations

from dataclasses import replace

import pytest
from PySide6.QtCore import QPoint, Qt
from PySide6.QtGui import QKeySequence
from PySide6.QtWidgets import QApplication

from app.actions import ACTIONS
from app.shown_values import screen_words
from core.chip.plan import SteppedField
from core.findings import Severity
from core.parameters import ChannelParameters
from core.project import ChipProject, ParameterSet
from core.project.folds import fold_notes

pytest_plugins = ["tests.app.windows"]
pytestmark = pytest.mark.qt_log_ignore("propagateSizeHints")

LEFT = Qt.MouseButton.LeftButton


def press(qtbot, window, name):
    """Start an action by its first key, as the user does."""
    words = next(each for each in ACTIONS if each.name == name)
    combination = QKeySequence(words.keys[0])[0]
    qtbot.keyClick(QApplication.focusWidget() or window, combination.key(), combination.keyboardModifiers())


@pytest.fixture
def desk(window, qtbot):
    """Open the page of the chip on two sets that nobody has placed."""
    sets = (
        ParameterSet(name="Alpha", channel=ChannelParameters(stages=4)),
        ParameterSet(name="Beta", channel=ChannelParameters(stages=6)),
    )
    window.document.load(ChipProject(name="Bench chip", sets=sets), path=None)
    press(qtbot, window, "show_chip")
    QApplication.processEvents()
    window.parts.chip_view.setFocus()
    return window.chip


def plan_of(window):
    QApplication.processEvents()
    return window.document.plan


def test_every_set_is_packed_until_something_is_placed(desk, window):
    assert window.parts.chip_view.isVisible()
    assert window.parts.places.isVisible()
    assert window.document.plan.channels == ()
    assert [each.set_name for each in desk.outcome.plan.channels] == ["Alpha", "Beta"]
    assert window.parts.places.model.rowCount() == 2
    assert "by itself" in window.parts.places.heading.text()


def test_the_page_brings_its_drawing_and_takes_it_away(desk, window, qtbot):
    press(qtbot, window, "show_channel")
    assert window.parts.drawing.isVisible()
    assert not window.parts.chip_view.isVisible()
    assert not window.parts.places.isVisible()
    press(qtbot, window, "show_process")
    assert window.parts.drawing.isVisible()


def test_a_channel_carried_by_the_mouse_is_one_step(desk, window, qtbot):
    view = window.parts.chip_view
    before = desk.outcome.plan.channels[0]
    start = view.box_of(0).center().toPoint()
    qtbot.mousePress(view, LEFT, pos=start)
    for share in (0.2, 0.5, 1.0):
        qtbot.mouseMove(view, start + QPoint(60, 20) * share)
    qtbot.mouseRelease(view, LEFT, pos=start + QPoint(60, 20))
    moved = plan_of(window).channels[0]
    assert moved.x_um == pytest.approx(before.x_um + 60 * view.camera.um_per_px, abs=1.0)
    assert moved.y_um == pytest.approx(before.y_um - 20 * view.camera.um_per_px, abs=1.0)
    assert (moved.x_um, moved.y_um) == (round(moved.x_um), round(moved.y_um))
    assert window.document.undo_stack.count() == 1
    assert window.document.undo_stack.undo_text == "Move 'Alpha'"
    assert "Placed by hand" in window.parts.places.heading.text()
    press(qtbot, window, "undo")
    assert plan_of(window).channels == ()


def test_a_held_arrow_key_is_one_step(desk, window, qtbot):
    view = window.parts.chip_view
    qtbot.keyClick(view, Qt.Key.Key_Space)
    before = desk.outcome.plan.channels[0]
    view.move_requested.emit(0, round(before.x_um) + 100, round(before.y_um), False)
    for step in range(2, 5):
        view.move_requested.emit(0, round(before.x_um) + 100 * step, round(before.y_um), True)
    assert plan_of(window).channels[0].x_um == round(before.x_um) + 400
    assert window.document.undo_stack.count() == 1
    qtbot.keyClick(view, Qt.Key.Key_Right, Qt.KeyboardModifier.ShiftModifier)
    assert plan_of(window).channels[0].x_um == round(before.x_um) + 401
    assert window.document.undo_stack.count() == 2


def test_turned_folded_levelled_by_keys(desk, window, qtbot):
    qtbot.keyClick(window.parts.chip_view, Qt.Key.Key_Space)
    level = desk.outcome.plan.channels[0].turn_deg
    press(qtbot, window, "turn_placed")
    assert plan_of(window).channels[0].turn_deg == pytest.approx(level + 90.0)
    press(qtbot, window, "level_placed")
    assert plan_of(window).channels[0].turn_deg == pytest.approx(level)
    press(qtbot, window, "fold_placed")
    assert plan_of(window).channels[0].rows == 2
    press(qtbot, window, "unfold_placed")
    assert plan_of(window).channels[0].rows == 1
    assert window.document.undo_stack.count() == 4
    press(qtbot, window, "unfold_placed")
    assert plan_of(window).channels[0].rows == 1
    assert "at least 1" in window.statusBar().currentMessage()


def test_a_set_and_its_control_are_added_at_free_places(desk, window, qtbot):
    window.document.select_set(1)
    press(qtbot, window, "place_set")
    assert [each.set_name for each in plan_of(window).channels] == ["Alpha", "Beta", "Beta"]
    assert window.parts.chip_view.selected == 2, "what was added is in hand"
    press(qtbot, window, "place_control")
    assert plan_of(window).channels[3].is_control
    assert not [f for f in desk.outcome.findings if f.severity is Severity.ERROR], "they touch nothing"
    press(qtbot, window, "undo")
    press(qtbot, window, "undo")
    assert plan_of(window).channels == ()


def test_removed_by_key_but_not_the_last_one(desk, window, qtbot):
    view = window.parts.chip_view
    view.select(0)
    qtbot.keyClick(view, Qt.Key.Key_Delete)
    assert [each.set_name for each in plan_of(window).channels] == ["Beta"]
    view.select(0)
    press(qtbot, window, "remove_placed")
    assert [each.set_name for each in plan_of(window).channels] == ["Beta"]
    assert "at least one" in window.statusBar().currentMessage()


def test_packed_anew(desk, window, qtbot):
    packed = desk.outcome.plan.channels
    window.document.change_plan(replace(desk.outcome.plan, channels=packed[::-1]), "Turn them round")
    for index in (0, 1):
        desk._change(index, {"x_um": 0.0, "y_um": 0.0})
    QApplication.processEvents()
    assert any(finding.code == "channels_overlap" for finding in desk.outcome.findings)
    press(qtbot, window, "pack_chip")
    assert plan_of(window).channels
    assert not any(finding.code == "channels_overlap" for finding in desk.outcome.findings)


def test_what_is_too_long_is_folded_to_fit_as_one_step(desk, window, qtbot):
    window.document.change_plan_values({"chip_width_um": 12500.0, "chip_height_um": 20000.0})
    steps = window.document.undo_stack.count()
    press(qtbot, window, "fold_to_fit")
    short, long = plan_of(window).channels
    assert (short.rows, long.rows) == (1, 2), "four stages fit in one row, six do not"
    assert not [f for f in desk.outcome.findings if f.severity is Severity.ERROR]
    assert window.document.undo_stack.count() == steps + 1
    assert window.document.undo_stack.undo_text == "Fold to fit"
    assert window.statusBar().currentMessage() == ""


def test_what_fits_in_no_number_of_rows_is_told(desk, window, qtbot):
    window.document.change_plan_values({"chip_width_um": 12500.0, "chip_height_um": 5500.0})
    press(qtbot, window, "fold_to_fit")
    assert "'Beta' fits this chip in no number of rows" in window.statusBar().currentMessage()
    assert plan_of(window).channels, "the other one is placed"
    press(qtbot, window, "undo")
    window.document.change_plan_values({"chip_width_um": 3000.0})
    steps = window.document.undo_stack.count()
    press(qtbot, window, "fold_to_fit")
    assert "'Alpha', 'Beta' fit this chip in no number of rows" in window.statusBar().currentMessage()
    assert window.document.undo_stack.count() == steps, "nothing fits, nothing is done"


def test_what_folding_costs_is_said_under_the_table_when_the_hand_rests(desk, window, qtbot):
    notes = window.parts.places.notes
    assert not notes.isVisible()
    window.parts.chip_view.select(0)
    press(qtbot, window, "fold_placed")
    assert window.fold_notes._job is None, "not on the path of the hand"
    qtbot.waitUntil(lambda: notes.isVisible() and window.fold_notes.is_up_to_date)
    first = notes.label.text()
    (said,) = fold_notes(window.document.project)
    assert first == f"\N{BULLET} S{screen_words(said)[1:]}."
    window.document.change_operating({"flow_ul_min": 777.0})
    qtbot.waitUntil(lambda: "777" in notes.label.text())
    press(qtbot, window, "unfold_placed")
    qtbot.waitUntil(lambda: not notes.isVisible())


def test_notes_take_few_lines_at_any_width(window, qtbot):
    press(qtbot, window, "show_chip")
    notes = window.parts.places.notes
    line = notes.label.fontMetrics().lineSpacing()
    notes.show_sentences(["Short."])
    assert line <= notes.height() < 2 * line
    notes.show_sentences(["Many words that need many lines. " * 60])
    assert notes.height() == 4 * line
    assert notes.verticalScrollBar().maximum() > 0
    notes.show_sentences([])
    assert not notes.isVisible()


@pytest.mark.parametrize("size", [(1280, 720), (1366, 768), (1600, 1000)])
def test_no_column_of_the_table_is_cut_off(desk, window, qtbot, size):
    window.resize(*size)
    table = window.parts.places.table
    desk._change(0, {"x_um": -123456.789, "turn_deg": -177.123456})
    QApplication.processEvents()
    qtbot.waitUntil(lambda: table.horizontalHeader().length() <= table.viewport().width())
    assert table.columnWidth(0) > 60, "the names can still be told apart"
    assert table.horizontalScrollBar().maximum() == 0


def test_numbers_are_typed_into_the_table(desk, window, qtbot):
    table = window.parts.places.table
    table.setFocus()
    table.setCurrentIndex(window.parts.places.model.index(1, 1))
    assert window.parts.chip_view.selected == 1, "the drawing follows the table"
    table.edit(table.currentIndex())
    entry = QApplication.focusWidget()
    entry.selectAll()
    qtbot.keyClicks(entry, "-1234.5")
    qtbot.keyClick(entry, Qt.Key.Key_Return)
    assert plan_of(window).channels[1].x_um == -1234.5
    assert window.parts.places.chosen == 1


def test_the_set_of_a_channel_in_hand_is_in_hand(desk, window, qtbot):
    view = window.parts.chip_view
    qtbot.mouseClick(view, LEFT, pos=view.box_of(1).center().toPoint())
    assert window.document.current_set.name == "Beta"
    assert window.parts.places.chosen == 1


def test_findings_of_the_chip_are_listed_marked_and_gone_to(desk, window, qtbot):
    desk._change(0, {"x_um": -25000.0})
    QApplication.processEvents()
    findings = window.parts.verdict.findings
    assert any("Alpha" in finding.message for finding in findings.findings)
    row = len(findings.findings) - len(desk.outcome.findings)
    findings.list.setCurrentRow(row)
    assert window.parts.chip_view.selected_finding == 0
    boxes = window.parts.chip_view.finding_boxes()
    qtbot.mouseClick(window.parts.chip_view, LEFT, pos=QPoint(3, 3))
    assert window.parts.chip_view.selected_finding == -1
    qtbot.mouseClick(window.parts.chip_view, LEFT, pos=boxes[0].center().toPoint())
    assert findings.chosen == row
    press(qtbot, window, "show_channel")
    assert len(findings.findings) == row, "with the channel's own drawing only its own are listed"


def test_a_plate_on_which_nothing_fits_is_told(desk, window):
    window.document.change_plan_values({"plate": "wafer", "wafer_diameter_um": 30000.0})
    QApplication.processEvents()
    assert "no chip of" in window.parts.chip.count_label.text()
    assert window.parts.chip_view.shown is None
    window.document.change_plan_values({"wafer_diameter_um": 100000.0})
    QApplication.processEvents()
    assert "chips on the wafer" in window.parts.chip.count_label.text()
    assert len(window.parts.chip_view.shown.copies) > 1


def test_a_plate_of_many_different_chips_is_drawn_beside_the_window(desk, window, qtbot):
    series = (SteppedField(name="loop_radius_um", first=280.0, last=330.0, steps=14),)
    sets = tuple(
        replace(each, channel=each.channel.with_values({"stages": 60})) for each in window.document.project.sets
    )
    plan = replace(window.document.plan, plate="wafer", wafer_diameter_um=300000.0, series=series)
    window.document.load(replace(window.document.project, sets=sets, plan=plan), path=None)
    QApplication.processEvents()
    assert desk._job is not None
    first_job = desk._job
    window.document.change_plan_values({"street_um": 300.0})  # the hand goes on meanwhile
    qtbot.waitUntil(lambda: desk._job is not first_job and desk._job is None and not desk._is_stale(), timeout=60_000)
    assert desk.outcome.plan.street_um == 300.0
    assert len({id(block) for block, _, _ in window.parts.chip_view.shown.copies}) > 1


def test_closing_while_a_plate_is_drawn(make_window, qtbot):
    window = make_window()
    series = (SteppedField(name="loop_radius_um", first=280.0, last=330.0, steps=20),)
    project = window.document.project
    sets = tuple(replace(each, channel=each.channel.with_values({"stages": 60})) for each in project.sets)
    plan = replace(project.plan, plate="wafer", wafer_diameter_um=300000.0, series=series)
    window.document.load(replace(project, sets=sets, plan=plan), path=None)
    press(qtbot, window, "show_chip")
    assert window.chip._job is not None
    window.close()  # nothing is left behind: see the fixture of all tests


def test_lengths_follow_the_unit(desk, window):
    window.settings.set_unit("length", "mm")
    assert "mm" in window.parts.chip_view.accessibleDescription()
    assert window.parts.places.model.headerData(1, Qt.Orientation.Horizontal) == "Across [mm]"


def test_a_channel_that_is_gone_is_told(desk, window):
    before = window.document.plan
    desk._change(9, {"x_um": 0.0})
    assert window.document.plan == before
    assert "wait until the chip is drawn anew" in window.statusBar().currentMessage()
