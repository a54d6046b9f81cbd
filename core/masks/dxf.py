"""DXF files with true arcs: closed polylines of zero width, and inserts that only shift, in millimetres."""

from __future__ import annotations

from contextlib import contextmanager
from io import StringIO
from typing import TYPE_CHECKING

import numpy as np

from core.fabrication.choices import DxfVersion
from core.units import UM_PER_MM

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

    from ezdxf.document import Drawing
    from ezdxf.layouts.base import BaseLayout

    from core.masks.dxf_blocks import DxfBlock

MM_PER_UM = 1.0 / UM_PER_MM
_MILLIMETRES, _METRIC = 4, 1  # values of $INSUNITS and $MEASUREMENT


def dxf_text(blocks: Sequence[DxfBlock], *, bounds_um: tuple[float, float, float, float], version: DxfVersion) -> str:
    """Return a whole DXF file.

    Parameters
    ----------
    blocks : sequence of DxfBlock
        Everything that is drawn, each block before those it stands in; the last is the model space.
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
        for layer in dict.fromkeys(ring.layer for block in blocks for ring in block.rings):
            document.layers.add(layer)
        *inner, top = blocks
        for block in inner:
            _fill(document.blocks.new(block.name), block, version)
        _fill(document.modelspace(), top, version)
        _set_extents(document, bounds_um)
        document.write(stream)
    return stream.getvalue()


def _fill(space: BaseLayout, block: DxfBlock, version: DxfVersion) -> None:
    add = space.add_polyline2d if version is DxfVersion.R12 else space.add_lwpolyline
    for ring in block.rings:
        points = np.column_stack((ring.vertices_um * MM_PER_UM + 0.0, ring.bulges)).tolist()
        add(points, format="xyb", close=True, dxfattribs={"layer": ring.layer})
    for insert in block.inserts:
        place = (insert.dx_um * MM_PER_UM, insert.dy_um * MM_PER_UM)
        space.add_blockref(insert.name, place, dxfattribs={"layer": insert.layer})


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
