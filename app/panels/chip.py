"""The plan of the chip: its size, its ports, marks and words, the plate that is filled, and what varies over it."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from PySide6.QtWidgets import QGridLayout, QLabel, QLineEdit, QWidget

from app.look import SPACING, font, set_role
from app.panels.chip_series import SeriesGroup
from app.panels.field_column import FieldColumn
from app.shown_values import ShownUnits, screen_words
from core.chip.plan import CHIP_FIELDS, FURNITURE, PLATE
from core.errors import DesignValueError

if TYPE_CHECKING:
    from app.document import Document
    from app.settings import Settings
    from core.chip.plan import ChipPlan, SteppedField
    from core.fields import Value

# fields that only mean something for some choices of the plate
_PLATES_OF_FIELD: dict[str, tuple[str, ...]] = {
    "wafer_diameter_um": ("wafer",),
    "plate_width_um": ("plate",),
    "plate_height_um": ("plate",),
    "edge_exclusion_um": ("wafer", "plate"),
    "street_um": ("wafer", "plate"),
}


class ChipPanel(FieldColumn):
    """Edits the chip's plan, bound to the document both ways."""

    def __init__(self, document: Document, settings: Settings) -> None:
        super().__init__(CHIP_FIELDS.values(), document.new_gesture)
        self._document, self._settings = document, settings
        self._shown: tuple[ChipPlan, ShownUnits, str] | None = None
        self.label_entry = QLineEdit()
        self.label_problem = _small_label("error")
        self.count_label = _small_label("soft")
        self.series = SeriesGroup()
        self.groups[FURNITURE].rows.insertWidget(0, self._label_row())
        self.groups[PLATE].rows.addWidget(self.count_label)
        self.add_below(self.series)
        self.label_entry.editingFinished.connect(self._on_label_entry_finished)
        self.series.series_requested.connect(self._on_series_requested)
        document.project_changed.connect(self.refresh)
        settings.units_changed.connect(self.refresh)
        self.refresh()

    def _label_row(self) -> QWidget:
        row = QWidget()
        grid = QGridLayout(row)
        grid.setContentsMargins(0, 0, 0, 0)
        grid.setHorizontalSpacing(SPACING.small)
        name = QLabel("Words on the chip")
        name.setBuddy(self.label_entry)
        self.label_entry.setAccessibleName("Words on the chip")
        self.label_entry.setToolTip("Drawn on the chip as closed shapes; empty for the name of the chip.")
        grid.addWidget(name, 0, 0)
        grid.addWidget(self.label_entry, 0, 1)
        grid.addWidget(self.label_problem, 1, 0, 1, 2)
        return row

    def refresh(self) -> None:
        """Show what the document holds."""
        plan, units = self._document.plan, ShownUnits.of(self._settings)
        if (plan, units, self._document.project.name) == self._shown:
            return
        self._shown = (plan, units, self._document.project.name)
        self.show_values(plan.as_dict(), units)
        for name, plates in _PLATES_OF_FIELD.items():
            self.editors[name].setVisible(plan.plate in plates)
        if self.label_entry.text() != plan.label:
            self.label_entry.setText(plan.label)
            _show(self.label_problem, "")
        self.label_entry.setPlaceholderText(self._document.project.name)
        self.series.setVisible(plan.plate != "single chip" or bool(plan.series))
        self.series.show_series(plan.series, units)

    def show_count(self, text: str) -> None:
        """Say how many chips there are on the plate."""
        _show(self.count_label, text)

    def change(self, name: str, value: Value, gesture: int | None) -> None:
        """Change a field of the plan."""
        self._document.change_plan_values({name: value}, gesture=gesture)

    def _on_label_entry_finished(self) -> None:
        plan, label = self._document.plan, self.label_entry.text().strip()
        if label == plan.label:
            return
        try:
            self._document.change_plan(replace(plan, label=label), "Change the words on the chip")
        except DesignValueError as error:
            self.label_entry.setText(plan.label)
            _show(self.label_problem, screen_words(str(error)))

    def _on_series_requested(self, series: tuple[SteppedField, ...]) -> None:
        words = ", ".join(each.field.label for each in series)
        text = f"Step {words} over the plate" if words else "Step nothing over the plate"
        try:
            self._document.change_plan(replace(self._document.plan, series=series), text)
        except DesignValueError as error:
            self.series.refuse(error)


def _small_label(role: str) -> QLabel:
    label = QLabel()
    label.setFont(font("small"))
    label.setWordWrap(True)
    set_role(label, role)
    label.hide()
    return label


def _show(label: QLabel, text: str) -> None:
    label.setText(text)
    label.setVisible(bool(text))
