"""An error of the program itself: one sentence, the work kept, the details in the log only."""

from __future__ import annotations

import logging
import sys

import pytest

from app.failures import FailureHook, start_log


@pytest.fixture
def log_path(tmp_path):
    logger = logging.getLogger("sideloop")
    before = list(logger.handlers)
    start_log(tmp_path / "logs" / "sideloop.log")
    yield tmp_path / "logs" / "sideloop.log"
    for handler in [h for h in logger.handlers if h not in before]:
        handler.close()
        logger.removeHandler(handler)


def caught(error):
    try:
        raise error
    except Exception:
        return sys.exc_info()


def test_told_once_logged_in_full_and_kept(log_path):
    kept, told = [], []

    def tell(title, text):
        told.append((title, text))
        hook.take(*caught(RuntimeError("again, while the sentence is shown")))

    hook = FailureHook(keep_work=lambda: kept.append(1), tell=tell, log_path=log_path)
    hook.take(*caught(ZeroDivisionError("details for the log")))
    assert len(kept) == 1
    assert len(told) == 1
    assert "Traceback" not in told[0][1]
    assert "details for the log" not in told[0][1]
    assert str(log_path) in told[0][1]
    log = log_path.read_text()
    assert "ZeroDivisionError: details for the log" in log
    assert "again, while the sentence is shown" in log


def test_it_takes_over_from_python(monkeypatch, log_path):
    monkeypatch.setattr(sys, "excepthook", sys.excepthook)
    hook = FailureHook(keep_work=lambda: None, tell=lambda *_: None, log_path=log_path)
    hook.install()
    assert sys.excepthook == hook.take


def test_no_log_is_no_failure(tmp_path):
    (tmp_path / "file").write_text("")
    start_log(tmp_path / "file" / "sideloop.log")
