"""The equations of one flow direction: which values are prescribed, residual, factor, pressure drop."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from core.flow.elimination import Elimination
from core.flow.inflow import developed_profile
from core.flow.mesh import OPEN_ENDS

if TYPE_CHECKING:
    from scipy.sparse import csr_array
    from skfem import MeshTri1

    from core.flow.assembly import Assembler
    from core.flow.elimination import Factor


class FlowProblem:
    """One direction of flow on one mesh.

    No slip on walls, developed inflow of mean speed 1 at one open end, free outflow at the other:
    in developed flow the viscous stress normal to the end vanishes and so the flow leaves undisturbed
    with zero pressure.

    Parameters
    ----------
    assembler : Assembler
        Mesh and modes; shared by both directions.
    inlet, outlet : str
        Names of the boundaries.
    elimination : Elimination
        Order of elimination; shared by both directions.
    """

    def __init__(self, assembler: Assembler, *, inlet: str, outlet: str, elimination: Elimination) -> None:
        self.assembler, self.inlet, self.outlet = assembler, inlet, outlet
        mesh = assembler.mesh
        self.inlet_nodes = np.setdiff1d(_nodes(mesh, mesh.boundaries[inlet]), elimination.wall)
        self.is_free = np.ones(assembler.layout.size, dtype=bool)
        assembler.layout.all_velocities(self.is_free)[:, np.union1d(elimination.wall, self.inlet_nodes)] = False
        self._moving = int(assembler.layout.all_velocities(self.is_free).sum())
        self.inflow = self._inflow()
        self._elimination = elimination

    def _inflow(self) -> np.ndarray:
        """Return a state that is zero but for the prescribed inflow, scaled to flow exactly 1 per depth."""
        assembler, lay = self.assembler, self.assembler.layout
        state = np.zeros(lay.size)
        plane, _ = lay.velocity(state)
        points = assembler.positions[self.inlet_nodes]
        start, stop = _ends(assembler.mesh, self.inlet)
        half_width = float(np.hypot(*(stop - start))) / 2
        middle, along = (start + stop) / 2, (stop - start) / np.hypot(*(stop - start))
        inward = _inward(assembler.mesh, self.inlet)
        profile = developed_profile(assembler.tensors, (points - middle) @ along, half_width)
        for c in (0, 1):
            plane[c][:, self.inlet_nodes] = profile * inward[c]
        flow = -self.flow_through(state, self.inlet)
        return state * (2 * half_width / flow)

    def start(self) -> np.ndarray:
        """Return the prescribed values with zeros elsewhere."""
        return self.inflow.copy()

    def with_prescribed(self, state: np.ndarray) -> np.ndarray:
        """Return a state with the prescribed values put in."""
        return np.where(self.is_free, state, self.inflow)

    def mass(self) -> csr_array:
        """Return the mass matrix; zero for pressures and prescribed values."""
        from scipy.sparse import diags_array

        free = diags_array(self.is_free.astype(float))
        return (free @ self.assembler.mass() @ free).tocsr()

    @property
    def fill(self) -> int:
        """Number of entries a factor will have, known before it is computed."""
        return self._elimination.fill

    def convection(self, state: np.ndarray) -> np.ndarray:
        """Return the derivative of the residual by the Reynolds number, zero where values are prescribed."""
        return self.assembler.convection(state) * self.is_free

    def full_residual(self, state: np.ndarray, reynolds: float) -> np.ndarray:
        """Return the residual at all unknowns, prescribed ones included."""
        out = self.assembler.creeping(state)
        return out + reynolds * self.assembler.convection(state) if reynolds else out

    def residual(self, state: np.ndarray, reynolds: float) -> np.ndarray:
        """Return the residual, zero where values are prescribed."""
        return self.full_residual(state, reynolds) * self.is_free

    def factorised(self, state: np.ndarray, reynolds: float) -> Factor:
        """Return the factor of the Jacobian; it solves for corrections that keep the prescribed values."""
        return self._elimination.factorised(self.assembler.momentum_slopes(state, reynolds), self.inlet_nodes)

    def norm(self, change: np.ndarray) -> float:
        """Return the root mean square of the velocities that are not prescribed."""
        free = self.assembler.layout.all_velocities(change * self.is_free)
        return float(np.sqrt(np.sum(free**2) / self._moving))

    def pressure_drop(self, state: np.ndarray, reynolds: float) -> float:
        """Return the static pressure drop between the open ends, in viscosity x speed / width.

        Taken from the power that the inlet delivers, which converges twice as fast as the pressure
        at the inlet itself and equals it where the flow is developed.
        """
        reaction = self.full_residual(state, reynolds) @ self.inflow
        return float(reaction / -self.flow_through(self.inflow, self.inlet))

    def mean_pressure(self, state: np.ndarray, boundary: str) -> float:
        """Return the pressure averaged over an open end and the depth."""
        mesh = self.assembler.mesh
        a, b = mesh.facets[:, mesh.boundaries[boundary]]
        length = np.hypot(*(mesh.p[:, b] - mesh.p[:, a]))
        pressure = self.assembler.layout.pressures(state)[0]
        return float(np.sum(length * (pressure[a] + pressure[b]) / 2) / length.sum())

    def flow_through(self, state: np.ndarray, boundary: str) -> float:
        """Return the outward flow per depth through an open end, by Simpson's rule (exact)."""
        mesh, lay = self.assembler.mesh, self.assembler.layout
        facets = mesh.boundaries[boundary]
        a, b = mesh.facets[:, facets]
        middle = mesh.nvertices + facets
        length = np.hypot(*(mesh.p[:, b] - mesh.p[:, a]))
        outward = -_inward(mesh, boundary)
        plane, _ = lay.velocity(state)
        through = np.einsum("c,cmn,m->n", outward, plane, self.assembler.tensors.mean)
        return float(np.sum(length * (through[a] + 4 * through[middle] + through[b]) / 6))


