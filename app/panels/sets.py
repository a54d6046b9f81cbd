"""The row of parameter sets above the drawing: small drawings to choose, name, copy and put in order."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QItemSelectionModel, QModelIndex, QRect, QSize, Qt
from PySide6.QtGui import QColor, QPainter, QPalette, QPen
from PySide6.QtWidgets import (
    QAbstractItemView,
    QFrame,
    QHBoxLayout,
    QLineEdit,
    QListView,
    QSizePolicy,
    QStyle,
    QStyledItemDelegate,
    QToolButton,
    QVBoxLayout,
    QWidget,
)

from app.look import SPACING, font
from app.panels.sets_model import THUMBNAIL_HEIGHT_PX, THUMBNAIL_WIDTH_PX, VERDICT_ROLE, SetsModel

if TYPE_CHECKING:
    from PySide6.QtGui import QAction, QResizeEvent
    from PySide6.QtWidgets import QStyleOptionViewItem

    from app.document import Document
    from app.look import Palette
    from app.panels.sets_model import Index

_CARD = QSize(THUMBNAIL_WIDTH_PX + 20, THUMBNAIL_HEIGHT_PX + 46)


class SetCardDelegate(QStyledItemDelegate):
    """Paints one set as a card: name, small drawing, Di; a bar under the one in hand."""

    def sizeHint(self, _option: QStyleOptionViewItem, _index: Index) -> QSize:
        """Return the size of a card."""
        return _CARD

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: Index) -> None:
        """Draw a card."""
        palette: QPalette = option.palette
        is_chosen = bool(option.state & QStyle.StateFlag.State_Selected)
        frame = option.rect.adjusted(2, 2, -2, -2)
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(palette.color(QPalette.ColorRole.Accent if is_chosen else QPalette.ColorRole.Mid), 1.0))
        painter.setBrush(palette.color(QPalette.ColorRole.Highlight if is_chosen else QPalette.ColorRole.Button))
        painter.drawRoundedRect(frame, SPACING.corner, SPACING.corner)
        if is_chosen:
            foot = QRect(frame.left(), frame.bottom() - 2, frame.width(), 3)
            painter.fillRect(foot, palette.color(QPalette.ColorRole.Accent))
        if option.state & QStyle.StateFlag.State_HasFocus:
            painter.setPen(QPen(palette.color(QPalette.ColorRole.Accent), 2.0))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawRoundedRect(frame, SPACING.corner, SPACING.corner)
        self._paint_words(painter, frame, index, palette.color(QPalette.ColorRole.Text))
        picture = index.data(Qt.ItemDataRole.DecorationRole)
        painter.drawPixmap(frame.left() + 8, frame.top() + 20, picture)
        painter.restore()

    @staticmethod
    def _paint_words(painter: QPainter, frame: QRect, index: Index, ink: QColor) -> None:
        painter.setPen(ink)
        painter.setFont(font("small"))
        line = QRect(frame.left() + 8, frame.top() + 3, frame.width() - 16, 16)
        name = painter.fontMetrics().elidedText(index.data(), Qt.TextElideMode.ElideRight, line.width())
        painter.drawText(line, Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter, name)
        line.moveBottom(frame.bottom() - 4)
        painter.drawText(line, Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter, index.data(VERDICT_ROLE))

    def createEditor(self, parent: QWidget, _option: QStyleOptionViewItem, _index: Index) -> QLineEdit:
        """Return the field in which a name is typed."""
        return QLineEdit(parent)

    def updateEditorGeometry(self, editor: QWidget, option: QStyleOptionViewItem, _index: Index) -> None:
        """Put the name's field over the name."""
        editor.setGeometry(option.rect.left() + 4, option.rect.top() + 2, option.rect.width() - 8, 26)


class SetsView(QListView):
    """The cards in one row, to be chosen, renamed and dragged."""

    def __init__(self, model: SetsModel) -> None:
        super().__init__()
        self.setModel(model)
        self.setItemDelegate(SetCardDelegate(self))
        self.setStyleSheet("QListView { background: transparent; border: none; }")
        self.setFlow(QListView.Flow.LeftToRight)
        self.setWrapping(False)
        self.setUniformItemSizes(True)
        self.setSpacing(0)
        self.setAccessibleName("Parameter sets")
        self.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
        self.setEditTriggers(QAbstractItemView.EditTrigger.DoubleClicked)
        self.setDragDropMode(QAbstractItemView.DragDropMode.InternalMove)
        self.setDefaultDropAction(Qt.DropAction.MoveAction)
        self.setDragDropOverwriteMode(False)
        self.setHorizontalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
        self.setVerticalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self.setFixedHeight(_CARD.height() + 4)

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Keep the cards whole when a scroll bar takes its room."""
        super().resizeEvent(event)
        bar = self.horizontalScrollBar()
        height = _CARD.height() + 4 + (bar.sizeHint().height() if bar.maximum() > 0 else 0)
        if height != self.height():
            self.setFixedHeight(height)


class SetsPanel(QFrame):
    """The row of sets with its buttons.

    Parameters
    ----------
    document : Document
        Whose sets are shown.
    palette : Palette
        Colours to begin with.
    buttons : sequence of QAction
        Shown as buttons beside the cards.
    """

    def __init__(self, document: Document, palette: Palette, buttons: tuple[QAction, ...]) -> None:
        super().__init__()
        self._document = document
        self.model = SetsModel(document, palette)
        self.view = SetsView(self.model)
        layout = QHBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(SPACING.small)
        layout.addWidget(self.view, 1)
        layout.addLayout(self._button_column(buttons))
        self.view.selectionModel().currentChanged.connect(self._on_view_current_changed)
        self.view.addActions(list(buttons))
        self.view.setContextMenuPolicy(Qt.ContextMenuPolicy.ActionsContextMenu)
        document.project_changed.connect(self._show_current)
        self._show_current()

    @staticmethod
    def _button_column(actions: tuple[QAction, ...]) -> QVBoxLayout:
        column = QVBoxLayout()
        column.setSpacing(SPACING.hair)
        for action in actions:
            button = QToolButton()
            button.setDefaultAction(action)
            button.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
            button.setFont(font("small"))
            column.addWidget(button)
        column.addStretch(1)
        return column

    def use_palette(self, palette: Palette) -> None:
        """Draw in other colours."""
        self.model.use_palette(palette)

    def begin_rename(self) -> None:
        """Let the user type another name for the set in hand."""
        self.view.setFocus()
        self.view.edit(self.model.index(self._document.index))

    def _show_current(self) -> None:
        index = self.model.index(self._document.index)
        if self.view.currentIndex() == index:
            return
        self.view.selectionModel().blockSignals(True)
        self.view.selectionModel().setCurrentIndex(index, QItemSelectionModel.SelectionFlag.ClearAndSelect)
        self.view.selectionModel().blockSignals(False)
        self.view.scrollTo(index)
        self.view.viewport().update()

    def _on_view_current_changed(self, current: QModelIndex) -> None:
        if current.isValid():
            self._document.select_set(current.row())
