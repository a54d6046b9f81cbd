"""A picture of the window without a screen, and the window's own start."""

from __future__ import annotations

import pytest
from PySide6.QtCore import QTimer
from PySide6.QtGui import QImage
from PySide6.QtWidgets import QApplication

from app import opening
from app.main_window import MainWindow
from app.picture import main, render_window
from core.project import new_project, write_project
from tests.app.answers import ReadyAnswers

pytestmark = pytest.mark.qt_log_ignore("propagateSizeHints")


@pytest.fixture
def chip(tmp_path):
    path = tmp_path / "bench.sideloop"
    write_project(new_project(), path)
    return path


@pytest.mark.parametrize("scheme", ["light", "dark"])
def test_a_picture_of_the_asked_size_and_colours(qapp, chip, tmp_path, scheme):
    target = tmp_path / "window.png"
    assert main([str(chip), str(target), "--size", "1280x720", "--scheme", scheme]) == 0
    image = QImage(str(target))
    assert (image.width(), image.height()) == (1280, 720)
    corner = image.pixelColor(2, 718).lightness()
    assert (corner < 90) == (scheme == "dark")


def test_a_new_chip_and_a_wanted_state(qapp, tmp_path):
    seen = []
    render_window(None, target_png=tmp_path / "window.png", prepare=lambda window: seen.append(window.document.path))
    assert seen == [None]
    assert (tmp_path / "window.png").stat().st_size > 10_000


def test_the_program_starts_opens_and_ends(qapp, chip, monkeypatch, tmp_path):
    hooks = []
    monkeypatch.setattr(opening, "Ask", ReadyAnswers)
    monkeypatch.setattr(opening, "user_folder", lambda: tmp_path / "user")
    monkeypatch.setattr(opening.FailureHook, "install", lambda hook: hooks.append(hook))
    monkeypatch.setattr(opening, "start_log", lambda path: None)

    def leave():
        (window,) = (w for w in QApplication.topLevelWidgets() if isinstance(w, MainWindow))
        titles.append(window.windowTitle())
        window.close()
        window.deleteLater()

    titles = []
    QTimer.singleShot(0, qapp, leave)
    assert opening.run_window(chip) == 0
    assert "bench.sideloop" in titles[0]
    assert len(hooks) == 1
