"""Parameter sets side by side: small drawings, scores, and every field with a sign where sets differ."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QSize, Qt, Signal
from PySide6.QtWidgets import (
    QAbstractItemView,
    QCheckBox,
    QHeaderView,
    QTableWidget,
    QTableWidgetItem,
    QVBoxLayout,
    QWidget,
)

from app.assessment import score_of
from app.drawing.thumbnail import set_thumbnail
from app.look import SPACING, font
from app.shown_values import DIFFERENT, ShownUnits, diodicity_text, number_text, value_text
from core.geometry.shape import build_shape
from core.parameters import CHANNEL_FIELDS

if TYPE_CHECKING:
    from collections.abc import Callable

    from PySide6.QtGui import QShowEvent

    from app.document import Document
    from app.look import Palette
    from app.settings import Settings
    from core.hydraulics.estimate import Score
    from core.project import ParameterSet

_PICTURE = QSize(190, 70)
_NOTHING = "\N{EM DASH}"

_SCORE_ROWS: tuple[tuple[str, Callable[[Score, ShownUnits], str]], ...] = (
    ("Di", lambda score, _units: diodicity_text(score).removeprefix("Di ")),
    (
        "Di \N{MINUS SIGN} 1",
        lambda score, _units: (
            f"{number_text(score.rectification, 3)} \N{PLUS-MINUS SIGN}{score.rectification_band_percent:.0f} %"
        ),
    ),
    (
        "Forward pressure",
        lambda score, units: f"{number_text(units.shown(score.forward_pressure_pa, 'Pa'))} {units.pressure}",
    ),
    (
        "Reverse pressure",
        lambda score, units: f"{number_text(units.shown(score.reverse_pressure_pa, 'Pa'))} {units.pressure}",
    ),
    ("Loop share, forward", lambda score, _units: f"{score.loop_share_forward:.1%}".replace("%", " %")),
    ("Loop share, reverse", lambda score, _units: f"{score.loop_share_reverse:.1%}".replace("%", " %")),
    ("Re", lambda score, _units: number_text(score.reynolds, 3)),
    ("Within its range", lambda score, _units: "yes" if score.valid else "no"),
)


class ComparePanel(QWidget):
    """A table with one column for each set; a field in which sets differ carries a sign.

    Signals
    -------
    set_requested(int)
        A column was chosen by Enter or a double click: take this set in hand.
    """

    set_requested = Signal(int)

    def __init__(self, document: Document, settings: Settings, palette: Palette) -> None:
        super().__init__()
        self._document, self._settings, self._palette = document, settings, palette
        self.only_different = QCheckBox("Only fields that &differ")
        self.only_different.setToolTip(f"{DIFFERENT} marks what is different from the set in hand")
        self.table = QTableWidget()
        self.table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.table.setAccessibleName("Comparison of parameter sets")
        self.table.setIconSize(_PICTURE)
        self.table.setHorizontalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
        self.table.verticalHeader().setSectionResizeMode(QHeaderView.ResizeMode.Fixed)
        self.table.verticalHeader().setDefaultSectionSize(SPACING.row)
        self.table.horizontalHeader().setDefaultSectionSize(_PICTURE.width() + 16)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addWidget(self.only_different)
        layout.addWidget(self.table)
        self.only_different.toggled.connect(self.refresh)
        self.table.itemActivated.connect(lambda item: self.set_requested.emit(item.column()))
        document.project_changed.connect(self._refresh_if_seen)
        settings.units_changed.connect(self._refresh_if_seen)

    def use_palette(self, palette: Palette) -> None:
        """Draw in other colours."""
        self._palette = palette
        self._refresh_if_seen()

    def showEvent(self, event: QShowEvent) -> None:
        """Bring the table up to date when it comes into sight."""
        self.refresh()
        super().showEvent(event)

    def _refresh_if_seen(self) -> None:
        if self.isVisible():
            self.refresh()

    def refresh(self) -> None:
        """Fill the table from the document."""
        sets = self._document.project.sets
        place = self.table.currentRow(), self.table.currentColumn()
        self.table.clear()
        self.table.setColumnCount(len(sets))
        self.table.setHorizontalHeaderLabels([self._column_title(i, each) for i, each in enumerate(sets)])
        rows = [*self._score_rows(sets), *self._field_rows(sets)]
        self.table.setRowCount(1 + len(rows))
        self._fill_pictures(sets)
        for row, (title, texts, is_field) in enumerate(rows, start=1):
            self._fill_row(row, title, texts, is_field=is_field)
        self.table.setCurrentCell(*place)

    def _column_title(self, index: int, each: ParameterSet) -> str:
        return f"{each.name}\n(in hand)" if index == self._document.index else f"{each.name}\n"

    def _fill_pictures(self, sets: tuple[ParameterSet, ...]) -> None:
        self.table.setVerticalHeaderItem(0, QTableWidgetItem("Drawing"))
        self.table.setRowHeight(0, _PICTURE.height() + 8)
        for column, each in enumerate(sets):
            item = QTableWidgetItem()
            item.setData(
                Qt.ItemDataRole.DecorationRole,
                set_thumbnail(
                    build_shape(each.channel),
                    width_px=_PICTURE.width(),
                    height_px=_PICTURE.height(),
                    palette=self._palette,
                ),
            )
            item.setData(Qt.ItemDataRole.AccessibleTextRole, f"Drawing of {each.name}")
            self.table.setItem(0, column, item)

    def _score_rows(self, sets: tuple[ParameterSet, ...]) -> list[tuple[str, list[str], bool]]:
        units = ShownUnits.of(self._settings)
        process, operating = self._document.process, self._document.operating
        scores = [score_of(each.channel, process, operating) for each in sets]
        return [
            (title, [_NOTHING if score is None else text(score, units) for score in scores], False)
            for title, text in _SCORE_ROWS
        ]

    def _field_rows(self, sets: tuple[ParameterSet, ...]) -> list[tuple[str, list[str], bool]]:
        units = ShownUnits.of(self._settings)
        rows = []
        for name, field in CHANNEL_FIELDS.items():
            texts = [value_text(field, getattr(each.channel, name), units) for each in sets]
            if len(set(texts)) > 1 or not self.only_different.isChecked():
                rows.append((field.label, texts, True))
        return rows

    def _fill_row(self, row: int, title: str, texts: list[str], *, is_field: bool) -> None:
        is_different = is_field and len(set(texts)) > 1
        header = QTableWidgetItem(f"{DIFFERENT} {title}" if is_different else title)
        self.table.setVerticalHeaderItem(row, header)
        in_hand = texts[self._document.index]
        for column, text in enumerate(texts):
            stands_out = is_different and text != in_hand
            item = QTableWidgetItem(f"{DIFFERENT} {text}" if stands_out else text)
            item.setTextAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
            if stands_out or not is_field:
                item.setFont(font("heading"))
            self.table.setItem(row, column, item)
