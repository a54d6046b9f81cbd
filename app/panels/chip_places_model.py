"""What is placed on the chip, as rows of a table: channel, exact place, turn, rows."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QAbstractTableModel, QModelIndex, QPersistentModelIndex, Qt, Signal

from app.shown_values import ShownUnits, entry_text
from core.chip.bodies import title_of
from core.chip.plan import PLACE_FIELDS
from core.errors import DesignValueError
from core.units import unit_symbol

if TYPE_CHECKING:
    from core.chip.plan import ChipChannel, ChipPlan
    from core.fields import Field

    Index = QModelIndex | QPersistentModelIndex

# of numbers as they are read, and as they are typed
_DECIMALS = {Qt.ItemDataRole.DisplayRole: 3, Qt.ItemDataRole.EditRole: 6}

COLUMNS: tuple[Field | None, ...] = (None, *PLACE_FIELDS.values())  # the first one is the name


class PlacesModel(QAbstractTableModel):
    """One row for each placed channel; numbers can be typed.

    Signals
    -------
    place_requested(int, str, float)
        Row, name of the field, wanted value in stored units.
    refused(DesignValueError)
        What was typed cannot be used; the old value stays.
    """

    place_requested = Signal(int, str, float)
    refused = Signal(object)

    def __init__(self) -> None:
        super().__init__()
        self._channels: tuple[ChipChannel, ...] = ()
        self._units = ShownUnits()

    def show_plan(self, plan: ChipPlan | None, units: ShownUnits) -> None:
        """Show the channels of another plan."""
        channels = plan.channels if plan is not None else ()
        is_same_size = len(channels) == len(self._channels)
        if not is_same_size:
            self.beginResetModel()
        is_new_unit = units != self._units
        self._channels, self._units = channels, units
        if not is_same_size:
            self.endResetModel()
        elif channels:
            self.dataChanged.emit(self.index(0, 0), self.index(len(channels) - 1, len(COLUMNS) - 1))
        if is_new_unit:
            self.headerDataChanged.emit(Qt.Orientation.Horizontal, 0, len(COLUMNS) - 1)

    def rowCount(self, parent: Index = QModelIndex()) -> int:  # noqa: B008  # Qt's default
        """Return the number of placed channels."""
        return 0 if parent.isValid() else len(self._channels)

    def columnCount(self, parent: Index = QModelIndex()) -> int:  # noqa: B008  # Qt's default
        """Return the number of columns."""
        return 0 if parent.isValid() else len(COLUMNS)

    def headerData(self, section: int, orientation: Qt.Orientation, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        """Return the name and unit of a column, or the number of a row."""
        if orientation == Qt.Orientation.Vertical:
            return str(section + 1) if role == Qt.ItemDataRole.DisplayRole else None
        field = COLUMNS[section]
        if role == Qt.ItemDataRole.ToolTipRole:
            return field.help if field else "The parameter set that the channel follows"
        if role != Qt.ItemDataRole.DisplayRole:
            return None
        if field is None:
            return "Channel"
        unit = unit_symbol(self._units.unit_for(field.unit))
        return f"{field.label} [{unit}]" if unit else field.label

    def data(self, index: Index, role: int = Qt.ItemDataRole.DisplayRole) -> object:
        """Return the text of a cell."""
        if not index.isValid() or index.row() >= len(self._channels):
            return None
        channel, field = self._channels[index.row()], COLUMNS[index.column()]
        if role in _DECIMALS:
            if field is None:
                return title_of(channel)
            # what turning has left behind the last digit is nothing; and nothing has no sign
            shown = self._units.shown(getattr(channel, field.name), field.unit)
            return entry_text(round(shown, _DECIMALS[Qt.ItemDataRole(role)]) + 0.0)
        if role == Qt.ItemDataRole.ToolTipRole and field is None:
            return title_of(channel)  # a long one is cut short
        if role == Qt.ItemDataRole.TextAlignmentRole and field is not None:
            return Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
        return None

    def setData(self, index: Index, value: object, role: int = Qt.ItemDataRole.EditRole) -> bool:
        """Ask for a typed value; the table shows it when the document has it."""
        if role != Qt.ItemDataRole.EditRole or not index.isValid():
            return False
        field = COLUMNS[index.column()]
        if field is None:
            return False
        if str(value).strip() == self.data(index, role):
            return True
        try:
            number = float(self._units.field(field).checked(str(value).strip()))
        except DesignValueError as error:
            self.refused.emit(error)
            return False
        self.place_requested.emit(index.row(), field.name, self._units.stored(number, field.unit))
        return True

    def flags(self, index: Index) -> Qt.ItemFlag:
        """Let numbers be typed."""
        if not index.isValid():
            return Qt.ItemFlag.NoItemFlags
        plain = Qt.ItemFlag.ItemIsEnabled | Qt.ItemFlag.ItemIsSelectable
        return plain if COLUMNS[index.column()] is None else plain | Qt.ItemFlag.ItemIsEditable
