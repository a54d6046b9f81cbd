"""Sparse factors of the Jacobian in a fixed order of elimination.

The order is found once on the graph of nodes and spread over all fields of a node, so that it costs
little and keeps dense blocks together. Because the matrix to be factorised carries a very small
compressibility, it may be eliminated in any order without exchange of rows (a quasi-definite matrix:
R. J. Vanderbei, SIAM J. Optim. 5, 1995, 100); Newton's corrections remove the trace it leaves.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from core.errors import SolveError

if TYPE_CHECKING:
    from core.flow.assembly import Assembler

_BYTES_PER_ENTRY = 12  # a value and an index in the factor


class Factor:
    """A factor that solves for the free unknowns in their own order."""

    def __init__(self, lu: Any, order: np.ndarray) -> None:
        self._lu, self._order = lu, order

    @property
    def entries(self) -> int:
        """Stored entries."""
        return self._lu.nnz

    def solve(self, right: np.ndarray) -> np.ndarray:
        """Return the solution for a right side of shape (n,) or (n, m)."""
        solution = np.empty_like(right)
        solution[self._order] = self._lu.solve(right[self._order])
        return solution


class Elimination:
    """Pattern and order for one set of free unknowns.

    Parameters
    ----------
    assembler : Assembler
        Mesh and modes.
    free : ndarray of int
        Unknowns that are not prescribed, ascending.
    """

    def __init__(self, assembler: Assembler, free: np.ndarray) -> None:
        from scipy.sparse import coo_array

        self._order, self.fill = _elimination_order(assembler, free)
        place = np.full(assembler.layout.size, -1)
        place[free[self._order]] = np.arange(len(free))
        rows, columns = place[assembler.rows], place[assembler.columns]
        self._taken = np.flatnonzero((rows >= 0) & (columns >= 0))
        numbers = np.arange(1.0, len(self._taken) + 1)
        shape = (len(free), len(free))
        pattern = coo_array((numbers, (rows[self._taken], columns[self._taken])), shape=shape).tocsc()
        self._taken = self._taken[pattern.data.astype(np.int64) - 1]
        self._indices, self._indptr, self._shape = pattern.indices, pattern.indptr, shape

    def factorised(self, values: np.ndarray) -> Factor:
        """Return the factor of a matrix given by its values in the assembler's order.

        Raises
        ------
        SolveError
            If the matrix is singular or the memory does not suffice.
        """
        from scipy.sparse import csc_array
        from scipy.sparse.linalg import splu

        matrix = csc_array((values[self._taken], self._indices, self._indptr), shape=self._shape)
        try:
            lu = splu(
                matrix,
                permc_spec="NATURAL",
                diag_pivot_thresh=0.0,
                relax=1,
                panel_size=10,
                options={"SymmetricMode": True, "Equil": False},
            )
        except (RuntimeError, MemoryError) as error:
            raise SolveError(
                f"the equations could not be factorised ({error}); choose quality 'coarse' or fewer stages"
            ) from error
        return Factor(lu, self._order)


def _elimination_order(assembler: Assembler, free: np.ndarray) -> tuple[np.ndarray, int]:
    """Return the order of elimination, by minimum degree on the graph of nodes, and the fill it brings."""
    from scipy.sparse import coo_array, eye_array
    from scipy.sparse.linalg import splu

    owner = assembler.node_of_unknowns()[free]
    used, owner = np.unique(owner, return_inverse=True)
    rows, columns = assembler.node_graph()
    place = np.full(assembler.layout.nodes + assembler.layout.corners, -1)
    place[used] = np.arange(len(used))
    rows, columns = place[rows], place[columns]
    both = (rows >= 0) & (columns >= 0)
    shape = (len(used), len(used))
    graph = coo_array((np.ones(both.sum()), (rows[both], columns[both])), shape=shape).tocsc()
    graph.data[:] = -1.0
    graph = (graph + 1000.0 * eye_array(len(used))).tocsc()
    lu = splu(graph, permc_spec="MMD_AT_PLUS_A", diag_pivot_thresh=0.0, relax=1, options={"SymmetricMode": True})
    order = np.argsort(lu.perm_c[owner], kind="stable")
    in_node = np.bincount(lu.perm_c[owner], minlength=len(used)).astype(float)
    lower = lu.L.tocoo()
    return order, int(2 * np.sum(in_node[lower.row] * in_node[lower.col]))
