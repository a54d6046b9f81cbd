"""Paints a scene, however many copies it holds, in the time of one frame.

What is small on the screen is painted from a kept picture of its block; what is large is painted as
it is, and only where it is in view. New pictures are made for some milliseconds a frame. Until a
block has its turn, a picture of another scale stands in, brought to the right size, or its bounds
are drawn as a dashed frame: whatever is shown is to scale.
"""

from __future__ import annotations

import time
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QImage, QPainter, QTransform

from app.drawing.camera import Camera
from app.drawing.chip_images import BlockImage, BlockImages
from app.drawing.chip_paths import BlockStore
from app.drawing.signs import line_pen
from app.look import LIGHT
from core.chip.scene import Layer

if TYPE_CHECKING:
    from PySide6.QtGui import QPainterPath

    from app.drawing.chip_paths import BlockPaths
    from app.look import Palette
    from core.chip.scene import Block, Scene

LARGEST_IMAGE_PX = 1024.0  # a block of more than a square of this side is painted as it is
_LONGEST_IMAGE_PX = 8192.0  # and one that is longer
_PARTS_PX = 400.0  # a block of more than this that has no picture yet shows its parts, which may have one
_PLAIN = 50_000  # a picture of a block of fewer lines is made without pictures of its parts
_LIGHT = 60  # so few lines are painted faster than a picture of them
_FRAME_S = 0.006  # spent on new pictures in one frame
_RIM_PX = 1.0  # kept free around a block in its picture
_FULL_EDGE_UM_PER_PX = 12.0  # from here on outwards, walls are drawn fainter
_FAINTEST = 0.3

PALETTE_OF_LAYER: dict[Layer, tuple[str, str]] = {  # fill, edge
    Layer.CHANNELS: ("fluid", "fluid_edge"),
    Layer.PORTS: ("ground", "ink"),
    Layer.MARKS: ("ink_soft", ""),
    Layer.TEXT: ("ink", ""),
    Layer.CUT: ("reverse", "reverse"),
}


@dataclass(slots=True)
class _Frame:
    """One painting: where to, how it is looked at, and until when new pictures may be made."""

    painter: QPainter
    camera: Camera
    area: QRectF  # [px]
    ratio: float  # device pixels per pixel
    is_moving: bool
    ends_s: float
    is_complete: bool = True
    is_plain: bool = False  # without pictures of parts


