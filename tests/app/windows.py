"""Windows for tests: fresh settings, ready answers, closed again at the end."""

from __future__ import annotations

import pytest

from tests.app.answers import ReadyAnswers


@pytest.fixture
def make_window(qtbot, qapp, tmp_path):
    """Return a function that opens a window; all of them share one settings file."""
    from app.look import Look, Scheme
    from app.main_window import MainWindow
    from app.panels.ask import Unsaved
    from app.settings import Settings
    from core.project import RecoveryStore

    made = []

    def make():
        look = Look(qapp, scheme=Scheme.LIGHT)
        window = MainWindow(
            settings=Settings(tmp_path / "settings.ini"),
            look=look,
            recovery=RecoveryStore(tmp_path / "recovery"),
            ask=ReadyAnswers(),
        )
        made.append((window, look))
        qtbot.addWidget(window)
        for drawing in (window.parts.drawing, window.parts.chip_view):
            drawing.set_animated(False)
        window.resize(1600, 1000)
        with qtbot.waitExposed(window):
            window.show()
        window.activateWindow()
        return window

    yield make
    for window, look in made:
        window.ask.unsaved_answer = Unsaved.DISCARD
        window.close()
        look.deleteLater()
    qapp.setStyleSheet("")


@pytest.fixture
def window(make_window):
    return make_window()
