"""Work that would keep the window waiting, done in a thread, always with one ending."""

from __future__ import annotations

import logging
from enum import StrEnum
from threading import Event
from typing import TYPE_CHECKING, Any

from PySide6.QtCore import QObject, QThread, Signal

from core.errors import CoreError

if TYPE_CHECKING:
    from collections.abc import Callable

_LOG = logging.getLogger("sideloop")


class Ending(StrEnum):
    """How a piece of work came to its end."""

    DONE = "done"
    FAILED = "failed"
    CANCELLED = "cancelled"


class Cancelled(Exception):
    """Raised inside the work when the user has asked it to stop."""


class Reporter:
    """What the work is given to tell how far it is and to learn that it should stop."""

    def __init__(self, tell: Callable[[int, int, str], None]) -> None:
        self._tell = tell
        self._stop = Event()

    def __call__(self, step: int, total: int, text: str) -> None:
        """Tell progress; raises ``Cancelled`` when the user has asked to stop."""
        if self._stop.is_set():
            raise Cancelled
        self._tell(step, total, text)

    def ask_to_stop(self) -> None:
        """Let the next report end the work."""
        self._stop.set()


class BackgroundJob(QThread):
    """One piece of work in a thread of its own.

    Parameters
    ----------
    work : callable
        Takes a ``Reporter`` (call it with step, total, text) and returns the outcome.

    Signals
    -------
    progressed(int, int, str)
        Step, number of steps, what is being done.
    ended(object, object)
        Sent exactly once: the ``Ending``, and the outcome (done), the exception (failed) or None.
    """

    progressed = Signal(int, int, str)
    ended = Signal(object, object)

    def __init__(self, work: Callable[[Reporter], Any], parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._work = work
        self._reporter = Reporter(self.progressed.emit)
        self._outcome: tuple[Ending, object] = (Ending.CANCELLED, None)
        # QThread's own signal comes even if the thread dies, so that a waiting window never hangs.
        self.finished.connect(self._on_finished)
        if parent is not None:  # a thread must never outlive its object
            parent.destroyed.connect(self._on_parent_destroyed)

    def run(self) -> None:
        """Do the work (called by the thread itself)."""
        try:
            self._outcome = (Ending.DONE, self._work(self._reporter))
        except Cancelled:
            self._outcome = (Ending.CANCELLED, None)
        except Exception as error:  # told to the user by whoever started the work
            if not isinstance(error, CoreError | OSError):
                _LOG.exception("unexpected failure in background work")
            self._outcome = (Ending.FAILED, error)

    def cancel(self) -> None:
        """Ask the work to stop at its next report."""
        self._reporter.ask_to_stop()

    def _on_parent_destroyed(self) -> None:
        self.cancel()
        self.wait()

    def _on_finished(self) -> None:
        self.ended.emit(*self._outcome)


def sentence_of(error: object) -> str:
    """Return what to tell the user about a failure, in one sentence."""
    if isinstance(error, CoreError):
        return str(error)
    if isinstance(error, OSError):
        where = f" ({error.filename})" if error.filename else ""
        return f"The system refused: {error.strerror or error}{where}."
    return f"Something unexpected went wrong ({type(error).__name__}); nothing was written."
