"""One line on a terminal that says how far a long answer is; nothing where nobody looks."""

from __future__ import annotations

import contextlib
import sys
import time
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

_ERASE = "\r\033[K"
_SHORTEST_WAIT_S = 0.1
_EARLIEST_GUESS_S = 1.0  # before this no time left is told
_WIDTH = 78


@contextlib.contextmanager
def told_progress() -> Iterator[Callable[[int, int, str], None] | None]:
    """Give a ``report(step, total, text)`` that writes to standard error, if that is a terminal; else None."""
    if not sys.stderr.isatty():
        yield None
        return
    line = ProgressLine()
    try:
        yield line.report
    finally:
        line.erase()


class ProgressLine:
    """Writes over one line of standard error."""

    def __init__(self) -> None:
        self._began = self._told = time.monotonic()

    def report(self, step: int, total: int, text: str) -> None:
        """Tell how far it is, at most some times in a second."""
        now = time.monotonic()
        if now - self._told < _SHORTEST_WAIT_S:
            return
        self._told = now
        self._write(f"{_ERASE}{progress_text(step, total, text, elapsed_s=now - self._began)[:_WIDTH]}")

    def erase(self) -> None:
        """Leave an empty line for what comes."""
        self._write(_ERASE)

    @staticmethod
    def _write(text: str) -> None:
        with contextlib.suppress(OSError):
            sys.stderr.write(text)
            sys.stderr.flush()


def progress_text(step: int, total: int, text: str, *, elapsed_s: float) -> str:
    """Return percent done, time left as far as it can be told, and what is being done."""
    left = time_left_text(step, total, elapsed_s=elapsed_s)
    return f"{100 * step // max(total, 1):3d} %  {left + ', ' if left else ''}{text}"


def time_left_text(step: int, total: int, *, elapsed_s: float) -> str:
    """Return the time left in words, or nothing while it is too early to tell.

    Examples
    --------
    >>> time_left_text(250, 1000, elapsed_s=10.0)
    'about 30 s left'
    >>> time_left_text(0, 1000, elapsed_s=10.0)
    ''
    """
    if step <= 0 or elapsed_s < _EARLIEST_GUESS_S or step > total:
        return ""
    left_s = elapsed_s * (total - step) / step
    return f"about {left_s:.0f} s left" if left_s < 90 else f"about {left_s / 60:.0f} min left"
