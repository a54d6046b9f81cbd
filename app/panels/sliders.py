"""The column of sliders: every field of the design and of its operating point, by group."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QFrame, QScrollArea, QToolButton, QVBoxLayout, QWidget

from app.look import SPACING, font
from app.panels.field_editor import FieldEditor, editor_for
from app.shown_values import ShownUnits
from core.errors import DesignValueError
from core.operating import OPERATING_FIELDS
from core.parameters import CHANNEL_FIELDS, MAKING

if TYPE_CHECKING:
    from app.document import Document
    from app.settings import Settings

# fields that only mean something for one fluid
_FLUID_OF_FIELD = {
    "glycerol_percent": "glycerol-water",
    "own_density_kg_m3": "own",
    "own_viscosity_mpa_s": "own",
}


class FieldGroup(QFrame):
    """A heading that opens and closes, with rows below it."""

    def __init__(self, title: str) -> None:
        super().__init__()
        self.setProperty("panel", True)
        self.header = QToolButton()
        self.header.setText(title)
        self.header.setFont(font("heading"))
        self.header.setCheckable(True)
        self.header.setChecked(True)
        self.header.setAutoRaise(True)
        self.header.setToolButtonStyle(Qt.ToolButtonStyle.ToolButtonTextBesideIcon)
        self.header.setStyleSheet("QToolButton { border: none; background: transparent; }")
        self.header.setAccessibleDescription("Opens and closes this group of fields")
        self.body = QWidget()
        self.rows = QVBoxLayout(self.body)
        self.rows.setContentsMargins(SPACING.medium, 0, SPACING.small, SPACING.small)
        self.rows.setSpacing(SPACING.hair)
        outer = QVBoxLayout(self)
        outer.setContentsMargins(0, 0, 0, 0)
        outer.setSpacing(0)
        outer.addWidget(self.header)
        outer.addWidget(self.body)
        self.header.toggled.connect(self._on_header_toggled)
        self._on_header_toggled(True)

    def _on_header_toggled(self, is_open: bool) -> None:
        self.body.setVisible(is_open)
        self.header.setArrowType(Qt.ArrowType.DownArrow if is_open else Qt.ArrowType.RightArrow)


class SlidersPanel(QScrollArea):
    """Edits the set in hand and the operating point, bound to the document both ways.

    Signals
    -------
    field_attended(object)
        Name of the field under the pointer or the focus, None when it is left.
    """

    field_attended = Signal(object)

    def __init__(self, document: Document, settings: Settings) -> None:
        super().__init__()
        self._document, self._settings = document, settings
        self.editors: dict[str, FieldEditor] = {}
        self.groups: dict[str, FieldGroup] = {}
        self.setWidgetResizable(True)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.column = QWidget()
        self._layout = QVBoxLayout(self.column)
        self._layout.setContentsMargins(SPACING.small, SPACING.small, SPACING.small, SPACING.small)
        self._layout.setSpacing(SPACING.small)
        fields = [*CHANNEL_FIELDS.values(), *OPERATING_FIELDS.values()]
        for field in sorted(fields, key=lambda field: field.group == MAKING):  # the process comes last
            self._add(editor_for(field, document.new_gesture))
        self._layout.addStretch(1)
        self.setWidget(self.column)
        self.setMinimumWidth(self.column.minimumSizeHint().width() + self.verticalScrollBar().sizeHint().width())
        document.project_changed.connect(self.refresh)
        settings.units_changed.connect(self.refresh)
        self.refresh()

    def _add(self, editor: FieldEditor) -> None:
        title = editor.field.group
        if title not in self.groups:
            self.groups[title] = FieldGroup(title)
            self._layout.addWidget(self.groups[title])
        self.groups[title].rows.addWidget(editor)
        self.editors[editor.field.name] = editor
        editor.change_requested.connect(self._on_editor_change_requested)
        editor.attended.connect(self.field_attended)

    def refresh(self) -> None:
        """Show what the document holds."""
        units = ShownUnits.of(self._settings)
        values = {**self._document.channel.as_dict(), **self._document.operating.as_dict()}
        for name, editor in self.editors.items():
            if editor.value != values[name] or editor.units != units or not editor.toolTip():
                editor.show_value(values[name], units)
            if name in _FLUID_OF_FIELD:
                editor.setVisible(values["fluid"] == _FLUID_OF_FIELD[name])

    def reveal(self, field_name: str) -> None:
        """Open the group of a field, scroll to it and give it the focus."""
        editor = self.editors.get(field_name)
        if editor is None:
            return
        self.groups[editor.field.group].header.setChecked(True)
        self.ensureWidgetVisible(editor)
        buddy = editor.name_label.buddy()
        if buddy is not None:
            buddy.setFocus(Qt.FocusReason.ShortcutFocusReason)

    def _on_editor_change_requested(self, name: str, value: object, gesture: int | None) -> None:
        change = self._document.change_channel if name in CHANNEL_FIELDS else self._document.change_operating
        try:
            change({name: value}, gesture=gesture)
        except DesignValueError as error:
            self.editors[name].refuse(error)
        else:
            self.editors[name].show_problem("")
