"""What varies from chip to chip of a plate: up to two fields of the channel, each in equal steps."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QGridLayout, QHBoxLayout, QLabel, QLineEdit, QWidget

from app.look import SPACING, font, set_role
from app.panels.field_column import FieldGroup
from app.panels.still_box import StillComboBox
from app.shown_values import ShownUnits, entry_text, screen_words
from core.chip.plan import SERIES_FIELDS, SteppedField
from core.errors import DesignValueError
from core.parameters import CHANNEL_FIELDS
from core.units import unit_symbol

if TYPE_CHECKING:
    from collections.abc import Sequence

_STEPS = int(SERIES_FIELDS["steps"].default)
_ENTRY_PX = 54
_DIRECTIONS = ("Along x", "Along y")


class SeriesRow(QWidget):
    """One stepped field: which, from where, to where, in how many chips.

    Signals
    -------
    edited()
        The user has changed something.
    """

    edited = Signal()

    def __init__(self, direction: str) -> None:
        super().__init__()
        self._units = ShownUnits()
        self.box = StillComboBox()
        self.box.setAccessibleName(f"{direction}: stepped field")
        self.box.setSizeAdjustPolicy(StillComboBox.SizeAdjustPolicy.AdjustToMinimumContentsLengthWithIcon)
        self.box.addItem("nothing varies", "")
        for field in CHANNEL_FIELDS.values():
            if not field.choices:
                self.box.addItem(field.label, field.name)
        self.unit_label = QLabel()
        set_role(self.unit_label, "soft")
        self.entries = {name: QLineEdit() for name in SERIES_FIELDS}
        layout = QGridLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setHorizontalSpacing(SPACING.small)
        layout.setVerticalSpacing(SPACING.hair)
        name_label = QLabel(direction)
        name_label.setBuddy(self.box)
        layout.addWidget(name_label, 0, 0)
        layout.addWidget(self.box, 0, 1)
        layout.setColumnStretch(1, 1)
        for name, entry in self.entries.items():
            entry.setAlignment(Qt.AlignmentFlag.AlignRight)
            entry.setFixedWidth(_ENTRY_PX)
            entry.setAccessibleName(f"{direction}: {SERIES_FIELDS[name].label}")
            entry.setToolTip(SERIES_FIELDS[name].help)
            entry.setPlaceholderText(SERIES_FIELDS[name].label.lower())
            entry.editingFinished.connect(self._on_entry_finished)
        self.steps_label = QLabel("steps")
        set_role(self.steps_label, "soft")
        across = QHBoxLayout()
        across.setSpacing(SPACING.small)
        across.addStretch(1)
        entries = self.entries
        for part in (entries["first"], entries["last"], self.unit_label, entries["steps"], self.steps_label):
            across.addWidget(part)
        layout.addLayout(across, 1, 0, 1, 2)
        self.box.activated.connect(self._on_box_activated)
        self.show_series(None, self._units)

    def show_series(self, series: SteppedField | None, units: ShownUnits) -> None:
        """Show a stepped field, or that nothing varies."""
        self._units = units
        self.box.setCurrentIndex(self.box.findData(series.name if series else ""))
        self._show_entries(series is not None)
        if series is not None:
            base = series.field.unit
            self.unit_label.setText(unit_symbol(units.unit_for(base)))
            texts = (units.shown(series.first, base), units.shown(series.last, base), series.steps)
            for entry, value in zip(self.entries.values(), texts, strict=True):
                entry.setText(entry_text(value))
                entry.setModified(False)

    def series(self) -> SteppedField | None:
        """Return what is entered.

        Raises
        ------
        DesignValueError
            If it cannot be used.
        """
        name = self.box.currentData()
        if not name:
            return None
        base = CHANNEL_FIELDS[name].unit
        ends = {
            end: self._units.stored(float(SERIES_FIELDS[end].checked(self.entries[end].text().strip())), base)
            for end in ("first", "last")
        }
        return SteppedField(name=name, steps=self.entries["steps"].text().strip(), **ends)  # type: ignore[arg-type]  # checked there

    def _show_entries(self, is_shown: bool) -> None:
        for part in (*self.entries.values(), self.unit_label, self.steps_label):
            part.setVisible(is_shown)

    def _on_box_activated(self) -> None:
        """Begin with steps of the field's default value upwards, which the user then changes."""
        name = self.box.currentData()
        if name:
            field = CHANNEL_FIELDS[name]
            first = float(field.default)
            last = min(first + (_STEPS - 1) * 10.0 * field.step, field.maximum)
            self.show_series(SteppedField(name=name, first=first, last=last, steps=_STEPS), self._units)
        self.edited.emit()

    def _on_entry_finished(self) -> None:
        if any(entry.isModified() for entry in self.entries.values()):
            for entry in self.entries.values():
                entry.setModified(False)
            self.edited.emit()


class SeriesGroup(FieldGroup):
    """The heading with both stepped fields below it.

    Signals
    -------
    series_requested(object)
        Tuple of ``SteppedField`` that the plan should have.
    """

    series_requested = Signal(object)

    def __init__(self) -> None:
        super().__init__("Stepped series")
        self.setToolTip("One or two values that vary from chip to chip; each chip bears its values in letters.")
        self._shown: tuple[SteppedField, ...] = ()
        self._units = ShownUnits()
        self.series_rows = [SeriesRow(direction) for direction in _DIRECTIONS]
        self.problem_label = QLabel()
        self.problem_label.setWordWrap(True)
        self.problem_label.setFont(font("small"))
        set_role(self.problem_label, "error")
        for row in self.series_rows:
            self.rows.addWidget(row)
            row.edited.connect(self._on_row_edited)
        self.rows.addWidget(self.problem_label)
        self.show_problem("")

    def show_series(self, series: Sequence[SteppedField], units: ShownUnits) -> None:
        """Show the series of a plan."""
        self._shown, self._units = tuple(series), units
        self.show_problem("")
        for number, row in enumerate(self.series_rows):
            row.show_series(series[number] if number < len(series) else None, units)

    def show_problem(self, text: str) -> None:
        """Say why a series was refused; empty text takes it away."""
        self.problem_label.setText(text)
        self.problem_label.setVisible(bool(text))

    def refuse(self, error: DesignValueError) -> None:
        """Show the old series again and say why the new one cannot be used."""
        self.show_series(self._shown, self._units)
        self.show_problem(f"{screen_words(str(error))}. The series stays as it was.")

    def _on_row_edited(self) -> None:
        try:
            entered = [row.series() for row in self.series_rows]
        except DesignValueError as error:
            self.refuse(error)
        else:
            self.series_requested.emit(tuple(series for series in entered if series is not None))
