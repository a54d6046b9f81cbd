"""The cells of a GDSII mask: one for each distinct piece of channel, placed by reference.

Pieces are turned into chords first and rounded to the grid after that; references only shift,
by whole nanometres. Neighbouring pieces are cut a little apart and the gap is filled from their
*rounded* corners, so that edges are shared exactly whatever the rounding of the places did.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import sqrt
from typing import TYPE_CHECKING

import numpy as np

from core.errors import ExportError
from core.masks.arcs import with_outermost_points
from core.masks.grid import NM_PER_UM, on_grid_nm, split_ring, tidy_ring

if TYPE_CHECKING:
    from core.geometry.contour import Floats
    from core.geometry.pieces import ChannelPieces
    from core.masks.drawing import MaskDrawing, PlacedChannel
    from core.masks.grid import Whole
    from core.parameters import ChannelParameters

PIECE_MARK = "__"  # no safe name of a channel has two underscores in a row
LONGEST_LINK_UM = 1.0
LINK_SAGITTA_UM = 5e-4  # half the grid: across a turn a link is as good as curved


@dataclass(frozen=True, slots=True, kw_only=True)
class GdsiiCell:
    """One cell.

    Attributes
    ----------
    name : str
        Unique in the file.
    rings_nm : tuple of array of int, shape (n, 2)
        Polygons, the first vertex not repeated [nm].
    references : tuple of (str, int, int)
        Name of the cell placed, and where [nm].
    """

    name: str
    rings_nm: tuple[Whole, ...] = ()
    references: tuple[tuple[str, int, int], ...] = ()


def gdsii_cells(drawing: MaskDrawing, *, chord_tolerance_um: float) -> tuple[GdsiiCell, ...]:
    """Return all cells of a mask, every cell before those that refer to it; the last is on top.

    Parameters
    ----------
    drawing : MaskDrawing
        Channels and their places.
    chord_tolerance_um : float
        Largest distance between an arc and its chords [um].

    Raises
    ------
    ExportError
        If a piece touches itself on the grid.
    """
    cells: list[GdsiiCell] = []
    references: list[tuple[str, int, int]] = []
    for channel in drawing.channels:
        cells += _channel_cells(channel, chord_tolerance_um)
        dx, dy = on_grid_nm(np.array([channel.dx_um, channel.dy_um]))
        references.append((channel.name, int(dx), int(dy)))
    return (*cells, GdsiiCell(name=drawing.stem, references=tuple(references)))


def link_length_um(parameters: ChannelParameters) -> float:
    """Return how far apart pieces are cut [um]: short enough for the link to be straight in the turn."""
    radius = parameters.loop_radius_um
    outer = radius + 0.5 * parameters.loop_width_um
    return min(LONGEST_LINK_UM, radius * sqrt(8.0 * LINK_SAGITTA_UM / outer))


def _channel_cells(channel: PlacedChannel, sagitta_um: float) -> list[GdsiiCell]:
    parts = channel.pieces(link_um=link_length_um(channel.shape.parameters))
    rests = _rests_um(parts)
    cells = []
    for piece, rest in zip(parts.pieces, rests, strict=True):
        chords = with_outermost_points(piece.contour).chords(sagitta_um=sagitta_um)
        ring = tidy_ring(on_grid_nm(chords + rest))
        try:
            rings = tuple(split_ring(ring))
        except ExportError as error:
            raise ExportError(
                f"GDSII cannot hold '{channel.title}': piece {piece.name} {error}; "
                "raise nose_radius_um or corner_radius_um, or write DXF alone"
            ) from error
        cells.append(GdsiiCell(name=f"{channel.name}{PIECE_MARK}{piece.name}", rings_nm=rings))
    places = [on_grid_nm(np.array([p.dx_um, p.dy_um]) - rests[p.piece]) for p in parts.placed]
    references = tuple(
        (cells[placed.piece].name, int(place[0]), int(place[1]))
        for placed, place in zip(parts.placed, places, strict=True)
    )
    links = _links_nm(parts, rests, places)
    return [*cells, GdsiiCell(name=channel.name, rings_nm=links, references=references)]


def _rests_um(parts: ChannelPieces) -> list[Floats]:
    """Return for each piece what its first place has beyond whole nanometres.

    Drawn into the cell before rounding, it makes the first copy as true as a drawing without
    references; only further copies are rounded twice.
    """
    rests: list[Floats] = [np.zeros(2) for _ in parts.pieces]
    for placed in reversed(parts.placed):
        place = np.array([placed.dx_um, placed.dy_um])
        rests[placed.piece] = place - on_grid_nm(place) / NM_PER_UM
    return rests


def _links_nm(parts: ChannelPieces, rests: list[Floats], places: list[Whole]) -> tuple[Whole, ...]:
    links = []
    for k in range(len(parts.placed) - 1):
        near, far = parts.placed[k].piece, parts.placed[k + 1].piece
        for leaving, arriving in zip(parts.pieces[near].exit, parts.pieces[far].entry, strict=True):
            here = on_grid_nm(leaving + rests[near]) + places[k]
            there = on_grid_nm(arriving + rests[far]) + places[k + 1]
            links.append(_quad(here, there))
    return tuple(links)


def _quad(here: Whole, there: Whole) -> Whole:
    """Return the four corners of two facing edges in an order that does not cross."""
    straight = np.abs(here - there).sum()
    crossed = np.abs(here - there[::-1]).sum()
    return np.concatenate((here, there[::-1] if straight <= crossed else there))
