"""The page on which the process is chosen and edited.

Truth: the shipped values and their sources, and the rules that the process itself keeps.
"""

from __future__ import annotations

import pytest
from PySide6.QtCore import Qt

from app.panels.process import ProcessPanel
from app.shown_values import DIFFERENT
from core.fabrication.process import PROCESS_FIELDS, ProcessKind
from core.fabrication.shipped import CONFIRM, SOURCES, about, cautions_of, shipped_process


@pytest.fixture
def panel(qtbot, document, settings):
    panel = ProcessPanel(document, settings)
    qtbot.addWidget(panel)
    panel.resize(330, 1400)
    with qtbot.waitExposed(panel):
        panel.show()
    return panel


def typed(qtbot, editor, text):
    editor.entry.setFocus()
    editor.entry.selectAll()
    qtbot.keyClicks(editor.entry, text)
    qtbot.keyClick(editor.entry, Qt.Key.Key_Return)


def chosen(qtbot, panel, kind):
    """Choose a kind by key, as with the list open."""
    panel.kind_box.setFocus()
    index = panel.kind_box.findData(str(kind))
    step = Qt.Key.Key_Down if index > panel.kind_box.currentIndex() else Qt.Key.Key_Up
    while panel.kind_box.currentIndex() != index:
        qtbot.keyClick(panel.kind_box, step)


@pytest.mark.parametrize("kind", ProcessKind)
def test_every_kind_can_be_chosen_by_key(panel, qtbot, document, kind):
    chosen(qtbot, panel, kind)
    assert document.process == shipped_process(kind)
    assert panel.about_label.text() == about(kind)
    assert all(caution in panel.cautions_label.text() for caution in cautions_of(kind))
    assert panel.cautions_label.isVisible()
    assert CONFIRM in panel.confirm_label.text()
    assert panel.confirm_label.isVisible()
    assert not panel.put_back_button.isVisible()
    assert document.undo_stack.count() <= 1, "going through the list by key is one step"
    document.undo_stack.undo()
    assert panel.kind_box.currentData() == "cast, film mask"


def test_every_value_has_a_row_that_tells_where_it_comes_from(panel):
    assert set(panel.editors) == set(PROCESS_FIELDS) - {"kind"}
    for name, source in SOURCES[ProcessKind.CAST_FILM].items():
        tip = panel.editors[name].toolTip()
        assert PROCESS_FIELDS[name].help in tip
        assert f"({source})" in tip
        assert "Allowed" in tip


def test_what_this_kind_cannot_have_has_no_row(panel, document):
    """Truth: nothing is cut away by a beam, and no tool runs, where silicone is cast from resist."""
    hidden = {"kerf_um", "tool_diameter_um", "undercut_ratio"}
    assert not any(panel.editors[name].isVisible() for name in hidden)
    assert panel.editors["tone"].isVisible()
    document.choose_process("laser-cut film")
    assert panel.editors["kerf_um"].isVisible()
    assert not panel.editors["tone"].isVisible(), "cut lines are cut"
    document.choose_process("milled mould")
    assert panel.editors["tool_diameter_um"].isVisible()


def test_an_edited_value_is_marked_and_put_back(panel, qtbot, document):
    editor = panel.editors["min_width_um"]
    assert not editor.reset_button.isVisible()
    typed(qtbot, editor, "70")
    assert document.process.min_width_um == 70.0
    assert editor.name_label.text() == f"{DIFFERENT} Smallest width"
    assert panel.put_back_button.text() == "Put 1 changed value &back"
    typed(qtbot, panel.editors["max_depth_um"], "150")
    assert panel.put_back_button.text() == "Put 2 changed values &back"
    qtbot.mouseClick(editor.reset_button, Qt.MouseButton.LeftButton)
    assert document.process.min_width_um == 50.0
    assert editor.name_label.text() == "Smallest width"
    qtbot.mouseClick(panel.put_back_button, Qt.MouseButton.LeftButton)
    assert document.process == shipped_process("cast, film mask")
    assert not panel.put_back_button.isVisible()
    document.undo_stack.undo()
    assert document.process.max_depth_um == 150.0


def test_putting_back_is_one_step(panel, qtbot, document):
    document.change_process({"min_width_um": 70, "min_gap_um": 70, "tone": "drawn shapes are DARK"})
    assert document.process.tone == "drawn shapes are DARK"
    panel.put_back()
    assert document.process == shipped_process("cast, film mask")
    assert document.undo_stack.count() == 2


def test_the_default_follows_the_kind(panel, document):
    document.choose_process("laser-cut film")
    shipped = shipped_process("laser-cut film")
    for name, editor in panel.editors.items():
        assert editor.field.default == getattr(shipped, name)
        assert not editor.reset_button.isVisible()


@pytest.mark.parametrize(
    ("name", "text", "words"),
    [
        ("min_depth_um", "400", ["Smallest depth is 400", "'Largest depth', which is 200", "5 µm stays"]),
        ("max_depth_um", "2", ["'Smallest depth'", "200 µm stays"]),
        ("collapse_width_to_depth", "4", ["'Width to depth, careful'", "20 stays"]),
        ("min_width_um", "thin", ["Smallest width is 'thin'", "50 µm stays"]),
        ("shrink_percent", "30", ["0 to 20 %", "1.5 % stays"]),
    ],
)
def test_values_that_contradict_are_told_at_their_field_and_nothing_is_lost(panel, qtbot, document, name, text, words):
    before = document.project
    typed(qtbot, panel.editors[name], text)
    assert document.project is before
    for word in words:
        assert word in panel.editors[name].problem_label.text()
    assert sum(editor.problem_label.isVisible() for editor in panel.editors.values()) == 1
    document.choose_process("milled channel")
    assert not panel.editors[name].problem_label.isVisible()


def test_lengths_follow_the_unit(panel, qtbot, document, settings):
    settings.set_unit("length", "mm")
    assert panel.editors["min_width_um"].entry.text() == "0.05"
    typed(qtbot, panel.editors["min_width_um"], "0.06")
    assert document.process.min_width_um == pytest.approx(60.0)


def test_the_wheel_never_changes_the_kind(panel, document):
    from PySide6.QtCore import QPoint, QPointF
    from PySide6.QtGui import QWheelEvent
    from PySide6.QtWidgets import QApplication

    middle = QPointF(panel.kind_box.rect().center())
    event = QWheelEvent(
        middle, middle, QPoint(), QPoint(0, -120), Qt.MouseButton.NoButton,
        Qt.KeyboardModifier.NoModifier, Qt.ScrollPhase.NoScrollPhase, False,
    )  # fmt: skip
    QApplication.sendEvent(panel.kind_box, event)
    assert document.process.kind == "cast, film mask"
