"""The real questions: every button means what it says, and Escape loses nothing."""

from __future__ import annotations

import pytest
from PySide6.QtCore import Qt, QTimer
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QWidget

from app.panels.ask import Ask, Recovery, Unsaved


@pytest.fixture
def parent(qtbot):
    parent = QWidget()
    qtbot.addWidget(parent)
    return parent


def answering(act):
    """Do something to the question as soon as it is open."""

    def do():
        act(QApplication.activeModalWidget())

    QTimer.singleShot(0, QApplication.instance(), do)


def press(words):
    def act(box):
        (button,) = (b for b in box.buttons() if b.text().replace("&", "") == words)
        button.click()

    return act


def escape(box):
    QTest.keyClick(box, Qt.Key.Key_Escape)


@pytest.mark.parametrize(
    ("act", "answer"),
    [
        (press("Save"), Unsaved.SAVE),
        (press("Discard changes"), Unsaved.DISCARD),
        (press("Stay here"), Unsaved.STAY),
        (escape, Unsaved.STAY),
    ],
)
def test_unsaved_changes(parent, act, answer):
    answering(act)
    assert Ask().unsaved(parent, "Bench chip") is answer


@pytest.mark.parametrize(
    ("act", "answer"),
    [
        (press("Recover it"), Recovery.RECOVER),
        (press("Throw it away"), Recovery.DISCARD),
        (press("Ask me later"), Recovery.LATER),
        (escape, Recovery.LATER),
    ],
)
def test_recovery(parent, act, answer):
    answering(act)
    assert Ask().recovery(parent, "A copy was kept.") is answer


def test_several_problems_are_listed(parent):
    seen = []

    def act(box):
        seen.append((box.text(), box.informativeText()))
        box.close()

    answering(act)
    Ask().tell(parent, "Not opened", "2 problems", ("depth_um is deep", "stages is many"))
    assert seen[0][0] == "2 problems"
    assert "depth_um is deep" in seen[0][1]
    assert "stages is many" in seen[0][1]
