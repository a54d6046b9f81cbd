"""The window as a user works with it: by mouse, keys, menus, dropped files; nothing goes unasked."""

from __future__ import annotations

import pytest
from PySide6.QtCore import QMimeData, QPoint, QPointF, QSize, Qt, QUrl
from PySide6.QtGui import QDragEnterEvent, QDropEvent, QKeySequence
from PySide6.QtWidgets import QApplication, QPushButton

from app.actions import ACTIONS
from app.main_window import first_size
from app.panels.ask import Unsaved
from app.panels.pages import PageDialog, WordsDialog
from core.parameters import ChannelParameters
from core.project import ChipProject, ParameterSet, write_project

pytest_plugins = ["tests.app.windows"]
pytestmark = pytest.mark.qt_log_ignore("propagateSizeHints")


@pytest.fixture
def chip(tmp_path):
    path = tmp_path / "bench.sideloop"
    sets = (
        ParameterSet(name="Alpha"),
        ParameterSet(name="Beta", channel=ChannelParameters(stages=8)),
        ParameterSet(name="Blocked", channel=ChannelParameters(loop_radius_um=20)),
    )
    write_project(ChipProject(name="Bench chip", sets=sets), path)
    return path


def press(qtbot, window, name):
    """Start an action by its first key, as the user does."""
    words = next(each for each in ACTIONS if each.name == name)
    combination = QKeySequence(words.keys[0])[0]
    qtbot.keyClick(QApplication.focusWidget() or window, combination.key(), combination.keyboardModifiers())


def test_it_opens_ready_to_work(window):
    assert window.parts.drawing.isVisible()
    assert window.parts.verdict.diodicity_label.text().startswith("Di 1.")
    assert "Untitled chip" in window.windowTitle()
    assert not window.isWindowModified()


def test_every_action_does_something_by_its_key(window, chip, qtbot, monkeypatch):
    window.files.open_path(chip)
    done = []
    for name, action in window.actions_by_name.items():
        action.triggered.connect(lambda *_, name=name: done.append(name))
    window.document.change_channel({"stages": 5})
    for words in ACTIONS:
        if words.keys and words.name not in ("quit", "compare"):
            press(qtbot, window, words.name)
            for dialog in window.findChildren(WordsDialog) + window.findChildren(PageDialog):
                dialog.reject()
            for dialog in [w for w in QApplication.topLevelWidgets() if w.isModal() and w.isVisible()]:
                dialog.reject()
            if words.name == "rename_set":
                qtbot.keyClick(window.parts.sets.view.indexWidget(window.parts.sets.model.index(window.document.index))
                               or QApplication.focusWidget(), Qt.Key.Key_Escape)  # fmt: skip
            assert words.name in done, words.plain_text


def test_undo_and_redo_say_what_they_do(window, qtbot):
    undo, redo = (window.actions_by_name[name] for name in ("undo", "redo"))
    assert not undo.isEnabled()
    window.document.change_channel({"loop_radius_um": 340})
    assert undo.text() == "&Undo: Loop radius 320 to 340 µm"
    press(qtbot, window, "undo")
    assert not undo.isEnabled()
    assert redo.text() == "&Redo: Loop radius 320 to 340 µm"
    press(qtbot, window, "redo")
    assert window.document.channel.loop_radius_um == 340.0


def test_the_title_says_file_and_unsaved(window, chip, qtbot):
    window.files.open_path(chip)
    assert "bench.sideloop" in window.windowTitle()
    window.document.change_channel({"stages": 5})
    assert window.isWindowModified()
    press(qtbot, window, "save")
    assert not window.isWindowModified()


def test_closing_asks(window, qtbot):
    window.document.change_channel({"stages": 5})
    window.ask.unsaved_answer = Unsaved.STAY
    assert not window.close()
    assert window.isVisible()
    window.ask.unsaved_answer = Unsaved.DISCARD
    assert window.close()


def dropped(window, path):
    mime = QMimeData()
    mime.setUrls([QUrl.fromLocalFile(str(path))])
    buttons, keys = Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier
    enter = QDragEnterEvent(QPoint(50, 50), Qt.DropAction.CopyAction, mime, buttons, keys)
    QApplication.sendEvent(window, enter)
    assert enter.isAccepted()
    QApplication.sendEvent(window, QDropEvent(QPointF(50, 50), Qt.DropAction.CopyAction, mime, buttons, keys))


def test_a_dropped_file_opens(window, chip):
    dropped(window, chip)
    assert window.document.project.name == "Bench chip"


def test_a_dropped_file_that_is_no_chip_is_told(window, tmp_path):
    path = tmp_path / "picture.png"
    path.write_bytes(b"\x89PNG\r\n")
    dropped(window, path)
    assert window.ask.told
    assert window.document.project.name == "Untitled chip"


def test_recent_files_are_listed_and_open(window, chip):
    window.files.open_path(chip)
    window.files.new()
    menu = next(child for child in window.findChildren(type(window.menuBar().actions()[0].menu()))
                if child.title() == "Open &recent")  # fmt: skip
    menu.actions()[0].trigger()
    assert window.document.project.name == "Bench chip"


def test_a_blocked_set_is_explained_and_enter_leads_to_its_cure(window, chip, qtbot):
    window.files.open_path(chip)
    with qtbot.waitSignal(window.document.channel_changed):
        window.document.select_set(2)
    assert window.parts.verdict.findings.list.count() >= 1
    assert window.parts.no_curves.isVisible()
    press(qtbot, window, "next_finding")
    assert window.parts.drawing.selected_finding == 0
    field = window.document.shape.findings[0].field
    qtbot.keyClick(window.parts.verdict.findings.list, Qt.Key.Key_Return)
    assert window.parts.sliders.editors[field].entry.hasFocus()
    with qtbot.waitSignal(window.document.channel_changed):
        window.document.select_set(0)
    assert window.parts.curves.isVisible()


