"""DXF files with true arcs: closed polylines of zero width in the model space, in millimetres."""

from __future__ import annotations

from contextlib import contextmanager
from dataclasses import dataclass
from io import StringIO
from typing import TYPE_CHECKING

import numpy as np

from core.geometry.contour import Contour
from core.masks.arcs import with_short_arcs
from core.masks.options import DxfVersion, IslandMode

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

    from ezdxf.document import Drawing

    from core.geometry.contour import Floats
    from core.masks.drawing import MaskDrawing, PlacedChannel
    from core.masks.options import MaskOptions

MM_PER_UM = 1e-3
_MILLIMETRES, _METRIC = 4, 1  # values of $INSUNITS and $MEASUREMENT
_SHORTEST_EDGE_UM = 1e-6  # shorter ones are one point written twice


@dataclass(frozen=True, slots=True, kw_only=True)
class DxfRing:
    """One closed polyline.

    Attributes
    ----------
    layer : str
        Name of its layer.
    vertices_um : array, shape (n, 2)
        Corners on the mask, the first not repeated [um].
    bulges : array, shape (n,)
        tan(sweep/4) of the edge that starts at each vertex.
    """

    layer: str
    vertices_um: Floats
    bulges: Floats


def dxf_rings(drawing: MaskDrawing, options: MaskOptions) -> tuple[DxfRing, ...]:
    """Return the closed polylines of a mask.

    Parameters
    ----------
    drawing : MaskDrawing
        Channels and their places.
    options : MaskOptions
        Whether islands are left out by cutting into pieces or drawn as loops on their own layer.
    """
    channel_layer, island_layer = options.channel_layer.dxf_name, options.island_layer.dxf_name
    rings: list[DxfRing] = []
    for channel in drawing.channels:
        if options.islands is IslandMode.PIECES:
            rings += [_ring(channel_layer, *piece) for piece in _butting_pieces(channel)]
            continue
        shift = np.array([channel.dx_um, channel.dy_um])
        for k, contour in enumerate(channel.outline.contours):
            rings.append(_ring(island_layer if k else channel_layer, contour.vertices_um + shift, contour.bulges))
    return tuple(rings)


def _butting_pieces(channel: PlacedChannel) -> list[tuple[Floats, Floats]]:
    """Return (vertices, bulges) of each piece; neighbours share the very same corners."""
    parts = channel.pieces(link_um=0.0)
    shift = np.array([channel.dx_um, channel.dy_um])
    found: list[tuple[Floats, Floats]] = []
    leaving: list[Floats] = []
    for placed in parts.placed:
        piece = parts.pieces[placed.piece]
        place = shift + np.array([placed.dx_um, placed.dy_um])
        vertices = piece.contour.vertices_um + place
        for arriving, left in zip(piece.entry, leaving, strict=True):
            for corner in arriving:
                nearest = left[np.argmin(np.hypot(*(left - corner - place).T))]
                vertices[np.all(piece.contour.vertices_um == corner, axis=1)] = nearest
        leaving = [chord + place for chord in piece.exit]
        found.append((vertices, piece.contour.bulges))
    return found


def _ring(layer: str, vertices_um: Floats, bulges: Floats) -> DxfRing:
    ahead = np.roll(vertices_um, -1, axis=0) - vertices_um
    is_edge = np.hypot(ahead[:, 0], ahead[:, 1]) > _SHORTEST_EDGE_UM
    short = with_short_arcs(Contour(vertices_um[is_edge], bulges[is_edge]))
    return DxfRing(layer=layer, vertices_um=short.vertices_um, bulges=short.bulges)


def dxf_text(rings: Sequence[DxfRing], *, bounds_um: tuple[float, float, float, float], version: DxfVersion) -> str:
    """Return a whole DXF file.

    Parameters
    ----------
    rings : sequence of DxfRing
        Everything that is drawn.
    bounds_um : tuple of float
        (x_min, y_min, x_max, y_max) for the header [um].
    version : DxfVersion
        R2000 or R12.

    Returns
    -------
    str
        ASCII text with line feeds, the same for the same input.
    """
    stream = StringIO()
    with _fixed_stamps():
        document = _empty_document(version)
        for layer in dict.fromkeys(ring.layer for ring in rings):
            document.layers.add(layer)
        space = document.modelspace()
        add = space.add_polyline2d if version is DxfVersion.R12 else space.add_lwpolyline
        for ring in rings:
            points = np.column_stack((ring.vertices_um * MM_PER_UM + 0.0, ring.bulges)).tolist()
            add(points, format="xyb", close=True, dxfattribs={"layer": ring.layer})
        _set_extents(document, bounds_um)
        document.write(stream)
    return stream.getvalue()


def _empty_document(version: DxfVersion) -> Drawing:
    from ezdxf.document import Drawing

    document = Drawing.new(version.value)
    document.layers.remove("Defpoints")  # there by default, never drawn on
    if version is DxfVersion.R2000:  # R12 cannot say its unit
        document.units = _MILLIMETRES
        document.header["$MEASUREMENT"] = _METRIC
    return document


def _set_extents(document: Drawing, bounds_um: tuple[float, float, float, float]) -> None:
    x0, y0, x1, y1 = (value * MM_PER_UM for value in bounds_um)
    low, high = (x0, y0, 0.0), (x1, y1, 0.0)
    # the header takes its values from the model space, except when one of them is the origin
    document.modelspace().reset_extents(low, high)
    document.header["$EXTMIN"], document.header["$EXTMAX"] = low, high


@contextmanager
def _fixed_stamps() -> Iterator[None]:
    """Let the same drawing give the same bytes: no date, no random identifiers."""
    from ezdxf import options  # type: ignore[attr-defined]  # there, only not declared

    before = options.write_fixed_meta_data_for_testing
    options.write_fixed_meta_data_for_testing = True
    try:
        yield
    finally:
        options.write_fixed_meta_data_for_testing = before
