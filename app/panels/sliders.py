"""The column of sliders: every field of the design and of its operating point, by group."""

from __future__ import annotations

from typing import TYPE_CHECKING

from app.panels.field_column import FieldColumn
from app.shown_values import ShownUnits
from core.operating import OPERATING_FIELDS
from core.parameters import CHANNEL_FIELDS, MAKING

if TYPE_CHECKING:
    from app.document import Document
    from app.settings import Settings
    from core.fields import Value

# fields that only mean something for one fluid
_FLUID_OF_FIELD = {
    "glycerol_percent": "glycerol-water",
    "own_density_kg_m3": "own",
    "own_viscosity_mpa_s": "own",
}


class SlidersPanel(FieldColumn):
    """Edits the set in hand and the operating point, bound to the document both ways."""

    def __init__(self, document: Document, settings: Settings) -> None:
        fields = [*CHANNEL_FIELDS.values(), *OPERATING_FIELDS.values()]
        # the rounding that the process causes comes last
        super().__init__(sorted(fields, key=lambda field: field.group == MAKING), document.new_gesture)
        self._document, self._settings = document, settings
        document.project_changed.connect(self.refresh)
        settings.units_changed.connect(self.refresh)
        self.refresh()

    def refresh(self) -> None:
        """Show what the document holds."""
        values = {**self._document.channel.as_dict(), **self._document.operating.as_dict()}
        self.show_values(values, ShownUnits.of(self._settings))
        for name, fluid in _FLUID_OF_FIELD.items():
            self.editors[name].setVisible(values["fluid"] == fluid)

    def change(self, name: str, value: Value, gesture: int | None) -> None:
        """Change a field of the set in hand or of the operating point."""
        change = self._document.change_channel if name in CHANNEL_FIELDS else self._document.change_operating
        change({name: value}, gesture=gesture)