class ScenePainter:
    """Paints scenes and keeps what it needs for the next time.

    Attributes
    ----------
    palette : Palette
        Colours; set by ``use_palette``.
    store : BlockStore
        Paths of blocks; another one may be put in its place.
    """

    def __init__(self) -> None:
        self.palette: Palette = LIGHT
        self.store = BlockStore()
        self._images = BlockImages()

    def use_palette(self, palette: Palette) -> None:
        """Paint in other colours from now on."""
        self.palette = palette
        self._images.clear()

    def paint(
        self, painter: QPainter, scene: Scene, camera: Camera, area: QRectF,
        *, is_moving: bool = False, ratio: float = 1.0, has_time: bool = False,
    ) -> bool:  # fmt: skip
        """Paint all figures of a scene.

        Parameters
        ----------
        painter : QPainter
            In device-independent pixels, with antialiasing.
        scene : Scene
            What to paint.
        camera : Camera
            From micrometres to pixels.
        area : QRectF
            What is in view [px].
        is_moving : bool
            True while the camera is on its way: pictures of another scale are good enough.
        ratio : float
            Device pixels per pixel.
        has_time : bool
            True to paint everything sharp however long it takes.

        Returns
        -------
        bool
            False when another frame is needed to paint it all sharp.
        """
        ends_s = np.inf if has_time else time.perf_counter() + _FRAME_S
        frame = _Frame(painter, camera, area, ratio, is_moving and not has_time, ends_s)
        self._paint_block(frame, scene.top, 0.0, 0.0)
        return frame.is_complete

    def _paint_block(self, frame: _Frame, block: Block, dx_um: float, dy_um: float) -> None:
        paths = self.store.of(block)
        if paths.bounds_um is None:
            return
        width_px, height_px = (side / frame.camera.um_per_px for side in paths.bounds_um.size().toTuple())
        is_large = width_px * height_px > LARGEST_IMAGE_PX**2 or max(width_px, height_px) > _LONGEST_IMAGE_PX
        if is_large or frame.is_plain or paths.weight <= _LIGHT:
            self._paint_as_it_is(frame, paths, dx_um, dy_um)
            return
        kept = self._image(frame, paths)
        if kept is not None:
            _paint_image(frame, kept, dx_um, dy_um)
        elif block.body is None and max(width_px, height_px) > _PARTS_PX:
            self._paint_as_it_is(frame, paths, dx_um, dy_um)
        else:
            _paint_waiting(frame, paths.bounds_um.translated(dx_um, dy_um), self.palette)

    def _image(self, frame: _Frame, paths: BlockPaths) -> BlockImage | None:
        """Return a picture that can be painted now, if there is one or the time to make one."""
        scale = frame.camera.um_per_px
        exact = self._images.at(paths.block, scale)
        if exact is not None:
            return exact
        near = self._images.near(paths.block, scale)
        if near is not None and frame.is_moving:
            frame.is_complete = False
            return near
        made = self._made_image(frame, paths) if time.perf_counter() < frame.ends_s else None
        if made is None:
            frame.is_complete = False
        return made or near

    def _made_image(self, frame: _Frame, paths: BlockPaths) -> BlockImage | None:
        assert paths.bounds_um is not None
        scale = frame.camera.um_per_px
        rim_um = _RIM_PX * scale
        box = paths.bounds_um.adjusted(-rim_um, -rim_um, rim_um, rim_um)
        width, height = (int(np.ceil(side / scale)) for side in (box.width(), box.height()))
        image = QImage(
            int(np.ceil(width * frame.ratio)), int(np.ceil(height * frame.ratio)),
            QImage.Format.Format_ARGB32_Premultiplied,
        )  # fmt: skip
        image.setDevicePixelRatio(frame.ratio)
        image.fill(Qt.GlobalColor.transparent)
        corner = QPointF(box.left(), box.bottom())  # the bottom is the larger y
        camera = Camera(left_um=corner.x(), top_um=corner.y(), um_per_px=scale)
        with QPainter(image) as painter:
            painter.setRenderHint(QPainter.RenderHint.Antialiasing)
            inner = _Frame(painter, camera, QRectF(0.0, 0.0, width, height), frame.ratio, False, frame.ends_s)
            inner.is_plain = paths.weight <= _PLAIN
            self._paint_as_it_is(inner, paths, 0.0, 0.0)
        if not inner.is_complete:
            return None
        made = BlockImage(block=paths.block, image=image, corner_um=corner, um_per_px=scale)
        self._images.keep(made)
        return made

    def _paint_as_it_is(self, frame: _Frame, paths: BlockPaths, dx_um: float, dy_um: float) -> None:
        """Paint what stands in a block as far as it is in view, then its own figures."""
        if len(paths.placed_bounds_um):
            for row in _rows_in_view(frame, paths, dx_um, dy_um):
                placed = paths.block.placed[row]
                self._paint_block(frame, placed.block, dx_um + placed.dx_um, dy_um + placed.dy_um)
        if not paths.layers:
            return
        frame.painter.save()
        shift = QTransform.fromTranslate(dx_um, dy_um)
        frame.painter.setTransform(shift * frame.camera.transform(), True)
        for layer, path in paths.layers.items():
            self._paint_layer(frame, layer, path)
        frame.painter.restore()

    def _paint_layer(self, frame: _Frame, layer: Layer, path: QPainterPath) -> None:
        fill, edge = PALETTE_OF_LAYER[layer]
        frame.painter.fillPath(path, QColor(getattr(self.palette, fill)))
        if edge:
            colour = QColor(getattr(self.palette, edge))
            colour.setAlphaF(min(1.0, max(_FAINTEST, _FULL_EDGE_UM_PER_PX / frame.camera.um_per_px)))
            pen = line_pen(getattr(self.palette, edge))
            pen.setColor(colour)
            frame.painter.strokePath(path, pen)


def _rows_in_view(frame: _Frame, paths: BlockPaths, dx_um: float, dy_um: float) -> list[int]:
    """Return which of the blocks that stand in a block can be seen."""
    left, top = frame.camera.to_um(frame.area.topLeft())
    right, bottom = frame.camera.to_um(frame.area.bottomRight())
    x0, y0, x1, y1 = paths.placed_bounds_um.T
    is_seen = (x1 >= left - dx_um) & (x0 <= right - dx_um) & (y1 >= bottom - dy_um) & (y0 <= top - dy_um)
    return np.flatnonzero(is_seen).tolist()


def _paint_image(frame: _Frame, kept: BlockImage, dx_um: float, dy_um: float) -> None:
    corner = frame.camera.to_px((kept.corner_um.x() + dx_um, kept.corner_um.y() + dy_um))
    if kept.um_per_px == frame.camera.um_per_px:
        on_pixel = QPointF(round(corner.x() * frame.ratio), round(corner.y() * frame.ratio)) / frame.ratio
        frame.painter.drawImage(on_pixel, kept.image)
        return
    share = kept.um_per_px / frame.camera.um_per_px
    size = kept.image.deviceIndependentSize()
    frame.painter.setRenderHint(QPainter.RenderHint.SmoothPixmapTransform)
    frame.painter.drawImage(QRectF(corner.x(), corner.y(), size.width() * share, size.height() * share), kept.image)


def _paint_waiting(frame: _Frame, box_um: QRectF, palette: Palette) -> None:
    """Draw the bounds of a block whose turn has not come."""
    box = QRectF(
        frame.camera.to_px((box_um.left(), box_um.bottom())), frame.camera.to_px((box_um.right(), box_um.top()))
    )
    frame.painter.setPen(line_pen(palette.pale_edge, dashes=[3.0, 3.0]))
    frame.painter.setBrush(Qt.BrushStyle.NoBrush)
    frame.painter.drawRect(box)
