"""An independent three-dimensional flow solve: quadratic-linear tetrahedra over half the depth.

Shares nothing with the program but the outline of the triangles; written with the form language of a
general finite-element library, no depth modes.
"""

from __future__ import annotations

import numpy as np
from scipy.sparse import block_array, diags_array
from scipy.sparse.linalg import splu
from skfem import (
    Basis,
    BilinearForm,
    ElementTetP1,
    ElementTetP2,
    ElementVector,
    FacetBasis,
    Functional,
    LinearForm,
    MeshTet,
)
from skfem.helpers import ddot, div, dot, grad, mul

_SOFT = 1e-7


class SolidFlow:
    """Both directions in one extruded domain; lengths in channel widths.

    Parameters
    ----------
    points, cells : ndarray
        Plane triangles, (n, 2) and (m, 3).
    depth : float
        Depth over width.
    layers : int
        Over half the depth, thinner at the floor.
    ends : dict
        Mid-point, inward unit normal of each open end.
    profile : callable
        Developed speed as a function of (distance from the middle, s) with mean 1.
    """

    def __init__(self, points, cells, *, depth, layers, ends, profile):
        heights = depth / 2 * (1 - np.cos(np.linspace(0, np.pi / 2, layers + 1))) ** 0.8
        self.mesh, self.depth, self.ends = _extruded(points, cells, heights), depth, ends
        self.u = Basis(self.mesh, ElementVector(ElementTetP2()), intorder=5)
        self.p = self.u.with_element(ElementTetP1())
        self.viscous = _stiffness.assemble(self.u)
        self.divergence = _divergence.assemble(self.u, self.p)
        weight = np.asarray(_mass.assemble(self.p).sum(axis=1)).ravel()
        self.soft = diags_array(-_SOFT * weight)
        self.profile = profile

    def prescribed(self, inlet, outlet):
        """Return the state of prescribed values, which unknowns are free, and the inflow of half the depth."""
        at, n = self.u.doflocs, self.u.N
        component = self._components()
        facets = self.mesh.boundary_facets()
        middle = self.mesh.p[:, self.mesh.facets[:, facets]].mean(axis=1)
        on = {name: facets[self._on_end(middle, name)] for name in (inlet, outlet)}
        roof = facets[np.isclose(middle[2], self.depth / 2)]
        wall = np.setdiff1d(facets, np.concatenate([*on.values(), roof]))
        fixed = np.zeros(n + self.p.N, dtype=bool)
        fixed[self.u.get_dofs(wall).flatten()] = True
        roof_dofs = self.u.get_dofs(roof).flatten()
        fixed[roof_dofs[component[roof_dofs] == 2]] = True
        inflow = np.setdiff1d(self.u.get_dofs(on[inlet]).flatten(), np.flatnonzero(fixed))
        fixed[inflow] = True
        state = np.zeros(n + self.p.N)
        centre, inward = self.ends[inlet]
        along = np.array([-inward[1], inward[0]])
        offset = (at[:2, inflow].T - centre) @ along
        speed = self.profile(offset, 2 * at[2, inflow] / self.depth - 1)
        state[inflow] = speed * np.array([*inward, 0.0])[component[inflow]]
        side = FacetBasis(self.mesh, self.u.elem, facets=on[inlet], intorder=5)
        entering = -_outflow.assemble(side, u=side.interpolate(state[:n]))
        state[:n] *= self.depth / 2 / entering
        return state, np.flatnonzero(~fixed), self.depth / 2

    def drop(self, inlet, outlet, reynolds, start):
        """Return the pressure drop in density x speed^2, from a starting velocity field (function of points)."""
        given, free, flow = self.prescribed(inlet, outlet)
        n = self.u.N
        state = given.copy()
        guess = start(self.u.doflocs, self._components())
        inner = free[free < n]
        state[inner] = guess[inner]
        for _ in range(12):
            residual, jacobian = self._linearised(state, reynolds)
            factor = splu(
                jacobian[free][:, free].tocsc(),
                permc_spec="MMD_AT_PLUS_A",
                diag_pivot_thresh=0.0,
                options={"SymmetricMode": True},
            )
            for _ in range(4):
                change = factor.solve(residual[free])
                state[free] -= change
                size = np.abs(change[: len(inner)]).max()
                residual = self._residual(state, reynolds)
                if size < 1e-6:
                    return float(residual @ given / flow) / reynolds
                if size > 0.05:
                    break
        raise AssertionError("the three-dimensional solve did not converge")

    def _components(self):
        component = np.empty(self.u.N, dtype=int)
        for c in range(3):
            component[self.u.element_dofs[c::3]] = c
        return component

    def _on_end(self, points, name):
        centre, inward = self.ends[name]
        off = points[:2].T - centre
        along = np.array([-inward[1], inward[0]])
        return (np.abs(off @ inward) < 1e-6) & (np.abs(off @ along) < 0.51)

    def _residual(self, state, reynolds):
        n = self.u.N
        velocity, pressure = state[:n], state[n:]
        carried = _convection.assemble(self.u, w=self.u.interpolate(velocity))
        momentum = self.viscous @ velocity + reynolds * carried - self.divergence.T @ pressure
        return np.concatenate([momentum, -self.divergence @ velocity])

    def _linearised(self, state, reynolds):
        moved = _convection_slope.assemble(self.u, w=self.u.interpolate(state[: self.u.N]))
        top = self.viscous + reynolds * moved
        jacobian = block_array([[top, -self.divergence.T], [-self.divergence, self.soft]]).tocsr()
        return self._residual(state, reynolds), jacobian


def _extruded(points, cells, heights):
    count, layers = len(points), len(heights) - 1
    p = np.vstack([np.column_stack([points, np.full(count, z)]) for z in heights])
    low = np.sort(cells, axis=1)  # the same diagonal on both sides of every wall between prisms
    tets = []
    for k in range(layers):
        a, b, c = (low[:, i] + k * count for i in range(3))
        tops = [x + count for x in (a, b, c)]
        tets += [
            np.stack([a, b, c, tops[2]]),
            np.stack([a, b, tops[1], tops[2]]),
            np.stack([a, tops[0], tops[1], tops[2]]),
        ]
    return MeshTet(np.ascontiguousarray(p.T), np.ascontiguousarray(np.hstack(tets)))


@BilinearForm
def _stiffness(u, v, w):
    return ddot(grad(u), grad(v))


@BilinearForm
def _divergence(u, q, w):
    return q * div(u)


@BilinearForm
def _mass(p, q, w):
    return p * q


@BilinearForm
def _convection_slope(u, v, w):
    steep = dot(mul(grad(w["w"]), u) + mul(grad(u), w["w"]), v)
    return steep + (div(w["w"]) * dot(u, v) + div(u) * dot(w["w"], v)) / 2


@LinearForm
def _convection(v, w):
    return dot(mul(grad(w["w"]), w["w"]), v) + div(w["w"]) * dot(w["w"], v) / 2


@Functional
def _outflow(w):
    return dot(w["u"], w.n)
