"""What the chip's drawing shows and how its parts lie on one another; knows no mouse and no keys."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter

from app.drawing import chip_signs, layers, signs
from app.drawing.chip_ground import draw_ground
from app.drawing.chip_painter import ScenePainter
from app.drawing.chip_paths import BlockStore
from app.drawing.chip_shown import NONE, PlacedChannel, ShownChip
from app.drawing.dimensions import length_text
from app.drawing.finding_marks import NO_FINDING, FindingMarks
from app.look import SPACING, font
from core.chip.bodies import title_of

if TYPE_CHECKING:
    from app.drawing.camera import Camera
    from app.look import Palette
    from core.findings import Finding

    Bounds = tuple[float, float, float, float]


class ChipPicture:
    """A chip as it is to be painted.

    Attributes
    ----------
    unit : str
        Unit of lengths, ``um`` or ``mm``.
    message : str
        A line over the drawing; empty for none.
    shown : ShownChip or None
        What is painted.
    marks : FindingMarks
        The findings of the chip, and which of them is picked; they stand on the chip in hand.
    selected, copy : int
        The channel in hand (``NONE`` for none), the chip in hand.
    carried_um : tuple of two float, or None
        How far the channel in hand has been carried [um].
    """

    def __init__(self) -> None:
        self.unit = "um"
        self.message = ""
        self.shown: ShownChip | None = None
        self.marks = FindingMarks()
        self.selected = NONE
        self.copy = 0
        self.carried_um: tuple[float, float] | None = None
        self._findings: tuple[Finding, ...] = ()
        self._painter = ScenePainter()

    @property
    def palette(self) -> Palette:
        """Colours in use."""
        return self._painter.palette

    def use_palette(self, palette: Palette) -> None:
        """Paint in other colours."""
        self._painter.use_palette(palette)

    def set_shown(self, shown: ShownChip | None, findings: tuple[Finding, ...]) -> None:
        """Show another chip."""
        was, self.shown = self.shown, shown
        self._findings, self.carried_um = findings, None
        self._painter.store = shown.store if shown else BlockStore()
        if shown is None or was is None or len(was.copies) != len(shown.copies):
            self.copy = shown.middle_copy if shown else 0
        if self.selected not in [channel.index for channel in self.channels()]:
            self.selected = NONE
        if self.marks.chosen >= len(findings):
            self.marks.chosen = NO_FINDING
        self._place_marks()

    def take_copy(self, copy: int) -> None:
        """Take another chip of the plate in hand."""
        self.copy = copy
        self._place_marks()

    def _place_marks(self) -> None:
        self.marks.findings = tuple(_on_copy(finding, self.copy_um()) for finding in self._findings)

    @property
    def bounds_um(self) -> Bounds | None:
        """Extent of chip or plate [um]."""
        return self.shown.bounds_um if self.shown else None

    def channels(self) -> tuple[PlacedChannel, ...]:
        """Return the channels of the chip in hand."""
        return self.shown.channels(self.copy) if self.shown else ()

    def copy_um(self) -> tuple[float, float]:
        """Return the middle of the chip in hand [um]."""
        if self.shown is None or not self.shown.copies:
            return 0.0, 0.0
        return self.shown.copies[self.copy][1:]

    def copy_bounds_um(self) -> Bounds | None:
        """Return the extent of the chip in hand [um]."""
        if self.shown is None or not self.shown.copies:
            return None
        (x, y), plan = self.copy_um(), self.shown.plan
        half_x, half_y = plan.chip_width_um / 2.0, plan.chip_height_um / 2.0
        return x - half_x, y - half_y, x + half_x, y + half_y

    def size_text(self) -> str:
        """Return the chip's size, and how many there are, in words."""
        if self.shown is None:
            return ""
        plan, chips = self.shown.plan, len(self.shown.copies)
        width, height = (length_text(side, self.unit) for side in (plan.chip_width_um, plan.chip_height_um))
        copies = "" if plan.plate == "single chip" else f", {chips} chip{'' if chips == 1 else 's'} on the {plan.plate}"
        return f"chip {width} by {height}{copies}"

    def summary(self) -> str:
        """Return the picture in words."""
        if self.shown is None:
            return "No chip."
        words = [self.size_text(), *(channel.name for channel in self.channels())]
        if self.selected != NONE:
            words.append(f"in hand: {self._place_text()}")
        words += [self.marks.message(index) for index in range(len(self.marks.findings))]
        return "; ".join(words) + "."

    def _place_text(self) -> str:
        assert self.shown is not None
        channel = self.shown.plan.channels[self.selected]
        dx, dy = self.carried_um or (0.0, 0.0)
        x, y = (length_text(value, self.unit) for value in (channel.x_um + dx, channel.y_um + dy))
        return f"{title_of(channel)}: x {x}, y {y}"

    def paint(
        self, painter: QPainter, area: QRectF, camera: Camera,
        *, is_moving: bool = False, ratio: float = 1.0, has_time: bool = False,
    ) -> bool:  # fmt: skip
        """Paint everything; returns False when another frame is needed to have it all sharp.

        Parameters
        ----------
        painter : QPainter
            With antialiasing, in device-independent pixels.
        area : QRectF
            What is to be covered [px].
        camera : Camera
            From micrometres to pixels.
        is_moving, ratio, has_time
            As for ``ScenePainter.paint``.
        """
        painter.fillRect(area, QColor(self.palette.ground))
        if self.shown is None:
            painter.setFont(font("body"))
            painter.setPen(QColor(self.palette.ink_soft))
            painter.drawText(area, Qt.AlignmentFlag.AlignCenter, self.message or "No chip to draw")
            return True
        draw_ground(painter, self.shown.ground, camera, self.palette)
        is_complete = self._painter.paint(
            painter, self.shown.scene, camera, area, is_moving=is_moving, ratio=ratio, has_time=has_time
        )
        self._paint_signs(painter, area, camera, self.shown)
        return is_complete

    def _paint_signs(self, painter: QPainter, area: QRectF, camera: Camera, shown: ShownChip) -> None:
        copy_um, channels = self.copy_um(), self.channels()
        if len(shown.copies) > 1:
            self._paint_copy_frame(painter, camera)
        chip_signs.draw_names(painter, channels, camera, copy_um, self.palette)
        held = next((channel for channel in channels if channel.index == self.selected), None)
        if held is not None:
            if self.carried_um is not None:
                shift = (copy_um[0] + self.carried_um[0], copy_um[1] + self.carried_um[1])
                chip_signs.draw_ghost(painter, held.path, camera, shift, self.palette)
            box = chip_signs.box_px(held.box_um, camera, copy_um)
            chip_signs.draw_in_hand(painter, box, area, self.palette, self._place_text())
        legend = chip_signs.draw_legend(painter, area, shown.layers, self.palette)
        bar = layers.draw_scale(painter, area, camera, self.palette, unit=self.unit)
        note = signs.label_box(self.size_text(), bar.center())
        note.moveLeft(bar.right() + SPACING.medium)
        if note.right() > legend.left():
            note.moveBottomLeft(bar.topLeft() - QPointF(0.0, SPACING.hair))
        signs.draw_note(painter, note, self.size_text(), self.palette)
        self._paint_findings(painter, area, camera)
        if self.message:
            box = signs.label_box(self.message, area.center())
            box.moveTop(area.top() + SPACING.medium)
            signs.draw_label(painter, box, self.message, self.palette)

    def _paint_copy_frame(self, painter: QPainter, camera: Camera) -> None:
        bounds = self.copy_bounds_um()
        assert bounds is not None
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.setPen(signs.line_pen(self.palette.accent, width_px=1.5))
        painter.drawRect(QRectF(camera.to_px(bounds[:2]), camera.to_px(bounds[2:])).normalized())

    def _paint_findings(self, painter: QPainter, area: QRectF, camera: Camera) -> None:
        self.marks.paint(painter, self.marks.boxes(camera), camera, self.palette, self.unit)
        chosen = self.marks.chosen
        if chosen != NO_FINDING:
            text = f"{self.marks.message(chosen)}."
            number, severity = self.marks.first_number + chosen, self.marks.findings[chosen].severity
            box = signs.banner_box(text, area)
            signs.draw_banner(painter, box, text, number=number, severity=severity, palette=self.palette)


def _on_copy(finding: Finding, copy_um: tuple[float, float]) -> Finding:
    """Return a finding of the chip at its place on one of the copies."""
    dx, dy = copy_um
    if finding.x_um is None or finding.y_um is None:
        return finding
    ends = None
    if finding.ends_um is not None:
        x0, y0, x1, y1 = finding.ends_um
        ends = (x0 + dx, y0 + dy, x1 + dx, y1 + dy)
    return replace(finding, x_um=finding.x_um + dx, y_um=finding.y_um + dy, ends_um=ends)
