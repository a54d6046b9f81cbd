"""A folded channel as pieces without holes, placed by shifts alone.

Every row is cut as its shape is, then turned; its first and last pieces get the pads or meet the bends.
Rows that are alike share their pieces.
"""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from core.geometry.contour import Contour, Placement
from core.geometry.pads import LeadEnd, end_index, finished
from core.geometry.pieces import ChannelPieces, Piece, PieceCollector, PlacedPiece, cut_pieces

if TYPE_CHECKING:
    from core.geometry.contour import Floats
    from core.geometry.rows import Bend, Folding, Row


def body_pieces(folding: Folding, *, link_um: float = 0.0, scale: float = 1.0) -> ChannelPieces:
    """Cut rows and bends into pieces.

    Parameters
    ----------
    folding : Folding
        Rows and bends at their places.
    link_um : float
        Length left free along the path at every cut [um]; see ``core.geometry.pieces.cut_pieces``. Around a
        bend it is left free on the straight leads.
    scale : float
        By how much the pieces and their shifts are enlarged in the end.

    Returns
    -------
    ChannelPieces
        In the order of the reverse flow. Chords across stages come in pairs, those at bends singly.
    """
    collector = PieceCollector()
    last = len(folding.rows) - 1
    shapes = {id(row.shape): row.shape for row in folding.rows}
    cut = {key: cut_pieces(shape, link_um=link_um) for key, shape in shapes.items()}
    for number, row in enumerate(folding.rows):
        parts = cut[id(row.shape)]
        _add_row(collector, row, parts, link_um=link_um, is_start_open=number > 0, is_far_open=number < last)
        if number < last:
            _add_bend(collector, folding.bends[number], row.far, folding.rows[number + 1].start)
    return collector.pieces() if scale == 1.0 else _scaled(collector.pieces(), scale)


def _add_row(
    collector: PieceCollector, row: Row, parts: ChannelPieces, *, link_um: float, is_start_open: bool, is_far_open: bool
) -> None:
    turn = Placement(angle=row.placement.angle, is_mirrored=row.placement.is_mirrored)
    numbers: dict[tuple[int, bool, bool], int] = {}
    for order, placed in enumerate(parts.placed):
        at = row.placement.points(np.array([placed.dx_um, placed.dy_um]))
        is_first, is_last = order == 0, order == len(parts.placed) - 1
        key = (placed.piece, is_first, is_last)
        if key not in numbers:
            piece = _turned(parts.pieces[placed.piece], turn)
            if is_first:
                piece = _ended(piece, _moved(row.start, -at), link_um=link_um if is_start_open else 0.0)
                piece = piece if is_start_open else replace(piece, entry=())
            if is_last:
                piece = _ended(piece, _moved(row.far, -at), link_um=link_um if is_far_open else 0.0, is_far=True)
                piece = piece if is_far_open else replace(piece, exit=())
            numbers[key] = collector.number(piece)
        collector.place(numbers[key], at)


def _add_bend(collector: PieceCollector, bend: Bend, start: LeadEnd, end: LeadEnd) -> None:
    origin = start.middle_um
    right, left = bend.walls(_moved(start, -origin), _moved(end, -origin))
    ring = Contour.joined((run.vertices_um, run.bulges) for run in (right, left))
    entry = np.array([left.vertices_um[-1], right.vertices_um[0]])
    leaving = np.array([left.vertices_um[0], right.vertices_um[-1]])
    collector.place(collector.number(Piece("BEND", ring, (entry,), (leaving,))), origin)


def _turned(piece: Piece, turn: Placement) -> Piece:
    def chords(ends: tuple[Floats, ...]) -> tuple[Floats, ...]:
        moved = (turn.points(chord) for chord in ends)
        return tuple(chord[::-1] if turn.is_mirrored else chord for chord in moved)

    return Piece(piece.kind, piece.contour.placed(turn), chords(piece.entry), chords(piece.exit))


def _ended(piece: Piece, end: LeadEnd, *, link_um: float, is_far: bool = False) -> Piece:
    """Return a piece with the end of its lead finished, and the chord there."""
    ring = finished(piece.contour, end)
    if end.pad_radius_um > 0.0:
        return replace(piece, contour=ring)
    first = end_index(ring, end.corners_um)
    if link_um > 0.0:
        vertices = ring.vertices_um.copy()
        count = len(vertices)
        before, after = vertices[first - 1], vertices[(first + 2) % count]
        straight = min(float(np.dot(vertices[first] - wall, end.outward)) for wall in (before, after))
        both = [first, (first + 1) % count]
        vertices[both] -= min(link_um, straight / 3.0) * end.outward
        ring = Contour(vertices, ring.bulges)
    right, left = ring.vertices_um[first], ring.vertices_um[(first + 1) % len(ring.vertices_um)]
    if is_far:
        return replace(piece, contour=ring, exit=(np.array([left, right]),))
    return replace(piece, contour=ring, entry=(np.array([right, left]),))


def _moved(end: LeadEnd, by_um: Floats) -> LeadEnd:
    return replace(end, drawn_um=end.drawn_um + by_um)


def _scaled(pieces: ChannelPieces, factor: float) -> ChannelPieces:
    enlarged = (
        replace(
            piece,
            contour=piece.contour.scaled(factor),
            entry=tuple(factor * chord for chord in piece.entry),
            exit=tuple(factor * chord for chord in piece.exit),
        )
        for piece in pieces.pieces
    )
    placed = (PlacedPiece(each.piece, factor * each.dx_um, factor * each.dy_um) for each in pieces.placed)
    return ChannelPieces(tuple(enlarged), tuple(placed))
