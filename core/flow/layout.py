"""Where the unknowns stand in their vector, and where the sums over triangles go in a sparse matrix."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from scipy.sparse import csr_array


@dataclass(frozen=True, slots=True, eq=False)
class Layout:
    """Where each field stands in the vector of unknowns.

    Attributes
    ----------
    nodes, corners : int
        Number of quadratic and of linear nodes.
    in_plane, vertical, pressure : int
        Number of modes of each family.
    """

    nodes: int
    corners: int
    in_plane: int
    vertical: int
    pressure: int

    @property
    def fields(self) -> int:
        """Number of velocity fields."""
        return 2 * self.in_plane + self.vertical

    @property
    def size(self) -> int:
        """Number of unknowns, prescribed ones included."""
        return self.fields * self.nodes + self.pressure * self.corners

    def velocity(self, state: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Return in-plane (2, n_u, nodes) and vertical (n_w, nodes) views of a state."""
        cut, end = 2 * self.in_plane * self.nodes, self.fields * self.nodes
        plane = state[:cut].reshape(2, self.in_plane, self.nodes)
        return plane, state[cut:end].reshape(self.vertical, self.nodes)

    def all_velocities(self, state: np.ndarray) -> np.ndarray:
        """Return all velocity fields (fields, nodes) as a view of a state."""
        return state[: self.fields * self.nodes].reshape(self.fields, self.nodes)

    def pressures(self, state: np.ndarray) -> np.ndarray:
        """Return the pressure modes (n_p, corners) as a view of a state."""
        return state[self.fields * self.nodes :].reshape(self.pressure, self.corners)


class Scatter:
    """Adds the entries of small cell matrices up to the stored entries of one sparse matrix.

    Parameters
    ----------
    row_dofs, column_dofs : ndarray of int
        Row and column in the matrix of each row and column of a cell's matrix, (cells, entries).
    n_rows, n_columns : int
        Of the sparse matrix.

    Attributes
    ----------
    nnz : int
        Stored entries.
    rows, columns : ndarray of int, shape (nnz,)
        Where each stands.
    """

    def __init__(self, row_dofs: np.ndarray, column_dofs: np.ndarray, n_rows: int, n_columns: int) -> None:
        from scipy.sparse import csr_array

        rows = np.repeat(row_dofs, column_dofs.shape[1], axis=1).ravel().astype(np.int64)
        columns = np.tile(column_dofs, (1, row_dofs.shape[1])).ravel()
        keys, place = np.unique(rows * n_columns + columns, return_inverse=True)
        self.nnz = len(keys)
        self.rows, self.columns = keys // n_columns, keys % n_columns
        ones = np.ones(len(place))
        self._sum = csr_array((ones, (place, np.arange(len(place)))), shape=(self.nnz, len(place)))
        self._shape = (n_rows, n_columns)
        self._starts = np.searchsorted(self.rows, np.arange(n_rows + 1))

    def matrix(self, values: np.ndarray) -> csr_array:
        """Return the sparse matrix of stored values."""
        from scipy.sparse import csr_array

        return csr_array((values, self.columns, self._starts), shape=self._shape)

    def __call__(self, local: np.ndarray) -> np.ndarray:
        """Return stored values (..., nnz) of cell matrices (..., cells, entries)."""
        if local.ndim == 2:
            return self._sum @ local.ravel()
        return np.array([self._sum @ one.ravel() for one in local])
