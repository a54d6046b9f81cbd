"""Work in a thread: one ending, always; cancelled work is no failure."""

from __future__ import annotations

import threading

import pytest
import shiboken6
from PySide6.QtWidgets import QWidget

from app.background import BackgroundJob, Ending, sentence_of
from core.errors import ExportError


def finished(qtbot, job):
    with qtbot.waitSignal(job.ended, timeout=5000) as ended:
        job.start()
    job.wait()
    return ended.args


def test_done(qapp, qtbot):
    steps = []
    job = BackgroundJob(lambda report: [report(step, 2, "busy") for step in range(2)] and "outcome")
    job.progressed.connect(lambda *step: steps.append(step))
    assert finished(qtbot, job) == [Ending.DONE, "outcome"]
    assert steps == [(0, 2, "busy"), (1, 2, "busy")]


def test_failed(qapp, qtbot):
    def work(_report):
        raise ExportError("the disk is full")

    ending, error = finished(qtbot, BackgroundJob(work))
    assert ending is Ending.FAILED
    assert sentence_of(error) == "the disk is full"


def test_cancelled_at_the_next_report(qapp, qtbot):
    reached, go_on = threading.Event(), threading.Event()

    def work(report):
        report(0, 2, "first")
        reached.set()
        go_on.wait(5)
        report(1, 2, "second")
        pytest.fail("cancelled work must not go on")

    job = BackgroundJob(work)
    with qtbot.waitSignal(job.ended, timeout=5000) as ended:
        job.start()
        assert reached.wait(5)
        job.cancel()
        go_on.set()
    job.wait()
    assert ended.args == [Ending.CANCELLED, None]


def test_a_job_ends_before_its_parent_is_gone(qapp, qtbot):
    reached, ended = threading.Event(), threading.Event()

    def work(report):
        reached.set()
        while True:
            try:
                report(0, 1, "busy")
            except BaseException:
                ended.set()
                raise

    parent = QWidget()
    job = BackgroundJob(work, parent)
    job.start()
    assert reached.wait(5)
    shiboken6.delete(parent)
    assert ended.is_set()


def test_failures_are_told_in_one_sentence():
    assert "refused" in sentence_of(PermissionError(13, "Permission denied", "/somewhere"))
    text = sentence_of(ZeroDivisionError("secret detail"))
    assert "ZeroDivisionError" in text
    assert "\n" not in text
