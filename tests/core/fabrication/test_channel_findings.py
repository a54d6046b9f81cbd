"""Findings of one channel: measured against brute force, exact to the nanometre, each cure tried again here."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
import shapely
from hypothesis import given, settings
from hypothesis import strategies as st

from core.fabrication.channel_findings import channel_findings
from core.fabrication.making import making_of
from core.fabrication.process import PROCESS_FIELDS, Process, ProcessKind
from core.fabrication.shipped import shipped_process
from core.findings import Finding, Severity
from core.geometry.shape import build_shape
from core.geometry.shape_findings import is_drawable
from core.parameters import CHANNEL_FIELDS, ChannelParameters
from tests.core.fabrication.processes import CHANNELS, KINDS, random_process
from tests.core.geometry.designs import polygon, sensible

# A process without any limit of its own, so that each test sets the one it is about.
LAX = Process(
    min_width_um=0.1, min_gap_um=0.1, min_wall_um=0.1, min_drawn_um=0.1, min_radius_um=0.0, min_depth_um=0.1,
    max_depth_um=10000.0, max_depth_to_width=100.0, max_width_to_depth=1000.0, collapse_width_to_depth=1000.0,
    shrink_percent=0.0,
)  # fmt: skip
# Shorter than the nanometre that is let pass, and longer.
JUST_LESS, JUST_MORE = 0.9e-3, 1.1e-3


def codes(channel: ChannelParameters, process: Process, **about: object) -> set[str]:
    return {f.code for f in channel_findings(channel, process, with_cures=False, **about)}  # type: ignore[arg-type]


def only(channel: ChannelParameters, process: Process, code: str, **about: object) -> Finding:
    found = [f for f in channel_findings(channel, process, **about) if f.code == code]  # type: ignore[arg-type]
    assert len(found) == 1, found
    return found[0]


def gap_of(channel: ChannelParameters) -> float:
    """Return the smallest gap as a finding tells it: with a limit that every gap misses."""
    found = channel_findings(channel, replace(LAX, min_gap_um=5000.0), with_cures=False)
    return next((f.value_um or 0.0 for f in found if f.code == "gap_below_min"), np.inf)


def brute_force_gap(channel: ChannelParameters) -> float:
    """Return the smallest solid between walls that face one another squarely, from thousands of points.

    Every point of a wall gets the largest circle that touches it there and fits into the solid; where the circle
    touches another wall just opposite, its diameter is a gap. An island without such a place is as thin as the
    largest circle inside it.
    """
    outline = build_shape(channel).outline
    assert outline is not None
    narrow = min(channel.channel_width_um, channel.loop_width_um)
    area = polygon(outline, sagitta_um=1e-3 * narrow)
    step = narrow / 20
    points, normals = [], []
    for ring in (area.exterior, *area.interiors):
        xy = shapely.get_coordinates(shapely.segmentize(ring, step))
        d = np.diff(xy, axis=0)
        length = np.hypot(*d.T)
        keep = length > 1e-9
        points.append((0.5 * (xy[1:] + xy[:-1]))[keep])
        # rings of shapely polygons made here keep the fluid on their left: the solid is on the right
        normals.append((np.stack((d[:, 1], -d[:, 0]), axis=1) / np.maximum(length, 1e-12)[:, None])[keep])
    p, n = np.concatenate(points), np.concatenate(normals)
    best = np.inf
    for at in range(0, len(p), 400):
        to = p[None] - p[at : at + 400, None]
        away2 = np.sum(to**2, axis=2)
        ahead = np.einsum("ijk,ik->ij", to, n[at : at + 400])
        with np.errstate(divide="ignore", invalid="ignore"):
            diameter = np.where(ahead > 1e-9 * away2 + 1e-12, away2 / ahead, np.inf)
        other = np.argmin(diameter, axis=1)
        rows = np.arange(len(other))
        d = diameter[rows, other]
        square = np.sqrt(away2[rows, other]) > 0.9995 * d
        best = min(best, float(d[square & np.isfinite(d)].min(initial=np.inf)))
    circles = [2 * shapely.maximum_inscribed_circle(shapely.Polygon(hole), 1e-3).length for hole in area.interiors]
    return min(best, *circles) if circles else best


def few_stages(seed: int, count: int) -> list[ChannelParameters]:
    rng = np.random.default_rng(seed)
    found: list[ChannelParameters] = []
    while len(found) < count:
        channel = sensible(rng, most_stages=2)
        lead = 10 * channel.channel_width_um + 4 * channel.loop_radius_um
        channel = replace(channel, lead_in_um=lead, lead_out_um=lead)
        if build_shape(channel).is_usable:
            found.append(channel)
    return found


@pytest.mark.slow
def test_gaps_are_those_of_brute_force() -> None:
    # truth: circles through thousands of points; good to 0.2 % at this spacing
    for channel in few_stages(5, 6):
        assert gap_of(channel) == pytest.approx(brute_force_gap(channel), rel=2e-3), channel


def test_limits_are_kept_to_the_nanometre() -> None:
    # truth: the lengths themselves, and the gap of the very drawing moved to either side of the limit
    for channel in few_stages(6, 6):
        gap = gap_of(channel)
        lengths = [("min_width_um", "width_below_min", min(channel.channel_width_um, channel.loop_width_um)),
                   ("min_gap_um", "gap_below_min", gap),
                   ("min_drawn_um", "drawn_gap_below_min", gap),
                   ("min_depth_um", "too_shallow", channel.depth_um)]  # fmt: skip
        for field, code, length in lengths:
            assert code not in codes(channel, replace(LAX, **{field: length + JUST_LESS}))
            assert code in codes(channel, replace(LAX, **{field: length + JUST_MORE}))
        deepest = replace(LAX, max_depth_um=channel.depth_um - JUST_LESS)
        assert "too_deep" not in codes(channel, deepest)
        assert "too_deep" in codes(channel, replace(deepest, max_depth_um=channel.depth_um - JUST_MORE))


@pytest.mark.parametrize(
    ("code", "field", "ratio"),
    # truth: depth 60 over the narrowest width 80; over the widest width 100
    [("too_deep_for_width", "max_depth_to_width", 60 / 80), ("roof_sags", "max_width_to_depth", 100 / 60),
     ("roof_closes", "collapse_width_to_depth", 100 / 60)],
)  # fmt: skip
def test_ratios_of_depth_and_width(code: str, field: str, ratio: float) -> None:
    channel = ChannelParameters(channel_width_um=100.0, loop_width_um=80.0, depth_um=60.0)
    others = {"max_width_to_depth": 1.4} if field == "collapse_width_to_depth" else {}
    assert code not in codes(channel, replace(LAX, **{field: ratio * (1 + 1e-9), **others}))
    assert code in codes(channel, replace(LAX, **{field: ratio * (1 - 1e-4), **others}))


def test_solids_lean_where_the_process_lets_them() -> None:
    channel = ChannelParameters()
    ratio = channel.depth_um / gap_of(channel)
    for kind in ProcessKind:
        process = shipped_process(kind).with_values({"max_depth_to_width": 0.99 * ratio, "max_width_to_depth": 50,
                                                     "collapse_width_to_depth": 100, "max_depth_um": 500})  # fmt: skip
        process = process.with_values({"allowance": "by the shop", "min_radius_um": 0, "tool_diameter_um": 0})
        if kind is ProcessKind.WET_GLASS:
            process = process.with_values({"undercut_ratio": 0.1})
        assert not making_of(channel, process).findings
        # glass etched round is wider at the bottom than at the top
        assert ("too_deep_for_gap" in codes(channel, process)) == (kind is not ProcessKind.WET_GLASS), kind


def test_corners_that_come_out_rounder() -> None:
    # truth: a cutter's radius is half its diameter
    mould = shipped_process(ProcessKind.MILLED_MOULD).with_values({"min_radius_um": 0.0})
    channel = ChannelParameters(nose_radius_um=30.0, corner_radius_um=60.0)
    finding = only(channel, mould.with_values({"tool_diameter_um": 100.0}), "nose_too_sharp")
    assert (finding.value_um, finding.limit_um, finding.cure) == (30.0, 50.0, ("nose_radius_um", 50.0))
    assert "nose_too_sharp" not in codes(channel, mould.with_values({"tool_diameter_um": 50.0}))
    # a nose 30 um across has a radius of 15 um
    sharper = replace(channel, nose_radius_um=15.0)
    assert only(sharper, mould.with_values({"tool_diameter_um": 50.0}), "nose_too_sharp").limit_um == 25.0


def test_a_tool_needs_room() -> None:
    channel = ChannelParameters(channel_width_um=150.0)
    milled = shipped_process(ProcessKind.MILLED_CHANNEL).with_values({"min_width_um": 100.0})
    assert only(channel, milled, "width_below_tool").cure == ("channel_width_um", 200.0)


@pytest.mark.parametrize(("share", "is_filled"), [(0.97, False), (1.03, True)])
def test_a_tool_outside_the_channel_fills_what_it_does_not_fit_into(share: float, is_filled: bool) -> None:
    # truth: the islands of the first channel have necks as wide as brute force finds; a wider tool splits them
    channel = ChannelParameters()
    tool = share * brute_force_gap(replace(channel, stages=1))
    mould = shipped_process(ProcessKind.MILLED_MOULD).with_values({"tool_diameter_um": tool, "min_gap_um": 1.0})
    assert ("no_shape_as_made" in codes(channel, mould)) == is_filled


def test_bond_and_pressure() -> None:
    # truth: 200 kPa over a safety factor of 2 allows 100 kPa
    process = shipped_process(ProcessKind.CAST_FILM)
    channel = ChannelParameters()
    assert codes(channel, process, pressure_pa=1.0e5) == set()
    finding = only(channel, process, "bond_too_weak", pressure_pa=1.01e5, pressure_at="at 40 uL/min")
    for words in ("101 kPa at 40 uL/min", "200 kPa", "100 kPa", "depth_um"):
        assert words in finding.message
    assert finding.severity is Severity.ERROR


def test_the_drawing_is_measured_as_enlarged() -> None:
    # truth: 47.5 um drawn at a scale of 1/(1 - 1.5 %) is 48.22 um on the film
    process = shipped_process(ProcessKind.CAST_FILM).with_values({"min_width_um": 40.0})
    channel = ChannelParameters(channel_width_um=47.5, loop_width_um=47.0, depth_um=50.0)
    finding = only(channel, process, "drawn_width_below_min")
    assert finding.field == "loop_width_um"
    assert finding.value_um == pytest.approx(47.0 / 0.985)
    assert finding.cure == ("loop_width_um", 47.28)


def test_the_grid() -> None:
    coarse = replace(LAX, grid_nm=5000)
    assert only(ChannelParameters(loop_width_um=49.0), coarse, "grid_too_coarse").field == "loop_width_um"
    assert codes(ChannelParameters(loop_width_um=50.0), coarse) == set()


def test_places_are_on_the_drawing() -> None:
    for stages in (1, 4, 30):
        channel = ChannelParameters(stages=stages, stage_gap_um=260.0)
        outline = build_shape(channel).outline
        assert outline is not None
        walls = polygon(outline, sagitta_um=1e-3).boundary
        for finding in channel_findings(channel, replace(LAX, min_gap_um=900.0, min_width_um=300.0), with_cures=False):
            assert finding.ends_um is not None
            x0, y0, x1, y1 = finding.ends_um
            assert np.hypot(x1 - x0, y1 - y0) == pytest.approx(finding.value_um, abs=1e-3)
            assert (finding.x_um, finding.y_um) == (pytest.approx((x0 + x1) / 2), pytest.approx((y0 + y1) / 2))
            assert max(walls.distance(shapely.Point(x0, y0)), walls.distance(shapely.Point(x1, y1))) < 0.01, finding


def check_cures(channel: ChannelParameters, process: Process) -> int:
    """Try every cure again; return how many there were."""
    count = 0
    for finding in channel_findings(channel, process):
        assert finding.field in CHANNEL_FIELDS
        assert "\n" not in finding.message
        assert any(name in finding.message for name in (*CHANNEL_FIELDS, *PROCESS_FIELDS, "process", "mask")), finding
        if finding.cure is None:
            continue
        count += 1
        name, value = finding.cure
        assert f"change {name} to {value:g}" in finding.message
        cured = channel.with_values({name: value})
        assert is_drawable(cured), (channel, process, finding)
        making = making_of(cured, process)
        assert not making.findings
        assert build_shape(making.made).is_usable
        assert build_shape(making.drawn).is_usable
        left = channel_findings(cured, process, with_cures=False)
        same = [f for f in left if f.code == finding.code and (f.value_um or 0) <= (finding.value_um or 0) + 1e-6]
        widths = finding.code.endswith(
            ("width_below_min", "width_below_tool", "for_width", "grid_too_coarse", "roof_sags", "roof_closes")
        )
        assert not same or widths, (channel, process, finding)
        if widths:
            subject = finding.message.split()[0]
            assert not any(f.message.split()[0] == subject for f in same), (channel, process, finding)
    return count


def test_cures_cure_on_sensible_channels() -> None:
    rng = np.random.default_rng(9)
    cures = 0
    for kind in ProcessKind:
        channel = sensible(rng, most_stages=3)
        cures += check_cures(channel, random_process(rng, kind))
    assert cures >= 5


@pytest.mark.slow
@settings(max_examples=25)
@given(CHANNELS, KINDS)
def test_cures_cure_anywhere(channel: ChannelParameters, kind: ProcessKind) -> None:
    check_cures(channel, shipped_process(kind))


@given(st.floats(0.3, 1.0), st.floats(1.01, 3.0))
def test_cures_of_one_length_are_nearest(width_share: float, depth_share: float) -> None:
    # truth: the limit itself, rounded away by at most a hundredth
    channel = ChannelParameters(loop_width_um=200.0 * width_share, depth_um=200.0 * depth_share, stages=2)
    process = replace(LAX, min_width_um=200.0, max_depth_um=200.0)
    for finding in channel_findings(channel, process):
        assert finding.cure is not None
        assert finding.cure[1] == pytest.approx(200.0, abs=0.0101)


def test_cures_for_a_gap() -> None:
    channel = ChannelParameters(stage_gap_um=260.0, stages=5)
    process = replace(LAX, min_gap_um=gap_of(channel) + 40.0)
    finding = only(channel, process, "gap_below_min")
    assert finding.cure is not None
    name, value = finding.cure
    cured = replace(channel, **{name: value})
    assert 0.0 <= gap_of(cured) - process.min_gap_um + 1e-3 < 8.0  # near, but found by few trials
