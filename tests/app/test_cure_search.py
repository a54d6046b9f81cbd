"""The search for cures stays out of the way of the hand.

Truth: the rules said in the class's own words, with a search that the test itself lets go on.
"""

from __future__ import annotations

import threading

import pytest
from PySide6.QtCore import QObject

from app import cure_search
from app.assessment import Checked
from app.cure_search import CureSearch
from core.fabrication.shipped import shipped_process
from core.findings import Finding, Severity
from core.parameters import ChannelParameters

FOUND = (Finding(code="x", severity=Severity.ERROR, message="x", field="stages", cure=("stages", 3)),)
CHECKED = Checked(channel=ChannelParameters(), process=shipped_process("cast, film mask"))
OTHER = Checked(channel=ChannelParameters(stages=2), process=shipped_process("cast, film mask"))


class Slow:
    """A search that tries until it is let go, and remembers what it was asked."""

    def __init__(self):
        self.asked, self.go_on, self.tries = [], threading.Event(), threading.Event()

    def __call__(self, checked, on_try):
        self.asked.append(checked)
        while not self.go_on.wait(0.002):
            on_try()
            self.tries.set()
        return FOUND


@pytest.fixture
def slow(monkeypatch):
    slow = Slow()
    monkeypatch.setattr(cure_search, "cured_findings_of", slow)
    monkeypatch.setattr(cure_search, "_REST_MS", 10)
    yield slow
    slow.go_on.set()


@pytest.fixture
def search(qapp, slow):
    parent = QObject()
    yield CureSearch(parent)
    parent.deleteLater()


def test_what_was_found_is_told_and_kept(search, slow, qtbot):
    slow.go_on.set()
    assert search.cured(CHECKED) is None
    with qtbot.waitSignal(search.found):
        search.look_for(CHECKED)
        assert search.is_searching
    assert search.cured(CHECKED) == FOUND
    assert not search.is_searching
    search.look_for(CHECKED)
    assert not search.is_searching, "it is known"


def test_a_hand_that_moves_on_ends_the_search(search, slow, qtbot):
    search.look_for(CHECKED)
    qtbot.waitUntil(slow.tries.is_set)
    with qtbot.assertNotEmitted(search.found):
        search.look_for(None)
        qtbot.waitUntil(lambda: search._job is None)
    assert search.cured(CHECKED) is None
    assert not slow.go_on.is_set(), "it ended by itself"


def test_another_wish_is_looked_for_next(search, slow, qtbot):
    search.look_for(CHECKED)
    qtbot.waitUntil(slow.tries.is_set)
    search.look_for(OTHER)
    qtbot.waitUntil(lambda: OTHER in slow.asked)
    with qtbot.waitSignal(search.found):
        slow.go_on.set()
    assert search.cured(OTHER) == FOUND
    assert search.cured(CHECKED) is None


def test_while_the_hand_moves_nothing_is_begun(search, slow, qtbot):
    for _ in range(5):
        search.look_for(CHECKED)
        search.look_for(None)
    assert search._job is None
    assert slow.asked == []


def test_a_search_that_fails_is_not_begun_again(search, slow, qtbot, monkeypatch):
    def fail(_checked, _on_try):
        raise RuntimeError("a defect")

    monkeypatch.setattr(cure_search, "cured_findings_of", fail)
    with qtbot.waitSignal(search.found):
        search.look_for(CHECKED)
    assert search.cured(CHECKED) == ()
    search.look_for(CHECKED)
    assert not search.is_searching
