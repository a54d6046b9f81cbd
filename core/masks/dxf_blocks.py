"""What stands in a DXF mask: closed rings with true arcs, in blocks that are inserted, or all written out."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache
from typing import TYPE_CHECKING

import numpy as np

from core.chip.scene import Layer
from core.fabrication.choices import IslandMode
from core.geometry.contour import Contour
from core.masks.arcs import with_short_arcs
from core.masks.drawing import pieces_of
from core.masks.layers import ISLAND_LAYER, LAYERS, WORKING_ORDER
from core.units import NM_PER_UM

if TYPE_CHECKING:
    from collections.abc import Iterator

    from core.chip.scene import Block
    from core.geometry.contour import Floats
    from core.masks.drawing import MaskDrawing
    from core.masks.options import MaskOptions

_SHORTEST_EDGE_UM = 1e-6  # shorter ones are one point written twice


@dataclass(frozen=True, slots=True, kw_only=True)
class DxfRing:
    """One closed polyline.

    Attributes
    ----------
    layer : str
        Name of its layer.
    vertices_um : array, shape (n, 2)
        Corners in its block, the first not repeated [um].
    bulges : array, shape (n,)
        tan(sweep/4) of the edge that starts at each vertex.
    """

    layer: str
    vertices_um: Floats
    bulges: Floats


@dataclass(frozen=True, slots=True, kw_only=True)
class DxfInsert:
    """A block placed by a shift [um]; the layer is one that the block draws on."""

    name: str
    layer: str
    dx_um: float
    dy_um: float


@dataclass(frozen=True, slots=True, kw_only=True)
class DxfBlock:
    """A block, or the model space.

    Attributes
    ----------
    name : str
        Unique, unlike any layer.
    rings : tuple of DxfRing
        Drawn in it, in the order of working.
    inserts : tuple of DxfInsert
        Blocks that stand in it.
    """

    name: str
    rings: tuple[DxfRing, ...] = ()
    inserts: tuple[DxfInsert, ...] = ()


def dxf_blocks(drawing: MaskDrawing, options: MaskOptions) -> tuple[DxfBlock, ...]:
    """Return the blocks of a mask, each before those it stands in; the last is the model space.

    Parameters
    ----------
    drawing : MaskDrawing
        Blocks and their places.
    options : MaskOptions
        How islands are left out, and whether copies are inserted or written out.
    """
    if options.is_flat:
        return (DxfBlock(name=drawing.stem, rings=tuple(_flat_rings(drawing, options))),)
    blocks = []
    for block in drawing.blocks:
        rings = [ring for layer in WORKING_ORDER for ring in rings_of(block, layer, options.islands)]
        inserts = []
        for placed in block.placed:
            dx, dy = (value / NM_PER_UM for value in drawing.shift_nm(placed))
            (layer, *_) = drawing.extents_of(placed.block)
            name = drawing.name_of(placed.block)
            inserts.append(DxfInsert(name=name, layer=LAYERS[layer].dxf_name, dx_um=dx, dy_um=dy))
        blocks.append(DxfBlock(name=drawing.name_of(block), rings=tuple(rings), inserts=tuple(inserts)))
    return tuple(blocks)


def flat_runs(drawing: MaskDrawing) -> Iterator[tuple[Block, Layer, int, int]]:
    """Yield block, layer and place [nm] of every run of rings, in the order in which a flat file holds them.

    One layer is done all over the mask before the next, so that a cutter frees no chip too early.
    """
    for layer in WORKING_ORDER:
        for block, x, y in drawing.placings():
            if layer in _drawn_layers(block):
                yield block, layer, x, y


def _drawn_layers(block: Block) -> set[Layer]:
    layers = {figure.layer for figure in block.figures}
    return layers if block.body is None else {*layers, Layer.CHANNELS}


def _flat_rings(drawing: MaskDrawing, options: MaskOptions) -> Iterator[DxfRing]:
    known = cache(lambda block, layer: rings_of(block, layer, options.islands))
    for block, layer, x, y in flat_runs(drawing):
        shift = np.array([x, y]) / NM_PER_UM
        for ring in known(block, layer):
            yield DxfRing(layer=ring.layer, vertices_um=ring.vertices_um + shift, bulges=ring.bulges)


def rings_of(block: Block, layer: Layer, islands: IslandMode) -> list[DxfRing]:
    """Return the closed polylines that a block itself draws for one layer.

    Parameters
    ----------
    block : Block
        A channel or other figures.
    layer : Layer
        Which of its figures; islands go with their channel.
    islands : IslandMode
        How islands are left out.
    """
    name = LAYERS[layer].dxf_name
    rings = []
    if block.body is not None and layer is Layer.CHANNELS:
        if islands is IslandMode.PIECES:
            rings += [_ring(name, *piece) for piece in _butting_pieces(block)]
        else:
            island_name = ISLAND_LAYER.dxf_name if islands is IslandMode.LOOPS else name
            # inner loops first: once the outer one is cut, nothing holds the inside any more
            rings += [_ring(island_name, ring.vertices_um, ring.bulges) for ring in block.body.outline.islands]
            outer = block.body.outline.outer
            rings.append(_ring(name, outer.vertices_um, outer.bulges))
    for figure in block.figures:
        if figure.layer is layer:
            rings.append(_ring(name, figure.outline.outer.vertices_um, figure.outline.outer.bulges))
    return rings


def _butting_pieces(block: Block) -> list[tuple[Floats, Floats]]:
    """Return (vertices, bulges) of each piece; neighbours share the very same corners."""
    parts = pieces_of(block, link_um=0.0)
    found: list[tuple[Floats, Floats]] = []
    leaving: list[Floats] = []
    for placed in parts.placed:
        piece = parts.pieces[placed.piece]
        place = np.array([placed.dx_um, placed.dy_um])
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
