"""The signs of a drawing: labels, arrows, marks of findings, scale bar, banner.

All work in device-independent pixels on a painter whose transform is the identity.
"""

from __future__ import annotations

from functools import lru_cache
from math import atan2, cos, hypot, pi, sin
from typing import TYPE_CHECKING

from PySide6.QtCore import QPointF, QRectF, QSizeF, Qt
from PySide6.QtGui import QColor, QFontMetricsF, QPainter, QPen, QPolygonF
from PySide6.QtWidgets import QApplication

from app.look import SPACING, font
from core.findings import Severity

if TYPE_CHECKING:
    from app.look import Palette

MARK_PX = 22.0
ARROW_PX = 9.0
_TEXT_FLAGS = Qt.AlignmentFlag.AlignCenter


def line_pen(colour: str, *, width_px: float = 1.0, dashes: list[float] | None = None) -> QPen:
    """Return a pen of constant width on the screen, with flat ends."""
    pen = QPen(QColor(colour), width_px)
    pen.setCosmetic(True)
    pen.setCapStyle(Qt.PenCapStyle.FlatCap)
    if dashes:
        pen.setDashPattern(dashes)
    return pen


def text_size(text: str, *, role: str = "small") -> QSizeF:
    """Return width and height of one line of text [px]."""
    return _text_size(text, role, QApplication.font().key())


@lru_cache(maxsize=1024)  # a drawing measures the same few texts at every frame
def _text_size(text: str, role: str, system_font: str) -> QSizeF:
    metrics = QFontMetricsF(font(role))
    return QSizeF(metrics.horizontalAdvance(text), metrics.height())


def label_box(text: str, centre: QPointF, *, role: str = "small") -> QRectF:
    """Return the box that a label needs around a point."""
    size = text_size(text, role=role)
    width, height = size.width() + 2.0 * SPACING.small, size.height() + 4.0
    return QRectF(centre.x() - width / 2.0, centre.y() - height / 2.0, width, height)


def draw_label(painter: QPainter, box: QRectF, text: str, palette: Palette, *, is_handled: bool = False) -> None:
    """Draw a label in its box; the one being handled is filled with the accent and bold."""
    painter.setPen(line_pen(palette.accent if is_handled else palette.rule))
    painter.setBrush(QColor(palette.accent if is_handled else palette.panel))
    painter.drawRoundedRect(box, SPACING.corner, SPACING.corner)
    painter.setFont(font("small"))
    painter.setPen(QColor(palette.on_accent if is_handled else palette.ink))
    painter.drawText(box, _TEXT_FLAGS, text)


def draw_arrow_head(painter: QPainter, tip: QPointF, angle: float, colour: str, *, size_px: float = ARROW_PX) -> None:
    """Draw a filled arrow head; the angle is the direction it points, clockwise on the screen [rad]."""
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(QColor(colour))
    painter.drawPolygon(_head(tip, angle, size_px))


def _head(tip: QPointF, angle: float, size: float) -> QPolygonF:
    def corner(side: float) -> QPointF:
        return tip - QPointF(size * cos(angle + side), size * sin(angle + side))

    return QPolygonF([tip, corner(0.34), corner(-0.34)])


def angle_px(start: QPointF, end: QPointF) -> float:
    """Return the direction from one pixel to another, clockwise on the screen [rad]."""
    return atan2(end.y() - start.y(), end.x() - start.x())


def length_px(start: QPointF, end: QPointF) -> float:
    """Return the distance of two pixels."""
    return hypot(end.x() - start.x(), end.y() - start.y())


def draw_flow_arrow(
    painter: QPainter, tail: QPointF, angle: float, *, length: float, palette: Palette, is_forward: bool
) -> None:
    """Draw a direction: solid with a full head for forward, dashed with an open head for reverse."""
    colour = palette.forward if is_forward else palette.reverse
    tip = tail + QPointF(length * cos(angle), length * sin(angle))
    neck = tip - QPointF(0.8 * 13.0 * cos(angle), 0.8 * 13.0 * sin(angle))
    painter.setPen(line_pen(colour, width_px=3.0, dashes=None if is_forward else [2.0, 1.2]))
    painter.drawLine(tail, neck)
    painter.setPen(line_pen(colour, width_px=2.0))
    painter.setBrush(QColor(colour) if is_forward else QColor(palette.panel))
    painter.drawPolygon(_head(tip, angle, 15.0))


