"""A small picture of a mask, to scale, its tone shown: what is dark is dark in the picture."""

from __future__ import annotations

from math import ceil, log10
from typing import TYPE_CHECKING

from core.chip.scene import Layer
from core.geometry.contour import arc_data
from core.masks.drawing import own_outlines
from core.masks.tones import look_of
from core.units import NM_PER_UM, UM_PER_MM, round_length_um

if TYPE_CHECKING:
    from core.chip.scene import Block
    from core.fabrication.choices import Tone
    from core.geometry.contour import Contour
    from core.masks.drawing import MaskDrawing
    from core.masks.tones import Look

MARGIN = 0.04  # of the larger side
_WIDTH_PX = 960
BAR_SHARE = 0.2  # of the width, at most
_SIGN_WIDTH = 0.6  # of the size of the lettering, on the average and generously
_FINEST = 1e-6  # of the larger side; finer digits are left out


def preview_svg(drawing: MaskDrawing, tone: Tone) -> str:
    """Return a picture of a mask as SVG text, the same for the same drawing.

    Parameters
    ----------
    drawing : MaskDrawing
        Blocks and their places.
    tone : Tone
        What the drawn shapes become.

    Returns
    -------
    str
        Every distinct block once, used as often as it stands on the mask; islands left out, arcs as arcs;
        y points up as on the mask.
    """
    picture = _Picture(drawing, look_of(tone))
    x0, y0, x1, y1 = drawing.bounds_um
    margin = MARGIN * max(x1 - x0, y1 - y0)
    bar = round_length_um(BAR_SHARE * (x1 - x0))
    left, top, width, height = x0 - margin, -y1 - margin, x1 - x0 + 2.0 * margin, y1 - y0 + 6.0 * margin
    below, font = -y0 + 2.0 * margin, 0.6 * margin
    words = f"{drawing.stem}: {picture.look.words}"
    small = min(font, (width - 2.0 * margin) / (_SIGN_WIDTH * len(words)))  # the words fit into one line
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{_WIDTH_PX}" height="{_WIDTH_PX * height / width:.0f}" '
        f'viewBox="{left:.3f} {top:.3f} {width:.3f} {height:.3f}">\n'
        f"<title>{words}</title>\n"
        f'<rect x="{left:.3f}" y="{top:.3f}" width="{width:.3f}" height="{height:.3f}" fill="#ffffff"/>\n'
        f'<rect id="plate" x="{left:.3f}" y="{top:.3f}" width="{width:.3f}" height="{y1 - y0 + 2.0 * margin:.3f}" '
        f'fill="{picture.look.plate}"/>\n'
        f"{picture.drawn()}"
        f'<rect id="bar" x="{x0:.3f}" y="{below:.3f}" width="{bar:g}" height="{0.2 * margin:.3f}" fill="#222222"/>\n'
        f'<text x="{x0:.3f}" y="{below + margin:.3f}" font-family="sans-serif" font-size="{font:.3f}">'
        f"{bar_words(bar)}</text>\n"
        f'<text x="{x0:.3f}" y="{below + 2.2 * margin:.3f}" font-family="sans-serif" font-size="{small:.3f}">'
        f"{words}</text>\n"
        "</svg>\n"
    )


def bar_words(bar_um: float) -> str:
    """Return the length of a scale bar in words.

    Examples
    --------
    >>> bar_words(2000.0)
    '2 mm'
    """
    return f"{bar_um / UM_PER_MM:g} mm" if bar_um >= UM_PER_MM else f"{bar_um:g} um"


class _Picture:
    def __init__(self, drawing: MaskDrawing, look: Look) -> None:
        self.drawing = drawing
        self.look = look
        x0, y0, x1, y1 = drawing.bounds_um
        self.digits = max(0, ceil(-log10(_FINEST * max(x1 - x0, y1 - y0))))

    def drawn(self) -> str:
        """Return every distinct block as a symbol, and the top."""
        *inner, top = self.drawing.blocks
        symbols = "".join(f'<g id="{self.drawing.name_of(block)}">{self._content(block)}</g>\n' for block in inner)
        return f"<defs>\n{symbols}</defs>\n<g>{self._content(top)}</g>\n"

    def _content(self, block: Block) -> str:
        parts = []
        for layer in Layer:
            outlines = own_outlines(block, layer)
            if outlines:
                path = "".join(self._ring(ring) for outline in outlines for ring in outline.contours)
                parts.append(f'<path class="{layer}" {self._style(layer)} d="{path}"/>')
        for placed in block.placed:
            x, y = (value / NM_PER_UM for value in self.drawing.shift_nm(placed))
            parts.append(f'<use href="#{self.drawing.name_of(placed.block)}" x="{x:.3f}" y="{-y:.3f}"/>')
        return "".join(parts)

    def _style(self, layer: Layer) -> str:
        if layer in self.look.shapes:
            return f'fill="{self.look.shapes[layer]}" fill-rule="evenodd"'
        return f'fill="none" stroke="{self.look.lines[layer]}" vector-effect="non-scaling-stroke"'

    def _ring(self, contour: Contour) -> str:
        (x, y), digits = contour.vertices_um.T, self.digits
        radius = arc_data(contour)[1]
        parts = [f"M{x[0]:.{digits}f} {-y[0]:.{digits}f}"]
        for k, bulge in enumerate(contour.bulges):
            end = (k + 1) % len(x)
            # the picture's y axis points down: a counter-clockwise arc has sweep flag 0 there
            arc = f"A{radius[k]:.{digits}f} {radius[k]:.{digits}f} 0 0 {int(bulge < 0.0)} " if bulge else "L"
            parts.append(f"{arc}{x[end]:.{digits}f} {-y[end]:.{digits}f}")
        return "".join((*parts, "Z"))
