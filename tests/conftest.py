"""What all tests share: Qt draws nowhere, and how hard hypothesis tries."""

from __future__ import annotations

import importlib.util
import os
from typing import TYPE_CHECKING

from hypothesis import HealthCheck, settings

if TYPE_CHECKING:
    import pytest

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")  # no windows flash up, and focus is nobody else's

# No deadline: the machine may be busy. The same examples on every CI run: a red run can be repeated.
settings.register_profile("ci", deadline=None, derandomize=True, suppress_health_check=[HealthCheck.too_slow])
settings.register_profile("fast", deadline=None, max_examples=20)
settings.register_profile("search", deadline=None, max_examples=2000)
settings.load_profile("fast")


def pytest_addoption(parser: pytest.Parser) -> None:
    """Know the settings of pytest-qt also where it is absent, because core is tested without Qt."""
    if importlib.util.find_spec("pytestqt") is None:
        parser.addini("qt_api", "unused without pytest-qt")
        parser.addini("qt_log_level_fail", "unused without pytest-qt")
