"""When the program itself fails: one sentence for the user, the details in a log, the work kept."""

from __future__ import annotations

import logging
import sys
from logging.handlers import RotatingFileHandler
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Callable
    from pathlib import Path
    from types import TracebackType

_LOG = logging.getLogger("sideloop")
_LARGEST_LOG_BYTES = 500_000


def start_log(path: Path) -> None:
    """Write the program's log to a file; without one when the disk does not allow it."""
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        handler = RotatingFileHandler(path, maxBytes=_LARGEST_LOG_BYTES, backupCount=1, encoding="utf-8", delay=True)
    except OSError:
        return
    handler.setFormatter(logging.Formatter("%(asctime)s %(levelname)s %(message)s"))
    _LOG.addHandler(handler)


class FailureHook:
    """Takes unexpected exceptions that nothing else has caught.

    Parameters
    ----------
    keep_work : callable
        Keeps a recovery copy.
    tell : callable
        Shows a title and one sentence.
    log_path : Path
        Named in the sentence.
    """

    def __init__(self, *, keep_work: Callable[[], object], tell: Callable[[str, str], object], log_path: Path) -> None:
        self._keep_work, self._tell, self._log_path = keep_work, tell, log_path
        self._is_telling = False

    def install(self) -> None:
        """Take all exceptions from now on."""
        sys.excepthook = self.take

    def take(self, kind: type[BaseException], error: BaseException, trace: TracebackType | None) -> None:
        """Log the failure, keep the work, tell the user once."""
        if issubclass(kind, KeyboardInterrupt):
            sys.__excepthook__(kind, error, trace)
            return
        _LOG.error("unexpected failure", exc_info=(kind, error, trace))
        if self._is_telling:  # one sentence is enough, however often a timer repeats the failure
            return
        self._is_telling = True
        try:
            self._keep_work()
            self._tell(
                "Something went wrong",
                "The program met an error of its own, not of yours; a copy of your work is kept. "
                f"Save it and start again. Details: {self._log_path}",
            )
        finally:
            self._is_telling = False
