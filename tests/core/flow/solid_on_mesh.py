"""Ties the three-dimensional solve to a mesh of the program, so that both see the same outline and inflow."""

from __future__ import annotations

import numpy as np

from core.flow.inflow import developed_profile
from core.flow.modes import depth_tensors, in_plane_modes, vertical_modes
from core.flow.sampling import Sampler
from tests.core.flow.solid_flow import SolidFlow


def solid_on(domain, mesh, depth, layers):
    """Return the three-dimensional solve of a domain on prisms over the plane triangles of a mesh."""
    tensors, shapes = depth_tensors(5, depth), in_plane_modes(5)

    def profile(offset, s):
        amplitude = developed_profile(tensors, offset, 0.5)
        return np.sum(amplitude * np.array([mode(s) for mode in shapes]), axis=0)

    inside = mesh.p[:, : mesh.nvertices].mean(axis=1)
    ends = {}
    for end in ("forward_inlet", "forward_outlet"):
        start, stop = getattr(domain, f"{end}_um") / domain.channel_width_um
        along = (stop - start) / np.hypot(*(stop - start))
        normal = np.array([-along[1], along[0]])
        middle = (start + stop) / 2
        ends[end] = (middle, normal if normal @ (inside - middle) > 0 else -normal)
    points = mesh.p[:, : mesh.nvertices].T
    return SolidFlow(points, mesh.t.T, depth=depth, layers=layers, ends=ends, profile=profile)


def started_from(problem, state, depth):
    """Return the mode solution as a function of points, only to begin the iteration with."""
    sampler, lay = Sampler(problem.assembler.mesh), problem.assembler.layout
    plane, vertical = lay.velocity(state)

    def velocity(points, component):
        s = 2 * points[2] / depth - 1
        out = np.zeros(points.shape[1])
        for c in (0, 1):
            mine = component == c
            values = sampler.quadratic(plane[c], points[:2, mine].T)
            out[mine] = np.sum(values * np.array([mode(s[mine]) for mode in in_plane_modes(lay.in_plane)]), axis=0)
        mine = component == 2
        values = sampler.quadratic(vertical, points[:2, mine].T)
        out[mine] = np.sum(values * np.array([mode(s[mine]) for mode in vertical_modes(lay.vertical)]), axis=0)
        return out

    return velocity
