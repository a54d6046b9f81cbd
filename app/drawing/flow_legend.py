"""What the colours of a flow picture mean: bands from little to much, each limit with its value."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor

from app.drawing.signs import line_pen, text_size, veil
from app.look import SPACING, font

if TYPE_CHECKING:
    from collections.abc import Sequence

    from PySide6.QtGui import QPainter

    from app.look import Palette

_BAR_PX = 9.0
_BAND_PX = 38.0
_ROW_PX = 17.0
# from little to much, by falling (light) or rising (dark) lightness, so that it reads without colour
_RAMPS = {
    "light": ("#eef4ee", "#a9d3cf", "#4f9ba6", "#2c5f8f", "#3b2a6b", "#1d0f33"),
    "dark": ("#101a20", "#1d4a57", "#2f7f86", "#5fb3a1", "#b3d68c", "#f7f0b2"),
}


def band_colours(palette: Palette, count: int) -> list[str]:
    """Return so many colours from little to much, evenly along the ramp of a palette."""
    ramp = [QColor(name) for name in _RAMPS["dark" if palette.is_dark else "light"]]
    places = np.linspace(0.0, len(ramp) - 1.0, max(count, 1))
    made = []
    for place in places.tolist():
        first = min(int(place), len(ramp) - 2)
        share = place - first
        pair = zip(ramp[first].getRgbF()[:3], ramp[first + 1].getRgbF()[:3], strict=True)
        made.append(QColor.fromRgbF(*((1.0 - share) * a + share * b for a, b in pair)).name())
    return made


def draw_flow_legend(
    painter: QPainter, area: QRectF, palette: Palette, *, title: str, remark: str, texts: Sequence[str]
) -> QRectF:
    """Paint a legend along the upper rim; returns the box it takes.

    Parameters
    ----------
    painter : QPainter
        In device-independent pixels.
    area : QRectF
        The drawing [px].
    palette : Palette
        Colours.
    title, remark : str
        What is shown, and what to beware of; the remark may be empty.
    texts : sequence of str
        Limits of the bands; none where there are no bands.
    """
    remark = remark and f"   {remark}"
    bar_width = min(_BAND_PX * max(len(texts) - 1, 0), area.width() - 6.0 * SPACING.medium)
    ends = text_size("00000").width()
    width = max(text_size(title + remark).width(), bar_width + ends) + 2.0 * SPACING.small
    height = _ROW_PX * (2 if texts else 1) + (_BAR_PX if texts else 0.0) + 2.0 * SPACING.hair
    box = QRectF(area.left() + SPACING.medium, area.top() + SPACING.small, width, height)
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(veil(palette))
    painter.drawRoundedRect(box, SPACING.corner, SPACING.corner)
    painter.setFont(font("small"))
    line = QRectF(box.left() + SPACING.small, box.top() + SPACING.hair, width, _ROW_PX)
    for text, colour in ((title, palette.ink), (remark, palette.warning)):
        painter.setPen(QColor(colour))
        painter.drawText(line, Qt.AlignmentFlag.AlignVCenter, text)
        line.setLeft(line.left() + text_size(text).width())
    if texts:
        _paint_bar(painter, QPointF(box.left() + ends / 2.0, line.bottom()), bar_width, texts, palette)
    return box


def _paint_bar(painter: QPainter, top_left: QPointF, width: float, texts: Sequence[str], palette: Palette) -> None:
    """Paint the bands from left to right, each limit with its value below."""
    colours = band_colours(palette, len(texts) - 1)
    band = width / max(len(texts) - 1, 1)
    for number, text in enumerate(texts):
        x = top_left.x() + number * band
        if number < len(texts) - 1:
            painter.fillRect(QRectF(x, top_left.y(), band, _BAR_PX), QColor(colours[number]))
        painter.setPen(line_pen(palette.ink))
        painter.drawLine(QPointF(x, top_left.y()), QPointF(x, top_left.y() + _BAR_PX + 3.0))
        place = QRectF(x - 50.0, top_left.y() + _BAR_PX + 2.0, 100.0, _ROW_PX)
        painter.drawText(place, Qt.AlignmentFlag.AlignCenter, text)
