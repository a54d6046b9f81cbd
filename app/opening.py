"""How the window is opened and kept until the user closes it."""

from __future__ import annotations

from typing import TYPE_CHECKING

from app.failures import FailureHook, start_log
from app.look import Look, Scheme
from app.main_window import MainWindow
from app.panels.ask import Ask
from app.settings import Settings, made_application, user_folder
from app.tidying import Tidier
from core.project import RecoveryStore

if TYPE_CHECKING:
    from pathlib import Path


def run_window(path: Path | None) -> int:
    """Open the window and stay until it is closed.

    Parameters
    ----------
    path : Path or None
        A project to open; None for a new chip.

    Returns
    -------
    int
        Exit status of the window.
    """
    program = made_application()
    Tidier(program)
    folder = user_folder()
    start_log(folder / "sideloop.log")
    settings = Settings(folder / "settings.ini")
    look = Look(program, scheme=Scheme(settings.scheme))
    window = MainWindow(settings=settings, look=look, recovery=RecoveryStore(folder / "recovery"), ask=Ask())
    FailureHook(
        keep_work=window.files.keep_copy,
        tell=lambda title, text: window.ask.tell(window, title, text),
        log_path=folder / "sideloop.log",
    ).install()
    window.show()
    if path is not None:
        window.files.open_path(path)
    window.files.offer_recovery()
    return program.exec()
