"""How many chips a wafer or a plate holds, where they stand, and which values each of them has."""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from math import floor
from typing import TYPE_CHECKING

import numpy as np

from core.chip.plan import PlateKind
from core.errors import GeometryError

if TYPE_CHECKING:
    from core.chip.plan import ChipPlan
    from core.fields import Value
    from core.geometry.contour import Floats, Indices

MOST_CHIPS = 20000
_SLACK = 1e-9  # a chip that fits to the last digit does fit


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class PlateGrid:
    """The copies of a chip on a plate.

    Attributes
    ----------
    columns, rows : array of int, shape (n,)
        Column from the left and row from below of each copy, from 0.
    centres_um : array, shape (n, 2)
        Middle of each copy, from the middle of the plate; row by row from below [um].
    offset_um, pitch_um : tuple of float
        Middle of the copy in column 0, row 0, and the steps from there; nothing may stand there [um].
    """

    columns: Indices
    rows: Indices
    centres_um: Floats
    offset_um: tuple[float, float]
    pitch_um: tuple[float, float]

    def __len__(self) -> int:
        return len(self.columns)


def plate_grid(plan: ChipPlan) -> PlateGrid:
    """Return the copies of a chip on its plate; none if not even one fits.

    Parameters
    ----------
    plan : ChipPlan
        Chip and plate. A wafer holds a chip whose four corners lie inside its radius less the edge exclusion; of
        the natural grids (a chip or a street in the middle, along and across) the one that holds most is taken.
        On a square plate the copies are centred within the edge exclusion.
    """
    width, height, street = plan.chip_width_um, plan.chip_height_um, plan.street_um
    if plan.plate == PlateKind.SINGLE:
        return _grid([1], (0.0, 0.0), (width, height))
    pitch = (width + street, height + street)
    if plan.plate == PlateKind.PLATE:
        free = (plan.plate_width_um - 2.0 * plan.edge_exclusion_um, plan.plate_height_um - 2.0 * plan.edge_exclusion_um)
        columns, rows = (max(0, floor((room + street) / step + _SLACK)) for room, step in zip(free, pitch, strict=True))
        return _grid([columns] * rows, (0.0, -0.5 * (rows - 1) * pitch[1]), pitch)
    radius = 0.5 * plan.wafer_diameter_um - plan.edge_exclusion_um
    layouts = [_rows_on_wafer(radius, (width, height), pitch, along, up) for up in (0.0, 0.5) for along in (0.0, 0.5)]
    counts, low = max(layouts, key=lambda layout: sum(layout[0]))  # the first of equals: a chip in the middle
    return _grid(counts, (0.0, low), pitch)


def _rows_on_wafer(
    radius: float, size: tuple[float, float], pitch: tuple[float, float], along: float, up: float
) -> tuple[list[int], float]:
    """Return how many chips each row holds, from below, and the height of the lowest row [um]."""
    most = floor(radius / pitch[1]) + 1
    heights = (np.arange(-most, most + 1) + up) * pitch[1]
    left = radius**2 - (np.abs(heights) + 0.5 * size[1]) ** 2
    room = np.sqrt(np.maximum(left, 0.0)) - 0.5 * size[0]  # of the middle of a chip, either way
    steps = np.floor(room / pitch[0] + along + _SLACK)
    counts = np.where((left >= -_SLACK) & (room >= -_SLACK * size[0]), 2.0 * steps + (along == 0.0), 0.0)
    kept = np.flatnonzero(counts > 0)
    if not len(kept):
        return [], 0.0
    return [int(count) for count in counts[kept]], float(heights[kept[0]])


def _grid(counts: list[int], first: tuple[float, float], pitch: tuple[float, float]) -> PlateGrid:
    """Return rows of given lengths, each centred; all lengths are odd, or all are even."""
    longest = max(counts, default=0)
    left = first[0] - 0.5 * (longest - 1) * pitch[0]
    columns = [np.arange(count) + (longest - count) // 2 for count in counts]
    column = np.concatenate(columns) if columns else np.empty(0, dtype=int)
    row = np.repeat(np.arange(len(counts)), counts)
    centres = np.stack((left + column * pitch[0], first[1] + row * pitch[1]), axis=1)
    return PlateGrid(columns=column, rows=row, centres_um=centres, offset_um=(left, first[1]), pitch_um=pitch)


def checked_grid(plan: ChipPlan) -> PlateGrid:
    """Return the copies of a chip on its plate.

    Raises
    ------
    GeometryError
        If none fits, or there are more than 20,000.
    """
    grid = plate_grid(plan)
    if not len(grid):
        raise GeometryError(
            f"no chip of {plan.chip_width_um:g} x {plan.chip_height_um:g} um fits on the {plan.plate}; lower "
            "chip_width_um, chip_height_um or edge_exclusion_um, or use a larger plate"
        )
    if len(grid) > MOST_CHIPS:
        raise GeometryError(
            f"the {plan.plate} would hold {len(grid)} chips; allowed: {MOST_CHIPS}; raise chip_width_um, "
            "chip_height_um or street_um"
        )
    return grid


def steps_of(plan: ChipPlan, grid: PlateGrid) -> list[tuple[int, ...]]:
    """Return for each copy which value of each series it has, counted from 0.

    The first series steps from column to column from the left, the second from row to row from below; both begin
    again where the plate is larger than the series. A single chip has no series.
    """
    if plan.plate == PlateKind.SINGLE:
        return [()] * len(grid)
    ways = zip(plan.series, (grid.columns, grid.rows), strict=False)
    stepped = [(place % series.steps).tolist() for series, place in ways]
    return list(zip(*stepped, strict=True)) if stepped else [()] * len(grid)


def values_of(plan: ChipPlan, steps: tuple[int, ...]) -> dict[str, Value]:
    """Return the values that the series give to the chip of some steps, by field."""
    return {series.name: series.values[step] for series, step in zip(plan.series, steps, strict=False)}


def label_lines(plan: ChipPlan, chip_name: str, steps: tuple[int, ...]) -> tuple[str, ...]:
    """Return the words on a chip: its label, then one line for each stepped value.

    Parameters
    ----------
    plan : ChipPlan
        The chip.
    chip_name : str
        Stands where the plan has no label.
    steps : tuple of int
        Which value of each series this chip has; see ``steps_of``.
    """
    lines = [
        f"{series.field.label} {series.values[step]:g} {series.field.unit}".strip()
        for series, step in zip(plan.series, steps, strict=False)
    ]
    return (plan.label or chip_name, *lines)


@lru_cache(maxsize=32)
def distinct_steps(plan: ChipPlan) -> tuple[tuple[int, ...], ...]:
    """Return the different chips of a plate by their steps, in order; at least one."""
    return tuple(dict.fromkeys(steps_of(plan, plate_grid(plan)))) or ((0,) * len(plan.series),)
