"""The drawing as a file: PNG for looking, SVG for papers."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QBuffer, QIODevice, QRect, Qt
from PySide6.QtGui import QImage, QPainter
from PySide6.QtSvg import QSvgGenerator

if TYPE_CHECKING:
    from pathlib import Path

    from app.drawing.channel_view import ChannelView

_PNG_SCALE = 2.0  # pixels of the file for one of the screen


def write_picture(view: ChannelView, path: Path) -> None:
    """Write what the drawing shows.

    Parameters
    ----------
    view : ChannelView
        As it is seen now.
    path : Path
        ``.svg`` for lines that stay sharp; anything else becomes PNG.

    Raises
    ------
    OSError
        If the file cannot be written; nothing is left of it then.
    """
    content = _svg(view) if path.suffix.lower() == ".svg" else _png(view)
    try:
        path.write_bytes(content)
    except OSError:
        path.unlink(missing_ok=True)
        raise


def _png(view: ChannelView) -> bytes:
    image = QImage(view.size() * _PNG_SCALE, QImage.Format.Format_ARGB32_Premultiplied)
    image.setDevicePixelRatio(_PNG_SCALE)
    image.fill(Qt.GlobalColor.transparent)
    with QPainter(image) as painter:
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        view.paint_kept(painter)
    buffer = QBuffer()
    buffer.open(QIODevice.OpenModeFlag.WriteOnly)
    image.save(buffer, "PNG")  # type: ignore[call-overload]  # takes a device as well
    return bytes(buffer.data().data())


def _svg(view: ChannelView) -> bytes:
    buffer = QBuffer()
    buffer.open(QIODevice.OpenModeFlag.WriteOnly)
    drawing = QSvgGenerator()
    drawing.setOutputDevice(buffer)
    drawing.setSize(view.size())
    drawing.setViewBox(QRect(view.rect()))
    drawing.setTitle(view.accessibleDescription())
    with QPainter(drawing) as painter:
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        view.paint_kept(painter)
    return bytes(buffer.data().data())
