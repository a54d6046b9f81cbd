"""Python's collector works between events only: nothing of Qt may end in another thread or under a lock of Qt."""

from __future__ import annotations

import gc
import threading
import weakref

import pytest

from app.tidying import Tidier


class Knot:
    """An object that only the collector can free."""

    def __init__(self) -> None:
        self.itself = self


@pytest.fixture
def tidier(qapp):
    made = Tidier()
    yield made
    made.end()
    gc.disable()  # as all tests of the window have it, see tests/conftest.py
    made.deleteLater()


def test_no_thread_collects_by_itself(tidier):
    freed_in = []
    knot = Knot()
    weakref.finalize(knot, lambda: freed_in.append(threading.current_thread()))
    del knot
    worker = threading.Thread(target=lambda: [Knot() for _ in range(100_000)])
    worker.start()
    worker.join()
    assert freed_in == []
    tidier.tidy()
    assert freed_in == [threading.main_thread()]


def test_what_is_due_is_collected_between_events(tidier, qtbot):
    knot = Knot()
    there = weakref.ref(knot)
    del knot
    [Knot() for _ in range(10_000)]
    qtbot.waitUntil(lambda: there() is None, timeout=3000)


def test_afterwards_the_collector_runs_again(qapp):
    Tidier().end()
    assert gc.isenabled()
    gc.disable()
