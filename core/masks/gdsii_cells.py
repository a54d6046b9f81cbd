"""The cells of a GDSII mask: one for each block, and one for each distinct piece of channel, placed by reference.

Pieces are turned into chords first and rounded to the grid after that; references only shift, by
whole steps of the grid. Neighbouring pieces are cut a little apart and the gap is filled from their
*rounded* corners, so that edges are shared exactly whatever the rounding of the places did.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import sqrt
from typing import TYPE_CHECKING

import numpy as np

from core.errors import ExportError, shown
from core.masks.arcs import with_outermost_points
from core.masks.drawing import pieces_of
from core.masks.grid import on_grid_nm, split_ring, tidy_ring
from core.masks.layers import CHANNEL_LAYER, LAYERS
from core.masks.names import PIECE_MARK
from core.units import NM_PER_UM

if TYPE_CHECKING:
    from core.chip.scene import Block
    from core.geometry.body import ChannelBody
    from core.geometry.contour import Contour, Floats
    from core.geometry.pieces import ChannelPieces
    from core.masks.drawing import MaskDrawing
    from core.masks.grid import Whole

LONGEST_LINK_UM = 1.0
LINK_STEPS = 4  # of the grid, at least, where the turn allows it


@dataclass(frozen=True, slots=True, kw_only=True)
class GdsiiCell:
    """One cell.

    Attributes
    ----------
    name : str
        Unique in the file.
    rings_nm : tuple of (int, array of int, shape (n, 2))
        Layer and corners of each polygon, the first corner not repeated [nm].
    references : tuple of (str, int, int)
        Name of the cell placed, and where [nm].
    """

    name: str
    rings_nm: tuple[tuple[int, Whole], ...] = ()
    references: tuple[tuple[str, int, int], ...] = ()


def gdsii_cells(drawing: MaskDrawing, *, chord_tolerance_um: float) -> tuple[GdsiiCell, ...]:
    """Return all cells of a mask, every cell before those that refer to it; the last is on top.

    Parameters
    ----------
    drawing : MaskDrawing
        Blocks and their places.
    chord_tolerance_um : float
        Largest distance between an arc and its chords [um].

    Raises
    ------
    ExportError
        If a figure touches itself on the grid, or vanishes.
    """
    draw = _Draw(drawing, chord_tolerance_um)
    return tuple(cell for block in drawing.blocks for cell in draw.cells(block))


def link_length_um(body: ChannelBody, *, grid_nm: int = 1) -> float:
    """Return how far apart pieces are cut [um]: short enough for the link to be straight in the turn.

    Across a turn the middle of a link then lies half a step of the grid inside its arc at most.
    """
    step = grid_nm / NM_PER_UM
    lengths = [max(LONGEST_LINK_UM, LINK_STEPS * step)]
    for shape in body.shapes:
        radius = shape.parameters.loop_radius_um
        lengths.append(radius * sqrt(4.0 * step / (radius + 0.5 * shape.parameters.loop_width_um)))
    return min(lengths)


class _Draw:
    """Draws blocks as cells.

    Parameters
    ----------
    drawing : MaskDrawing
        Gives names, places and the grid.
    sagitta_um : float
        Largest distance between an arc and its chords [um].
    """

    def __init__(self, drawing: MaskDrawing, sagitta_um: float) -> None:
        self.drawing = drawing
        self.sagitta_um = sagitta_um

    def cells(self, block: Block) -> list[GdsiiCell]:
        """Return the cell of a block, after those of the pieces of its channel."""
        name = self.drawing.name_of(block)
        pieces: list[GdsiiCell] = []
        rings: list[tuple[int, Whole]] = []
        references: list[tuple[str, int, int]] = []
        if block.body is not None:
            pieces, rings, references = self._channel(block, name)
        for figure in block.figures:
            number = LAYERS[figure.layer].gdsii_number
            rings += [(number, ring) for ring in self._rings(figure.outline.outer, np.zeros(2), block, "figure")]
        references += [(self.drawing.name_of(placed.block), *self.drawing.shift_nm(placed)) for placed in block.placed]
        return [*pieces, GdsiiCell(name=name, rings_nm=tuple(rings), references=tuple(references))]

    def _rings(self, contour: Contour, rest_um: Floats, block: Block, what: str) -> list[Whole]:
        """Return a ring as polygons on the grid."""
        contour = contour if contour.area_um2 > 0.0 else contour.reversed()
        chords = with_outermost_points(contour).chords(sagitta_um=self.sagitta_um)
        try:
            return split_ring(tidy_ring(self._on_grid(chords + rest_um)))
        except ExportError as error:
            raise ExportError(
                f"GDSII cannot hold {shown(block.title or block.name)}: {what} {error}; raise nose_radius_um or "
                "corner_radius_um, choose a finer grid_nm, or write DXF alone"
            ) from error

    def _channel(
        self, block: Block, name: str
    ) -> tuple[list[GdsiiCell], list[tuple[int, Whole]], list[tuple[str, int, int]]]:
        """Return the cells of the pieces, the links between them, and where the pieces lie."""
        assert block.body is not None
        number = CHANNEL_LAYER.gdsii_number
        parts = pieces_of(block, link_um=link_length_um(block.body, grid_nm=self.drawing.grid_nm))
        rests = self._rests_um(parts)
        cells = []
        for piece, rest in zip(parts.pieces, rests, strict=True):
            rings = self._rings(piece.contour, rest, block, f"piece {piece.name}")
            cells.append(
                GdsiiCell(name=f"{name}{PIECE_MARK}{piece.name}", rings_nm=tuple((number, ring) for ring in rings))
            )
        places = [self._on_grid(np.array([p.dx_um, p.dy_um]) - rests[p.piece]) for p in parts.placed]
        references = [
            (cells[placed.piece].name, int(place[0]), int(place[1]))
            for placed, place in zip(parts.placed, places, strict=True)
        ]
        return cells, [(number, link) for link in self._links_nm(parts, rests, places)], references

    def _rests_um(self, parts: ChannelPieces) -> list[Floats]:
        """Return for each piece what its first place has beyond whole steps of the grid.

        Drawn into the cell before rounding, it makes the first copy as true as a drawing without
        references; only further copies are rounded twice.
        """
        rests: list[Floats] = [np.zeros(2) for _ in parts.pieces]
        for placed in reversed(parts.placed):
            place = np.array([placed.dx_um, placed.dy_um])
            rests[placed.piece] = place - self._on_grid(place) / NM_PER_UM
        return rests

    def _links_nm(self, parts: ChannelPieces, rests: list[Floats], places: list[Whole]) -> list[Whole]:
        links = []
        for k in range(len(parts.placed) - 1):
            near, far = parts.placed[k].piece, parts.placed[k + 1].piece
            for leaving, arriving in zip(parts.pieces[near].exit, parts.pieces[far].entry, strict=True):
                here = self._on_grid(leaving + rests[near]) + places[k]
                there = self._on_grid(arriving + rests[far]) + places[k + 1]
                links.append(_quad(here, there))
        return links

    def _on_grid(self, points_um: Floats) -> Whole:
        return on_grid_nm(points_um, grid_nm=self.drawing.grid_nm)


def _quad(here: Whole, there: Whole) -> Whole:
    """Return the four corners of two facing edges in an order that does not cross."""
    straight = np.abs(here - there).sum()
    crossed = np.abs(here - there[::-1]).sum()
    return np.concatenate((here, there[::-1] if straight <= crossed else there))
