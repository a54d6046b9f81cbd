"""A picture of a mask on a page of a PDF: every distinct block is drawn once and used where it stands."""

from __future__ import annotations

from math import tan
from typing import TYPE_CHECKING

import numpy as np

from core.chip.scene import Layer
from core.geometry.contour import arc_data
from core.masks.drawing import own_outlines
from core.masks.preview import BAR_SHARE, MARGIN, bar_words
from core.masks.tones import look_of
from core.units import NM_PER_UM, round_length_um

if TYPE_CHECKING:
    from reportlab.pdfgen.canvas import Canvas
    from reportlab.pdfgen.pathobject import PDFPathObject

    from core.chip.scene import Block
    from core.fabrication.choices import Tone
    from core.geometry.contour import Contour
    from core.masks.drawing import MaskDrawing
    from core.masks.tones import Look

_EVEN_ODD = 0
_LINE_POINTS = 0.4
_BAR_POINTS = 3.0
_BELOW_POINTS = 40.0  # for the scale bar and words


def draw_picture(
    canvas: Canvas, drawing: MaskDrawing, *, tone: Tone, room: tuple[float, float, float, float], prefix: str
) -> None:
    """Draw a mask into a part of a page.

    Parameters
    ----------
    canvas : Canvas
        The page.
    drawing : MaskDrawing
        Blocks and their places.
    tone : Tone
        What the drawn shapes become.
    room : tuple of float
        (left, bottom, width, height) [points].
    prefix : str
        Makes the names of its symbols unique in the document.
    """
    look = look_of(tone)
    left, bottom, room_width, room_height = room
    x0, y0, x1, y1 = drawing.bounds_um
    margin = MARGIN * max(x1 - x0, y1 - y0)
    width, height = x1 - x0 + 2.0 * margin, y1 - y0 + 2.0 * margin
    scale = min(room_width / width, (room_height - _BELOW_POINTS) / height)
    low = bottom + room_height - scale * height
    symbols = _Symbols(canvas, drawing, look, prefix, line_um=_LINE_POINTS / scale)
    *inner, top = drawing.blocks
    for block in inner:
        symbols.add(block)
    canvas.saveState()
    canvas.setFillColor(look.plate)
    canvas.rect(left, low, scale * width, scale * height, stroke=0, fill=1)
    canvas.translate(left - scale * (x0 - margin), low - scale * (y0 - margin))
    canvas.scale(scale, scale)
    symbols.draw(top)
    canvas.restoreState()
    bar = round_length_um(BAR_SHARE * (x1 - x0))
    canvas.setFillColor("#222222")
    canvas.rect(left, low - 10.0, scale * bar, _BAR_POINTS, stroke=0, fill=1)
    canvas.drawString(left, low - 20.0, bar_words(bar))
    canvas.drawString(left, low - 34.0, look.words)


class _Symbols:
    def __init__(self, canvas: Canvas, drawing: MaskDrawing, look: Look, prefix: str, *, line_um: float) -> None:
        self.canvas = canvas
        self.drawing = drawing
        self.look = look
        self.prefix = prefix
        self.line_um = line_um

    def add(self, block: Block) -> None:
        """Keep a block as a symbol."""
        x0, y0, x1, y1 = self._box(block)
        self.canvas.beginForm(self._name(block), x0, y0, x1, y1)
        self.draw(block)
        self.canvas.endForm()

    def draw(self, block: Block) -> None:
        """Draw a block where the canvas stands."""
        for layer in Layer:
            if outlines := own_outlines(block, layer):
                path = self.canvas.beginPath()
                for contour in (ring for outline in outlines for ring in outline.contours):
                    _add_ring(path, contour)
                self._paint(path, layer)
        for placed in block.placed:
            x, y = (value / NM_PER_UM for value in self.drawing.shift_nm(placed))
            self.canvas.saveState()
            self.canvas.translate(x, y)
            self.canvas.doForm(self._name(placed.block))
            self.canvas.restoreState()

    def _paint(self, path: PDFPathObject, layer: Layer) -> None:
        if layer in self.look.shapes:
            self.canvas.setFillColor(self.look.shapes[layer])
            self.canvas.drawPath(path, stroke=0, fill=1, fillMode=_EVEN_ODD)
        else:
            self.canvas.setStrokeColor(self.look.lines[layer])
            self.canvas.setLineWidth(self.line_um)
            self.canvas.drawPath(path, stroke=1, fill=0)

    def _name(self, block: Block) -> str:
        return self.prefix + self.drawing.name_of(block)

    def _box(self, block: Block) -> tuple[float, float, float, float]:
        boxes = np.array(list(self.drawing.extents_of(block).values()))
        (x0, y0), (x1, y1) = boxes[:, :2].min(axis=0) - self.line_um, boxes[:, 2:].max(axis=0) + self.line_um
        return float(x0), float(y0), float(x1), float(y1)


def _add_ring(path: PDFPathObject, contour: Contour) -> None:
    """Add a ring; arcs become cubic curves, which over a quarter turn stray by 3e-4 of the radius at most."""
    centre, _, _, sweep = arc_data(contour)
    x, y = contour.vertices_um.T
    path.moveTo(x[0], y[0])
    for k, turn in enumerate(sweep):
        end = (k + 1) % len(x)
        if turn:
            arm = 4.0 / 3.0 * tan(turn / 4.0)
            (ax, ay), (bx, by) = contour.vertices_um[k] - centre[k], contour.vertices_um[end] - centre[k]
            path.curveTo(x[k] - arm * ay, y[k] + arm * ax, x[end] + arm * by, y[end] - arm * bx, x[end], y[end])
        else:
            path.lineTo(x[end], y[end])
    path.close()
