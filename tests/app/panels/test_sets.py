"""The row of sets: chosen, renamed, put in order; the model obeys Qt's own rules for models."""

from __future__ import annotations

import pytest
from PySide6.QtCore import QModelIndex, Qt

from app.look import DARK, LIGHT
from app.panels.sets import SetsPanel
from app.panels.sets_model import VERDICT_ROLE


@pytest.fixture
def panel(qtbot, document):
    panel = SetsPanel(document, LIGHT, ())
    qtbot.addWidget(panel)
    panel.resize(700, 110)
    with qtbot.waitExposed(panel):
        panel.show()
    return panel


def rows(panel):
    return [panel.model.index(row).data() for row in range(panel.model.rowCount())]


def test_model_obeys_the_rules(panel, qtmodeltester, document):
    qtmodeltester.check(panel.model)
    document.copy_set()
    document.rename_set(0, "Omega")
    qtmodeltester.check(panel.model)


def test_rows_name_score_and_drawing(panel, document):
    assert rows(panel) == ["Alpha", "Beta", "Blocked"]
    assert panel.model.index(0).data(VERDICT_ROLE) == f"Di {document.assessment.score.diodicity:.3f}"
    assert panel.model.index(2).data(VERDICT_ROLE) == "no score"
    assert not panel.model.index(0).data(Qt.ItemDataRole.DecorationRole).isNull()


def test_choosing_takes_in_hand(panel, qtbot, document):
    centre = panel.view.visualRect(panel.model.index(1)).center()
    qtbot.mouseClick(panel.view.viewport(), Qt.MouseButton.LeftButton, pos=centre)
    assert document.current_set.name == "Beta"
    qtbot.keyClick(panel.view, Qt.Key.Key_Left)
    assert document.current_set.name == "Alpha"


def test_the_row_follows_the_document(panel, document):
    document.select_set(2)
    assert panel.view.currentIndex().row() == 2
    document.copy_set(0)
    assert rows(panel) == ["Alpha", "Alpha 2", "Beta", "Blocked"]
    assert panel.view.currentIndex().row() == 1
    assert panel.view.selectionModel().isRowSelected(1)
    document.undo_stack.undo()
    assert rows(panel) == ["Alpha", "Beta", "Blocked"]
    assert panel.view.currentIndex().row() == 2


def test_renaming_in_place(panel, qtbot, document):
    panel.begin_rename()
    editor = panel.view.indexWidget(panel.model.index(0)) or panel.view.viewport().focusWidget()
    editor.selectAll()
    qtbot.keyClicks(editor, "Omega")
    with qtbot.waitSignal(document.project_changed):
        qtbot.keyClick(editor, Qt.Key.Key_Return)
    assert document.project.sets[0].name == "Omega"
    assert rows(panel)[0] == "Omega"


def test_a_taken_name_is_refused(panel, qtbot, document):
    with qtbot.waitSignal(panel.model.name_refused) as refused:
        assert not panel.model.setData(panel.model.index(0), "BETA")
    assert "another name" in str(refused.args[0])
    assert document.project.sets[0].name == "Alpha"


def test_a_drop_moves_the_set(panel, qtbot, document):
    with qtbot.waitSignal(document.project_changed):
        panel.model.moveRows(QModelIndex(), 0, 1, QModelIndex(), 2)  # as the view does at a drop before the third
    assert rows(panel) == ["Beta", "Alpha", "Blocked"]
    assert document.current_set.name == "Alpha"
    with qtbot.waitSignal(document.project_changed):
        panel.model.moveRows(QModelIndex(), 2, 1, QModelIndex(), 0)
    assert rows(panel) == ["Blocked", "Beta", "Alpha"]
    assert document.undo_stack.count() == 2


def test_drawings_follow_once_the_hand_rests(panel, qtbot, document):
    picture = panel.model.index(0).data(Qt.ItemDataRole.DecorationRole)
    with qtbot.waitSignal(panel.model.dataChanged):
        document.change_channel({"loop_radius_um": 600})
    assert panel.model.index(0).data(Qt.ItemDataRole.DecorationRole).cacheKey() != picture.cacheKey()


def test_other_colours_give_other_drawings(panel, qtbot):
    picture = panel.model.index(0).data(Qt.ItemDataRole.DecorationRole).toImage()
    panel.use_palette(DARK)
    assert panel.model.index(0).data(Qt.ItemDataRole.DecorationRole).toImage() != picture
