"""Factors of the Jacobian by small dense matrices, eliminated one after the other.

Each front is factorised with exchange of rows among its own unknowns (multifrontal method: I. S. Duff
and J. K. Reid, ACM Trans. Math. Softw. 9, 1983, 302). Because the matrix carries a very small
compressibility, every front can be eliminated (a quasi-definite matrix: R. J. Vanderbei, SIAM J. Optim.
5, 1995, 100). Newton's corrections, whose residuals are exact, remove the trace that it leaves, and that
of single precision, which takes half the memory and two thirds of the time.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from core.errors import SolveError
from core.flow.fronts import Fronts

if TYPE_CHECKING:
    from core.flow.assembly import Assembler

Part = tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]  # lu, exchanges of rows, upper and lower border block


class Factor:
    """Solves for all unknowns that are not on walls, to about three digits."""

    def __init__(self, fronts: Fronts, parts: list[Part], order: np.ndarray) -> None:
        self._fronts, self._parts, self._order = fronts.all, parts, order

    def solve(self, right: np.ndarray) -> np.ndarray:
        """Return the solution for a right side in the order of a state; zero at walls."""
        from scipy.linalg.lapack import sgetrs

        scale = float(np.abs(right).max())
        if not 0.0 < scale < np.inf:
            return right.copy()
        x = (right[self._order] / scale).astype(np.float32)
        for front, (lu, exchanges, _, lower) in zip(self._fronts, self._parts, strict=True):
            mine, _ = sgetrs(lu, exchanges, x[front.begin : front.end])
            x[front.begin : front.end] = mine
            x[front.border] -= lower @ mine
        for front, (_, _, upper, _) in zip(reversed(self._fronts), reversed(self._parts), strict=True):
            x[front.begin : front.end] -= upper @ x[front.border]
        solution = np.zeros_like(right)
        solution[self._order] = x
        return solution * scale


class Elimination:
    """Pattern and order of elimination for all unknowns of an assembler that are not on walls.

    Parameters
    ----------
    assembler : Assembler
        Mesh and modes.
    wall : ndarray of int
        Nodes at which the velocity is zero.
    """

    def __init__(self, assembler: Assembler, wall: np.ndarray) -> None:
        self._assembler, self.wall = assembler, wall
        lay, square, mixed = assembler.layout, assembler.square, assembler.mixed
        fields = np.full(lay.nodes, lay.fields)
        fields[wall] = 0
        widths = fields.copy()
        widths[: lay.corners] += lay.pressure
        self._fronts = Fronts(square.rows, square.columns, widths)
        self._order = _unknowns(assembler, fields, self._fronts.place)
        moves, corners = fields > 0, np.arange(lay.corners)
        self._square = _Places(self._fronts, square.rows, square.columns, moves[square.rows] & moves[square.columns])
        self._mixed = _Places(self._fronts, mixed.rows, mixed.columns, moves[mixed.columns], row_shift=fields)
        self._soft = _Places(self._fronts, corners, corners, widths[corners] > 0, row_shift=fields, column_shift=fields)

    @property
    def fill(self) -> int:
        """Number of entries a factor will have."""
        return self._fronts.entries

    def factorised(self, momentum: np.ndarray, prescribed: np.ndarray) -> Factor:
        """Return the factor of the Jacobian.

        Parameters
        ----------
        momentum : ndarray, shape (fields, fields, entries)
            As of ``Assembler.momentum_slopes``.
        prescribed : ndarray of int
            Nodes not on walls at which the velocity is given; their rows and columns are those of the
            unit matrix.

        Raises
        ------
        SolveError
            If the matrix is singular or the memory does not suffice.
        """
        lay, square, mixed = self._assembler.layout, self._assembler.square, self._assembler.mixed
        given = np.zeros(lay.nodes, dtype=bool)
        given[prescribed] = True
        momentum = momentum.astype(np.float32)
        momentum[:, :, given[square.rows] | given[square.columns]] = 0.0
        own = np.flatnonzero((square.rows == square.columns) & given[square.rows])
        for field in range(lay.fields):
            momentum[field, field, own] = 1.0
        continuity = (self._assembler.continuity * ~given[mixed.columns]).astype(np.float32)
        softening = (np.eye(lay.pressure)[:, :, None] * self._assembler.softening).astype(np.float32)
        try:
            return Factor(self._fronts, self._eliminated(momentum, continuity, softening), self._order)
        except (np.linalg.LinAlgError, MemoryError) as error:
            raise SolveError(
                f"the equations could not be factorised ({error}); choose quality 'coarse' or fewer stages"
            ) from error

    def _eliminated(self, momentum: np.ndarray, continuity: np.ndarray, softening: np.ndarray) -> list[Part]:
        from scipy.linalg.lapack import sgetrf, sgetrs

        waiting: dict[int, np.ndarray] = {}  # what eliminated fronts leave to later ones
        parts: list[Part] = []
        for number, front in enumerate(self._fronts.all):
            matrix = np.zeros((front.size, front.size), dtype=np.float32)
            self._square.put(matrix, number, momentum)
            self._mixed.put(matrix, number, continuity)
            self._mixed.put(matrix, number, continuity, mirrored=True)
            self._soft.put(matrix, number, softening)
            for child, here in front.children:
                matrix.reshape(-1)[here[:, None] * front.size + here] += waiting.pop(child)
            p = front.pivots
            lu, exchanges, failed = sgetrf(matrix[:p, :p])
            if failed:
                raise np.linalg.LinAlgError("singular matrix")
            upper, _ = sgetrs(lu, exchanges, matrix[:p, p:])
            lower = matrix[p:, :p].copy()
            waiting[number] = matrix[p:, p:] - lower @ upper
            parts.append((lu, exchanges, upper, lower))
        return parts


class _Places:
    """Where blocks of couplings between nodes go in the fronts."""

    def __init__(
        self,
        fronts: Fronts,
        rows: np.ndarray,
        columns: np.ndarray,
        used: np.ndarray,
        *,
        row_shift: np.ndarray | None = None,
        column_shift: np.ndarray | None = None,
    ) -> None:
        entries = np.flatnonzero(used)
        numbers = fronts.front_of(rows[entries], columns[entries])
        order = np.argsort(numbers, kind="stable")
        self._entries, numbers = entries[order], numbers[order]
        r, c = rows[self._entries], columns[self._entries]
        self._row = fronts.place_in(numbers, r) + (0 if row_shift is None else row_shift[r])
        self._column = fronts.place_in(numbers, c) + (0 if column_shift is None else column_shift[c])
        self._ends = np.searchsorted(numbers, np.arange(len(fronts.all) + 1))

    def put(self, matrix: np.ndarray, front: int, blocks: np.ndarray, *, mirrored: bool = False) -> None:
        """Write blocks (i, j, entries) in the matrix of a front, or in the mirror image of their places."""
        mine = slice(self._ends[front], self._ends[front + 1])
        down, along = (1, len(matrix)) if mirrored else (len(matrix), 1)
        first = self._row[mine] * down + self._column[mine] * along
        steps = np.arange(blocks.shape[0])[:, None] * down + np.arange(blocks.shape[1]) * along
        matrix.reshape(-1)[steps[:, :, None] + first] = blocks[:, :, self._entries[mine]]


def _unknowns(assembler: Assembler, fields: np.ndarray, place: np.ndarray) -> np.ndarray:
    """Return the unknowns of the state in the order of elimination, those of each node together."""
    lay = assembler.layout
    moving, corners = np.flatnonzero(fields), np.arange(lay.corners)
    places = [place[moving] + field for field in range(lay.fields)]
    places += [place[corners] + fields[corners] + mode for mode in range(lay.pressure)]
    unknowns = [field * lay.nodes + moving for field in range(lay.fields)]
    unknowns += [lay.fields * lay.nodes + mode * lay.corners + corners for mode in range(lay.pressure)]
    order = np.empty(sum(len(each) for each in places), dtype=np.int64)
    order[np.concatenate(places)] = np.concatenate(unknowns)
    return order
