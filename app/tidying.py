"""Memory that Python's collector frees: only in the window's thread, and only between two events.

The collector may otherwise start wherever Python code runs: in a thread of the background, where no object
of Qt may end, or inside a call of Qt that holds a lock which the end of an object waits for, for ever.
"""

from __future__ import annotations

import gc

from PySide6.QtCore import QObject, QTimer

_EVERY_MS = 500
_FRESH, _AGEING, _OLD = range(3)


class Tidier(QObject):
    """Takes the collector's place from now on until ``end``.

    It collects by the collector's own thresholds, which are looked at twice a second.
    """

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        gc.disable()
        self._timer = QTimer(self, interval=_EVERY_MS)
        self._timer.timeout.connect(self.tidy)
        self._timer.start()

    def tidy(self) -> None:
        """Collect what is due: fresh objects often, old ones seldom."""
        due = [count > threshold for count, threshold in zip(gc.get_count(), gc.get_threshold(), strict=True)]
        if due[_FRESH]:
            gc.collect(max(generation for generation in (_FRESH, _AGEING, _OLD) if due[generation]))

    def end(self) -> None:
        """Let the collector run by itself again."""
        self._timer.stop()
        gc.enable()
