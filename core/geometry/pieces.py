"""A channel cut into pieces without holes, each distinct shape once.

Every island is cut across the bypass and across the turn. What lies between the cuts of two
neighbouring stages is the same shape again and again, so that it can be drawn once and placed.
"""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from core.errors import GeometryError
from core.geometry.chain import Chain, period, walk
from core.geometry.contour import Contour
from core.geometry.shape import repeat_vector

if TYPE_CHECKING:
    from core.geometry.chain import Spot
    from core.geometry.contour import Floats
    from core.geometry.curves import Ring
    from core.geometry.shape import ChannelShape

SAME_UM = 1e-4  # pieces that differ by less than a tenth of the finest mask grid are one shape
LONGEST_PIECE_NAME = 7  # characters


@dataclass(frozen=True)
class Piece:
    """One shape without holes, in its own coordinates.

    Attributes
    ----------
    kind : str
        ``START``, ``STEP``, ``END``, ``BEND``, or ``WHOLE`` for a channel or row that is not cut.
    contour : Contour
        Counter-clockwise ring.
    entry, exit : tuple of array, each shape (2, 2)
        Chords at which the piece before and the piece after join, in the order of the reverse
        flow: across the bypass, then across the loop. Their ends are vertices of the contour.
    number : int
        Its number among the distinct pieces of its kind, from 0.
    """

    kind: str
    contour: Contour
    entry: tuple[Floats, ...] = ()
    exit: tuple[Floats, ...] = ()
    number: int = 0

    @property
    def name(self) -> str:
        """Unique within a channel, at most ``LONGEST_PIECE_NAME`` characters: ``START``, ``STEP_A``, ``STEP_AB``."""
        if self.number == 0 and self.kind != "STEP":
            return self.kind
        letters = _letters(self.number)
        return f"{self.kind[: LONGEST_PIECE_NAME - 1 - len(letters)]}_{letters}"


@dataclass(frozen=True, slots=True)
class PlacedPiece:
    """Where a piece lies: its number and its shift [um]."""

    piece: int
    dx_um: float
    dy_um: float


@dataclass(frozen=True, slots=True)
class ChannelPieces:
    """A channel as pieces.

    Attributes
    ----------
    pieces : tuple of Piece
        Distinct shapes.
    placed : tuple of PlacedPiece
        All of them in the order of the reverse flow.
    """

    pieces: tuple[Piece, ...]
    placed: tuple[PlacedPiece, ...]


class PieceCollector:
    """Distinct pieces so far, and where all of them are placed."""

    def __init__(self) -> None:
        self._found: list[Piece] = []
        self._placed: list[PlacedPiece] = []
        self._kinds: Counter[str] = Counter()

    def number(self, piece: Piece) -> int:
        """Return the number of a piece: an earlier one of the same shape, or a new one."""
        for number, old in enumerate(self._found):
            if _is_same(old, piece):
                return number
        self._found.append(replace(piece, number=self._kinds[piece.kind]))
        self._kinds[piece.kind] += 1
        return len(self._found) - 1

    def place(self, number: int, at_um: Floats) -> None:
        """Place a piece by its number, shifted by a vector of shape (2,) [um]."""
        self._placed.append(PlacedPiece(number, float(at_um[0]), float(at_um[1])))

    def pieces(self) -> ChannelPieces:
        """Return everything collected."""
        return ChannelPieces(tuple(self._found), tuple(self._placed))


def cut_pieces(shape: ChannelShape, *, link_um: float = 0.0) -> ChannelPieces:
    """Cut a channel into pieces without holes.

    Parameters
    ----------
    shape : ChannelShape
        A usable shape.
    link_um : float
        Length left free along the path at every cut, to be filled between the ``exit`` of a
        piece and the ``entry`` of the next [um]; 0 lets neighbours share the cut. Where a wall is
        short, a third of it is used instead.

    Returns
    -------
    ChannelPieces
        Pieces in their own coordinates and their shifts.

    Raises
    ------
    GeometryError
        If the shape has no outline.
    """
    if shape.outline is None or shape.chain is None:
        raise GeometryError("a shape with error findings cannot be cut into pieces")
    if shape.parameters.stages == 0:
        return ChannelPieces((Piece("WHOLE", shape.outline.outer),), (PlacedPiece(0, 0.0, 0.0),))
    return _Cutter(shape.chain, link_um).pieces(shape.parameters.stages)


