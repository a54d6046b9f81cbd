"""A child that waits for its request, so that the first answer need not wait for the child."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QEvent, QObject, QTimer

from app.solving.process import SolveProcess

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from PySide6.QtWidgets import QWidget

_LONGEST_WAIT_MS = 60_000  # a waiting child holds memory


class WaitingChild(QObject):
    """Wakes a child when the pointer comes near what asks for a solve, and ends it when nothing is asked.

    Parameters
    ----------
    command : callable
        Returns what a child would run, or None while none is wanted.
    near : QWidget
        Where the pointer comes before a solve is asked for.
    """

    def __init__(self, command: Callable[[], Sequence[str] | None], *, near: QWidget) -> None:
        super().__init__(near)
        self._command = command
        self._child: SolveProcess | None = None
        self._patience = QTimer(self, singleShot=True, interval=_LONGEST_WAIT_MS)
        self._patience.timeout.connect(self.end_now)
        near.installEventFilter(self)

    @property
    def process_id(self) -> int:
        """Number of the waiting process; 0 when there is none."""
        return 0 if self._child is None else self._child.process_id

    def eventFilter(self, _: QObject, event: QEvent) -> bool:
        """Wake a child when the pointer comes in; the event goes on."""
        if event.type() == QEvent.Type.Enter and (command := self._command()) is not None:
            if self._child is None or not self._child.is_running:
                self.end_now()
                self._child = SolveProcess(command=command, parent=self)
                self._child.wake()
            self._patience.start()
        return False

    def taken(self, command: Sequence[str]) -> SolveProcess:
        """Return a child for a request: the one that waits, if it runs the same command, else a new one."""
        child, self._child = self._child, None
        self._patience.stop()
        if child is not None and child.is_running and child.command == tuple(command):
            return child
        self._drop(child)
        return SolveProcess(command=command, parent=self)

    def end_now(self) -> None:
        """End the waiting child before this returns."""
        child, self._child = self._child, None
        self._patience.stop()
        self._drop(child)

    def _drop(self, child: SolveProcess | None) -> None:
        if child is not None:
            child.end_now()
            child.deleteLater()
