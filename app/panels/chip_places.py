"""The table of what is placed on the chip, with the commands that place, turn, fold and remove."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QModelIndex, Qt, Signal
from PySide6.QtWidgets import (
    QAbstractItemView,
    QGridLayout,
    QHBoxLayout,
    QHeaderView,
    QLabel,
    QSizePolicy,
    QTableView,
    QToolButton,
    QVBoxLayout,
    QWidget,
)

from app.look import SPACING, font, set_role
from app.panels.chip_places_model import PlacesModel
from app.panels.low_notes import LowNotes

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from PySide6.QtGui import QAction

    from app.panels.chip_desk import ChipDesk
    from app.shown_values import ShownUnits
    from core.chip.plan import ChipPlan

NONE = -1

# what each action of placing does, by the action's name
PLACING: dict[str, Callable[[ChipDesk], object]] = {
    "place_set": lambda desk: desk.add(is_control=False),
    "place_control": lambda desk: desk.add(is_control=True),
    "turn_placed": lambda desk: desk.turn(),
    "level_placed": lambda desk: desk.level(),
    "fold_placed": lambda desk: desk.fold(1),
    "unfold_placed": lambda desk: desk.fold(-1),
    "remove_placed": lambda desk: desk.remove(),
    "pack_chip": lambda desk: desk.pack(),
    "fold_to_fit": lambda desk: desk.fold_to_fit(),
}
_BUTTONS_ACROSS = 2
_ROW_PX = 24


class PlacesPanel(QWidget):
    """Lists placed channels for exact entry.

    Parameters
    ----------
    buttons : sequence of QAction
        Shown as buttons beside the table.

    Signals
    -------
    channel_chosen(int)
        Another row is pointed at, -1 for none.
    """

    channel_chosen = Signal(int)

    def __init__(self, buttons: Sequence[QAction]) -> None:
        super().__init__()
        self.model = PlacesModel()
        self.table = QTableView()
        self.table.setModel(self.model)
        self.table.setAccessibleName("Placed channels")
        self.table.setFont(font("small"))
        self.table.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.table.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
        self.table.setShowGrid(False)
        header = self.table.horizontalHeader()
        header.setResizeContentsPrecision(0)  # of the rows in sight: a held channel changes them all the time
        header.setSectionResizeMode(QHeaderView.ResizeMode.ResizeToContents)
        header.setSectionResizeMode(0, QHeaderView.ResizeMode.Stretch)  # the numbers are never cut short
        self.table.verticalHeader().setDefaultSectionSize(_ROW_PX)
        self.table.verticalHeader().setSectionResizeMode(QHeaderView.ResizeMode.Fixed)
        self.table.verticalHeader().hide()
        self.heading = QLabel()
        self.heading.setFont(font("small"))
        self.heading.setWordWrap(True)
        set_role(self.heading, "soft")
        self.notes = LowNotes()
        self.notes.setAccessibleName("What folding costs")
        left = QVBoxLayout()
        left.setSpacing(SPACING.hair)
        left.addWidget(self.heading)
        left.addWidget(self.table, 1)
        left.addWidget(self.notes)
        layout = QHBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(SPACING.small)
        layout.addLayout(left, 1)
        layout.addLayout(_button_grid(buttons))
        self.table.selectionModel().currentRowChanged.connect(self._on_current_row_changed)
        self.table.addActions(list(buttons))
        self.table.setContextMenuPolicy(Qt.ContextMenuPolicy.ActionsContextMenu)

    def show_plan(self, plan: ChipPlan | None, units: ShownUnits, *, is_packed: bool) -> None:
        """Show what is placed.

        Parameters
        ----------
        plan : ChipPlan or None
            The plan with the place of every channel; None while there is none.
        units : ShownUnits
            Units of the screen.
        is_packed : bool
            True when nobody has placed anything and every set is packed by itself.
        """
        chosen = self.chosen
        self.model.show_plan(plan, units)
        self.point_at(chosen if chosen < self.model.rowCount() else NONE)
        words = "Every set is packed by itself until one is moved, turned, folded, added or removed."
        self.heading.setText(
            words if is_packed else "Placed by hand. Numbers can be typed; Space steps in the drawing."
        )

    @property
    def chosen(self) -> int:
        """The row pointed at, -1 for none."""
        return self.table.currentIndex().row()

    def point_at(self, row: int) -> None:
        """Point at a row, as chosen in the drawing; -1 for none."""
        if row == self.chosen:
            return
        self.table.selectionModel().blockSignals(True)
        if row == NONE:
            self.table.selectionModel().clear()
        else:
            self.table.selectRow(row)
        self.table.selectionModel().blockSignals(False)
        self.table.viewport().update()

    def _on_current_row_changed(self, current: QModelIndex) -> None:
        self.channel_chosen.emit(current.row())


def _button_grid(actions: Sequence[QAction]) -> QGridLayout:
    grid = QGridLayout()
    grid.setSpacing(SPACING.hair)
    for number, action in enumerate(actions):
        button = QToolButton()
        button.setDefaultAction(action)
        button.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        button.setFont(font("small"))
        grid.addWidget(button, *divmod(number, _BUTTONS_ACROSS))
    grid.setRowStretch(len(actions), 1)
    return grid
