"""Work that may be done less often than it is asked for, at once when it has not been done lately."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, QTimer

if TYPE_CHECKING:
    from collections.abc import Callable


class Throttle(QObject):
    """Does its work at the first call at once and then at most once in an interval; the last call counts.

    Parameters
    ----------
    work : callable
        What is done; it looks up for itself what is current.
    interval_ms : int
        Least time between two times [ms].
    """

    def __init__(self, work: Callable[[], object], *, interval_ms: int, parent: QObject) -> None:
        super().__init__(parent)
        self._work = work
        self._is_wanted = False
        self._rest = QTimer(self, singleShot=True, interval=interval_ms)
        self._rest.timeout.connect(self._on_rest_timeout)

    def call(self) -> None:
        """Ask for the work."""
        if self._rest.isActive():
            self._is_wanted = True
        else:
            self._do()

    def _do(self) -> None:
        self._is_wanted = False
        self._work()
        self._rest.start()

    def _on_rest_timeout(self) -> None:
        if self._is_wanted:
            self._do()
