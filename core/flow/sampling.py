"""Values of nodal fields at any point of a mesh."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from scipy.sparse import csr_array
    from skfem import MeshTri2

_NEAR = 6  # triangles tried first; points that fall outside all of them try many more


class Sampler:
    """Finds the triangle of a point and interpolates fields there.

    Parameters
    ----------
    mesh : MeshTri2
        Quadratic triangles. Their curved sides are taken as straight for finding a point, which
        moves values by less than the mesh error.
    """

    def __init__(self, mesh: MeshTri2) -> None:
        from scipy.spatial import KDTree

        self._corner = mesh.p[:, mesh.t].transpose(2, 1, 0)  # (cells, 3, 2)
        self._cells = mesh.dofs.element_dofs.T
        self._tree = KDTree(self._corner.mean(axis=1))

    def locate(self, points: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Return the triangle and the barycentric coordinates of points.

        Parameters
        ----------
        points : ndarray, shape (n, 2)
            In channel widths.

        Returns
        -------
        ndarray of int, shape (n,)
            Triangle that holds the point, or the nearest one.
        ndarray, shape (n, 3)
            Barycentric coordinates, not below 0.
        """
        cells, shares = self._best(points, _NEAR)
        lost = np.flatnonzero(shares.min(axis=1) < -0.02)
        if len(lost):
            cells[lost], shares[lost] = self._best(points[lost], min(60, len(self._corner)))
        shares = np.clip(shares, 0.0, None)
        return cells, shares / shares.sum(axis=1, keepdims=True)

    def inside(self, points: np.ndarray, within: float = 0.05) -> np.ndarray:
        """Return which points lie in the mesh, to a share of a triangle; shape (n,)."""
        return self._best(points, min(60, len(self._corner)))[1].min(axis=1) > -within

    def quadratic(self, fields: np.ndarray, points: np.ndarray) -> np.ndarray:
        """Return fields given on all nodes (m, nodes) at points (n, 2); shape (m, n)."""
        nodes, weights = self._quadratic_weights(points)
        return np.einsum("mna,na->mn", fields[:, nodes], weights)

    def linear(self, fields: np.ndarray, points: np.ndarray) -> np.ndarray:
        """Return fields given on corners (m, corners) at points (n, 2); shape (m, n)."""
        cells, b = self.locate(points)
        return np.einsum("mna,na->mn", fields[:, self._cells[cells, :3]], b)

    def matrices(self, points: np.ndarray, corners: int) -> tuple[csr_array, csr_array]:
        """Return what takes values on all nodes to points (n, 2), and values on corners to the first of the points."""
        nodes, weights = self._quadratic_weights(points)
        cells, shares = self.locate(points[:corners])
        return _matrix(nodes, weights, int(self._cells.max()) + 1), _matrix(
            self._cells[cells, :3], shares, int(self._cells[:, :3].max()) + 1
        )

    def _quadratic_weights(self, points: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Return the nodes (n, 6) of the triangle of each point, and their weights."""
        cells, b = self.locate(points)
        weights = np.concatenate([b * (2 * b - 1), 4 * b[:, [0, 1, 0]] * b[:, [1, 2, 2]]], axis=1)
        return self._cells[cells], weights

    def _best(self, points: np.ndarray, near: int) -> tuple[np.ndarray, np.ndarray]:
        near = min(near, len(self._corner))
        _, candidates = self._tree.query(points, k=near)
        candidates = candidates.reshape(len(points), near)
        a, b, c = (self._corner[candidates, i] for i in range(3))
        offset, ab, ac = points[:, None] - a, b - a, c - a
        area = ab[..., 0] * ac[..., 1] - ab[..., 1] * ac[..., 0]
        second = (offset[..., 0] * ac[..., 1] - offset[..., 1] * ac[..., 0]) / area
        third = (ab[..., 0] * offset[..., 1] - ab[..., 1] * offset[..., 0]) / area
        shares = np.stack([1 - second - third, second, third], axis=-1)
        best = np.argmax(shares.min(axis=-1), axis=1)
        rows = np.arange(len(points))
        return candidates[rows, best], shares[rows, best]


def _matrix(columns: np.ndarray, weights: np.ndarray, width: int) -> csr_array:
    from scipy.sparse import csr_array

    starts = np.arange(len(columns) + 1) * columns.shape[1]
    return csr_array((weights.ravel(), columns.ravel(), starts), shape=(len(columns), width))
