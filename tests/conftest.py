"""What all tests share: Qt draws nowhere, and how hard hypothesis tries."""

from __future__ import annotations

import gc
import importlib.util
import os
from typing import TYPE_CHECKING

import pytest
from hypothesis import HealthCheck, settings

if TYPE_CHECKING:
    from collections.abc import Generator

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")  # no windows flash up, and focus is nobody else's

# No deadline: the machine may be busy. The same examples on every CI run: a red run can be repeated.
settings.register_profile("ci", deadline=None, derandomize=True, suppress_health_check=[HealthCheck.too_slow])
settings.register_profile("fast", deadline=None, max_examples=20)
settings.register_profile("search", deadline=None, max_examples=2000)
settings.load_profile("fast")


@pytest.hookimpl(wrapper=True)
def pytest_runtest_protocol(item: pytest.Item) -> Generator[None, object, object]:
    """Let Python's collector run between tests of the window only, as between events in the program: app/tidying.py."""
    if "qapp" not in getattr(item, "fixturenames", ()):
        return (yield)
    gc.disable()
    try:
        return (yield)
    finally:
        gc.enable()


def pytest_addoption(parser: pytest.Parser) -> None:
    """Know the settings of pytest-qt also where it is absent, because core is tested without Qt."""
    if importlib.util.find_spec("pytestqt") is None:
        parser.addini("qt_api", "unused without pytest-qt")
        parser.addini("qt_log_level_fail", "unused without pytest-qt")
