"""A picture of the window, made without a screen: ``python -m app.picture FILE TARGET.png``."""

from __future__ import annotations

import argparse
import os
import sys
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Callable

    from app.main_window import MainWindow


def render_window(
    path: Path | None,
    *,
    target_png: Path,
    width_px: int = 1600,
    height_px: int = 1000,
    scheme: str = "light",
    prepare: Callable[[MainWindow], object] | None = None,
) -> None:
    """Open a project in a window that nobody sees, and keep its picture.

    Parameters
    ----------
    path : Path or None
        Project; None for a new chip.
    target_png : Path
        Where the picture goes.
    width_px, height_px : int
        Size of the window.
    scheme : str
        ``light`` or ``dark``.
    prepare : callable, optional
        Given the window, to bring it into the wanted state.
    """
    from PySide6.QtCore import QCoreApplication, QEvent

    from app.look import Look, Scheme
    from app.main_window import MainWindow
    from app.panels.ask import Ask
    from app.settings import Settings, made_application
    from core.project import RecoveryStore

    program = made_application()
    look = Look(program, scheme=Scheme(scheme))
    with TemporaryDirectory() as folder:
        settings = Settings(Path(folder) / "settings.ini")
        window = MainWindow(settings=settings, look=look, recovery=RecoveryStore(Path(folder)), ask=Ask())
        for drawing in (window.parts.drawing, window.parts.chip_view):
            drawing.set_animated(False)
        window.resize(width_px, height_px)
        window.show()
        if path is not None:
            window.files.open_path(path)
        if prepare is not None:
            prepare(window)
        for _ in range(3):  # sizes settle, then the curves come
            program.processEvents()
        shown = program.activeModalWidget() or window
        shown.grab().save(str(target_png))
        window.document.undo_stack.set_clean()
        window.document.solved.mark_saved()
        window.close()
        window.deleteLater()
        QCoreApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete)


def main(arguments: list[str]) -> int:
    """Make one picture as the command line says."""
    parser = argparse.ArgumentParser(prog="python -m app.picture", description="Make a picture of the window.")
    parser.add_argument("file", type=Path, help="chip project")
    parser.add_argument("target", type=Path, help="picture to write (PNG)")
    parser.add_argument("--size", default="1600x1000", help="width x height in pixels (default: %(default)s)")
    parser.add_argument("--scheme", choices=("light", "dark"), default="light")
    parsed = parser.parse_args(arguments)
    width_px, height_px = (int(part) for part in parsed.size.split("x"))
    os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
    render_window(parsed.file, target_png=parsed.target, width_px=width_px, height_px=height_px, scheme=parsed.scheme)
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