def test_a_finding_picked_on_the_drawing_is_shown_in_the_list(window, chip, qtbot):
    window.files.open_path(chip)
    window.document.select_set(2)
    window.document.settle()
    window.parts.drawing.show_finding(0)
    assert window.parts.verdict.findings.list.currentRow() == 0


def test_sets_by_keyboard(window, chip, qtbot):
    window.files.open_path(chip)
    press(qtbot, window, "copy_set")
    press(qtbot, window, "move_later")
    assert [each.name for each in window.document.project.sets] == ["Alpha", "Beta", "Alpha 2", "Blocked"]
    press(qtbot, window, "previous_set")
    assert window.document.current_set.name == "Beta"
    press(qtbot, window, "remove_set")
    assert [each.name for each in window.document.project.sets] == ["Alpha", "Alpha 2", "Blocked"]


def test_the_last_set_cannot_go(window, qtbot):
    press(qtbot, window, "remove_set")
    assert len(window.document.project.sets) == 1
    assert "at least one" in window.statusBar().currentMessage()


def test_comparing(window, chip, qtbot):
    window.files.open_path(chip)
    press(qtbot, window, "compare")
    assert window.parts.comparison.isVisible()
    assert window.parts.comparison.table.columnCount() == 3
    press(qtbot, window, "compare")
    assert window.parts.drawing.isVisible()


def test_units_change_everywhere(window):
    window.settings.set_unit("length", "mm")
    window.settings.set_unit("flow", "mL/min")
    assert window.parts.sliders.editors["flow_ul_min"].entry.text() == "1.2"
    assert "1.2 mL/min" in window.parts.verdict.condition_label.text()
    assert window.parts.sliders.editors["depth_um"].unit_label.text() == "mm"


def test_colours_change_at_once(window, qtbot):
    with qtbot.waitSignal(window.look.palette_changed):
        window.settings.set_scheme("dark")
    assert window.look.palette.is_dark


def test_dragging_the_operating_point_is_one_step_and_the_axes_stand_still(window):
    document = window.document
    before = document.assessment.estimate.flow_ul_min[-1]
    for flow in (1300.0, 1500.0, 1900.0):
        window.parts.curves.operating_flow_dragged.emit(flow)
        assert document.assessment.estimate.flow_ul_min[-1] == before
    window.parts.curves.operating_flow_set.emit(1950.0)
    assert document.operating.flow_ul_min == 1950.0
    assert document.undo_stack.count() == 1
    assert document.assessment.estimate.flow_ul_min[-1] > before
    window.parts.curves.operating_flow_set.emit(2100.0)
    assert document.undo_stack.count() == 2


def test_an_impossible_flow_from_the_curve_is_refused(window):
    window.parts.curves.operating_flow_set.emit(0.0)
    assert window.document.operating.flow_ul_min == 1200.0
    assert "'Flow' is 0" in window.statusBar().currentMessage()


def test_parts_are_reached_by_one_key(window, chip, qtbot):
    window.files.open_path(chip)
    window.document.select_set(2)
    window.document.settle()
    seen = []
    for _ in range(4):
        press(qtbot, window, "next_part")
        seen.append(QApplication.focusWidget())
    assert window.parts.sliders.editors["loop_angle_deg"].entry in seen
    assert window.parts.sets.view in seen
    assert window.parts.drawing in seen
    assert window.parts.verdict.findings.list in seen


def test_chip_details(window, qtbot):
    press(qtbot, window, "details")
    dialog = window.findChild(WordsDialog)
    dialog.entries["name"].setText("   ")
    dialog.accept()
    assert "give a name" in dialog.problem_label.text()
    dialog.entries["name"].setText("Rinse chip")
    dialog.entries["lab"].setText("Fernhollow Bench Fluidics")
    dialog.accept()
    assert window.document.project.name == "Rinse chip"
    assert "Rinse chip" in window.windowTitle()


def test_notes_of_a_set(window, qtbot):
    press(qtbot, window, "note_set")
    dialog = window.findChild(WordsDialog)
    dialog.entries["notes"].setPlainText("Second trial.")
    dialog.accept()
    assert window.document.current_set.notes == "Second trial."


def test_pages_open_and_close(window, qtbot):
    for name in ("keys", "cautions", "about"):
        window.actions_by_name[name].trigger()
        dialog = window.findChildren(PageDialog)[-1]
        assert dialog.page.toPlainText()
        qtbot.mouseClick(dialog.findChild(QPushButton), Qt.MouseButton.LeftButton)


def test_the_arrangement_comes_back(window, make_window):
    window.parts.setSizes([400, 700, 340])
    sizes = window.parts.sizes()
    window.close()
    assert make_window().parts.sizes() == pytest.approx(sizes, abs=30)


@pytest.mark.parametrize(
    ("room", "first"), [((1280, 720), (1280, 720)), ((1920, 1040), (1440, 900)), ((3840, 2160), (1440, 900))]
)
def test_the_first_window_fits_the_screen(room, first):
    assert first_size(QSize(*room)) == QSize(*first)


@pytest.mark.parametrize("size", [(1280, 720), (1600, 1000), (3840, 2160)])
def test_nothing_is_cut_off(window, chip, size):
    window.files.open_path(chip)
    window.resize(*size)
    QApplication.processEvents()
    assert (window.width(), window.height()) == size
    assert window.parts.drawing.width() > 0.4 * size[0]
    assert window.parts.drawing.height() > 0.4 * size[1]
    for panel in (window.parts.sliders, window.parts.verdict):
        assert panel.widget().width() <= panel.viewport().width()
        assert panel.widget().minimumSizeHint().width() <= panel.viewport().width()
