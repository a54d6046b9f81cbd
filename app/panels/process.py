"""Making it: the process, what it can do, what it does to a drawing, and what to beware of."""

from __future__ import annotations

from functools import lru_cache
from typing import TYPE_CHECKING

from PySide6.QtCore import QSize, Qt
from PySide6.QtWidgets import QLabel, QPushButton, QVBoxLayout, QWidget

from app.look import SPACING, font, set_role
from app.panels.field_column import FieldColumn, FieldGroup
from app.panels.process_kind import ProcessKindBox
from app.shown_values import ShownUnits
from core.errors import DesignValueError
from core.fabrication.process import PROCESS_FIELDS
from core.fabrication.shipped import CONFIRM, SOURCES, about, cautions_of, shipped_process

if TYPE_CHECKING:
    from app.document import Document
    from app.panels.field_editor import FieldEditor
    from app.settings import Settings
    from core.fabrication.process import Process
    from core.fields import Value

_USUAL = "the usual choice for this process"  # of words; every number has a source of its own


class ProcessColumn(FieldColumn):
    """Edits every value of the process; what differs from the shipped value is marked and can be put back."""

    def __init__(self, document: Document) -> None:
        fields = [field for name, field in PROCESS_FIELDS.items() if name != "kind"]
        super().__init__(fields, document.new_gesture)
        self._document = document
        self._kind = ""

    def show_process(self, process: Process, units: ShownUnits) -> None:
        """Show the values of a process, with the way back to those shipped for its kind.

        Values that can be no other way in this kind, or beside the other values, have no row.
        """
        if process.kind != self._kind:
            self._kind = process.kind
            shipped = shipped_process(process.kind)
            for name, editor in self.editors.items():
                editor.set_default(getattr(shipped, name), source=SOURCES[process.kind].get(name, _USUAL))
                editor.show_value(getattr(process, name), units)
                editor.show_problem("")
        self.show_values(process.as_dict(), units)
        for name, editor in self.editors.items():
            editor.setVisible(_has_choice(process, name))
        for title, group in self.groups.items():
            names = (name for name, editor in self.editors.items() if editor.field.group == title)
            group.setVisible(any(_has_choice(process, name) for name in names))

    def change(self, name: str, value: Value, gesture: int | None) -> None:
        """Change a value of the process."""
        self._document.change_process({name: value}, gesture=gesture)


class ProcessPanel(QWidget):
    """The page on which the process is chosen and edited, bound to the document both ways."""

    def __init__(self, document: Document, settings: Settings) -> None:
        super().__init__()
        self._document, self._settings = document, settings
        self.kind_box = ProcessKindBox()
        self.about_label = _label("soft")
        self.confirm_label = _label("warning", f"\N{WHITE UP-POINTING TRIANGLE} {CONFIRM}")
        self.put_back_button = QPushButton()
        self.cautions_label = _label()
        cautions = FieldGroup("\N{WARNING SIGN} Cautions")
        cautions.rows.addWidget(self.cautions_label)
        self.column = ProcessColumn(document)
        self.column.add_above(cautions)
        self._place()
        self._gesture: int | None = None
        self._shown: tuple[Process, ShownUnits] | None = None
        self.kind_box.entered.connect(self._on_kind_box_entered)
        self.kind_box.kind_chosen.connect(lambda kind: document.choose_process(kind, gesture=self._gesture))
        self.put_back_button.clicked.connect(self.put_back)
        document.project_changed.connect(self.refresh)
        settings.units_changed.connect(self.refresh)
        self.refresh()

    def _place(self) -> None:
        head = QVBoxLayout()
        head.setContentsMargins(SPACING.medium, SPACING.small, SPACING.medium, 0)
        head.setSpacing(SPACING.hair)
        for part in (self.kind_box, self.about_label, self.confirm_label, self.put_back_button):
            head.addWidget(part)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(SPACING.hair)
        layout.addLayout(head)
        layout.addWidget(self.column, 1)

    @property
    def editors(self) -> dict[str, FieldEditor]:
        """The rows by name of their field."""
        return self.column.editors

    @property
    def first_target(self) -> QWidget:
        """What takes the focus when the keys come to this page."""
        return self.kind_box

    def sizeHint(self) -> QSize:
        """Be as narrow as may be: the drawing needs the room."""
        return QSize(self.minimumSizeHint().width(), super().sizeHint().height())

    def refresh(self) -> None:
        """Show what the document holds."""
        process, units = self._document.process, ShownUnits.of(self._settings)
        if (process, units) == self._shown:  # any change of the project leads here
            return
        self._shown = (process, units)
        self.kind_box.show_kind(process.kind)
        self.column.show_process(process, units)
        _show(self.about_label, about(process.kind))
        _show(self.cautions_label, "\n".join(f"\N{BULLET} {each}" for each in cautions_of(process.kind)))
        changed = sum(value != self.editors[name].field.default for name, value in _edited(process).items())
        self.put_back_button.setVisible(changed > 0)
        self.put_back_button.setText(f"Put {changed} changed value{'' if changed == 1 else 's'} &back")

    def _on_kind_box_entered(self) -> None:
        self._gesture = self._document.new_gesture()

    def put_back(self) -> None:
        """Take all values that are shipped for this kind of process, as one step."""
        process = self._document.process
        shipped = _edited(shipped_process(process.kind))
        changed = {name: value for name, value in shipped.items() if value != getattr(process, name)}
        self._document.change_process(changed)

    def reveal(self, field_name: str) -> None:
        """Scroll to a field and give it the focus."""
        self.column.reveal(field_name)


@lru_cache(maxsize=256)
def _has_choice(process: Process, name: str) -> bool:
    """Return whether a value could be another one while all others stay."""
    field, value = PROCESS_FIELDS[name], getattr(process, name)
    others = field.choices or (field.minimum, field.maximum, float(value) + field.step)
    return any(_is_accepted(process, name, other) for other in others if other != value)


def _is_accepted(process: Process, name: str, value: object) -> bool:
    try:
        process.with_values({name: value})
    except DesignValueError:
        return False
    return True


def _edited(process: Process) -> dict[str, Value]:
    """Return the values that have a row of their own."""
    values = process.as_dict()
    del values["kind"]
    return values


def _show(label: QLabel, text: str) -> None:
    if label.text() != text:
        label.setText(text)


def _label(role: str = "", text: str = "") -> QLabel:
    label = QLabel(text)
    label.setFont(font("small"))
    label.setWordWrap(True)
    label.setTextFormat(Qt.TextFormat.PlainText)
    label.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
    if role:
        set_role(label, role)
    return label
