"""Sentences under a table, in as few lines as they need and never so many that the table has no room."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QLabel, QScrollArea

from app.look import font

if TYPE_CHECKING:
    from collections.abc import Sequence

    from PySide6.QtGui import QResizeEvent

_MOST_LINES = 4


class LowNotes(QScrollArea):
    """Shows sentences; what does not fit a few lines is scrolled to."""

    def __init__(self) -> None:
        super().__init__()
        self.label = QLabel()
        self.label.setFont(font("small"))
        self.label.setWordWrap(True)
        self.label.setTextFormat(Qt.TextFormat.PlainText)
        self.label.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self.label.setAlignment(Qt.AlignmentFlag.AlignTop)
        self.setWidget(self.label)
        self.setWidgetResizable(True)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setFocusPolicy(Qt.FocusPolicy.TabFocus)  # the arrow keys scroll
        self.hide()

    def show_sentences(self, sentences: Sequence[str]) -> None:
        """Show sentences, or nothing at all."""
        text = "\n".join(f"\N{BULLET} {sentence}" for sentence in sentences)
        if text != self.label.text():
            self.label.setText(text)
            self._fit_height()
        self.setVisible(bool(text))

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Need other lines at another width."""
        super().resizeEvent(event)
        self._fit_height()

    def _fit_height(self) -> None:
        most = _MOST_LINES * self.label.fontMetrics().lineSpacing()
        # at the width without a scroll bar, which only comes when there are too many lines anyway
        self.setFixedHeight(max(min(self.label.heightForWidth(self.width()), most), 0))
