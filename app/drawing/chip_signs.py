"""The signs on a chip's drawing: legend, names, the channel in hand, marks of findings."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter

from app.drawing import signs
from app.drawing.chip_painter import PALETTE_OF_LAYER
from app.look import SPACING, font
from core.chip.scene import Layer

if TYPE_CHECKING:
    from collections.abc import Sequence

    from PySide6.QtGui import QPainterPath

    from app.drawing.camera import Camera
    from app.drawing.chip_shown import PlacedChannel
    from app.look import Palette

LAYER_WORDS: dict[Layer, str] = {
    Layer.CHANNELS: "channels",
    Layer.PORTS: "ports",
    Layer.MARKS: "marks",
    Layer.TEXT: "lettering",
    Layer.CUT: "cutting",
}
_SWATCH_PX = 16.0
_NAME_ROOM_PX = 70.0  # a channel shorter than this on the screen bears no name


def box_px(box_um: QRectF, camera: Camera, copy_um: tuple[float, float]) -> QRectF:
    """Return where a box of a chip is on the screen; its top is the smaller y [um]."""
    dx, dy = copy_um
    return QRectF(
        camera.to_px((box_um.left() + dx, box_um.bottom() + dy)), camera.to_px((box_um.right() + dx, box_um.top() + dy))
    )


def draw_legend(painter: QPainter, area: QRectF, layers: Sequence[Layer], palette: Palette) -> QRectF:
    """Draw a swatch and a word for each layer in the lower right corner; returns the box."""
    words = [LAYER_WORDS[layer] for layer in layers]
    height = max(signs.text_size("x").height(), _SWATCH_PX) + 2.0
    width = max((signs.text_size(word).width() for word in words), default=0.0) + _SWATCH_PX + 3.0 * SPACING.small
    box = QRectF(0.0, 0.0, width, height * len(words) + SPACING.small)
    box.moveBottomRight(area.bottomRight() - QPointF(SPACING.medium, SPACING.medium))
    signs.draw_note(painter, box, "", palette)
    painter.setFont(font("small"))
    for row, (layer, word) in enumerate(zip(layers, words, strict=True)):
        line = QRectF(box.left() + SPACING.small, box.top() + SPACING.hair + row * height, width, height)
        _draw_swatch(painter, QRectF(line.left(), line.center().y() - 6.0, _SWATCH_PX, 12.0), layer, palette)
        painter.setPen(QColor(palette.ink))
        painter.drawText(line.translated(_SWATCH_PX + SPACING.small, 0.0), Qt.AlignmentFlag.AlignVCenter, word)
    return box


def _draw_swatch(painter: QPainter, box: QRectF, layer: Layer, palette: Palette) -> None:
    """Draw a sample of a layer: each has a shape of its own, so that colour is never alone."""
    fill, edge = (getattr(palette, name) if name else "" for name in PALETTE_OF_LAYER[layer])
    painter.setBrush(QColor(fill))
    painter.setPen(signs.line_pen(edge) if edge else Qt.PenStyle.NoPen)
    middle = box.center()
    if layer is Layer.PORTS:
        painter.drawEllipse(middle, 5.5, 5.5)
    elif layer is Layer.MARKS:
        painter.drawRect(QRectF(middle.x() - 1.5, box.top(), 3.0, box.height()))
        painter.drawRect(QRectF(middle.x() - 6.0, middle.y() - 1.5, 12.0, 3.0))
    elif layer is Layer.TEXT:
        painter.setPen(QColor(fill))
        painter.drawText(box, Qt.AlignmentFlag.AlignCenter, "A")
    elif layer is Layer.CUT:
        painter.drawRect(QRectF(box.left(), middle.y() - 1.0, box.width(), 2.0))
    else:
        painter.drawRect(box.adjusted(0.5, 2.0, -0.5, -2.0))


def draw_names(
    painter: QPainter, channels: Sequence[PlacedChannel], camera: Camera, copy_um: tuple[float, float], palette: Palette
) -> None:
    """Write the name of each channel above its left end, where there is room."""
    painter.setFont(font("small"))
    for channel in channels:
        box = box_px(channel.box_um, camera, copy_um)
        size = signs.text_size(channel.name)
        if box.width() < max(_NAME_ROOM_PX, size.width()) or box.height() < 0.6 * size.height():
            continue
        label = QRectF(box.left(), box.top() - size.height() - 3.0, size.width() + 2.0 * SPACING.hair, size.height())
        signs.draw_note(painter, label, channel.name, palette)


def draw_in_hand(painter: QPainter, box: QRectF, area: QRectF, palette: Palette, text: str) -> None:
    """Draw a frame around the channel in hand, whose box is given, and where it stands in words [px]."""
    frame = box.adjusted(-5.0, -5.0, 5.0, 5.0)
    painter.setBrush(Qt.BrushStyle.NoBrush)
    painter.setPen(signs.line_pen(palette.accent, width_px=2.0, dashes=[5.0, 3.0]))
    painter.drawRect(frame)
    label = signs.label_box(text, frame.center())
    label.moveTopLeft(frame.bottomLeft() + QPointF(0.0, 4.0))
    label.moveRight(min(label.right(), area.right() - SPACING.hair))
    signs.draw_label(painter, label, text, palette, is_handled=True)


def draw_ghost(
    painter: QPainter, path: QPainterPath, camera: Camera, shift_um: tuple[float, float], palette: Palette
) -> None:
    """Draw the channel where the hand has brought it."""
    colour = QColor(palette.accent)
    painter.save()
    painter.setTransform(camera.transform(), True)
    painter.translate(*shift_um)
    painter.strokePath(path, signs.line_pen(palette.accent))
    colour.setAlphaF(0.35)
    painter.fillPath(path, colour)
    painter.restore()
