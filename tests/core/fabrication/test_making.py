"""Drawn and made outlines: against areas grown and shrunk by a general clipping library, and round trips."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np
import pytest
import shapely
from hypothesis import given
from hypothesis import strategies as st

from core.fabrication.making import making_of, scale_of, smallest_radius_um
from core.fabrication.process import Process, ProcessKind
from core.fabrication.shipped import shipped_process
from core.geometry.shape import build_shape
from core.parameters import ChannelParameters
from tests.core.fabrication.processes import ALLOWANCES, CHANNELS, KINDS, fitting_channel, random_process
from tests.core.geometry.designs import polygon

if TYPE_CHECKING:
    from core.fabrication.making import Making

WIDTHS, RADII = ("channel_width_um", "loop_width_um"), ("nose_radius_um", "corner_radius_um")
# Edges that stand for arcs lie this far off them; grown areas have the same again, so walls agree to twice that.
CHORD_UM = 1e-3
# The narrowest nose here (opening angle about 15 deg) enlarges that by 1 / sin(a/2) = 8; measured: 5.4 CHORD_UM.
NOSE_UM = 10 * CHORD_UM
ROUND_TRIP_UM = 0.010


def area_of(channel: ChannelParameters) -> shapely.Polygon | None:
    outline = build_shape(channel).outline
    return None if outline is None else polygon(outline, sagitta_um=CHORD_UM)


def grown(area: shapely.Polygon, by_um: float) -> shapely.Polygon:
    """Return an area with all walls moved, by the clipping library alone; arcs within about CHORD_UM."""
    quarter = int(np.ceil(np.pi / 4 / np.sqrt(2 * CHORD_UM / max(abs(by_um), CHORD_UM)))) + 1
    return area.buffer(by_um, quad_segs=quarter)


def processed(drawn: shapely.Polygon, shift_um: float, process: Process) -> shapely.Polygon:
    """Return what a process makes of an area: walls moved, then corners no sharper than it can."""
    tool = process.tool_diameter_um / 2 if process.tool_runs == "outside the channel" else 0.0
    least = max(tool, process.min_radius_um)
    moved_area = grown(drawn, shift_um)
    return grown(grown(moved_area, least), -least) if least else moved_area


def away_from_ends(channel: ChannelParameters, reach_um: float) -> shapely.Geometry:
    """Return a patch over each open end, where nothing is compared: ends are cut square and do not move."""
    line = build_shape(channel).centreline
    return shapely.union_all(
        [shapely.Point(end.point_um).buffer(reach_um) for end in (line.forward_inlet, line.forward_outlet)]
    )


def largest_distance(first: shapely.Geometry, second: shapely.Geometry, patch: shapely.Geometry) -> float:
    """Return how far the walls of two areas lie apart, either way, outside a patch [um]."""
    outside = [area.boundary.difference(patch) for area in (first, second)]

    def one_way(walls: shapely.Geometry, others: shapely.Geometry) -> float:
        edges = [np.stack((xy[:-1], xy[1:]), axis=1) for xy in rings_of(others)]
        tree = shapely.STRtree(shapely.linestrings(np.concatenate(edges)))
        points = shapely.points(shapely.get_coordinates(walls))
        return float(tree.query_nearest(points, return_distance=True, all_matches=False)[1].max())

    return max(one_way(outside[0], second.boundary), one_way(outside[1], first.boundary))


def rings_of(walls: shapely.Geometry) -> list[np.ndarray]:
    return [shapely.get_coordinates(line) for line in shapely.get_parts(walls)]


def drawable_cases(kind: ProcessKind, count: int, seed: int) -> list[tuple[ChannelParameters, Process]]:
    rng = np.random.default_rng(seed)
    found: list[tuple[ChannelParameters, Process]] = []
    while len(found) < count:
        process = random_process(rng, kind)
        channel = fitting_channel(rng, process, most_stages=2)
        if not making_of(channel, process).findings and build_shape(channel).is_usable:
            found.append((channel, process))
    return found


def is_as_wanted(making: Making) -> bool:
    return all(abs(getattr(making.made, name) - getattr(making.wanted, name)) < 1e-6 for name in (*WIDTHS, *RADII))


def check_walls_moved(channel: ChannelParameters, process: Process) -> tuple[bool, bool]:
    """Compare the outlines as drawn and as made; return whether they were compared, and came back as wanted."""
    making = making_of(channel, process)
    drawn, made, wanted = area_of(making.drawn), area_of(making.made), area_of(making.wanted)
    if drawn is None or made is None:
        return False, False
    shift = 0.0 if process.allowance == "by the shop" else making.wall_shift_um
    patch = away_from_ends(channel, channel.channel_width_um + 2.0 * abs(shift) + 10.0)
    truth = processed(drawn, shift, process)
    assert largest_distance(truth, made, patch) < NOSE_UM, (channel, process)
    if is_as_wanted(making):
        assert largest_distance(made, wanted, patch) < ROUND_TRIP_UM, (channel, process)
    return True, is_as_wanted(making)


@pytest.mark.parametrize("kind", ProcessKind)
def test_walls_are_those_of_the_drawing_moved(kind: ProcessKind) -> None:
    # truth: the drawn area grown or shrunk by shapely, edges for arcs within CHORD_UM
    results = [check_walls_moved(*case) for case in drawable_cases(kind, 6, seed=11)]
    assert sum(compared for compared, _ in results) >= 4


@pytest.mark.slow
@pytest.mark.parametrize("kind", ProcessKind)
def test_walls_are_those_of_the_drawing_moved_often(kind: ProcessKind) -> None:
    # truth as above
    results = [check_walls_moved(*case) for case in drawable_cases(kind, 30, seed=12)]
    assert sum(compared for compared, _ in results) >= 20


@given(CHANNELS, KINDS, st.sampled_from(ALLOWANCES), st.floats(-500, 500))
def test_parameters_come_back_or_a_finding_says_so(
    channel: ChannelParameters, kind: ProcessKind, allowance: str, bias_um: float
) -> None:
    # truth: the theorem on growing and shrinking, in numbers worked out here
    process = shipped_process(kind).with_values({"bias_um": bias_um, "allowance": allowance})
    making = making_of(channel, process)
    d = bias_um + process.undercut_ratio * channel.depth_um + process.kerf_um / 2
    assert making.wall_shift_um == pytest.approx(d)
    if making.findings:
        assert making.drawn == making.made == making.flow == channel
        for finding in making.findings:
            assert finding.severity == "error"
            assert finding.field in finding.message
        return
    plain = channel.stages == 0
    for name in WIDTHS[:1] if plain else WIDTHS:
        drawn = getattr(channel, name) - (2 * d if allowance == "in the drawing" else 0)
        made = getattr(channel, name) + (2 * d if allowance == "not at all" else 0)
        assert getattr(making.drawn, name) == pytest.approx(drawn, abs=1e-6)
        assert getattr(making.made, name) == pytest.approx(made, abs=1e-6)
    for name in () if plain else RADII:
        wanted = getattr(channel, name)
        drawn = max(wanted + d, 0) if allowance == "in the drawing" else wanted
        made = max(drawn - (0 if allowance == "by the shop" else d), 0, smallest_radius_um(process))
        assert getattr(making.drawn, name) == pytest.approx(drawn, abs=1e-6)
        assert getattr(making.made, name) == pytest.approx(made, abs=1e-6)
    for name in set(ChannelParameters.table()) - {*WIDTHS, *RADII}:
        assert getattr(making.drawn, name) == getattr(making.made, name) == getattr(channel, name)


@given(CHANNELS, KINDS)
def test_a_given_mask_becomes_what_was_foreseen_for_it(channel: ChannelParameters, kind: ProcessKind) -> None:
    # the other way: a mask that exists is a channel for which nobody allows
    process = shipped_process(kind).with_values({"allowance": "in the drawing"})
    making = making_of(channel, process)
    if making.findings:
        return
    there = making_of(making.drawn, process.with_values({"allowance": "not at all"}))
    assert not there.findings
    for name in (*WIDTHS, *RADII) if channel.stages else WIDTHS[:1]:
        assert getattr(there.made, name) == pytest.approx(getattr(making.made, name), abs=1e-6)


def mould(tool_um: float) -> Process:
    return shipped_process(ProcessKind.MILLED_MOULD).with_values({"tool_diameter_um": tool_um, "min_radius_um": 0})


@pytest.mark.parametrize(("tool_um", "nose_um"), [(100.0, 50.0), (50.0, 30.0)])
def test_a_tool_outside_the_channel_rounds_noses_to_its_own_radius(tool_um: float, nose_um: float) -> None:
    # truth: no cutter leaves a corner sharper than its radius: 30 um needs a tool of 60 um at most
    channel = ChannelParameters(nose_radius_um=30.0, corner_radius_um=60.0)
    assert making_of(channel, mould(tool_um)).made.nose_radius_um == nose_um
    assert making_of(channel, mould(tool_um)).made.corner_radius_um == 60.0


def test_a_tool_in_the_channel_leaves_noses_sharp() -> None:
    process = shipped_process(ProcessKind.MILLED_CHANNEL).with_values({"min_radius_um": 0})
    assert process.tool_diameter_um == 200.0
    assert making_of(ChannelParameters(nose_radius_um=0.0), process).made.nose_radius_um == 0.0


def test_a_corner_sharper_than_the_walls_move_inwards_is_clipped() -> None:
    process = shipped_process(ProcessKind.CAST_CHROME).with_values({"bias_um": -5.0})
    making = making_of(ChannelParameters(nose_radius_um=2.0), process)
    assert (making.drawn.nose_radius_um, making.made.nose_radius_um) == (0.0, 5.0)
    assert any("nose_radius_um is 2 um as wanted and comes out as 5 um" in note for note in making.notes)


def test_an_opening_that_vanishes_is_a_finding() -> None:
    making = making_of(ChannelParameters(depth_um=120.0), shipped_process(ProcessKind.WET_GLASS))
    assert [(f.code, f.field, f.value_um) for f in making.findings] == [
        ("drawn_width_gone", "channel_width_um", -40.0),
        ("drawn_width_gone", "loop_width_um", -40.0),
    ]


def test_walls_that_meet_above_the_floor_are_a_finding() -> None:
    # truth: two walls that lean by 30 deg from 100 um apart meet at 50 um / tan 30 deg = 86.6 um
    lean = shipped_process(ProcessKind.CAST_CHROME).with_values({"wall_lean_deg": 30.0})
    narrow = ChannelParameters(channel_width_um=100.0, loop_width_um=100.0)
    assert making_of(replace(narrow, depth_um=86.5), lean).findings == ()
    assert {f.code for f in making_of(replace(narrow, depth_um=86.7), lean).findings} == {"walls_meet"}


def test_channels_for_the_flow_are_the_mean_over_the_depth() -> None:
    # truth: isotropic section w h + pi h^2 / 2 under an opening w; walls leaning by a lose h tan a on the mean
    glass = making_of(ChannelParameters(depth_um=50.0), shipped_process(ProcessKind.WET_GLASS))
    assert glass.drawn.channel_width_um == pytest.approx(100.0)
    assert glass.made == glass.wanted
    assert glass.flow.channel_width_um * 50.0 == pytest.approx(100.0 * 50.0 + np.pi * 50.0**2 / 2)
    acrylic = shipped_process(ProcessKind.LASER_ACRYLIC)
    wide = ChannelParameters(channel_width_um=800, loop_width_um=800, loop_radius_um=1500, depth_um=500)
    assert making_of(wide, acrylic).flow.loop_width_um == pytest.approx(800 - 500 * np.tan(np.radians(2)))


@pytest.mark.parametrize(
    ("percent", "factor"),
    # truth: 1/(1 - s) worked out by hand to six figures
    [(0.0, 1.0), (1.06, 1.01071), (1.24, 1.01256), (1.5, 1.01523), (1.52, 1.01543), (1.94, 1.01978)],
)
def test_scale_makes_up_for_shrinkage(percent: float, factor: float) -> None:
    process = Process(shrink_percent=percent)
    assert scale_of(process) == pytest.approx(factor, abs=5e-6)
    making = making_of(ChannelParameters(), process)
    assert making.made == making.drawn == making.wanted
    assert any("enlarged once" in note for note in making.notes) == (percent > 0)


def test_notes_say_who_allows_for_the_shift() -> None:
    process = shipped_process(ProcessKind.LASER_FILM)
    for allowance, words in (
        ("in the drawing", "the drawing allows for it"),
        ("by the shop", "the shop allows for it"),
        ("not at all", "channels come out 80 um wider than drawn"),
    ):
        note = making_of(ChannelParameters(), process.with_values({"allowance": allowance})).notes[0]
        assert words in note
        assert "40 um outwards" in note
