"""A column of fields under headings that open and close; what the fields belong to is said by those who build on it."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QEvent, QObject, Qt, Signal
from PySide6.QtWidgets import QFrame, QScrollArea, QToolButton, QVBoxLayout, QWidget

from app.look import SPACING, font
from app.panels.field_editor import FieldEditor, editor_for
from core.errors import DesignValueError

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Mapping

    from app.shown_values import ShownUnits
    from core.fields import Field, Value


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


class FieldColumn(QScrollArea):
    """Rows of fields by group, in a column that scrolls.

    Parameters
    ----------
    fields : iterable of Field
        In the order in which they are shown; a group stands where its first field does.
    new_gesture : callable
        Gives the number under which the changes of one drag are undone together.

    Signals
    -------
    field_attended(object)
        Name of the field under the pointer or the focus, None when it is left.
    """

    field_attended = Signal(object)

    def __init__(self, fields: Iterable[Field], new_gesture: Callable[[], int]) -> None:
        super().__init__()
        self.editors: dict[str, FieldEditor] = {}
        self.groups: dict[str, FieldGroup] = {}
        self.setWidgetResizable(True)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.column = QWidget()
        self._layout = QVBoxLayout(self.column)
        self._layout.setContentsMargins(SPACING.small, SPACING.small, SPACING.small, SPACING.small)
        self._layout.setSpacing(SPACING.small)
        for field in fields:
            self._add(editor_for(field, new_gesture))
        self._layout.addStretch(1)
        self.setWidget(self.column)
        self._fit_width()

    def _add(self, editor: FieldEditor) -> None:
        title = editor.field.group
        if title not in self.groups:
            self.groups[title] = FieldGroup(title)
            self._layout.addWidget(self.groups[title])
        self.groups[title].rows.addWidget(editor)
        self.editors[editor.field.name] = editor
        editor.change_requested.connect(self._on_editor_change_requested)
        editor.attended.connect(self.field_attended)

    @property
    def first_target(self) -> QWidget | None:
        """What takes the focus when the keys come to this page."""
        return next(iter(self.editors.values())).name_label.buddy()

    def add_above(self, part: QWidget) -> None:
        """Put a part above the groups."""
        self._layout.insertWidget(0, part)

    def add_below(self, part: QWidget) -> None:
        """Put a part below the groups."""
        self._layout.insertWidget(self._layout.count() - 1, part)

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        """Follow rows that come, go and grow: the column never scrolls sideways."""
        if watched is self.column and event.type() == QEvent.Type.LayoutRequest:
            self._fit_width()
        return super().eventFilter(watched, event)

    def _fit_width(self) -> None:
        """Be as wide as the widest row needs."""
        self.setMinimumWidth(self.column.minimumSizeHint().width() + self.verticalScrollBar().sizeHint().width())

    def show_values(self, values: Mapping[str, Value], units: ShownUnits) -> None:
        """Show the values of all fields; rows that are as they should be are left alone."""
        for name, editor in self.editors.items():
            if editor.value != values[name] or editor.units != units or not editor.toolTip():
                editor.show_value(values[name], units)

    def change(self, name: str, value: Value, gesture: int | None) -> None:
        """Change one field of whatever they belong to; raises ``DesignValueError`` if it cannot be used."""
        raise NotImplementedError

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

    def _on_editor_change_requested(self, name: str, value: Value, gesture: int | None) -> None:
        try:
            self.change(name, value, gesture)
        except DesignValueError as error:
            self.editors[name].refuse(error)
        else:
            self.editors[name].show_problem("")