def draw_mark(
    painter: QPainter, box: QRectF, number: int, severity: Severity, palette: Palette, *, is_selected: bool
) -> None:
    """Draw the numbered mark of a finding: eight corners for an error, a triangle for a warning."""
    is_error = severity is Severity.ERROR
    colour = palette.error if is_error else palette.warning
    if is_selected:
        painter.setPen(line_pen(palette.accent, width_px=3.0))
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.drawEllipse(box.adjusted(-5, -5, 5, 5))
    painter.setPen(line_pen(palette.panel, width_px=1.5))
    painter.setBrush(QColor(colour))
    painter.drawPolygon(_octagon(box) if is_error else _triangle(box))
    painter.setFont(font("small"))
    painter.setPen(QColor(palette.on_sign))
    painter.drawText(box if is_error else box.translated(0, 3), _TEXT_FLAGS, str(number))


def _octagon(box: QRectF) -> QPolygonF:
    radius = box.width() / 2.0 * 1.06
    corners = (pi / 8 + n * pi / 4 for n in range(8))
    return QPolygonF([box.center() + QPointF(radius * cos(a), radius * sin(a)) for a in corners])


def _triangle(box: QRectF) -> QPolygonF:
    wide = box.adjusted(-3, -4, 3, 1)
    return QPolygonF([QPointF(wide.center().x(), wide.top()), wide.bottomRight(), wide.bottomLeft()])


def draw_scale_bar(painter: QPainter, left: QPointF, length: float, text: str, palette: Palette) -> QRectF:
    """Draw a bar of a round length with its value above; returns the box it takes."""
    size = text_size(text)
    right = left + QPointF(length, 0.0)
    width = max(length, size.width()) + 2.0 * SPACING.small
    box = QRectF(left.x() - SPACING.small, left.y() - size.height() - 8.0, width, size.height() + 16.0)
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(veil(palette))
    painter.drawRoundedRect(box, SPACING.corner, SPACING.corner)
    painter.setPen(line_pen(palette.ink, width_px=2.0))
    painter.drawLine(left, right)
    for end in (left, right):
        painter.drawLine(end - QPointF(0.0, 4.0), end + QPointF(0.0, 4.0))
    painter.setFont(font("small"))
    painter.drawText(left - QPointF(0.0, 7.0), text)
    return box


def draw_note(painter: QPainter, box: QRectF, text: str, palette: Palette, *, is_handled: bool = False) -> None:
    """Draw a line of secondary text, or a handled label in its place."""
    if is_handled:
        draw_label(painter, box, text, palette, is_handled=True)
        return
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(veil(palette))
    painter.drawRoundedRect(box, SPACING.corner, SPACING.corner)
    painter.setFont(font("small"))
    painter.setPen(QColor(palette.ink_soft))
    painter.drawText(box, _TEXT_FLAGS, text)


def veil(palette: Palette) -> QColor:
    """Return the drawing's background, slightly transparent, to lay under text."""
    colour = QColor(palette.solid)
    colour.setAlpha(225)
    return colour


def banner_box(text: str, area: QRectF) -> QRectF:
    """Return the box of a banner at the top of an area, as high as its wrapped text."""
    metrics = QFontMetricsF(font("body"))
    room = QRectF(0.0, 0.0, area.width() - MARK_PX - 5.0 * SPACING.medium, 1e4)
    needed = metrics.boundingRect(room, int(Qt.TextFlag.TextWordWrap), text)
    width = min(area.width() - 2.0 * SPACING.medium, needed.width() + MARK_PX + 3.5 * SPACING.medium)
    height = max(MARK_PX, needed.height()) + 2.0 * SPACING.small
    return QRectF(area.center().x() - width / 2.0, area.top() + SPACING.medium, width, height)


def draw_banner(
    painter: QPainter, box: QRectF, text: str, *, number: int, severity: Severity, palette: Palette
) -> None:
    """Draw a finding's message in a box, with its mark and a rim in its colour."""
    painter.setPen(line_pen(palette.error if severity is Severity.ERROR else palette.warning, width_px=2.0))
    painter.setBrush(QColor(palette.panel))
    painter.drawRoundedRect(box, SPACING.corner, SPACING.corner)
    mark = QRectF(box.left() + SPACING.medium, box.center().y() - MARK_PX / 2.0, MARK_PX, MARK_PX)
    draw_mark(painter, mark, number, severity, palette, is_selected=False)
    painter.setFont(font("body"))
    painter.setPen(QColor(palette.ink))
    room = box.adjusted(MARK_PX + 2.0 * SPACING.medium, 0.0, -SPACING.medium, 0.0)
    painter.drawText(room, int(Qt.TextFlag.TextWordWrap | Qt.AlignmentFlag.AlignVCenter), text)
