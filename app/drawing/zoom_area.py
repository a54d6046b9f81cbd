"""A widget to look at a drawing: zoom at the pointer, drag, fit; by mouse, touch and keys."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QEasingCurve, QEvent, QPointF, QRectF, Qt, QVariantAnimation, Signal
from PySide6.QtWidgets import QPinchGesture, QSizePolicy, QStyle, QWidget

from app.drawing.camera import Camera
from app.drawing.signs import line_pen

if TYPE_CHECKING:
    from PySide6.QtGui import QKeyEvent, QMouseEvent, QNativeGestureEvent, QPainter, QResizeEvent, QWheelEvent
    from PySide6.QtWidgets import QGestureEvent

    Bounds = tuple[float, float, float, float]

_ZOOM_PER_NOTCH = 1.25
_ZOOM_PER_KEY = 1.4
_PAN_PER_KEY_PX = 60.0
_ANIMATION_MS = 160
_CLICK_PX = 4.0
_SEEN_PX = 70.0  # as long as a length should be on the screen to be looked at
_NEAR_ENOUGH = 2.0  # it may be shorter by this
# room kept around a fitted drawing for arrows, dimensions and the scale bar: left, top, right, bottom
MARGINS_PX = (88.0, 58.0, 88.0, 84.0)

_ZOOM_KEYS: dict[int, int] = {Qt.Key.Key_Plus: 1, Qt.Key.Key_Equal: 1, Qt.Key.Key_Minus: -1, Qt.Key.Key_Underscore: -1}
_PAN_KEYS: dict[int, tuple[int, int]] = {
    Qt.Key.Key_Left: (1, 0),
    Qt.Key.Key_Right: (-1, 0),
    Qt.Key.Key_Up: (0, 1),
    Qt.Key.Key_Down: (0, -1),
}
_FIT_KEYS = (Qt.Key.Key_F, Qt.Key.Key_0, Qt.Key.Key_Home)


class ZoomArea(QWidget):
    """Holds the camera and moves it; what is to be seen is painted by the class that builds on it.

    Until the user zooms or drags, the view *follows*: it stays still while the drawing changes a
    little and fits again when the drawing grows out of it or gets small.
    """

    pointer_moved = Signal(float, float)  # x_um, y_um
    pointer_left = Signal()
    view_changed = Signal()

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setMouseTracking(True)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Expanding)
        self.setMinimumSize(240, 160)
        self.setAttribute(Qt.WidgetAttribute.WA_OpaquePaintEvent)
        self.grabGesture(Qt.GestureType.PinchGesture)
        self._camera = Camera()
        self._goal = self._camera
        self._bounds_um: Bounds | None = None
        self._is_following = True
        self._is_animated = True
        self._pressed_px: QPointF | None = None
        self._dragged_px: QPointF | None = None
        self._animation = QVariantAnimation(self, startValue=0.0, endValue=1.0, duration=_ANIMATION_MS)
        self._animation.setEasingCurve(QEasingCurve.Type.OutCubic)
        self._animation.valueChanged.connect(self._on_animation_value_changed)
        self._origin = self._camera

    @property
    def camera(self) -> Camera:
        """Where the drawing is looked at from now."""
        return self._camera

    @property
    def is_following(self) -> bool:
        """True until the user chooses a view; true again after a fit."""
        return self._is_following

    @property
    def is_gliding(self) -> bool:
        """True while the view is on its way to where it was sent."""
        return self._camera != self._goal

    def set_animated(self, is_animated: bool) -> None:
        """Let zoom and fit glide (the default, unless the system asks for less motion), or jump."""
        self._is_animated = is_animated

    def set_bounds(self, bounds_um: Bounds | None) -> None:
        """Tell the extent of what is drawn; fits again when following calls for it."""
        was_empty, self._bounds_um = self._bounds_um is None, bounds_um
        if bounds_um is None or not self._is_following:
            return
        if was_empty:
            self.fit(animated=False)
        elif self._is_badly_framed(bounds_um):
            self.fit()

    def fit(self, *, animated: bool = True) -> None:
        """Show the whole drawing, and follow it from now on."""
        self._is_following = True
        if self._bounds_um is not None:
            self._go_to(Camera.fitting(self._bounds_um, self._fit_area()), animated=animated)

    def show_part(self, bounds_um: Bounds) -> None:
        """Show a part of the drawing as large as it fits."""
        self._is_following = False
        self._go_to(Camera.fitting(bounds_um, self._fit_area()), animated=True)

    def zoom_in(self) -> None:
        """Come closer to the middle of the view."""
        self.zoom(_ZOOM_PER_KEY)

    def zoom_out(self) -> None:
        """Step back from the middle of the view."""
        self.zoom(1.0 / _ZOOM_PER_KEY)

    def zoom(self, factor: float, at_px: QPointF | None = None, *, animated: bool = True) -> None:
        """Zoom by a factor; the place at a pixel (default: the middle) stays there."""
        self._is_following = False
        self._go_to(self._goal.zoomed(factor, at_px or QRectF(self.rect()).center()), animated=animated)

    def pan(self, dx_px: float, dy_px: float, *, animated: bool = False) -> None:
        """Move the drawing by some pixels."""
        self._is_following = False
        self._go_to(self._goal.moved(dx_px, dy_px), animated=animated)

    def is_in_view(self, x_um: float, y_um: float) -> bool:
        """Whether a place is shown, once the view has come to rest."""
        return QRectF(self.rect()).contains(self._goal.to_px((x_um, y_um)))

    def come_near(self, x_um: float, y_um: float, *, length_um: float | None = None) -> None:
        """Bring a place into view, and close enough to see a length there; a view that shows both stays."""
        middle = QRectF(self.rect()).center()
        factor = 1.0 if not length_um else max(1.0, _SEEN_PX * self._goal.um_per_px / length_um)
        if self.is_in_view(x_um, y_um) and factor < _NEAR_ENOUGH:
            return
        off = middle - self._goal.to_px((x_um, y_um))
        self._is_following = False
        self._go_to(self._goal.moved(off.x(), off.y()).zoomed(factor, middle), animated=True)

    def _fit_area(self) -> QRectF:
        left, top, right, bottom = MARGINS_PX
        share = min(1.0, self.width() / 640.0, self.height() / 400.0)
        return QRectF(self.rect()).adjusted(left * share, top * share, -right * share, -bottom * share)

    def _is_badly_framed(self, bounds_um: Bounds) -> bool:
        corners = (self._goal.to_px(bounds_um[:2]), self._goal.to_px(bounds_um[2:]))
        shown, area = QRectF(*corners).normalized(), self._fit_area()
        is_small = shown.width() < 0.6 * area.width() and shown.height() < 0.6 * area.height()
        return is_small or not area.adjusted(-30, -20, 30, 20).contains(shown)

    def _go_to(self, goal: Camera, *, animated: bool) -> None:
        self._goal, self._origin = goal, self._camera
        self._animation.stop()
        if animated and self._is_animated and self.isVisible() and self._system_allows_motion():
            self._animation.start()
        else:
            self._set_camera(goal)

    def _system_allows_motion(self) -> bool:
        return self.style().styleHint(QStyle.StyleHint.SH_Widget_Animation_Duration, None, self) > 0

    def _on_animation_value_changed(self, share: float) -> None:
        self._set_camera(self._origin.blended(self._goal, share))

    def _set_camera(self, camera: Camera) -> None:
        self._camera = camera
        self.view_changed.emit()
        self.update()

    def paint_focus(self, painter: QPainter, colour: str) -> None:
        """Paint a frame while the keys go here."""
        if self.hasFocus():
            painter.setPen(line_pen(colour, width_px=2.0))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawRect(QRectF(self.rect()).adjusted(1, 1, -1, -1))

    def clicked_at(self, point_px: QPointF) -> None:
        """Take a click that was no drag."""

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Keep a followed drawing fitted, and the middle of a chosen view in the middle."""
        super().resizeEvent(event)
        if self._is_following:
            self.fit(animated=False)
        elif event.oldSize().isValid():
            grown = event.size() - event.oldSize()
            self._go_to(self._goal.moved(grown.width() / 2.0, grown.height() / 2.0), animated=False)

    def wheelEvent(self, event: QWheelEvent) -> None:
        """Zoom at the pointer; two fingers on a touch pad pan, with Ctrl they zoom."""
        has_fingers = event.phase() != Qt.ScrollPhase.NoScrollPhase
        if has_fingers and not event.modifiers() & Qt.KeyboardModifier.ControlModifier:
            self.pan(event.pixelDelta().x(), event.pixelDelta().y())
        else:
            self.zoom(_ZOOM_PER_NOTCH ** (event.angleDelta().y() / 120.0), event.position(), animated=not has_fingers)
        event.accept()

    def event(self, event: QEvent) -> bool:
        """Take pinches of touch pads and touch screens."""
        if event.type() == QEvent.Type.NativeGesture:
            return self._take_native_gesture(event)  # type: ignore[arg-type]  # by its type
        if event.type() == QEvent.Type.Gesture:
            return self._take_gesture(event)  # type: ignore[arg-type]  # by its type
        return super().event(event)

    def _take_native_gesture(self, event: QNativeGestureEvent) -> bool:
        if event.gestureType() != Qt.NativeGestureType.ZoomNativeGesture:
            return False
        self.zoom(1.0 + event.value(), event.position(), animated=False)
        return True

    def _take_gesture(self, event: QGestureEvent) -> bool:
        pinch = event.gesture(Qt.GestureType.PinchGesture)
        if not isinstance(pinch, QPinchGesture):
            return False
        at_px = QPointF(self.mapFromGlobal(pinch.centerPoint()))
        self.zoom(pinch.scaleFactor(), at_px, animated=False)
        return True

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Start a drag or a click."""
        if event.button() in (Qt.MouseButton.LeftButton, Qt.MouseButton.MiddleButton):
            self._pressed_px, self._dragged_px = event.position(), None

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        """Drag the drawing, and tell where the pointer is."""
        here = event.position()
        if self._pressed_px is not None:
            if self._dragged_px is None and (here - self._pressed_px).manhattanLength() >= _CLICK_PX:
                self._dragged_px = self._pressed_px
                self.setCursor(Qt.CursorShape.ClosedHandCursor)
            if self._dragged_px is not None:
                self.pan(here.x() - self._dragged_px.x(), here.y() - self._dragged_px.y())
                self._dragged_px = here
        self.pointer_moved.emit(*self._camera.to_um(here))

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        """End a drag, or take a click."""
        was_click = self._pressed_px is not None and self._dragged_px is None
        self._pressed_px = self._dragged_px = None
        self.unsetCursor()
        if was_click and event.button() == Qt.MouseButton.LeftButton:
            self.clicked_at(event.position())

    def mouseDoubleClickEvent(self, event: QMouseEvent) -> None:
        """Fit."""
        if event.button() == Qt.MouseButton.LeftButton:
            self.fit()

    def leaveEvent(self, event: QEvent) -> None:
        """Tell that the pointer is gone."""
        super().leaveEvent(event)
        self.pointer_left.emit()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Zoom, pan and fit."""
        key = event.key()
        if key in _ZOOM_KEYS:
            self.zoom(_ZOOM_PER_KEY ** _ZOOM_KEYS[key])
        elif key in _PAN_KEYS:
            self.pan(*(_PAN_PER_KEY_PX * sign for sign in _PAN_KEYS[key]), animated=True)
        elif key in _FIT_KEYS and not event.modifiers() & ~Qt.KeyboardModifier.KeypadModifier:
            self.fit()
        else:
            super().keyPressEvent(event)
