"""Work done at once, then at most once in an interval, and never forgotten."""

from __future__ import annotations

from PySide6.QtCore import QObject, QTimer

from app.throttle import Throttle


def test_first_at_once_then_once_more_for_all_the_rest(qapp, qtbot):
    done = []
    parent = QObject()
    throttle = Throttle(lambda: done.append(1), interval_ms=20, parent=parent)
    throttle.call()
    assert len(done) == 1
    for _ in range(5):
        throttle.call()
    assert len(done) == 1
    timer = throttle.findChild(QTimer)
    with qtbot.waitSignal(timer.timeout):
        pass
    assert len(done) == 2
    with qtbot.waitSignal(timer.timeout):
        pass
    assert len(done) == 2, "nothing was asked for in between"
    throttle.call()
    assert len(done) == 3
