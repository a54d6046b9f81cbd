"""The large drawing of one channel, to scale.

Use::

    view = ChannelView()
    view.use_palette(look.palette);  look.palette_changed.connect(view.use_palette)
    view.show_shape(shape, last_good=None)       # at every change of the parameters
    view.show_shape(shape, last_good=usable)     # when ``shape`` has no outline
    view.fit(animated=False)                     # when another parameter set is chosen
    view.highlight_field("loop_radius_um")       # while its slider is handled; None afterwards
    view.show_shares(lambda stage: (0.23, 0.61)) # loop shares of a stage, forward and reverse; None hides them
    view.show_findings(findings)                 # other findings than those of the shape
    view.show_beside({Walls.MADE: made})         # other walls; an empty mapping hides them

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

from app.drawing.finding_marks import NO_FINDING, looked_at_um
from app.drawing.picture import Picture
from app.drawing.zoom_area import ZoomArea

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from PySide6.QtGui import QHelpEvent, QKeyEvent, QPaintEvent

    from app.drawing.beside import Walls
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

    def show_shape(
        self, shape: ChannelShape | None, *, last_good: ChannelShape | None = None, keeps_findings: bool = False
    ) -> None:
        """Show a shape.

        Parameters
        ----------
        shape : ChannelShape or None
            What the user asked for; None empties the drawing.
        last_good : ChannelShape or None
            The latest shape that had an outline, drawn pale when ``shape`` has none.
        keeps_findings : bool
            True to leave those shown until others come by ``show_findings``, so that marks do not
            flicker during a drag; otherwise the shape's own are shown.
        """
        self._picture.set_shape(shape, last_good)
        self.set_bounds(self._picture.bounds_um)
        if keeps_findings:
            self.setAccessibleDescription(self._picture.summary())
            self.update()
        else:
            self.show_findings(shape.findings if shape is not None else (), chosen=self.selected_finding)

    def show_findings(self, findings: tuple[Finding, ...], *, chosen: int = NO_FINDING) -> None:
        """Mark other findings; the one chosen is stressed and the view stays where it is."""
        self._picture.marks.findings = findings
        self.mark_finding(chosen if chosen < len(findings) else NO_FINDING)
        self.setAccessibleDescription(self._picture.summary())
        self.update()

    def show_beside(self, shapes: Mapping[Walls, ChannelShape]) -> None:
        """Show other walls beside the wanted ones, with a legend."""
        if self._picture.beside.show(shapes):
            self.update()

    def highlight_field(self, name: str | None) -> None:
        """Show and stress the dimension of a parameter, as while its slider is moved."""
        if name != self._picture.field:
            self._picture.field = name
            self.update()

    def show_shares(self, shares: Callable[[int], tuple[float, float] | None] | None) -> None:
        """Label loop and bypass with their shares of the flow, both ways.

        Parameters
        ----------
        shares : callable or None
            Given a stage, counted from 0 in the reverse flow, returns its loop shares forward and reverse, 0 to 1.
            None hides the labels.
        """
        self._picture.shares = shares
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
        """Findings that are marked; their places in this tuple are the indices of the signals."""
        return self._picture.marks.findings

    @property
    def selected_finding(self) -> int:
        """Index of the finding that is picked, -1 for none."""
        return self._picture.marks.chosen

    def show_finding(self, index: int) -> None:
        """Pick a finding, show its message and go where its place and what was measured can be seen; -1 picks none."""
        if not NO_FINDING <= index < len(self.findings):
            return
        self.mark_finding(index)
        if index == NO_FINDING:
            return
        finding = self.findings[index]
        if finding.x_um is not None and finding.y_um is not None:
            self.come_near(finding.x_um, finding.y_um, length_um=looked_at_um(finding))

    def finding_boxes(self) -> dict[int, QRectF]:
        """Return where the marks of findings are on the screen, by index [px]."""
        return self._picture.marks.boxes(self.camera)

    def mark_finding(self, index: int) -> None:
        """Pick a finding and show its message where the view is; -1 picks none."""
        if index != self._picture.marks.chosen:
            self._picture.marks.chosen = index
            self.finding_selected.emit(index)
            self.update()

    def _finding_at(self, point_px: QPointF) -> int:
        for index, box in self.finding_boxes().items():
            if box.adjusted(-_NEAR_PX, -_NEAR_PX, _NEAR_PX, _NEAR_PX).contains(point_px):
                return index
        return NO_FINDING

    def clicked_at(self, point_px: QPointF) -> None:
        """Pick the finding whose mark was clicked, or none."""
        self.mark_finding(self._finding_at(point_px))

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Step through findings; the rest is zoom and pan."""
        step = _FINDING_KEYS.get(event.key())
        if step and self.findings:
            start = max(self.selected_finding, -1 if step > 0 else 0)
            self.show_finding((start + step) % len(self.findings))
        elif event.key() == Qt.Key.Key_Escape and self.selected_finding != NO_FINDING:
            self.mark_finding(NO_FINDING)
        else:
            super().keyPressEvent(event)

    def event(self, event: QEvent) -> bool:
        """Tell a finding's message where the pointer rests on its mark."""
        if event.type() != QEvent.Type.ToolTip:
            return super().event(event)
        help_event: QHelpEvent = event  # type: ignore[assignment]  # by its type
        index = self._finding_at(QPointF(help_event.pos()))
        text = "" if index == NO_FINDING else self._picture.marks.message(index)  # no text hides the tip
        QToolTip.showText(help_event.globalPos(), text, self)
        return True

    def paintEvent(self, event: QPaintEvent) -> None:
        """Paint the picture, and a frame while the keys go here."""
        area = QRectF(self.rect())
        with QPainter(self) as painter:
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            self._picture.paint(painter, area, self.camera)
            self.paint_focus(painter, self._picture.palette.accent)
