"""For every test of the window: no screen, fresh settings, nothing left behind, no warning let by."""

from __future__ import annotations

import os
import sys
import threading
from pathlib import Path

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")

import pytest  # the platform is chosen before Qt is loaded


def pytest_collection_modifyitems(items):
    """Mark tests that use Qt, and let any warning of Qt fail them."""
    for item in items:
        if item.path.is_relative_to(Path(__file__).parent) and "qapp" in item.fixturenames:
            item.add_marker("gui")
            item.add_marker(pytest.mark.qt_log_level_fail("WARNING"))
            # said by the screenless platform about raising windows and about their least sizes
            item.add_marker(pytest.mark.qt_log_ignore("This plugin does not support", extend=True))


@pytest.fixture(autouse=True)
def fresh_settings(tmp_path, monkeypatch):
    """Keep settings and data of this user out of the test, and the test out of them."""
    for name in ("HOME", "XDG_CONFIG_HOME", "XDG_DATA_HOME", "XDG_CACHE_HOME", "XDG_STATE_HOME"):
        monkeypatch.setenv(name, str(tmp_path / "user"))
    from PySide6.QtCore import QSettings

    for form in (QSettings.Format.NativeFormat, QSettings.Format.IniFormat):
        QSettings.setPath(form, QSettings.Scope.UserScope, str(tmp_path / "user"))


@pytest.fixture(autouse=True)
def nothing_left_behind(request):
    """Fail a test that leaves a top-level widget or a thread."""
    threads = set(threading.enumerate())
    yield
    left = [t for t in threading.enumerate() if t not in threads and not t.daemon]
    assert not left, f"threads left running: {left}"
    if "qapp" not in request.fixturenames or "PySide6.QtWidgets" not in sys.modules:
        return
    from PySide6.QtCore import QCoreApplication, QEvent

    QCoreApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete)
    widgets = request.getfixturevalue("qapp").topLevelWidgets()
    assert not widgets, f"windows left behind: {widgets}"
