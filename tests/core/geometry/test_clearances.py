"""Narrowest places against growing and shrinking of fine polygons by a general clipping library."""

from __future__ import annotations

import os
from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np
import pyclipper
import pytest
import shapely
from scipy.optimize import minimize

from core.errors import DesignValueError
from core.geometry.clearances import narrowest, narrowest_gap, wall_between
from core.geometry.contour import Contour, Outline, Placement
from core.geometry.shape import build_shape
from core.parameters import ChannelParameters
from tests.core.geometry.designs import anywhere, polygon, round_numbers, sensible

if TYPE_CHECKING:
    from core.geometry.shape import ChannelShape

Rings = list[list[list[int]]]
GRID_PER_UM = 1e6
SAGITTA_UM = 1e-4
NM = 1e-3
# how many random channels; 500 take ten minutes or so: SIDELOOP_CHANNELS=500
CHANNELS = int(os.environ.get("SIDELOOP_CHANNELS", "40"))


def rings_of(outline: Outline) -> Rings:
    chords = [contour.chords(sagitta_um=SAGITTA_UM) for contour in outline.contours]
    return [np.round(ring * GRID_PER_UM).astype(np.int64).tolist() for ring in chords]


def moved_out(rings: Rings, by_um: float) -> Rings:
    """Return an area grown (or shrunk) by so much on all sides; round corners true to 0.1 nm."""
    pen = pyclipper.PyclipperOffset(2.0, SAGITTA_UM * GRID_PER_UM)
    pen.AddPaths(rings, pyclipper.JT_ROUND, pyclipper.ET_CLOSEDPOLYGON)
    return pen.Execute(by_um * GRID_PER_UM)


def area_um2(rings: Rings) -> float:
    return float(sum(pyclipper.Area(ring) for ring in rings)) / GRID_PER_UM**2


def topology(rings: Rings) -> tuple[int, int]:
    """Return how many separate areas and how many holes there are."""
    areas = np.array([pyclipper.Area(ring) for ring in rings]) / GRID_PER_UM**2
    return int(np.sum(areas > 1e-8)), int(np.sum(areas < -1e-8))


def check_width(outline: Outline, width_um: float) -> None:
    rings = rings_of(outline)
    before = topology(moved_out(rings, -0.5 * (width_um - NM)))
    assert before == (1, len(outline.islands))
    assert topology(moved_out(rings, -0.5 * (width_um + NM))) != before


def solids_of(outline: Outline) -> list[tuple[Rings, float]]:
    """Return what separates solid from fluid, piece by piece, and in which sense a growing fluid moves it."""
    outer, *islands = rings_of(outline)
    return [([outer], 1.0), *(([island[::-1]], -1.0) for island in islands)]


def check_gap(outline: Outline, gap_um: float) -> None:
    below, above = 0.5 * (gap_um - NM), 0.5 * (gap_um + NM)
    solids = solids_of(outline)
    wide = [moved_out(rings, sense * below) for rings, sense in solids]
    assert [topology(rings) for rings in wide] == [(1, 0)] * len(solids)
    wider = [moved_out(rings, sense * above) for rings, sense in solids]
    if any(topology(rings) != (1, 0) for rings in wider):
        return
    # a slot between parallel walls is filled all at once, and no hole is left: it does not open again
    filled = area_um2(moved_out(wider[0], -above)) - area_um2(moved_out(wide[0], -below))
    assert filled > 0.05 * gap_um**2


def random_channels(count: int, seed: int) -> list[ChannelShape]:
    """Return usable channels of one to four stages, made small so that their polygons need few corners."""
    rng = np.random.default_rng(seed)
    found: list[ChannelShape] = []
    while len(found) < count:
        parameters = round_numbers(rng) if rng.uniform() < 0.3 else sensible(rng, most_stages=4)
        factor = float(rng.uniform(8.0, 20.0)) / parameters.channel_width_um
        lengths = [name for name in parameters.table() if name.endswith("_um")]
        try:
            parameters = parameters.with_values({name: getattr(parameters, name) * factor for name in lengths})
        except DesignValueError:
            continue
        shape = build_shape(parameters)
        if shape.outline is not None and 1 <= parameters.stages <= 4:
            found.append(shape)
    return found


@pytest.mark.slow
def test_random_channels_break_just_above_the_smallest_width_and_gap() -> None:
    # truth: eroded or dilated by half a nanometre less on each side nothing changes, by half a nanometre more it does
    for shape in random_channels(CHANNELS, seed=21):
        assert shape.outline is not None
        found = narrowest(shape)
        check_width(shape.outline, found.width_um)
        check_gap(shape.outline, found.gap_um)
