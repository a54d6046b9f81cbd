"""Narrowest places against growing and shrinking of fine polygons by a general clipping library."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np
import pyclipper
import pytest
import shapely

from core.errors import DesignValueError, GeometryError
from core.geometry.clearances import gap_of, narrowest, narrowest_gap, on_long_chain, wall_between
from core.geometry.contour import Contour, Outline, Placement
from core.geometry.shape import build_shape
from core.parameters import ChannelParameters
from tests.core.geometry.designs import polygon, round_numbers, sensible
from tests.thorough import cases

if TYPE_CHECKING:
    from core.geometry.shape import ChannelShape

Rings = list[list[list[int]]]
GRID_PER_UM = 1e6
SAGITTA_UM = 1e-4
NM = 1e-3
CHANNELS = cases(500, share=40)  # 500 take three or four minutes


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
    # between parallel walls with an open end no hole is left and nothing breaks: all is filled at once
    filled = 0.0
    for (_, sense), near, far in zip(solids, wide, wider, strict=True):
        filled += area_um2(moved_out(far, -sense * above)) * sense - area_um2(moved_out(near, -sense * below)) * sense
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


def test_a_limit_only_leaves_larger_gaps_out() -> None:
    for shape in random_channels(20, seed=22):
        gap = narrowest_gap(shape)
        assert gap is not None
        near = narrowest_gap(shape, below_um=1.01 * gap.um)
        assert near is not None
        assert near.um == pytest.approx(gap.um, abs=1e-4)
        assert narrowest_gap(shape, below_um=0.99 * gap.um) is None


@pytest.mark.parametrize("length_um", [20.0, 5000.0])
def test_open_ends_are_no_walls_of_a_straight_channel(length_um: float) -> None:
    shape = build_shape(ChannelParameters(stages=0, lead_in_um=length_um / 2, lead_out_um=length_um / 2))
    found = narrowest(shape)
    assert found.width_um == pytest.approx(200.0, abs=1e-9)
    assert found.width_at_um[:, 1] == pytest.approx([-100.0, 100.0])
    assert found.gap_um == np.inf
    assert narrowest_gap(shape) is None


def test_long_chains_tell_places_on_their_own_drawing() -> None:
    rng = np.random.default_rng(23)
    done = 0
    while done < 15:
        shape = build_shape(replace(sensible(rng), stages=int(rng.integers(6, 30))))
        if shape.outline is None:
            continue
        done += 1
        found = narrowest(shape)
        walls = shapely.MultiLineString([
            shapely.LinearRing(ring.chords(sagitta_um=1e-4)).coords for ring in shape.outline.contours
        ])  # fmt: skip
        for length, at in ((found.width_um, found.width_at_um), (found.gap_um, found.gap_at_um)):
            assert np.hypot(*(at[1] - at[0])) == pytest.approx(length, abs=1e-9)
            on_wall = shapely.distance(shapely.points(at), walls)
            # an island without a neck is told by a diameter of its largest circle: one end on the wall
            assert on_wall.min() < 1e-3
            if not found.is_gap_in_island or length == found.width_um:
                assert on_wall.max() < 1e-3


@pytest.mark.parametrize("sides", ["alternate", "same"])
def test_places_at_the_far_end_of_the_short_chain_are_at_the_far_end_of_the_long_one(sides: str) -> None:
    shape = build_shape(ChannelParameters(stages=21, sides=sides, stage_gap_um=900.0))
    assert shape.chain is not None
    for name in ("forward_inlet", "forward_outlet"):
        short, long = (getattr(line, name).section_um for line in (shape.chain.centreline, shape.centreline))
        assert on_long_chain(shape, short) == pytest.approx(long, abs=1e-6)


def test_narrowest_needs_a_shape() -> None:
    with pytest.raises(GeometryError, match="cannot be measured"):
        narrowest(build_shape(ChannelParameters(run_bend_deg=60)))


def area_with_hole(hole: list[tuple[float, float]], bulges: list[float] | None = None) -> Outline:
    """Return a square of 1000 um around a hole, which is given counter-clockwise."""
    square = Contour(np.array([[-500.0, -500.0], [500.0, -500.0], [500.0, 500.0], [-500.0, 500.0]]), np.zeros(4))
    ring = Contour(np.array(hole), np.array(bulges if bulges else np.zeros(len(hole))))
    return Outline(square, (ring.reversed(),))


@pytest.mark.parametrize(
    ("hole", "bulges", "gap_um"),
    [
        # truth: closed forms. A triangle has no neck: twice its inradius
        ([(0, 0), (30, 0), (0, 40)], None, 20.0),
        # two corners facing one another, 6 um apart
        ([(0, 0), (20, 0), (13, 10), (20, 20), (0, 20), (7, 10)], None, 6.0),
        # a corner facing a straight wall
        ([(0, 0), (40, 0), (40, 20), (24, 20), (20, 5), (16, 20), (0, 20)], None, 5.0),
        # a disc
        ([(0, 0), (10, -10), (20, 0), (10, 10)], [np.tan(np.pi / 8)] * 4, 20.0),
        # a bar with round ends
        ([(0, 0), (50, 0), (50, 8), (0, 8)], [0.0, 0.999, 0.0, 0.999], 8.0),
        # a straight wall against the side of an arc that bulges into the solid
        ([(0, 0), (60, 0), (60, 30), (40, 30), (20, 30), (0, 30)], [0, 0, 0, -0.5, 0, 0], 25.0),
    ],
)  # fmt: skip
def test_gaps_known_in_closed_form(hole: list[tuple[float, float]], bulges: list[float] | None, gap_um: float) -> None:
    outline = area_with_hole(hole, bulges)
    gap = gap_of(outline.contours)
    assert gap is not None
    assert gap.is_in_island
    assert gap.um == pytest.approx(gap_um, abs=1.01e-4)
    assert np.hypot(*(gap.at_um[1] - gap.at_um[0])) == pytest.approx(gap.um)


@pytest.mark.parametrize("seed", range(cases(500, share=30)))
def test_wall_between_channels_anywhere(seed: int) -> None:
    # truth: distance of fine polygons by a general geometry library
    rng = np.random.default_rng(400 + seed)
    outlines = []
    while len(outlines) < 2:
        outline = build_shape(replace(sensible(rng), channel_width_um=60.0, loop_width_um=60.0)).outline
        if outline is not None:
            turn = Placement(
                angle=float(rng.uniform(0, 6)), dx_um=float(rng.uniform(-1, 1)) * np.ptp(outline.bounds_um[::2])
            )
            outlines.append(Outline(outline.outer.placed(turn), tuple(ring.placed(turn) for ring in outline.islands)))
    first, second = outlines
    areas = [polygon(outline, sagitta_um=SAGITTA_UM) for outline in outlines]
    found = wall_between(first, second)
    expected = areas[0].distance(areas[1])
    assert found.um == pytest.approx(expected, abs=3.0 * SAGITTA_UM)
    for area, point in zip(areas, found.at_um, strict=True):
        assert area.distance(shapely.Point(point)) < 2.0 * SAGITTA_UM
    if expected:
        assert np.hypot(*(found.at_um[1] - found.at_um[0])) == pytest.approx(found.um, abs=1e-9)


def test_wall_between_areas_within_one_another() -> None:
    outside = area_with_hole([(-100, -100), (100, -100), (100, 100), (-100, 100)])
    small = np.array([[-10.0, -10.0], [10.0, -10.0], [10.0, 10.0], [-10.0, 10.0]])
    in_hole, in_fluid = (Outline(Contour(small + np.array(at), np.zeros(4))) for at in ((20.0, 0.0), (300.0, 0.0)))
    assert wall_between(outside, in_hole).um == pytest.approx(70.0)
    assert wall_between(in_hole, outside).at_um[:, 0] == pytest.approx([30.0, 100.0])
    assert wall_between(outside, in_fluid).um == 0.0
    assert wall_between(in_fluid, outside).um == 0.0
