"""Arcs cut into shorter ones stay where they are: exact areas and bounds do not change."""

from __future__ import annotations

import numpy as np
import pytest

from core.geometry.contour import Contour
from core.masks.arcs import with_outermost_points, with_short_arcs
from tests.core.masks.samples import area_with_bulges

QUARTER = np.tan(np.pi / 8.0)
BULGES = [0.05, 0.3, QUARTER, 0.5, 1.0, 2.5, -0.7, -1.0, -4.0]


def ring(bulge: float) -> Contour:
    return Contour(np.array([[0.0, 0.0], [3.0, 1.0], [-2.0, 40.0]]), np.array([bulge, 0.0, 0.0]))


def exact_area(contour: Contour) -> float:
    return area_with_bulges([tuple(v) for v in contour.vertices_um.tolist()], contour.bulges.tolist())


@pytest.mark.parametrize("bulge", BULGES)
def test_long_arcs_become_quarter_turns(bulge: float) -> None:
    # truth: the exact area of the same ring with its one long arc, by the segment formula
    short = with_short_arcs(ring(bulge))
    assert np.abs(short.bulges).max() <= QUARTER * (1.0 + 1e-12)
    assert exact_area(short) == pytest.approx(exact_area(ring(bulge)), rel=1e-13)
    assert short.bounds_um == pytest.approx(ring(bulge).bounds_um, abs=1e-12)


@pytest.mark.parametrize("bulge", BULGES)
def test_corners_alone_give_the_bounds(bulge: float) -> None:
    cut = with_outermost_points(ring(bulge))
    low, high = cut.vertices_um.min(axis=0), cut.vertices_um.max(axis=0)
    assert (*low, *high) == pytest.approx(ring(bulge).bounds_um, abs=1e-12)
    assert exact_area(cut) == pytest.approx(exact_area(ring(bulge)), rel=1e-13)


def test_edges_that_need_no_cut_keep_every_bit() -> None:
    contour = Contour(np.array([[0.1, 0.2], [1.3, 0.7], [0.9, 2.1]]), np.array([0.1, 0.0, 0.05]))
    short = with_short_arcs(contour)
    assert np.array_equal(short.vertices_um, contour.vertices_um)
    assert np.array_equal(short.bulges, contour.bulges)
