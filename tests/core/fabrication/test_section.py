"""Sections across the channel: areas in closed form, and the rectangle that stands in, against a Poisson solve."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import pytest
from scipy.integrate import quad

from core.fabrication.process import Process, ProcessKind
from core.fabrication.section import (
    floor_width_um,
    side_loss_um,
    stand_in_error_percent,
    stand_in_note,
)
from core.fabrication.shipped import shipped_process

if TYPE_CHECKING:
    from collections.abc import Callable

GLASS = shipped_process(ProcessKind.WET_GLASS)


def leaning(degrees: float) -> Process:
    return shipped_process(ProcessKind.CAST_CHROME).with_values({"wall_lean_deg": degrees})


def section_area_um2(width_um: float, depth_um: float, process: Process) -> float:
    return depth_um * (width_um - side_loss_um(process, depth_um=depth_um))


@pytest.mark.parametrize(
    ("opening_um", "depth_um", "area_um2"),
    # truth: w h + pi h^2 / 2 worked out by hand to six figures
    [(10.0, 20.0, 828.319), (50.0, 50.0, 6426.99), (100.0, 30.0, 4413.72), (20.0, 100.0, 17708.0)],
)
def test_isotropic_etching(opening_um: float, depth_um: float, area_um2: float) -> None:
    assert section_area_um2(opening_um + 2 * depth_um, depth_um, GLASS) == pytest.approx(area_um2, rel=1e-5)
    assert floor_width_um(GLASS, width_um=opening_um + 2 * depth_um, depth_um=depth_um) == pytest.approx(opening_um)


@pytest.mark.parametrize("undercut", [0.3, 1.0, 1.7])
def test_round_sides_are_quarter_ellipses(undercut: float) -> None:
    # truth: the width over the depth integrated numerically
    process = GLASS.with_values({"undercut_ratio": undercut})
    opening, depth = 40.0, 25.0
    area, _ = quad(lambda z: opening + 2 * undercut * np.sqrt(depth**2 - z**2), 0, depth)
    assert section_area_um2(opening + 2 * undercut * depth, depth, process) == pytest.approx(area, rel=1e-7)


def test_leaning_walls_are_a_trapezium() -> None:
    # truth: mean of top and floor times depth; tan 45 deg = 1
    assert section_area_um2(100.0, 30.0, leaning(45.0)) == pytest.approx(0.5 * (100 + 40) * 30)
    assert section_area_um2(100.0, 30.0, leaning(0.0)) == 3000.0


def test_upright_walls_need_no_note() -> None:
    assert stand_in_note(Process(), mean_width_um=100.0, depth_um=50.0) is None
    assert side_loss_um(shipped_process(ProcessKind.DRY_SILICON), depth_um=100.0) == 0.0
    note = stand_in_note(leaning(5.0), mean_width_um=100.0, depth_um=50.0)
    assert note is not None
    assert "leaning by 5 deg" in note
    deep = stand_in_note(leaning(5.0), mean_width_um=100.0, depth_um=150.0)
    assert deep is not None
    assert "not worked out" in deep


def conductance(half_width: Callable[[np.ndarray], np.ndarray], depth: float) -> float:
    """Return the flow of unit viscosity and gradient through a section, by quadratic triangles on half of it."""
    from skfem import Basis, BilinearForm, ElementTriP2, LinearForm, MeshTri, condense, solve
    from skfem.helpers import dot, grad

    square = MeshTri.init_tensor(np.linspace(0, 1, 25), np.sin(np.linspace(0, np.pi / 2, 25)))
    x, y = square.p
    mesh = MeshTri(np.array([x * half_width(y * depth), y * depth]), square.t)
    basis = Basis(mesh, ElementTriP2())
    stiffness = BilinearForm(lambda u, v, _: dot(grad(u), grad(v))).assemble(basis)
    load = LinearForm(lambda v, _: v).assemble(basis)
    middle = mesh.facets_satisfying(lambda p: np.abs(p[0]) < 1e-12, boundaries_only=True)
    walls = np.setdiff1d(mesh.boundary_facets(), middle)
    return float(2 * load @ solve(*condense(stiffness, load, D=basis.get_dofs(walls))))


def rectangle(width: float, depth: float) -> float:
    return conductance(lambda y: 0.5 * width + 0 * y, depth)


def test_the_solve_itself() -> None:
    # truth: square duct, side 1: flow 0.0351443 (Shah and London 1978: 0.42173104 / 12)
    assert rectangle(1.0, 1.0) == pytest.approx(0.42173104 / 12, rel=2e-5)


@pytest.mark.slow
@pytest.mark.parametrize("undercut", [0.3, 0.6, 1.0, 1.5, 2.0])
@pytest.mark.parametrize("slenderness", [0.1, 0.2, 0.35, 0.5, 0.62, 0.8, 1.0])
def test_stand_in_for_round_sides(undercut: float, slenderness: float) -> None:
    # truth: Poisson solve of the round-sided section, mean width 1
    depth = slenderness
    opening = 1.0 - 0.5 * np.pi * undercut * depth
    if opening < 0.02:
        return
    process = GLASS.with_values({"undercut_ratio": undercut})
    real = conductance(lambda y: 0.5 * opening + undercut * np.sqrt(np.maximum(depth**2 - y**2, 0)), depth)
    error = 100 * (rectangle(1.0, depth) / real - 1)
    assert abs(error) <= stand_in_error_percent(process, mean_width_um=100.0, depth_um=100.0 * depth)


@pytest.mark.slow
@pytest.mark.parametrize("lean_deg", [1.0, 3.0, 10.0, 20.0, 30.0, 45.0])
@pytest.mark.parametrize("slenderness", [0.1, 0.2, 0.35, 0.5, 0.7, 1.0])
def test_stand_in_for_leaning_walls(lean_deg: float, slenderness: float) -> None:
    # truth: Poisson solve of the trapezium, mean width 1
    slope, depth = np.tan(np.radians(lean_deg)), slenderness
    if slope * depth > 0.98:
        return
    real = conductance(lambda y: 0.5 * (1 + slope * depth) - slope * y, depth)
    error = 100 * (rectangle(1.0, depth) / real - 1)
    bound = stand_in_error_percent(leaning(lean_deg), mean_width_um=100.0, depth_um=100.0 * depth)
    assert -0.002 <= error <= bound + 0.002


@pytest.mark.slow
def test_the_bounds_are_not_idle() -> None:
    # truth: the worst cases of the solves above come within two thirds of the bound
    slope = np.tan(np.radians(20.0))
    real = conductance(lambda y: 0.5 * (1 + slope) - slope * y, 1.0)
    assert 100 * (rectangle(1.0, 1.0) / real - 1) > 0.67 * stand_in_error_percent(
        leaning(20.0), mean_width_um=100.0, depth_um=100.0
    )
    opening, depth = 1.0 - 0.31 * np.pi, 0.62
    real = conductance(lambda y: 0.5 * opening + np.sqrt(np.maximum(depth**2 - y**2, 0)), depth)
    bound = stand_in_error_percent(GLASS, mean_width_um=100.0, depth_um=62.0)
    assert 100 * (rectangle(1.0, depth) / real - 1) > 0.67 * bound
