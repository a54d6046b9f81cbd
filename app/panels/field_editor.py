"""One row of the slider column: name, exact entry, unit, way back to the default, slider, complaint."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from PySide6.QtCore import QEvent, QObject, QSize, Qt, Signal
from PySide6.QtGui import QEnterEvent, QKeyEvent
from PySide6.QtWidgets import QComboBox, QGridLayout, QLabel, QLineEdit, QToolButton, QWidget

from app.look import SPACING, font, set_role
from app.panels.field_slider import FieldSlider
from app.panels.still_box import StillComboBox
from app.shown_values import DIFFERENT, ShownUnits, entry_text, screen_words, value_text, word_for
from core.errors import DesignValueError
from core.units import unit_symbol

if TYPE_CHECKING:
    from collections.abc import Callable

    from core.fields import Field, Value

_LONGEST_NAME = 18  # letters of a name that stands in one line beside its entry
_LONGEST_BESIDE = 22  # letters of a choice that still fits beside the field's name


class FieldEditor(QWidget):
    """What all rows share; the rows themselves are made by ``editor_for``.

    Parameters
    ----------
    field : Field
        The field to edit; everything shown comes from it.
    new_gesture : callable
        Gives the number under which the changes of one drag are undone together.

    Signals
    -------
    change_requested(str, object, object)
        Field name, wanted value in stored units, number of the gesture or None.
    attended(object)
        Name of the field under the pointer or the focus, None when it is left.
    """

    change_requested = Signal(str, object, object)
    attended = Signal(object)

    def __init__(self, field: Field, new_gesture: Callable[[], int]) -> None:
        super().__init__()
        self.field = field
        self.value: Value = field.default
        self.units = ShownUnits()
        self._source = ""
        self._new_gesture = new_gesture
        self._gesture: int | None = None
        self.setObjectName(field.name)
        self.name_label = QLabel(field.label)
        self.name_label.setWordWrap(len(field.label) > _LONGEST_NAME)
        self.reset_button = self._made_reset_button()
        self.problem_label = QLabel()
        self.problem_label.setWordWrap(True)
        self.problem_label.setFont(font("small"))
        self.problem_label.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        set_role(self.problem_label, "error")
        self.problem_label.hide()
        self.grid = QGridLayout(self)
        self.grid.setContentsMargins(0, 0, 0, 0)
        self.grid.setHorizontalSpacing(SPACING.small)
        self.grid.setVerticalSpacing(0)
        self.grid.setColumnStretch(0, 1)
        self.grid.addWidget(self.name_label, 0, 0)
        self.grid.addWidget(self.reset_button, 0, 3)
        self.grid.addWidget(self.problem_label, 2, 0, 1, 4)

    def _made_reset_button(self) -> QToolButton:
        button = QToolButton()
        button.setText("\N{ANTICLOCKWISE OPEN CIRCLE ARROW}")
        button.setAutoRaise(True)
        button.setProperty("low", True)
        button.setFixedSize(QSize(24, 24))
        button.setAccessibleName(f"Back to the default of {self.field.label}")
        policy = button.sizePolicy()
        policy.setRetainSizeWhenHidden(True)
        button.setSizePolicy(policy)
        button.clicked.connect(lambda: self.request(self.field.default))
        button.hide()
        return button

    def set_default(self, value: Value, *, source: str) -> None:
        """Go back to another value than the field's own from now on, and mark whatever differs from it.

        Parameters
        ----------
        value : float, int or str
            Where the way back leads.
        source : str
            Where that value comes from, for the tool tip.
        """
        self.field, self._source = replace(self.field, default=value), source

    def watch(self, *widgets: QWidget) -> None:
        """Tell when one of the row's own widgets has the focus."""
        for widget in widgets:
            widget.installEventFilter(self)

    def show_value(self, value: Value, units: ShownUnits) -> None:
        """Show what the document holds."""
        if value != self.value:
            self.show_problem("")
        self.value, self.units = value, units
        is_changed = value != self.field.default
        self.reset_button.setVisible(is_changed)
        default = value_text(self.field, self.field.default, units)
        self.reset_button.setToolTip(f"Back to {default}")
        source = f" ({self._source})" if self._source else ""
        self.setToolTip(
            f"{self.field.help}\nAllowed: {self.limit_text()}. Default: {default}{source}.\n{self.key_hint()}"
        )
        if self._source:
            self.name_label.setText(f"{DIFFERENT} {self.field.label}" if is_changed else self.field.label)
        self.show_in_widgets()

    def show_problem(self, text: str) -> None:
        """Show one line under the row that says why a value was refused; empty text removes it."""
        self.problem_label.setText(text)
        self.problem_label.setVisible(bool(text))

    def limit_text(self) -> str:
        """Return what is accepted, in the screen's units and words."""
        if self.field.choices:
            return ", ".join(word_for(choice) for choice in self.field.choices)
        return self.units.field(self.field).limit

    def refuse(self, error: DesignValueError) -> None:
        """Tell why a value cannot be used and show the old one again."""
        kept = value_text(self.field, self.value, self.units)
        story = screen_words(str(error).removeprefix(error.field))
        is_own = error.field == self.field.name
        self.show_in_widgets()
        self.show_problem(f"{self.field.label if is_own else screen_words(error.field)}{story}. {kept} stays.")

    def request(self, value: Value, gesture: int | None = None) -> None:
        """Ask for a value in stored units."""
        self.change_requested.emit(self.field.name, value, gesture)

    def begin_gesture(self) -> None:
        """Start a drag or a key press whose changes belong together."""
        self._gesture = self._new_gesture()

    def show_in_widgets(self) -> None:
        """Show ``self.value`` in the row's own widgets."""
        raise NotImplementedError

    def key_hint(self) -> str:
        """Return which keys change the value."""
        raise NotImplementedError

    def enterEvent(self, event: QEnterEvent) -> None:
        """Point the field out on the drawing."""
        self.attended.emit(self.field.name)
        super().enterEvent(event)

    def leaveEvent(self, event: QEvent) -> None:
        """Stop pointing it out."""
        self.attended.emit(None)
        super().leaveEvent(event)

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        """Follow the focus."""
        if event.type() == QEvent.Type.FocusIn:
            self.attended.emit(self.field.name)
        elif event.type() == QEvent.Type.FocusOut:
            self.attended.emit(None)
        return super().eventFilter(watched, event)