def both_directions(assembler: Assembler) -> dict[str, FlowProblem]:
    """Return the forward and the reverse problem on one assembler."""
    enter, leave = OPEN_ENDS
    mesh = assembler.mesh
    ends = np.concatenate([mesh.boundaries[name] for name in OPEN_ENDS])
    elimination = Elimination(assembler, _nodes(mesh, np.setdiff1d(mesh.boundary_facets(), ends)))
    return {
        "forward": FlowProblem(assembler, inlet=enter, outlet=leave, elimination=elimination),
        "reverse": FlowProblem(assembler, inlet=leave, outlet=enter, elimination=elimination),
    }


def _nodes(mesh: MeshTri1, facets: np.ndarray) -> np.ndarray:
    return np.unique(np.concatenate([mesh.facets[:, facets].ravel(), mesh.nvertices + facets]))


def _ends(mesh: MeshTri1, boundary: str) -> tuple[np.ndarray, np.ndarray]:
    """Return the two end points of a straight boundary."""
    points = mesh.p[:, np.unique(mesh.facets[:, mesh.boundaries[boundary]])].T
    first = points[np.argmax(np.hypot(*(points - points.mean(axis=0)).T))]
    last = points[np.argmax(np.hypot(*(points - first).T))]
    return first, last


def _inward(mesh: MeshTri1, boundary: str) -> np.ndarray:
    """Return the unit normal of a straight boundary that points into the liquid."""
    start, stop = _ends(mesh, boundary)
    along = (stop - start) / np.hypot(*(stop - start))
    normal = np.array([-along[1], along[0]])
    cell = mesh.f2t[0, mesh.boundaries[boundary][0]]
    inside = mesh.p[:, mesh.t[:, cell]].mean(axis=1) - start
    return normal if normal @ inside > 0 else -normal
