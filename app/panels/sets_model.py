"""The parameter sets of the chip as rows of a list."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QAbstractListModel, QModelIndex, QPersistentModelIndex, Qt, QTimer, Signal

from app.assessment import score_of
from app.drawing.thumbnail import set_thumbnail
from app.shown_values import diodicity_text
from core.errors import DesignValueError
from core.geometry.shape import build_shape

if TYPE_CHECKING:
    from PySide6.QtGui import QPixmap

    from app.document import Document
    from app.look import Palette
    from core.project import ParameterSet

    Index = QModelIndex | QPersistentModelIndex

THUMBNAIL_WIDTH_PX, THUMBNAIL_HEIGHT_PX = 132, 40
VERDICT_ROLE = Qt.ItemDataRole.UserRole + 1

# Small drawings and scores of the row wait until the hand rests; the large ones do not.
_REST_MS = 120


class SetsModel(QAbstractListModel):
    """Rows for the list of sets; changes go through the document.

    Signals
    -------
    name_refused(DesignValueError)
        A new name cannot be used; the old one stays.
    """

    name_refused = Signal(object)

    def __init__(self, document: Document, palette: Palette) -> None:
        super().__init__(document)
        self._document = document
        self._palette = palette
        self._rows = document.project.sets
        self._pictures: dict[object, QPixmap] = {}
        self._rest = QTimer(self, singleShot=True, interval=_REST_MS)
        self._rest.timeout.connect(self.take_over_contents)
        document.project_changed.connect(self._on_project_changed)

    def use_palette(self, palette: Palette) -> None:
        """Draw in other colours."""
        self._palette = palette
        self._pictures.clear()
        self._tell_all_changed()

    def _on_project_changed(self) -> None:
        sets = self._document.project.sets
        if len(sets) != len(self._rows):
            self.beginResetModel()
            self._rows = sets
            self.endResetModel()
        elif [each.name for each in sets] != [each.name for each in self._rows]:
            self.take_over_contents()  # no reset: a name may have been typed into the row itself
        else:
            self._rest.start()

    def take_over_contents(self) -> None:
        """Show names and designs as they stand."""
        self._rows = self._document.project.sets
        self._tell_all_changed()

    def _tell_all_changed(self) -> None:
        self.dataChanged.emit(self.index(0), self.index(len(self._rows) - 1))

    def rowCount(self, parent: Index = QModelIndex()) -> int:  # noqa: B008  # Qt's default
        """Return the number of sets."""
        return 0 if parent.isValid() else len(self._rows)

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        """Return name, small drawing, score line or tool tip of a row."""
        if not index.isValid() or index.row() >= len(self._rows):
            return None
        each = self._rows[index.row()]
        if role in (Qt.ItemDataRole.DisplayRole, Qt.ItemDataRole.EditRole):
            return each.name
        if role == Qt.ItemDataRole.DecorationRole:
            return self._picture(each)
        if role == VERDICT_ROLE:
            return self._verdict(each)
        if role == Qt.ItemDataRole.AccessibleTextRole:
            return f"{each.name}, {self._verdict(each)}"
        if role == Qt.ItemDataRole.ToolTipRole:
            notes = f"\n{each.notes}" if each.notes else ""
            return f"{each.name}{notes}\nF2 renames, Alt+Left and Alt+Right move, Ctrl+D copies."
        return None

    def setData(self, index: Index, value: object, role: int = Qt.ItemDataRole.EditRole) -> bool:
        """Rename a set."""
        if role != Qt.ItemDataRole.EditRole or not index.isValid():
            return False
        try:
            self._document.rename_set(index.row(), str(value))
        except DesignValueError as error:
            self.name_refused.emit(error)
            return False
        return True

    def flags(self, index: Index) -> Qt.ItemFlag:
        """Let rows be dragged and renamed, and dropped between rows only."""
        if not index.isValid():
            return Qt.ItemFlag.ItemIsDropEnabled
        flag = Qt.ItemFlag
        return flag.ItemIsEnabled | flag.ItemIsSelectable | flag.ItemIsEditable | flag.ItemIsDragEnabled

    def supportedDropActions(self) -> Qt.DropAction:
        """Allow sets to be moved, nothing else."""
        return Qt.DropAction.MoveAction

    def moveRows(self, _from: Index, row: int, count: int, _to: Index, before: int) -> bool:
        """Move one set in front of another; the document does it after the drop is over."""
        if count != 1 or not 0 <= row < len(self._rows):
            return False
        place = before if before < row else before - 1
        QTimer.singleShot(0, self, lambda: self._document.move_set(row, place))
        return True

    def _picture(self, each: ParameterSet) -> QPixmap:
        if each.channel not in self._pictures:
            if len(self._pictures) > 4 * len(self._rows):
                self._pictures.clear()
            self._pictures[each.channel] = set_thumbnail(
                build_shape(each.channel),
                width_px=THUMBNAIL_WIDTH_PX,
                height_px=THUMBNAIL_HEIGHT_PX,
                palette=self._palette,
            )
        return self._pictures[each.channel]

    def _verdict(self, each: ParameterSet) -> str:
        score = score_of(each.channel, self._document.process, self._document.operating)
        return "no score" if score is None else diodicity_text(score)
