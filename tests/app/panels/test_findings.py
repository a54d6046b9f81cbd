"""The list of findings: order kept, stepped by keys, signs besides colour."""

from __future__ import annotations

import pytest
from PySide6.QtCore import Qt

from app.panels.findings import FindingsPanel
from core.findings import Finding, Severity

SHAPE = (
    Finding(code="one", severity=Severity.ERROR, message="loop_radius_um is too small", field="loop_radius_um"),
    Finding(code="two", severity=Severity.WARNING, message="the nose is sharp", field="nose_radius_um"),
)
FINDINGS = tuple(("Alpha", finding) for finding in SHAPE)


@pytest.fixture
def panel(qtbot):
    panel = FindingsPanel()
    qtbot.addWidget(panel)
    panel.resize(280, 400)
    with qtbot.waitExposed(panel):
        panel.show()
    return panel


def test_nothing_found_is_said(panel):
    assert "No findings" in panel.heading.text()
    assert not panel.list.isVisible()


def test_findings_carry_signs_and_screen_words(panel):
    panel.show_findings(FINDINGS, home="Alpha")
    assert panel.heading.text() == "Findings: 1 blocking, 1 to note"
    assert panel.list.item(0).text() == "\N{BLACK DIAMOND} Blocks: 'Loop radius' is too small"
    assert panel.list.item(1).text().startswith("\N{WHITE UP-POINTING TRIANGLE} Note: ")


def test_stepping_goes_round(panel, qtbot):
    panel.show_findings(FINDINGS, home="Alpha")
    seen = []
    panel.finding_chosen.connect(seen.append)
    for step in (1, 1, 1, -1):
        panel.step(step)
    assert seen == [0, 1, 0, 1]


def test_keys_step_and_enter_asks_for_the_field(panel, qtbot):
    panel.show_findings(FINDINGS, home="Alpha")
    panel.point_at(0)
    panel.list.setFocus()
    qtbot.keyClick(panel.list, Qt.Key.Key_Down)
    with qtbot.waitSignal(panel.field_requested) as asked:
        qtbot.keyClick(panel.list, Qt.Key.Key_Return)
    assert asked.args == ["nose_radius_um"]


def test_the_finding_pointed_at_stays_when_others_go(panel):
    panel.show_findings(FINDINGS, home="Alpha")
    panel.point_at(1)
    panel.show_findings(FINDINGS[1:])
    assert panel.list.currentRow() == 0
    panel.show_findings(FINDINGS[:1])
    assert panel.list.currentRow() == -1


def test_long_lines_are_shown_whole(panel):
    long = Finding(code="x", severity=Severity.ERROR, message="far too long " * 12, field="stages")
    panel.show_findings([("", long)])
    assert panel.list.height() > 4 * panel.list.fontMetrics().height()
    assert panel.list.verticalScrollBar().maximum() == 0
