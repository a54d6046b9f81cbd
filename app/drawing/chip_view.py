"""The drawing of the chip, or of the plate full of chips, to scale.

Use::

    view = ChipView()
    view.show_chip(shown, findings)      # at every change; None while there is nothing to show
    view.select(2)                       # a channel by its place in the plan's list, -1 for none

Signals
    ``channel_selected(index)`` when another channel is in hand, -1 for none;
    ``move_requested(index, x_um, y_um, is_held)`` when one was dragged, or moved by a key (held or not);
    ``remove_requested(index)`` for the key Delete;
    ``finding_selected(index)``; places are whole micrometres from the middle of the chip in hand.

Keys, with the focus on the drawing
    Space and Shift+Space next and previous channel, arrows move it by 100 um (with Shift by 1 um),
    Delete removes it, Esc lets go of it. Without one in hand arrows pan.
    + - zoom, F or 0 fit all, C fit the chip in hand, Page Down and Page Up step through findings.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QEvent, QPointF, QRectF, Qt, Signal
from PySide6.QtGui import QPainter
from PySide6.QtWidgets import QToolTip, QWidget

from app.drawing import chip_signs
from app.drawing.chip_picture import ChipPicture
from app.drawing.chip_shown import NONE, PlacedChannel, ShownChip
from app.drawing.zoom_area import ZoomArea

if TYPE_CHECKING:
    from collections.abc import Sequence

    from PySide6.QtGui import QHelpEvent, QKeyEvent, QMouseEvent, QPaintEvent

    from app.look import Palette
    from core.chip.plan import ChipChannel
    from core.findings import Finding

_NEAR_PX = 4.0
_FAR_STEP_UM, _NEAR_STEP_UM = 100.0, 1.0
_ARROWS: dict[int, tuple[int, int]] = {
    Qt.Key.Key_Left: (-1, 0), Qt.Key.Key_Right: (1, 0), Qt.Key.Key_Up: (0, 1), Qt.Key.Key_Down: (0, -1),
}  # fmt: skip
_FINDING_KEYS: dict[int, int] = {Qt.Key.Key_PageDown: 1, Qt.Key.Key_PageUp: -1}


class ChipView(ZoomArea):
    """Shows a chip or a plate of chips to scale; see the module for signals and keys."""

    channel_selected = Signal(int)
    move_requested = Signal(int, float, float, bool)
    remove_requested = Signal(int)
    finding_selected = Signal(int)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setAccessibleName("Chip drawing")
        self._picture = ChipPicture()
        self._grabbed: tuple[PlacedChannel, tuple[float, float]] | None = None

    # --- what is shown --------------------------------------------------------------------

    def use_palette(self, palette: Palette) -> None:
        """Paint with other colours from now on."""
        self._picture.use_palette(palette)
        self.update()

    def set_length_unit(self, unit: str) -> None:
        """Write lengths in ``um`` or ``mm``."""
        self._picture.unit = unit
        self.setAccessibleDescription(self._picture.summary())
        self.update()

    def show_chip(self, shown: ShownChip | None, findings: Sequence[Finding] = ()) -> None:
        """Show another chip; the channel and the copy in hand stay in hand if they are still there."""
        was = self._picture.selected
        self._picture.set_shown(shown, tuple(findings))
        self._grabbed = None
        self.setAccessibleDescription(self._picture.summary())
        self.set_bounds(self._picture.bounds_um)
        if was != self._picture.selected:
            self.channel_selected.emit(self._picture.selected)
        self.update()

    def show_message(self, text: str) -> None:
        """Write a line over the drawing, such as that it is being made anew; empty text takes it away."""
        if text != self._picture.message:
            self._picture.message = text
            self.update()

    @property
    def shown(self) -> ShownChip | None:
        """What is shown."""
        return self._picture.shown

    @property
    def selected(self) -> int:
        """The channel in hand by its place in the plan's list, -1 for none."""
        return self._picture.selected

    @property
    def copy_in_hand(self) -> int:
        """Number of the chip on the plate in which channels are handled."""
        return self._picture.copy

    def select(self, index: int) -> None:
        """Take a channel in hand, -1 for none."""
        if index == self._picture.selected or index not in (NONE, *(c.index for c in self._picture.channels())):
            return
        self._picture.selected = index
        self.channel_selected.emit(index)
        self.setAccessibleDescription(self._picture.summary())
        self.update()

    def fit_chip(self) -> None:
        """Show the chip in hand as large as it fits."""
        if (bounds := self._picture.copy_bounds_um()) is not None:
            self.show_part(bounds)

    def box_of(self, index: int) -> QRectF:
        """Return where a channel of the chip in hand is on the screen [px]."""
        channel = next(each for each in self._picture.channels() if each.index == index)
        return chip_signs.box_px(channel.box_um, self.camera, self._picture.copy_um())

    # --- findings -------------------------------------------------------------------------

    @property
    def selected_finding(self) -> int:
        """Index of the finding that is picked, -1 for none."""
        return self._picture.marks.chosen

    def show_finding(self, index: int) -> None:
        """Pick a finding and go where its place and what was measured can be seen; -1 picks none."""
        findings = self._picture.marks.findings
        if not NONE <= index < len(findings):
            return
        self._pick(index)
        if index != NONE and findings[index].x_um is not None:
            found = findings[index]
            self.come_near(found.x_um, found.y_um, length_um=found.value_um if found.ends_um is not None else None)

    def finding_boxes(self) -> dict[int, QRectF]:
        """Return where the marks of findings are on the screen, by index [px]."""
        return self._picture.marks.boxes(self.camera)

    def set_first_number(self, number: int) -> None:
        """Give the marks numbers from here on, behind those of another drawing."""
        self._picture.marks.first_number = number
        self.update()

    def _pick(self, index: int) -> None:
        if index != self._picture.marks.chosen:
            self._picture.marks.chosen = index
            self.finding_selected.emit(index)
            self.update()

    def _finding_at(self, point_px: QPointF) -> int:
        near = (-_NEAR_PX, -_NEAR_PX, _NEAR_PX, _NEAR_PX)
        return next((i for i, box in self.finding_boxes().items() if box.adjusted(*near).contains(point_px)), NONE)

    # --- the hand -------------------------------------------------------------------------

    def _channel_at(self, point_px: QPointF) -> PlacedChannel | None:
        """Return the smallest channel of the chip in hand whose bounds are at a pixel."""
        copy_um, found = self._picture.copy_um(), []
        for channel in self._picture.channels():
            box = chip_signs.box_px(channel.box_um, self.camera, copy_um)
            if box.adjusted(-_NEAR_PX, -_NEAR_PX, _NEAR_PX, _NEAR_PX).contains(point_px):
                found.append((box.width() * box.height(), channel.index, channel))
        return min(found)[2] if found else None

    def clicked_at(self, point_px: QPointF) -> None:
        """Pick a finding, or take the copy and the channel under the pointer in hand."""
        finding = self._finding_at(point_px)
        self._pick(finding)
        if finding == NONE:
            self._take_copy_at(point_px)
            channel = self._channel_at(point_px)
            self.select(channel.index if channel else NONE)

    def _take_copy_at(self, point_px: QPointF) -> None:
        if self._picture.shown is None:
            return
        copy = self._picture.shown.copy_at(*self.camera.to_um(point_px))
        if copy not in (NONE, self._picture.copy):
            self._picture.take_copy(copy)
            self.update()

    def mousePressEvent(self, event: QMouseEvent) -> None:
        """Grab the channel in hand, or start to drag the paper."""
        super().mousePressEvent(event)
        if event.button() != Qt.MouseButton.LeftButton:
            return
        channel = self._channel_at(event.position())
        if channel is not None and self._finding_at(event.position()) == NONE:
            self._grabbed = (channel, self.camera.to_um(event.position()))

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        """Carry a grabbed channel along; the rest is as with any drawing."""
        if self._grabbed is None or self._pressed_px is None:
            super().mouseMoveEvent(event)
            return
        here = event.position()
        if self._picture.carried_um is None and (here - self._pressed_px).manhattanLength() < _NEAR_PX:
            return
        channel, start_um = self._grabbed
        self.select(channel.index)
        x, y = self.camera.to_um(here)
        place = self._place_of(channel.index)
        x, y = self._target(channel.index, (x - start_um[0], y - start_um[1]))
        self._picture.carried_um = (x - place.x_um, y - place.y_um)
        self.setCursor(Qt.CursorShape.SizeAllCursor)
        self.pointer_moved.emit(*self.camera.to_um(here))
        self.update()

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        """Put a carried channel down."""
        carried, grabbed = self._picture.carried_um, self._grabbed
        self._grabbed = self._picture.carried_um = None
        if carried is not None and grabbed is not None:
            self._pressed_px = self._dragged_px = None
            self.unsetCursor()
            self._request_move(grabbed[0].index, carried, is_held=False)
            self.update()
        else:
            super().mouseReleaseEvent(event)

    def _place_of(self, index: int) -> ChipChannel:
        assert self._picture.shown is not None
        return self._picture.shown.plan.channels[index]

    def _target(self, index: int, by_um: tuple[float, float]) -> tuple[float, float]:
        """Return where a channel comes to stand when it is moved: on whole micrometres [um]."""
        place = self._place_of(index)
        return float(round(place.x_um + by_um[0])), float(round(place.y_um + by_um[1]))

    def _request_move(self, index: int, by_um: tuple[float, float], *, is_held: bool) -> None:
        self.move_requested.emit(index, *self._target(index, by_um), is_held)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Choose, move and remove channels, step through findings; the rest is zoom and pan."""
        key, is_shifted = event.key(), bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
        if key == Qt.Key.Key_Space:
            self._step_channel(-1 if is_shifted else 1)
        elif key in _FINDING_KEYS and self._picture.marks.findings:
            step = _FINDING_KEYS[key]
            start = max(self.selected_finding, -1 if step > 0 else 0)
            self.show_finding((start + step) % len(self._picture.marks.findings))
        elif key in _ARROWS and self.selected != NONE:
            step_um = _NEAR_STEP_UM if is_shifted else _FAR_STEP_UM
            dx, dy = _ARROWS[key]
            self._request_move(self.selected, (dx * step_um, dy * step_um), is_held=event.isAutoRepeat())
        elif key == Qt.Key.Key_Delete and self.selected != NONE:
            self.remove_requested.emit(self.selected)
        elif key == Qt.Key.Key_Escape and (self.selected, self.selected_finding) != (NONE, NONE):
            self._let_go()
        elif key == Qt.Key.Key_C and not event.modifiers():
            self.fit_chip()
        else:
            super().keyPressEvent(event)

    def _let_go(self) -> None:
        if self._picture.carried_um is not None:
            self._grabbed = self._pressed_px = self._picture.carried_um = None
            self.unsetCursor()
            self.update()
        else:
            self.select(NONE)
            self._pick(NONE)

    def _step_channel(self, step: int) -> None:
        order = [channel.index for channel in self._picture.channels()]
        if order:
            here = order.index(self.selected) if self.selected in order else -1 if step > 0 else 0
            self.select(order[(here + step) % len(order)])

    def event(self, event: QEvent) -> bool:
        """Tell a finding's message where the pointer rests on its mark."""
        if event.type() != QEvent.Type.ToolTip:
            return super().event(event)
        help_event: QHelpEvent = event  # type: ignore[assignment]  # by its type
        index = self._finding_at(QPointF(help_event.pos()))
        QToolTip.showText(help_event.globalPos(), "" if index == NONE else self._picture.marks.message(index), self)
        return True

    def paintEvent(self, event: QPaintEvent) -> None:
        """Paint the picture; once more soon if not all of it could be painted sharp in this frame."""
        area = QRectF(self.rect())
        with QPainter(self) as painter:
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            is_complete = self._picture.paint(
                painter, area, self.camera, is_moving=self.is_gliding, ratio=self.devicePixelRatioF()
            )
            self.paint_focus(painter, self._picture.palette.accent)
        if not is_complete and not self.is_gliding:
            self.update()
