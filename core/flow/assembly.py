"""Matrices of the mode equations, put together from small tables and scalar plane matrices.

Unknowns are fields on the nodes of the triangles: first all in-plane x components by mode, then y,
then the vertical modes (all quadratic), then the pressure modes (linear). With ``R`` the Reynolds
number on channel width and the pressure in units of ``viscosity * speed / width`` the equations are

    R ((u . grad) u + u div u / 2) - laplace u + grad p = 0,    div u = 0,

so that creeping flow is plainly R = 0. The term with div u vanishes in the exact solution; it keeps
the convection from making or losing kinetic energy where triangles let a little volume leak
(R. Temam, Bull. Soc. Math. France 96, 1968, 115), which would bend a small difference of directions.

Every plane integral is computed once for all triangles and scattered with a fixed sparse operator;
blocks are then sums of (table entry) x (scalar matrix).
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from core.flow.layout import Layout, Scatter

if TYPE_CHECKING:
    from scipy.sparse import csr_array
    from skfem import MeshTri2

    from core.flow.modes import ModeTensors

_ORDER = 5  # of the quadrature: quadratic test x quadratic carrier x slope of a quadratic
_SOFTENING = 1e-7  # of the liquid, in the matrix that is factorised only: makes every pivot usable in any order


class Assembler:
    """Builds residual and Jacobian for one mesh and one set of modes.

    Parameters
    ----------
    mesh : MeshTri2
        Quadratic triangles in channel widths; straight-sided ones do as well.
    tensors : ModeTensors
        Depth modes.
    """

    def __init__(self, mesh: MeshTri2, tensors: ModeTensors) -> None:
        from skfem import Basis, ElementTriP1, ElementTriP2

        self.mesh, self.tensors = mesh, tensors
        quadratic = Basis(mesh, ElementTriP2(), intorder=_ORDER)
        linear = Basis(mesh, ElementTriP1(), intorder=_ORDER)
        self.dofs = quadratic.element_dofs.T.copy()  # (cells, 6)
        corner_dofs = linear.element_dofs.T
        self.positions = quadratic.doflocs.T.copy()
        self.layout = Layout(quadratic.N, linear.N, tensors.n_in_plane, tensors.n_vertical, tensors.n_pressure)
        self._weight = quadratic.dx  # (cells, points)
        points = quadratic.quadrature[0]
        local = [ElementTriP2().lbasis(points, i) for i in range(6)]
        self._shape = np.array([value + 0.0 * points[0] for value, _ in local])  # (6, points)
        self._steep = np.array([slope for _, slope in local]).transpose(1, 0, 2)  # (2, 6, points), on the unit triangle
        self._turn = quadratic.mapping.invDF(points)  # (unit axis, plane axis, cells, points)
        self._slope = np.einsum("rdeq,raq->deqa", self._turn, self._steep)  # (2, cells, points, 6)
        self._pairs = np.einsum("aq,bq->qab", self._shape, self._shape).reshape(self._shape.shape[1], 36)
        hat = np.array([ElementTriP1().lbasis(points, i)[0] + 0.0 * points[0] for i in range(3)])
        self.square = Scatter(self.dofs, self.dofs, self.layout.nodes, self.layout.nodes)
        self.mixed = Scatter(corner_dofs, self.dofs, self.layout.corners, self.layout.nodes)
        self._constant_blocks(hat, corner_dofs)
        self._constant_tables()

    def _constant_blocks(self, hat: np.ndarray, corner_dofs: np.ndarray) -> None:
        """Compute the scalar matrices that do not depend on the flow."""
        w = self._weight
        stiff = np.einsum("eq,deqa,deqb->eab", w, self._slope, self._slope, optimize=True)
        mass = w @ self._pairs
        self._stiffness = self.square(stiff.reshape(len(w), 36))
        self._mass = self.square(mass)
        self._gradient = [
            self.mixed(np.einsum("eq,aq,eqb->eab", w, hat, self._slope[d], optimize=True).reshape(len(w), 18))
            for d in (0, 1)
        ]
        self._lumped = np.bincount(corner_dofs.ravel(), np.einsum("eq,aq->ea", w, hat).ravel(), self.layout.corners)
        self._hat_shape = self.mixed(np.einsum("eq,aq,bq->eab", w, hat, self._shape, optimize=True).reshape(len(w), 18))

    def _constant_tables(self) -> None:
        """Combine the scalar matrices of creeping flow with the mode tables."""
        t, lay = self.tensors, self.layout
        c = 2 * lay.in_plane
        self._friction = np.zeros((lay.fields, lay.fields))
        for begin in (0, lay.in_plane):
            self._friction[begin : begin + lay.in_plane, begin : begin + lay.in_plane] = t.friction
        self._friction[c:, c:] = t.vertical_friction
        self.continuity = np.zeros((lay.pressure, lay.fields, self.mixed.nnz))
        for axis in (0, 1):
            begin = axis * lay.in_plane
            self.continuity[:, begin : begin + lay.in_plane] = -t.divergence[:, :, None] * self._gradient[axis]
        self.continuity[:, c:] = -t.vertical_divergence[:, :, None] * self._hat_shape
        self.softening = -_SOFTENING * self._lumped
        self._plane_matrices = [self.square.matrix(self._stiffness), self.square.matrix(self._mass)]
        self._divergences = [self.mixed.matrix(each) for each in (*self._gradient, self._hat_shape)]

    def blank(self) -> np.ndarray:
        """Return a state of zeros."""
        return np.zeros(self.layout.size)

    def creeping(self, state: np.ndarray) -> np.ndarray:
        """Return the residual without convection; linear and symmetric in the state."""
        t, lay = self.tensors, self.layout
        out = np.zeros(lay.size)
        stiffness, mass = self._plane_matrices
        velocity, pressure = lay.all_velocities(state), lay.pressures(state)
        momentum, balance = lay.all_velocities(out), lay.pressures(out)
        momentum[:] = (stiffness @ velocity.T).T + self._friction @ (mass @ velocity.T).T
        c = 2 * lay.in_plane
        groups = (slice(0, lay.in_plane), slice(lay.in_plane, c), slice(c, None))
        tables = (t.divergence, t.divergence, t.vertical_divergence)
        for fields, table, matrix in zip(groups, tables, self._divergences, strict=True):
            momentum[fields] -= table.T @ (matrix.T @ pressure.T).T
            balance -= table @ (matrix @ velocity[fields].T).T
        return out

    def mass(self) -> csr_array:
        """Return the mass matrix of the velocities, with zero rows for pressures."""
        from scipy.sparse import coo_array

        lay, one = self.layout, self.square
        shift = np.repeat(np.arange(lay.fields) * lay.nodes, one.nnz)
        rows, columns = np.tile(one.rows, lay.fields) + shift, np.tile(one.columns, lay.fields) + shift
        return coo_array((np.tile(self._mass, lay.fields), (rows, columns)), shape=(lay.size, lay.size)).tocsr()

    def _sampled(self, fields: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Return values (m, cells, q) and slopes (2, m, cells, q) of nodal fields (m, nodes)."""
        local = fields[:, self.dofs]
        unit = [local @ self._steep[r] for r in (0, 1)]
        slopes = [unit[0] * self._turn[0, d] + unit[1] * self._turn[1, d] for d in (0, 1)]
        return local @ self._shape, np.array(slopes)

    def convection(self, state: np.ndarray) -> np.ndarray:
        """Return the convective part of the residual, without the Reynolds number.

        Parameters
        ----------
        state : ndarray, shape (size,)

        Returns
        -------
        ndarray, shape (size,)
        """
        t, lay = self.tensors, self.layout
        plane, vertical = lay.velocity(state)
        u = [self._sampled(plane[c]) for c in (0, 1)]
        w, dw = self._sampled(vertical)
        source = (u[0][1][0] + u[1][1][1]) / 2

        def carried(value: np.ndarray, slope: np.ndarray) -> np.ndarray:
            x, y = u[0][0][:, None], u[1][0][:, None]
            return x * slope[0][None] + y * slope[1][None] + source[:, None] * value[None]

        out = np.zeros(lay.size)
        plane_out, vertical_out = lay.velocity(out)
        for c in (0, 1):
            moved = _contracted(t.uuu, carried(*u[c])) + _contracted(t.uwu, w[:, None] * u[c][0][None])
            plane_out[c] = self._tested(moved)
        if lay.vertical:
            moved = _contracted(t.wuw, carried(w, dw)) + _contracted(t.www, w[:, None] * w[None])
            vertical_out[:] = self._tested(moved)
        return out

    def _tested(self, values: np.ndarray) -> np.ndarray:
        local = (values * self._weight) @ self._shape.T
        flat = self.dofs.ravel()
        return np.array([np.bincount(flat, part.ravel(), self.layout.nodes) for part in local])

    def momentum_slopes(self, state: np.ndarray, reynolds: float) -> np.ndarray:
        """Return the derivative of the momentum balances by the velocities.

        Parameters
        ----------
        state : ndarray, shape (size,)
        reynolds : float
            Density x mean speed x channel width / viscosity [-].

        Returns
        -------
        ndarray, shape (fields, fields, entries)
            Test field, trial field, entry of ``square``.
        """
        lay = self.layout
        blocks = np.zeros((lay.fields, lay.fields, self.square.nnz))
        if reynolds:
            self._add_convection_slopes(blocks, state)
            blocks *= reynolds
        for i in range(lay.fields):
            blocks[i, i] += self._stiffness
        for i, j in zip(*np.nonzero(self._friction), strict=True):
            blocks[i, j] += self._friction[i, j] * self._mass
        return blocks

    def _add_convection_slopes(self, blocks: np.ndarray, state: np.ndarray) -> None:
        t, lay = self.tensors, self.layout
        plane, vertical = lay.velocity(state)
        u = [self._sampled(plane[c]) for c in (0, 1)]
        w, dw = self._sampled(vertical)
        nu, c3 = lay.in_plane, 2 * lay.in_plane
        carry = self._carried_by(u[0][0], u[1][0]) + self._reaction((u[0][1][0] + u[1][1][1]) / 2)
        by_w = self._reaction(w)
        advect = _by_carrier(t.uuu, carry) + _by_carrier(t.uwu, by_w)
        for c in (0, 1):
            rows = slice(c * nu, (c + 1) * nu)
            blocks[rows, rows] += advect
            for d in (0, 1):
                moved = self._reaction(u[c][1][d]) + self._spread(u[c][0], d)
                blocks[rows, d * nu : (d + 1) * nu] += _by_carried(t.uuu, moved)
            blocks[rows, c3:] += _by_carried(t.uwu, self._reaction(u[c][0]))
        if lay.vertical:
            blocks[c3:, c3:] += _by_carrier(t.wuw, carry)
            blocks[c3:, c3:] += _by_carrier(t.www + t.www.transpose(0, 2, 1), by_w)
            for d in (0, 1):
                moved = self._reaction(dw[d]) + self._spread(w, d)
                blocks[c3:, d * nu : (d + 1) * nu] += _by_carried(t.wuw, moved)

    def _reaction(self, fields: np.ndarray) -> np.ndarray:
        """Return values of the matrices of (test, field x trial), one row for each field."""
        if not len(fields):
            return np.zeros((0, self.square.nnz))
        local = (fields * self._weight) @ self._pairs
        return self.square(local)

    def _spread(self, fields: np.ndarray, axis: int) -> np.ndarray:
        """Return values of half the matrices of (test x field, slope of trial), one row for each field."""
        rows = [self._shape @ (f[..., None] * self._slope[axis]) for f in fields * self._weight / 2]
        return self.square(np.array(rows).reshape(len(rows), len(self.dofs), 36))

    def _carried_by(self, x: np.ndarray, y: np.ndarray) -> np.ndarray:
        """Return values of the matrices of (test, carrier . grad trial), one row for each carrier."""
        rows = []
        for cx, cy in zip(x * self._weight, y * self._weight, strict=True):
            along = cx[..., None] * self._slope[0] + cy[..., None] * self._slope[1]
            rows.append((self._shape @ along).reshape(len(cx), 36))
        return self.square(np.array(rows))


def _contracted(table: np.ndarray, products: np.ndarray) -> np.ndarray:
    """Return the sum over (carrier, carried) of table entries times products (j, k, cells, points)."""
    i, j, k = table.shape
    rest = products.shape[2:]
    return (table.reshape(i, j * k) @ products.reshape(j * k, rest[0] * rest[1])).reshape(i, *rest)


def _by_carrier(table: np.ndarray, values: np.ndarray) -> np.ndarray:
    """Return blocks (test, trial, stored) from the values of one matrix for each carrier."""
    return np.tensordot(table, values, axes=(1, 0))


def _by_carried(table: np.ndarray, values: np.ndarray) -> np.ndarray:
    """Return blocks (test, trial, stored) from the values of one matrix for each carried mode."""
    return np.tensordot(table, values, axes=(2, 0))
