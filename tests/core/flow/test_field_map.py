"""Values, rasters and streamlines of fields whose truth is plain: linear, and a rigid rotation."""

from __future__ import annotations

import numpy as np
import pytest

from core.flow.field_map import FieldMap, round_levels
from core.flow.result import FlowField


def square_field(n=9, size_um=100.0) -> FlowField:
    """Return a mesh of a square whose in-plane mode is a rotation about its middle."""
    axis = np.linspace(0.0, size_um, n)
    x, y = (each.ravel() for each in np.meshgrid(axis, axis, indexing="ij"))
    i, j = np.meshgrid(np.arange(n - 1), np.arange(n - 1), indexing="ij")
    a = (i * n + j).ravel()
    b, c, d = a + n, a + n + 1, a + 1
    triangles = np.concatenate((np.stack((a, b, c), 1), np.stack((a, d, c), 1)))  # of both senses
    middle = size_um / 2
    return FlowField(
        points_um=np.stack((x, y), 1),
        triangles=triangles,
        in_plane_m_s=np.stack((-(y - middle), x - middle))[:, None, :] * 1e-3,
        vertical_m_s=np.zeros((0, len(x))),
        pressure_modes_pa=(3.0 * x + y)[None, :],
        plain=True,
    )


FIELD = square_field()
MAP = FieldMap(FIELD)
LINEAR = FIELD.points_um @ np.array([2.0, -1.0])


def test_linear_values_are_exact_inside_and_absent_outside():
    for x, y in np.random.default_rng(3).uniform(0.0, 100.0, (50, 2)):
        assert MAP.at(LINEAR, x, y) == pytest.approx(2.0 * x - y, abs=1e-9)
    assert MAP.at(LINEAR, 0.0, 0.0) == pytest.approx(0.0, abs=1e-9)
    assert MAP.at(LINEAR, -0.1, 50.0) is None
    assert MAP.at(LINEAR, 50.0, 100.1) is None


@pytest.mark.parametrize("um_per_px", [0.7, 3.0, 40.0])
def test_the_raster_holds_the_value_in_the_middle_of_each_pixel(um_per_px):
    width, height = 170, 150
    (raster,) = MAP.raster(
        LINEAR[None], left_um=-10.0, top_um=105.0, um_per_px=um_per_px, width_px=width, height_px=height
    )
    x = -10.0 + (np.arange(width) + 0.5) * um_per_px
    y = 105.0 - (np.arange(height) + 0.5) * um_per_px
    column, row = np.meshgrid(x, y)
    inside = (column > 0.01) & (column < 99.99) & (row > 0.01) & (row < 99.99)
    outside = (column < -0.01) | (column > 100.01) | (row < -0.01) | (row > 100.01)
    np.testing.assert_allclose(raster[inside], (2.0 * column - row)[inside], atol=1e-3)
    assert np.isnan(raster[outside]).all()
    assert inside.any()
    assert outside.any()


def test_a_view_beside_the_field_is_empty():
    raster = MAP.raster(LINEAR[None], left_um=500.0, top_um=0.0, um_per_px=1.0, width_px=30, height_px=20)
    assert raster.shape == (1, 20, 30)
    assert np.isnan(raster).all()


def test_streamlines_of_a_rotation_are_circles():
    seeds = np.array([[70.0, 50.0], [50.0, 85.0], [500.0, 0.0]])
    lines = MAP.streamlines(FIELD.velocity_m_s(), seeds, cell_um=1.0)
    assert len(lines) == 2  # the third seed lies outside
    for line, radius in zip(lines, (20.0, 35.0), strict=True):
        reach = np.hypot(*(line - 50.0).T)
        np.testing.assert_allclose(reach, radius, rtol=0.02)
        turn = np.diff(np.unwrap(np.arctan2(line[:, 1] - 50.0, line[:, 0] - 50.0)))
        assert (turn > 0.0).all(), "in the sense of the flow"


def test_speed_and_pressure_by_name():
    np.testing.assert_allclose(MAP.values("speed", 0.5), np.hypot(*FIELD.velocity_m_s().T))
    np.testing.assert_allclose(MAP.values("pressure", 0.2), FIELD.pressure_pa(0.2))


@pytest.mark.parametrize(("low", "high"), [(0.0, 0.93), (-3.0, 2400.0), (0.0, 1e-9), (101.0, 102.0), (5.0, 5.0)])
def test_levels_are_round_and_hold_the_range(low, high):
    levels = round_levels(low, high)
    steps = np.diff(levels)
    assert levels[0] <= low + 1e-12
    assert levels[-1] >= high - 1e-12
    assert 1 <= len(levels) <= 14
    if len(steps):
        np.testing.assert_allclose(steps, steps[0], rtol=1e-6)
        assert float(f"{steps[0]:.0e}") == pytest.approx(steps[0], rel=1e-6)
