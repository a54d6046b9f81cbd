"""The box in which a process is chosen: every kind with one sentence about it."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QRect, QSize, Qt, Signal
from PySide6.QtGui import QFontMetrics, QPainter, QPalette
from PySide6.QtWidgets import QStyle, QStyledItemDelegate

from app.look import SPACING, font
from app.panels.still_box import StillComboBox
from app.shown_values import word_for
from core.fabrication.process import ProcessKind
from core.fabrication.shipped import about

if TYPE_CHECKING:
    from PySide6.QtCore import QModelIndex, QPersistentModelIndex
    from PySide6.QtGui import QFocusEvent
    from PySide6.QtWidgets import QStyleOptionViewItem

    Index = QModelIndex | QPersistentModelIndex

_ABOUT_ROLE = Qt.ItemDataRole.UserRole + 1
_WIDTH_PX = 430  # of the list that opens
_WRAPPED = int(Qt.TextFlag.TextWordWrap)


class _KindDelegate(QStyledItemDelegate):
    """Paints a kind's name with its sentence below."""

    def sizeHint(self, _option: QStyleOptionViewItem, index: Index) -> QSize:
        """Return the room that name and sentence need."""
        room = QRect(0, 0, _WIDTH_PX - 2 * SPACING.medium - 16, 1000)
        sentence = QFontMetrics(font("small")).boundingRect(room, _WRAPPED, index.data(_ABOUT_ROLE))
        return QSize(_WIDTH_PX, QFontMetrics(font("heading")).height() + sentence.height() + 2 * SPACING.small)

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: Index) -> None:
        """Draw a row."""
        colours: QPalette = option.palette
        role = QPalette.ColorRole
        is_chosen = bool(option.state & QStyle.StateFlag.State_Selected)
        painter.save()
        if is_chosen:
            painter.fillRect(option.rect, colours.color(role.Highlight))
        room = option.rect.adjusted(SPACING.medium, SPACING.small, -SPACING.medium, -SPACING.small)
        painter.setFont(font("heading"))
        painter.setPen(colours.color(role.HighlightedText if is_chosen else role.Text))
        painter.drawText(room, int(Qt.AlignmentFlag.AlignTop), index.data(Qt.ItemDataRole.DisplayRole))
        room.setTop(room.top() + QFontMetrics(font("heading")).height())
        painter.setFont(font("small"))
        painter.setPen(colours.color(role.HighlightedText if is_chosen else role.PlaceholderText))
        painter.drawText(room, _WRAPPED, index.data(_ABOUT_ROLE))
        painter.restore()


class ProcessKindBox(StillComboBox):
    """Chooses a kind of process.

    Signals
    -------
    entered()
        The keys come to the box: what is chosen until they leave is one choice.
    kind_chosen(str)
        The user picked another kind.
    """

    entered = Signal()
    kind_chosen = Signal(str)

    def __init__(self) -> None:
        super().__init__()
        self.setAccessibleName("Process")
        self.setSizeAdjustPolicy(StillComboBox.SizeAdjustPolicy.AdjustToMinimumContentsLengthWithIcon)
        self.setMinimumContentsLength(12)
        self.setMaxVisibleItems(len(ProcessKind))
        self.setItemDelegate(_KindDelegate(self))
        self.view().setMinimumWidth(_WIDTH_PX)
        for kind in ProcessKind:
            words = word_for(str(kind))
            self.addItem(words[:1].upper() + words[1:], str(kind))
            self.setItemData(self.count() - 1, about(kind), _ABOUT_ROLE)
            self.setItemData(self.count() - 1, f"{words}. {about(kind)}", Qt.ItemDataRole.AccessibleTextRole)
        self.activated.connect(lambda index: self.kind_chosen.emit(self.itemData(index)))

    def focusInEvent(self, event: QFocusEvent) -> None:
        """Tell that a choice begins."""
        super().focusInEvent(event)
        self.entered.emit()

    def show_kind(self, kind: str) -> None:
        """Show which kind is chosen."""
        self.setCurrentIndex(self.findData(kind))
