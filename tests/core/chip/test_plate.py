"""Chips on wafers and plates, counted against brute force, and the values of a stepped series."""

from __future__ import annotations

from itertools import product

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.chip.plan import ChipPlan, SteppedField
from core.chip.plate import (
    MOST_CHIPS,
    checked_grid,
    distinct_steps,
    label_lines,
    plate_grid,
    steps_of,
    values_of,
)  # fmt: skip
from core.errors import GeometryError

RADIUS = SteppedField(name="loop_radius_um", first=250, last=400, steps=4)
STAGES = SteppedField(name="stages", first=1, last=3, steps=3)


def wafer(**values) -> ChipPlan:
    return ChipPlan(plate="wafer", **values)


def fitting_by_brute_force(plan: ChipPlan, along: float, up: float) -> int:
    """Count grid places whose four corners all lie inside, one by one."""
    radius = plan.wafer_diameter_um / 2 - plan.edge_exclusion_um
    px, py = plan.chip_width_um + plan.street_um, plan.chip_height_um + plan.street_um
    count = 0
    reach = int(radius / min(px, py)) + 2
    for i, j in product(range(-reach, reach + 1), repeat=2):
        x, y = (i + along) * px, (j + up) * py
        corners = [
            (x + a * plan.chip_width_um / 2) ** 2 + (y + b * plan.chip_height_um / 2) ** 2
            for a, b in product((-1, 1), repeat=2)
        ]
        count += max(corners) <= radius**2 * (1 + 1e-12)
    return count


@given(
    width=st.floats(3000, 60000), height=st.floats(3000, 60000), street=st.sampled_from([0.0, 200.0, 3000.0]),
    diameter=st.sampled_from([50000.0, 76200.0, 100000.0]), exclusion=st.sampled_from([0.0, 4000.0]),
)  # fmt: skip
def test_a_wafer_holds_as_many_chips_as_the_best_of_the_natural_grids(width, height, street, diameter, exclusion):
    plan = wafer(chip_width_um=width, chip_height_um=height, street_um=street, wafer_diameter_um=diameter,
                 edge_exclusion_um=exclusion)  # fmt: skip
    best = max(fitting_by_brute_force(plan, along, up) for along in (0.0, 0.5) for up in (0.0, 0.5))
    centres = plate_grid(plan).centres_um
    assert len(centres) == best
    if best:
        reach = np.abs(centres) + np.array([width, height]) / 2
        assert np.hypot(*reach.T).max() <= (diameter / 2 - exclusion) * (1 + 1e-9)
        assert centres.mean(axis=0) == pytest.approx([0.0, 0.0], abs=1e-6)
        gaps = np.abs(centres[:, None] - centres[None]) - [width + street, height + street]
        apart = gaps.max(axis=2)
        np.fill_diagonal(apart, 0.0)
        assert apart.min() >= -1e-6


def test_a_chip_that_fits_to_the_last_digit_is_kept():
    # the corners of 3 : 4 lie on the circle of radius 5
    plan = wafer(chip_width_um=60000.0, chip_height_um=80000.0, edge_exclusion_um=0.0)
    assert len(plate_grid(plan)) == 1
    assert len(plate_grid(plan.with_values({"chip_height_um": 80001.0}))) == 0


def test_a_plate_is_filled_from_its_middle_within_the_exclusion():
    plan = ChipPlan(plate="plate", plate_width_um=100000.0, plate_height_um=50000.0, edge_exclusion_um=5000.0,
                    chip_width_um=20000.0, chip_height_um=10000.0, street_um=1000.0)  # fmt: skip
    grid = plate_grid(plan)
    # 90 mm hold 4 chips of 20 mm and 3 streets (83 mm), not 5 (104 mm); 40 mm hold 3 of 10 mm (32 mm), not 4 (43 mm)
    assert len(grid) == 12
    assert sorted(set(grid.centres_um[:, 0])) == [-31500.0, -10500.0, 10500.0, 31500.0]
    assert sorted(set(grid.centres_um[:, 1])) == [-11000.0, 0.0, 11000.0]
    exact = plan.with_values({"plate_width_um": 93000.0})
    assert len(plate_grid(exact)) == 12
    assert len(plate_grid(exact.with_values({"plate_width_um": 92999.0}))) == 9


def test_places_follow_from_offset_and_pitch():
    grid = plate_grid(wafer(chip_width_um=9000.0, chip_height_um=7000.0))
    rebuilt = np.array(grid.offset_um) + np.stack((grid.columns, grid.rows), axis=1) * np.array(grid.pitch_um)
    assert np.abs(rebuilt - grid.centres_um).max() < 1e-6
    assert grid.columns.min() == grid.rows.min() == 0


def test_a_single_chip_stands_in_the_middle():
    assert plate_grid(ChipPlan()).centres_um.tolist() == [[0.0, 0.0]]


def test_too_large_and_far_too_many_chips_are_refused():
    with pytest.raises(GeometryError, match="no chip of 90000"):
        checked_grid(wafer(chip_width_um=90000.0, chip_height_um=50000.0))
    tiny = wafer(chip_width_um=500.0, chip_height_um=500.0, street_um=0.0, wafer_diameter_um=450000.0)
    assert len(plate_grid(tiny)) > MOST_CHIPS
    with pytest.raises(GeometryError, match="allowed: 20000"):
        checked_grid(tiny)


def test_a_series_steps_along_and_up_and_begins_again():
    plan = wafer(chip_width_um=15000.0, chip_height_um=11000.0, series=(RADIUS, STAGES))
    grid = plate_grid(plan)
    steps = steps_of(plan, grid)
    for each, column, row in zip(steps, grid.columns, grid.rows, strict=True):
        assert each == (column % 4, row % 3)
    assert distinct_steps(plan) == tuple(dict.fromkeys(steps))
    assert values_of(plan, (1, 2)) == {"loop_radius_um": 300.0, "stages": 3}
    assert label_lines(plan, "Rinse", (1, 2)) == ("Rinse", "Loop radius 300 um", "Stages 3")
    assert label_lines(plan.__class__(label="Own"), "Rinse", ()) == ("Own",)


def test_a_single_chip_has_no_series():
    plan = ChipPlan(series=(RADIUS,))
    assert distinct_steps(plan) == ((),)
    assert values_of(plan, ()) == {}
