"""The large drawing of one channel, to scale.

Use::

    view = ChannelView()
    view.use_palette(look.palette);  look.palette_changed.connect(view.use_palette)
    view.show_shape(shape, last_good=None)       # at every change of the parameters
    view.show_shape(shape, last_good=usable)     # when ``shape`` has no outline
    view.fit(animated=False)                     # when another parameter set is chosen
    view.highlight_field("loop_radius_um")       # while its slider is handled; None afterwards
    view.show_shares(0.23, 0.61)                 # loop shares, forward and reverse; None hides them

Signals
    ``pointer_moved(x_um, y_um)`` and ``pointer_left()`` for a read-out;
    ``view_changed()`` after zoom or pan;
    ``finding_selected(index)`` when the user picks a finding's mark, -1 when none is picked.

Slots for menus and buttons
    ``fit()``, ``zoom_in()``, ``zoom_out()``, ``set_centrelines_shown(bool)``,
    ``set_dimensions_shown(bool)``, ``set_length_unit("um" | "mm")``, ``show_finding(index)``.

Keys, with the focus on the drawing
    + - zoom, arrows pan, F or 0 fit, Page Down and Page Up next and previous finding, Esc none.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QEvent, QPointF, QRectF, Qt, Signal
from PySide6.QtGui import QPainter
from PySide6.QtWidgets import QToolTip, QWidget

from app.drawing.picture import NO_FINDING, Picture
from app.drawing.signs import line_pen
from app.drawing.zoom_area import ZoomArea

if TYPE_CHECKING:
    from PySide6.QtGui import QHelpEvent, QKeyEvent, QPaintEvent

    from app.drawing.flow_overlay import FlowOverlay
    from app.look import Palette
    from core.findings import Finding
    from core.geometry.shape import ChannelShape

_NEAR_PX = 4.0  # a mark may be missed by this much
_FINDING_KEYS: dict[int, int] = {Qt.Key.Key_PageDown: 1, Qt.Key.Key_PageUp: -1}


class ChannelView(ZoomArea):
    """Shows one channel to scale; see the module for signals, slots and keys.

    Parameters
    ----------
    parent : QWidget, optional
        As for any widget.
    """

    finding_selected = Signal(int)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setAccessibleName("Channel drawing")
        self._picture = Picture()

    def use_palette(self, palette: Palette) -> None:
        """Paint with other colours from now on."""
        self._picture.palette = palette
        self.update()

    def show_shape(self, shape: ChannelShape | None, *, last_good: ChannelShape | None = None) -> None:
        """Show a shape.

        Parameters
        ----------
        shape : ChannelShape or None
            What the user asked for; None empties the drawing.
        last_good : ChannelShape or None
            The latest shape that had an outline, drawn pale when ``shape`` has none.
        """
        self._picture.set_shape(shape, last_good)
        if self._picture.finding >= len(self.findings):
            self._select(NO_FINDING)
        self.setAccessibleDescription(self._picture.summary())
        self.set_bounds(self._picture.bounds_um)
        self.update()

    def highlight_field(self, name: str | None) -> None:
        """Show and stress the dimension of a parameter, as while its slider is moved."""
        if name != self._picture.field:
            self._picture.field = name
            self.update()

    def show_shares(self, forward: float | None, reverse: float | None) -> None:
        """Label loop and bypass with their shares of the flow, both ways.

        Parameters
        ----------
        forward, reverse : float or None
            Loop share, 0 to 1; None hides the labels.
        """
        self._picture.shares = None if forward is None or reverse is None else (forward, reverse)
        self.update()

    def use_overlay(self, overlay: FlowOverlay) -> None:
        """Lay a solved flow over the channel from now on, as far as the overlay shows one."""
        self._picture.overlay = overlay
        overlay.changed.connect(self.update)

    def paint_kept(self, painter: QPainter) -> None:
        """Paint what is seen now into a picture that is kept, sharp and without the frame of the focus."""
        self._picture.is_kept = True
        self._picture.paint(painter, QRectF(self.rect()), self.camera)
        self._picture.is_kept = False

    def set_length_unit(self, unit: str) -> None:
        """Write lengths in ``um`` or ``mm``."""
        self._picture.set_unit(unit)
        self.setAccessibleDescription(self._picture.summary())
        self.update()

    def set_centrelines_shown(self, is_shown: bool) -> None:
        """Draw the centre lines, or not."""
        self._picture.has_centrelines = is_shown
        self.update()

    def set_dimensions_shown(self, is_shown: bool) -> None:
        """Draw the dimensions, or only the one that is handled."""
        self._picture.has_dimensions = is_shown
        self.update()

    @property
    def findings(self) -> tuple[Finding, ...]:
        """Findings of the shape shown; their places in this tuple are the indices of the signals."""
        return self._picture.findings

    @property
    def selected_finding(self) -> int:
        """Index of the finding that is picked, -1 for none."""
        return self._picture.finding

    def show_finding(self, index: int) -> None:
        """Pick a finding, show its message and bring its place into view; -1 picks none."""
        if not NO_FINDING <= index < len(self.findings):
            return
        self._select(index)
        if index == NO_FINDING:
            return
        x_um, y_um = self.findings[index].x_um, self.findings[index].y_um
        if x_um is not None and y_um is not None and not self.is_in_view(x_um, y_um):
            self.centre_on(x_um, y_um)

    def finding_boxes(self) -> dict[int, QRectF]:
        """Return where the marks of findings are on the screen, by index [px]."""
        return self._picture.finding_boxes(self.camera)

    def _select(self, index: int) -> None:
        if index != self._picture.finding:
            self._picture.finding = index
            self.finding_selected.emit(index)
            self.update()

    def _finding_at(self, point_px: QPointF) -> int:
        for index, box in self.finding_boxes().items():
            if box.adjusted(-_NEAR_PX, -_NEAR_PX, _NEAR_PX, _NEAR_PX).contains(point_px):
                return index
        return NO_FINDING

    def clicked_at(self, point_px: QPointF) -> None:
        """Pick the finding whose mark was clicked, or none."""
        self._select(self._finding_at(point_px))

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Step through findings; the rest is zoom and pan."""
        step = _FINDING_KEYS.get(event.key())
        if step and self.findings:
            start = max(self.selected_finding, -1 if step > 0 else 0)
            self.show_finding((start + step) % len(self.findings))
        elif event.key() == Qt.Key.Key_Escape and self.selected_finding != NO_FINDING:
            self._select(NO_FINDING)
        else:
            super().keyPressEvent(event)

    def event(self, event: QEvent) -> bool:
        """Tell a finding's message where the pointer rests on its mark."""
        if event.type() != QEvent.Type.ToolTip:
            return super().event(event)
        help_event: QHelpEvent = event  # type: ignore[assignment]  # by its type
        index = self._finding_at(QPointF(help_event.pos()))
        text = "" if index == NO_FINDING else self._picture.message(index)  # no text hides the tip
        QToolTip.showText(help_event.globalPos(), text, self)
        return True

    def paintEvent(self, event: QPaintEvent) -> None:
        """Paint the picture, and a frame while the keys go here."""
        area = QRectF(self.rect())
        with QPainter(self) as painter:
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            self._picture.paint(painter, area, self.camera)
            if self.hasFocus():
                painter.setPen(line_pen(self._picture.palette.accent, width_px=2.0))
                painter.setBrush(Qt.BrushStyle.NoBrush)
                painter.drawRect(area.adjusted(1, 1, -1, -1))