class NumberEditor(FieldEditor):
    """Row of a number: exact entry and slider."""

    def __init__(self, field: Field, new_gesture: Callable[[], int]) -> None:
        super().__init__(field, new_gesture)
        self.entry = QLineEdit()
        self.entry.setAlignment(Qt.AlignmentFlag.AlignRight)
        self.entry.setFixedWidth(78)
        self.entry.setAccessibleName(field.label)
        self.name_label.setBuddy(self.entry)
        self.unit_label = QLabel()
        set_role(self.unit_label, "soft")
        self.unit_label.setMinimumWidth(46)
        self.slider = FieldSlider(field)
        self.grid.addWidget(self.entry, 0, 1)
        self.grid.addWidget(self.unit_label, 0, 2)
        self.grid.addWidget(self.slider, 1, 0, 1, 4)
        self.watch(self.entry, self.slider)
        self.entry.editingFinished.connect(self._on_entry_finished)
        self.slider.sliderPressed.connect(self.begin_gesture)
        self.slider.slid.connect(self._on_slid)
        self.slider.stepped.connect(self._on_stepped)
        self.slider.end_requested.connect(lambda is_top: self.request(field.maximum if is_top else field.minimum))

    def set_default(self, value: Value, *, source: str) -> None:
        """Move the notch of the slider along."""
        super().set_default(value, source=source)
        self.slider.show_default(float(value))

    def show_in_widgets(self) -> None:
        """Show the value in entry and slider."""
        text = self._text()
        if self.entry.text() != text:
            self.entry.setText(text)
        self.entry.setModified(False)
        self.unit_label.setText(unit_symbol(self.units.unit_for(self.field.unit)))
        self.slider.show_value(float(self.value))

    def key_hint(self) -> str:
        """Return which keys change the value."""
        step = value_text(self.field, self.field.step, self.units)
        return f"Arrow keys: {step}. Page keys: ten steps. Home and End: the bounds. Escape: undo typing."

    def _text(self) -> str:
        return entry_text(self.units.shown(float(self.value), self.field.unit))

    def _on_entry_finished(self) -> None:
        if not self.entry.isModified() or self.entry.text() == self._text():
            return
        shown_field = self.units.field(self.field)
        try:
            number = float(shown_field.checked(self.entry.text().strip()))
        except DesignValueError as error:
            self.refuse(error)
            self.entry.selectAll()
            return
        self.show_problem("")
        self.request(self.units.stored(number, self.field.unit))

    def _on_slid(self, value: float) -> None:
        if not self.slider.isSliderDown():
            self.begin_gesture()
        self.request(value, self._gesture)

    def _on_stepped(self, steps: int, is_held: bool) -> None:
        if not is_held:
            self.begin_gesture()
        field = self.field
        wanted = min(max(float(self.value) + steps * field.step, field.minimum), field.maximum)
        self.request(wanted, self._gesture)

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        """Let arrows step and Escape take typing back in the entry."""
        if watched is self.entry and event.type() == QEvent.Type.KeyPress:
            assert isinstance(event, QKeyEvent)
            steps = {Qt.Key.Key_Up: 1, Qt.Key.Key_Down: -1, Qt.Key.Key_PageUp: 10, Qt.Key.Key_PageDown: -10}
            if event.key() in steps:
                self._on_stepped(steps[Qt.Key(event.key())], event.isAutoRepeat())
                return True
            if event.key() == Qt.Key.Key_Escape:
                self.show_problem("")
                self.show_in_widgets()
                return True
        return super().eventFilter(watched, event)


class ChoiceEditor(FieldEditor):
    """Row of a word chosen from a few."""

    def __init__(self, field: Field, new_gesture: Callable[[], int]) -> None:
        super().__init__(field, new_gesture)
        self.box = StillComboBox()
        self.box.setAccessibleName(field.label)
        for choice in field.choices:
            self.box.addItem(word_for(choice), choice)
        self.name_label.setBuddy(self.box)
        is_long = max(len(word_for(choice)) for choice in field.choices) > _LONGEST_BESIDE
        self.grid.addWidget(self.box, *((1, 0, 1, 4) if is_long else (0, 1, 1, 2)))
        if is_long:  # it may be as narrow as the column
            self.box.setSizeAdjustPolicy(QComboBox.SizeAdjustPolicy.AdjustToMinimumContentsLengthWithIcon)
            self.box.setMinimumContentsLength(_LONGEST_BESIDE)
        self.watch(self.box)
        self.box.activated.connect(lambda index: self.request(self.box.itemData(index)))

    def show_in_widgets(self) -> None:
        """Show the chosen word."""
        self.box.setCurrentIndex(self.box.findData(self.value))

    def key_hint(self) -> str:
        """Return which keys change the value."""
        return "Arrow keys choose."


def editor_for(field: Field, new_gesture: Callable[[], int]) -> FieldEditor:
    """Return the row that suits a field."""
    return ChoiceEditor(field, new_gesture) if field.choices else NumberEditor(field, new_gesture)
