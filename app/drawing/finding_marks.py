"""Findings on a drawing: a numbered mark each, and where something was measured a ring and the line."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QPointF, QRectF, Qt

from app.drawing.dimensions import length_text
from app.drawing.signs import (
    MARK_PX,
    draw_label,
    draw_mark,
    label_box,
    length_px,
    line_pen,
)
from app.shown_values import screen_words
from core.findings import Severity

if TYPE_CHECKING:
    from collections.abc import Iterator

    from PySide6.QtGui import QPainter

    from app.drawing.camera import Camera
    from app.look import Palette
    from core.findings import Finding

NO_FINDING = -1
_RING_PX = 9.0  # least radius of a ring
_RIM_PX = 6.0  # from the measured line's ends to the ring
_SLANT = 0.71  # a mark sits on its ring half way between up and right
_CONTEXT = 2.5  # a detail is looked at with so much of what is around it
_BAR_PX = 5.0  # half of the bar at each end of a measured line
_LABEL_OFF_PX = 20.0
_SHOWN_LINE_PX = 8.0  # shorter lines are told by the ring alone


class FindingMarks:
    """The findings of one drawing, in the order of their numbers.

    Attributes
    ----------
    findings : tuple of Finding
        What is marked.
    chosen : int
        Index of the finding that is picked, ``NO_FINDING`` for none.
    first_number : int
        Number of the first mark.
    """

    def __init__(self) -> None:
        self.findings: tuple[Finding, ...] = ()
        self.chosen = NO_FINDING
        self.first_number = 1

    def message(self, index: int) -> str:
        """Return what a finding says, in the words of the screen."""
        text = screen_words(self.findings[index].message).rstrip(".")
        return text[:1].upper() + text[1:]

    @property
    def told(self) -> int:
        """Index of the finding told at length: the one picked, or the first that blocks."""
        if self.chosen != NO_FINDING:
            return self.chosen
        errors = (index for index, finding in enumerate(self.findings) if finding.severity is Severity.ERROR)
        return next(errors, NO_FINDING)

    def boxes(self, camera: Camera) -> dict[int, QRectF]:
        """Return where the marks are, by index: on the place, or beside the ring round what was measured [px]."""
        boxes: dict[int, QRectF] = {}
        for index, finding in enumerate(self.findings):
            if finding.x_um is None or finding.y_um is None:
                continue
            wanted = list(_mark_boxes(finding, camera))
            free = (box for box in wanted if not any(box.intersects(other) for other in boxes.values()))
            box = next(free, wanted[0])
            while any(box.intersects(other) for other in boxes.values()):
                box.translate(MARK_PX + 4.0, 0.0)
            boxes[index] = box
        return boxes

    def rings(self, camera: Camera) -> list[QRectF]:
        """Return the boxes round all rings, with room for a label below [px]."""
        rings = (_ring(finding, camera) for finding in self.findings)
        return [QRectF(ring[0].x() - ring[1], ring[0].y() - ring[1], 2.0 * ring[1], 2.0 * (ring[1] + _LABEL_OFF_PX))
                for ring in rings if ring is not None]  # fmt: skip

    def paint(self, painter: QPainter, boxes: dict[int, QRectF], camera: Camera, palette: Palette, unit: str) -> None:
        """Paint rings, lines and marks, the chosen one last; ``boxes`` says where the marks go."""
        for index in sorted(boxes, key=lambda index: (index == self.chosen, index)):
            finding, is_chosen = self.findings[index], index == self.chosen
            _paint_ring(painter, finding, camera, palette, is_chosen=is_chosen)
            if is_chosen and finding.ends_um is not None:
                _paint_measured(painter, finding, camera, palette, unit=unit)
            number = self.first_number + index
            draw_mark(painter, boxes[index], number, finding.severity, palette, is_selected=is_chosen)


def _mark_boxes(finding: Finding, camera: Camera) -> Iterator[QRectF]:
    """Yield places for a mark: on the place, or round the ring where there is one [px]."""
    middle = camera.to_px((finding.x_um, finding.y_um))  # type: ignore[arg-type]  # asked for where there is a place
    ring = _ring(finding, camera)
    off = 0.0 if ring is None else _SLANT * ring[1] + MARK_PX / 2.0
    for across, up in ((1.0, -1.0), (1.0, 1.0), (-1.0, -1.0), (-1.0, 1.0)):
        box = QRectF(0.0, 0.0, MARK_PX, MARK_PX)
        box.moveCenter(middle + QPointF(across * off, up * off))
        yield box


def looked_at_um(finding: Finding) -> float | None:
    """Return the length that should be large enough on the screen to be looked at [um]; None for no matter."""
    if finding.ends_um is not None:
        return finding.value_um
    size = _size_um(finding)
    return None if size is None else _CONTEXT * size


def _size_um(finding: Finding) -> float | None:
    """Return the size of a detail of which only the middle is known, such as a corner that is too sharp [um]."""
    if finding.x_um is None or finding.value_um is None or finding.limit_um is None:
        return None
    return max(finding.value_um, finding.limit_um)


def _ends(finding: Finding, camera: Camera) -> tuple[QPointF, QPointF]:
    assert finding.ends_um is not None
    return camera.to_px(finding.ends_um[:2]), camera.to_px(finding.ends_um[2:])


def _ring(finding: Finding, camera: Camera) -> tuple[QPointF, float] | None:
    """Return middle and radius of the ring round what was measured [px]; None where nothing was."""
    if finding.ends_um is not None:
        start, end = _ends(finding, camera)
        return (start + end) / 2.0, max(_RING_PX, length_px(start, end) / 2.0 + _RIM_PX)
    if (size_um := _size_um(finding)) is None:
        return None
    centre = camera.to_px((finding.x_um, finding.y_um))  # type: ignore[arg-type]  # a size has a place
    return centre, max(_RING_PX, size_um / camera.um_per_px)


def _paint_ring(painter: QPainter, finding: Finding, camera: Camera, palette: Palette, *, is_chosen: bool) -> None:
    if (ring := _ring(finding, camera)) is None:
        return
    colour = palette.error if finding.severity is Severity.ERROR else palette.warning
    painter.setBrush(Qt.BrushStyle.NoBrush)
    painter.setPen(line_pen(palette.accent if is_chosen else colour, width_px=3.0 if is_chosen else 2.2))
    painter.drawEllipse(ring[0], ring[1], ring[1])


def _paint_measured(painter: QPainter, finding: Finding, camera: Camera, palette: Palette, *, unit: str) -> None:
    """Paint the line along which was measured, with a bar at each end and its length."""
    start, end = _ends(finding, camera)
    length = length_px(start, end)
    if length < _SHOWN_LINE_PX:
        return
    along = (end - start) / length
    across = QPointF(-along.y(), along.x()) * _BAR_PX
    painter.setPen(line_pen(palette.ink, width_px=2.0))
    painter.drawLine(start, end)
    for tip in (start, end):
        painter.drawLine(tip - across, tip + across)
    if finding.value_um is not None:
        below = QPointF(0.0, length / 2.0 + _RIM_PX + _LABEL_OFF_PX)
        text = length_text(finding.value_um, unit)
        draw_label(painter, label_box(text, (start + end) / 2.0 + below), text, palette)