class _Cutter:
    def __init__(self, chain: Chain, link_um: float) -> None:
        self.chain = chain
        self.link_um = link_um
        self.outer = chain.outers[0]
        self.collector = PieceCollector()

    def pieces(self, stages: int) -> ChannelPieces:
        drawn = self.chain.parameters.stages
        step = period(self.chain.parameters)
        extra = (stages - drawn) // step
        shift = repeat_vector(self.chain) if extra else np.zeros(2)
        self._place(self._distinct("START", self._start(), 0), 0, np.zeros(2))
        cells = [self._distinct("STEP", self._cell(cell), cell + 1) for cell in range(drawn - 1)]
        for cell in range(stages - 1):
            periods = 0 if extra == 0 or cell == 0 else (cell - 1) // step
            source = cell - periods * step
            self._place(cells[source], source + 1, periods * shift)
        self._place(self._distinct("END", self._end(drawn - 1), drawn - 1), drawn - 1, extra * shift)
        return self.collector.pieces()

    def _distinct(self, kind: str, piece: tuple[Contour, list[Floats], list[Floats]], stage: int) -> int:
        """Return the number of a shape, in coordinates from the fork of a stage: a new or an earlier one."""
        contour, entry, leaving = piece
        origin = self.chain.centreline.stages[stage].fork_um
        shifted = Contour(contour.vertices_um - origin, contour.bulges)
        before, after = (tuple(chord - origin for chord in ends) for ends in (entry, leaving))
        return self.collector.number(Piece(kind, shifted, before, after))

    def _place(self, number: int, stage: int, shift: Floats) -> None:
        self.collector.place(number, self.chain.centreline.stages[stage].fork_um + shift)

    def _start(self) -> tuple[Contour, list[Floats], list[Floats]]:
        before = self._spots(0, -1.0)
        runs = [
            walk(self.outer, before.top, before.bottom),
            walk(self.chain.islands[0], before.island_bottom, before.island_top),
        ]
        return Contour.joined((run.vertices_um, run.bulges) for run in runs), [], self._chords(0, before)

    def _cell(self, stage: int) -> tuple[Contour, list[Floats], list[Floats]]:
        after, before = self._spots(stage, 1.0), self._spots(stage + 1, -1.0)
        runs = [
            walk(self.outer, after.bottom, before.bottom),
            walk(self.chain.islands[stage + 1], before.island_bottom, before.island_top),
            walk(self.outer, before.top, after.top),
            walk(self.chain.islands[stage], after.island_top, after.island_bottom),
        ]
        ring = Contour.joined((run.vertices_um, run.bulges) for run in runs)
        return ring, self._chords(stage, after), self._chords(stage + 1, before)

    def _end(self, stage: int) -> tuple[Contour, list[Floats], list[Floats]]:
        after = self._spots(stage, 1.0)
        runs = [
            walk(self.outer, after.bottom, after.top),
            walk(self.chain.islands[stage], after.island_top, after.island_bottom),
        ]
        return Contour.joined((run.vertices_um, run.bulges) for run in runs), self._chords(stage, after), []

    def _spots(self, stage: int, sense: float) -> _Spots:
        """Return the four spots of a cut, moved half a link with (+1) or against (-1) the reverse flow."""
        cut, island = self.chain.cuts[stage], self.chain.islands[stage]
        is_left_loop = self.chain.centreline.stages[stage].side > 0
        # seen along the reverse flow, walls above run against it, those below with it; islands the other way
        up, down = -sense, sense
        bypass_outer = self._moved(self.outer, cut.outer_bypass, down if is_left_loop else up)
        turn_outer = self._moved(self.outer, cut.outer_turn, up if is_left_loop else down)
        bypass_island = self._moved(island, cut.island_bypass, up if is_left_loop else down)
        turn_island = self._moved(island, cut.island_turn, down if is_left_loop else up)
        if is_left_loop:
            return _Spots(turn_outer, bypass_outer, turn_island, bypass_island)
        return _Spots(bypass_outer, turn_outer, bypass_island, turn_island)

    def _moved(self, ring: Ring, spot: Spot, sense: float) -> Spot:
        index, length = spot
        curve = ring.curves[index]
        half = 0.5 * self.link_um
        if curve.radius:
            half *= curve.radius / self.chain.parameters.loop_radius_um
        half = min(half, min(length, curve.length - length) / 3.0)
        return index, length + sense * half

    def _chords(self, stage: int, spots: _Spots) -> list[Floats]:
        island = self.chain.islands[stage]
        top = _chord(self.outer, spots.top, island, spots.island_top)
        bottom = _chord(island, spots.island_bottom, self.outer, spots.bottom)
        return [bottom, top] if self.chain.centreline.stages[stage].side > 0 else [top, bottom]


@dataclass(frozen=True, slots=True)
class _Spots:
    """Spots above and below (seen along the reverse flow) on the outer ring and on the island."""

    top: Spot
    bottom: Spot
    island_top: Spot
    island_bottom: Spot


def _chord(above: Ring, upper: Spot, below: Ring, lower: Spot) -> Floats:
    """Return the two ends of a chord, the left one (seen along the reverse flow) first."""
    return np.array([above.curves[upper[0]].at(upper[1]), below.curves[lower[0]].at(lower[1])])


def _is_same(one: Piece, other: Piece) -> bool:
    a, b = one.contour, other.contour
    return (
        a.vertices_um.shape == b.vertices_um.shape
        and len(one.entry) == len(other.entry)
        and len(one.exit) == len(other.exit)
        and bool(np.allclose(a.vertices_um, b.vertices_um, rtol=0.0, atol=SAME_UM))
        and bool(np.allclose(a.bulges, b.bulges, rtol=0.0, atol=1e-9))
    )


def _letters(number: int) -> str:
    """Return A to Z, then AA, AB and so on, for 0, 1, 2 ..."""
    ahead, last = divmod(number, 26)
    return (_letters(ahead - 1) if ahead else "") + chr(ord("A") + last)
