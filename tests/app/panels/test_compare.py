"""Sets side by side: every field, the scores, and a sign where they differ."""

from __future__ import annotations

import pytest
from PySide6.QtCore import Qt

from app.look import LIGHT
from app.panels.compare import DIFFERENT, ComparePanel
from core.parameters import CHANNEL_FIELDS


@pytest.fixture
def panel(qtbot, document, settings):
    panel = ComparePanel(document, settings, LIGHT)
    qtbot.addWidget(panel)
    panel.resize(800, 600)
    with qtbot.waitExposed(panel):
        panel.show()
    return panel


def titles(panel):
    return [panel.table.verticalHeaderItem(row).text() for row in range(panel.table.rowCount())]


def texts(panel, title):
    row = titles(panel).index(title)
    return [panel.table.item(row, column).text() for column in range(panel.table.columnCount())]


def test_scores_and_fields_of_every_set(panel, document):
    assert panel.table.columnCount() == 3
    assert texts(panel, "Di")[0] == f"Di {document.assessment.score.diodicity:.3f}".removeprefix("Di ")
    assert texts(panel, "Di")[2] == "\N{EM DASH}"
    for field in CHANNEL_FIELDS.values():
        assert any(title.endswith(field.label) for title in titles(panel))


def test_differences_carry_a_sign(panel, document):
    assert texts(panel, f"{DIFFERENT} Loop radius") == ["320 µm", f"{DIFFERENT} 400 µm", f"{DIFFERENT} 20 µm"]
    assert texts(panel, "Depth") == ["200 µm"] * 3
    document.select_set(1)
    assert texts(panel, f"{DIFFERENT} Loop radius") == [f"{DIFFERENT} 320 µm", "400 µm", f"{DIFFERENT} 20 µm"]
    assert "in hand" in panel.table.horizontalHeaderItem(1).text()


def test_only_what_differs(panel):
    panel.only_different.setChecked(True)
    assert "Depth" not in titles(panel)
    assert f"{DIFFERENT} Stages" in titles(panel)


def test_each_set_has_a_drawing(panel):
    for column in range(3):
        assert not panel.table.item(0, column).data(Qt.ItemDataRole.DecorationRole).isNull()


def test_units_are_followed(panel, settings):
    settings.set_unit("length", "mm")
    assert texts(panel, "Depth") == ["0.2 mm"] * 3


def test_enter_takes_a_set_in_hand(panel, qtbot):
    panel.table.setCurrentCell(3, 1)
    with qtbot.waitSignal(panel.set_requested) as asked:
        panel.table.itemActivated.emit(panel.table.currentItem())
    assert asked.args == [1]
