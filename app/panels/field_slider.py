"""The slider of one field: its own scale, a notch at the default, keys that step as the field says."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QLineF, QRect, QRectF, Qt, Signal
from PySide6.QtGui import QPainter, QPalette, QPen
from PySide6.QtWidgets import QApplication, QSlider, QStyle, QStyleOptionSlider

from app.panels.slider_scale import SliderScale

if TYPE_CHECKING:
    from PySide6.QtGui import QKeyEvent, QMouseEvent, QPaintEvent, QWheelEvent

    from core.fields import Field

_STEPS_OF_KEY = {
    Qt.Key.Key_Left: -1,
    Qt.Key.Key_Down: -1,
    Qt.Key.Key_Right: 1,
    Qt.Key.Key_Up: 1,
    Qt.Key.Key_PageDown: -10,
    Qt.Key.Key_PageUp: 10,
}


class FieldSlider(QSlider):
    """Slides one number over its bounds.

    Signals
    -------
    slid(float)
        The hand moved the handle to this value.
    stepped(int, bool)
        A key asks for so many steps; True when the key is held down.
    end_requested(bool)
        The Home (False) or End (True) key.
    """

    slid = Signal(float)
    stepped = Signal(int, bool)
    end_requested = Signal(bool)

    def __init__(self, field: Field) -> None:
        super().__init__(Qt.Orientation.Horizontal)
        self._scale = SliderScale.of(field)
        self._default_tick = self._scale.tick(float(field.default))
        self.setRange(0, self._scale.tick_count)
        self.setAccessibleName(field.label)
        self.setMinimumHeight(20)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.valueChanged.connect(lambda tick: self.slid.emit(self._scale.value(tick)))

    def show_default(self, value: float) -> None:
        """Put the notch of the default elsewhere."""
        self._default_tick = self._scale.tick(value)
        self.update()

    def show_value(self, value: float) -> None:
        """Put the handle where a value sits; a handle under the hand is left alone."""
        if not self.isSliderDown():
            self.blockSignals(True)
            self.setValue(self._scale.tick(value))
            self.blockSignals(False)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Step as the field says, not in places of the slider."""
        key = Qt.Key(event.key())
        if key in _STEPS_OF_KEY:
            self.stepped.emit(_STEPS_OF_KEY[key], event.isAutoRepeat())
        elif key in (Qt.Key.Key_Home, Qt.Key.Key_End):
            self.end_requested.emit(key == Qt.Key.Key_End)
        else:
            super().keyPressEvent(event)

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Take the handle to the pointer at once, then drag as usual."""
        handle = self._handle_rect()
        if event.button() == Qt.MouseButton.LeftButton and not handle.contains(event.position().toPoint()):
            self.setSliderDown(True)
            self.setSliderPosition(self._tick_at(event.position().x(), handle.width()))
        super().mousePressEvent(event)

    def _tick_at(self, x: float, handle_width: int) -> int:
        span = self.width() - handle_width
        return QStyle.sliderValueFromPosition(0, self.maximum(), round(x - handle_width / 2), span)

    def wheelEvent(self, event: QWheelEvent) -> None:
        """Leave the wheel to the column, so that scrolling never changes a design."""
        event.ignore()

    def paintEvent(self, _event: QPaintEvent) -> None:
        """Draw the rail, a notch at the default, and the handle."""
        handle = QRectF(self._handle_rect())
        middle = self.height() / 2.0
        # the application's own colours: a style sheet may have changed those of the widget
        colours, role = QApplication.palette(), QPalette.ColorRole
        ink, rail, stress = (colours.color(each) for each in (role.PlaceholderText, role.Mid, role.Accent))
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(rail)
        painter.drawRoundedRect(QRectF(0.0, middle - 1.5, self.width(), 3.0), 1.5, 1.5)
        painter.setBrush(stress if self.hasFocus() else ink)
        painter.drawRoundedRect(QRectF(0.0, middle - 1.5, handle.center().x(), 3.0), 1.5, 1.5)
        painter.setPen(QPen(ink, 1.0))
        span = self.width() - handle.width()
        notch = QStyle.sliderPositionFromValue(0, self.maximum(), self._default_tick, int(span)) + handle.width() / 2.0
        painter.drawLine(QLineF(notch, middle + 4.0, notch, middle + 8.0))
        is_handled = self.hasFocus() or self.underMouse()
        painter.setPen(QPen(stress if is_handled else ink, 2.0))
        is_filled = self.isSliderDown() or self.hasFocus()
        painter.setBrush(stress if is_filled else colours.color(role.Base))
        body = QRectF(handle.center().x() - 4.0, middle - 7.0, 8.0, 14.0)
        painter.drawRoundedRect(body, 3.0, 3.0)

    def _handle_rect(self) -> QRect:
        option = QStyleOptionSlider()
        self.initStyleOption(option)
        control, part = QStyle.ComplexControl.CC_Slider, QStyle.SubControl.SC_SliderHandle
        return self.style().subControlRect(control, option, part, self)
