"""A box of choices that only the hand changes, never the wheel."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtWidgets import QComboBox

if TYPE_CHECKING:
    from PySide6.QtGui import QWheelEvent


class StillComboBox(QComboBox):
    """A box that leaves the wheel to the column, so that scrolling never changes a design."""

    def wheelEvent(self, event: QWheelEvent) -> None:
        """Leave the wheel to the column."""
        event.ignore()
