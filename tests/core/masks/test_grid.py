"""Rings on the grid: what rounding leaves behind is tidied, what is too long is cut without loss."""

from __future__ import annotations

import numpy as np
import pytest
import shapely

from core.errors import ExportError
from core.masks.grid import on_grid_nm, split_ring, tidy_ring


def test_rounding_is_to_the_nearest_nanometre() -> None:
    assert on_grid_nm(np.array([[0.0014, -0.0016], [1e6, -1e6]])).tolist() == [[1, -2], [10**9, -(10**9)]]


def test_doubled_vertices_and_spurs_go() -> None:
    ring = np.array([[0, 0], [10, 0], [10, 0], [10, 10], [10, 25], [10, 10], [0, 10], [0, 0]])
    assert tidy_ring(ring).tolist() == [[0, 0], [10, 0], [10, 10], [0, 10]]
    sliver = np.array([[0, 0], [5, 0], [9, 0], [5, 0]])
    assert len(tidy_ring(sliver)) < 3


def wavy_ribbon(count: int) -> np.ndarray:
    """Return a closed ribbon along a sine, 2 um wide, with ``count`` vertices [nm]."""
    x = np.linspace(0.0, 60.0, count // 2)
    top = np.column_stack((x, 8.0 * np.sin(0.5 * x)))
    return on_grid_nm(np.concatenate((top - [0.0, 2.0], top[::-1])))


@pytest.mark.parametrize("most", [20, 199])
@pytest.mark.parametrize("count", [150, 398, 1000])
def test_pieces_of_a_ring_cover_exactly_the_ring(count: int, most: int) -> None:
    # truth: whole-number areas, by the shoelace sum of the ring itself
    ring = wavy_ribbon(count)
    pieces = split_ring(ring, most_vertices=most)
    assert all(3 <= len(piece) <= most for piece in pieces)
    assert sum(twice_area(piece) for piece in pieces) == twice_area(ring)
    assert {tuple(v) for piece in pieces for v in piece.tolist()} == {tuple(v) for v in ring.tolist()}
    whole = shapely.union_all([shapely.Polygon(piece) for piece in pieces])
    assert whole.equals(shapely.Polygon(ring))
    assert whole.geom_type == "Polygon"


def twice_area(ring: np.ndarray) -> int:
    ahead = np.roll(ring, -1, axis=0)
    return int(np.sum(ring[:, 0] * ahead[:, 1] - ring[:, 1] * ahead[:, 0]))


def test_a_ring_that_touches_itself_is_refused() -> None:
    with pytest.raises(ExportError, match="touches itself"):
        split_ring(np.array([[0, 0], [10, 10], [10, 0], [0, 10]]))
    with pytest.raises(ExportError, match="touches itself"):
        split_ring(np.array([[0, 0], [10, 0]]))
