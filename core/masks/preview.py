"""A small picture of a mask: filled channels to scale, with a scale bar."""

from __future__ import annotations

from math import floor, log10
from typing import TYPE_CHECKING

import numpy as np

from core.geometry.contour import arc_data

if TYPE_CHECKING:
    from core.masks.drawing import MaskDrawing, PlacedChannel

_MARGIN = 0.04  # of the larger side
_WIDTH_PX = 960
_BAR_SHARE = 0.2  # of the width, at most
_UM_PER_MM = 1000.0


def preview_svg(drawing: MaskDrawing) -> str:
    """Return a picture of a mask as SVG text, the same for the same drawing.

    Parameters
    ----------
    drawing : MaskDrawing
        Channels and their places.

    Returns
    -------
    str
        One path for each channel, islands left out, arcs as arcs; y points up as on the mask.
    """
    x0, y0, x1, y1 = drawing.bounds_um
    margin = _MARGIN * max(x1 - x0, y1 - y0)
    bar = scale_bar_um(x1 - x0)
    font = 0.6 * margin
    left, top = x0 - margin, -y1 - margin
    width, height = x1 - x0 + 2.0 * margin, y1 - y0 + 4.0 * margin
    bar_y = -y0 + margin
    shapes = "\n".join(
        f'<path fill="#1f6f78" fill-rule="evenodd" d="{_path(channel)}"/>' for channel in drawing.channels
    )
    label = f"{bar / _UM_PER_MM:g} mm" if bar >= _UM_PER_MM else f"{bar:g} um"
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" width="{_WIDTH_PX}" height="{_WIDTH_PX * height / width:.0f}" '
        f'viewBox="{left:.3f} {top:.3f} {width:.3f} {height:.3f}">\n'
        f"<title>{drawing.stem}: drawn shapes are the channel</title>\n"
        f'<rect x="{left:.3f}" y="{top:.3f}" width="{width:.3f}" height="{height:.3f}" fill="#ffffff"/>\n'
        f"{shapes}\n"
        f'<rect x="{x0:.3f}" y="{bar_y:.3f}" width="{bar:g}" height="{0.2 * margin:.3f}" fill="#222222"/>\n'
        f'<text x="{x0:.3f}" y="{bar_y + margin:.3f}" font-family="sans-serif" font-size="{font:.3f}">{label}</text>\n'
        "</svg>\n"
    )


def scale_bar_um(width_um: float) -> float:
    """Return a round length of at most a fifth of the width: 1, 2 or 5 times a power of ten [um].

    Examples
    --------
    >>> scale_bar_um(6400.0)
    1000.0
    """
    room = _BAR_SHARE * width_um
    decade = 10.0 ** floor(log10(room))
    return max(step * decade for step in (1.0, 2.0, 5.0) if step * decade <= room * (1.0 + 1e-12))


def _path(channel: PlacedChannel) -> str:
    parts = []
    for contour in channel.outline.contours:
        x, y = (contour.vertices_um + np.array([channel.dx_um, channel.dy_um])).T
        _, radius, _, _ = arc_data(contour)
        parts.append(f"M{x[0]:.3f} {-y[0]:.3f}")
        for k, bulge in enumerate(contour.bulges):
            end = (k + 1) % len(x)
            # the picture's y axis points down: a counter-clockwise arc has sweep flag 0 there
            arc = f"A{radius[k]:.3f} {radius[k]:.3f} 0 0 {int(bulge < 0.0)} " if bulge else "L"
            parts.append(f"{arc}{x[end]:.3f} {-y[end]:.3f}")
        parts.append("Z")
    return "".join(parts)
