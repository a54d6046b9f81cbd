"""The outline: exact area, one hole per stage, full width everywhere, or a finding by name."""

from __future__ import annotations

import re
import time
from collections import Counter
from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np
import pytest
import shapely

from core.findings import Finding, Severity
from core.geometry.centreline import build_centreline
from core.geometry.chain import drawn_stages
from core.geometry.contour import LARGEST_SWEEP
from core.geometry.shape import ChannelShape, build_shape
from core.parameters import CHANNEL_FIELDS, ChannelParameters
from tests.core.geometry.designs import anywhere, independent_area_um2, polygon, round_numbers, sensible

if TYPE_CHECKING:
    from collections.abc import Callable

CODES = {
    "bend_exceeds_angle",
    "loop_misses_bypass",
    "leg_negative",
    "bypass_vanishes",
    "turn_too_tight",
    "lead_too_short",
    "loop_meets_lead",
    "loop_meets_next_stage",
    "island_vanishes",
    "nose_too_round",
    "walls_touch",
}


def check(parameters: ChannelParameters) -> str:
    """Assert that a set gives a good area or a named finding; return which."""
    shape = build_shape(parameters)
    if shape.outline is None:
        assert shape.findings, parameters
        for finding in shape.findings:
            assert finding.severity is Severity.ERROR
            assert finding.code in CODES
            assert finding.field in CHANNEL_FIELDS
            assert finding.field in finding.message
        return shape.findings[0].code
    outline = shape.outline
    narrow = min(parameters.channel_width_um, parameters.loop_width_um)
    area = polygon(outline, sagitta_um=2e-3 * narrow)
    assert area.is_valid, (shapely.is_valid_reason(area), parameters)
    assert len(outline.islands) == parameters.stages, parameters
    assert outline.outer.area_um2 > 0
    assert all(island.area_um2 < 0 for island in outline.islands)
    assert max(np.abs(c.bulges).max() for c in outline.contours) <= np.tan(LARGEST_SWEEP / 4) + 1e-12
    # every kind of neighbourhood is in the short chain of which a longer one is made
    short = build_shape(replace(parameters, stages=drawn_stages(parameters)))
    assert short.outline is not None
    assert clearance_share(short, polygon(short.outline, sagitta_um=1e-4 * narrow)) >= 0.999, parameters
    return "good"


def clearance_share(shape: ChannelShape, area: shapely.Polygon) -> float:
    """Return the least free width over nominal width, measured on every centre line by brute force."""
    strokes = shape.centreline.strokes
    ends = np.array([shape.centreline.forward_inlet.point_um, shape.centreline.forward_outlet.point_um])
    points, halves = [], []
    for stroke in strokes:
        on_line = stroke.points(1e-3 * stroke.width_um)
        if stroke.bulge == 0.0:
            on_line = on_line[0] + np.linspace(0, 1, 9)[:, None] * (on_line[-1] - on_line[0])
        points.append(on_line)
        halves.append(np.full(len(on_line), 0.5 * stroke.width_um))
    xy, half = np.concatenate(points), np.concatenate(halves)
    inner = np.hypot(*(xy[:, None] - ends[None]).transpose(2, 0, 1)).min(axis=1) > half
    xy, half = xy[inner], half[inner]
    if not len(xy):
        return 1.0
    spots = shapely.points(xy)
    assert shapely.contains(area, spots).all(), shape.parameters
    return float((shapely.distance(spots, area.boundary) / half).min())


@pytest.mark.parametrize("stages", [0, 1, 2, 3, 4, 5, 6, 20, 100])
@pytest.mark.parametrize("sides", ["alternate", "same"])
def test_default_channel_is_good_at_any_length(stages: int, sides: str) -> None:
    assert check(ChannelParameters(stages=stages, sides=sides)) == "good"


def test_straight_control_channel_is_a_rectangle() -> None:
    outline = build_shape(ChannelParameters(stages=0)).outline
    assert outline is not None
    assert outline.area_um2 == pytest.approx(2000.0 * 200.0, rel=1e-14)
    assert len(outline.outer.vertices_um) == 4


def test_area_agrees_with_an_independent_construction() -> None:
    # truth: polylines of 800 points fattened and rounded by a polygon-clipping library
    rng = np.random.default_rng(5)
    compared = 0
    while compared < 25:
        parameters = sensible(rng, most_stages=4)
        outline = build_shape(parameters).outline
        if outline is None:
            continue
        compared += 1
        assert outline.area_um2 == pytest.approx(independent_area_um2(parameters), rel=1e-6), parameters


@pytest.mark.parametrize("sides", ["alternate", "same"])
@pytest.mark.parametrize("stages", [7, 8, 11])
def test_repeating_the_middle_equals_drawing_all(sides: str, stages: int) -> None:
    # truth: the same walk drawn in full by the independent construction
    parameters = ChannelParameters(stages=stages, sides=sides, stage_gap_um=260 if sides == "alternate" else 800)
    assert drawn_stages(parameters) < stages
    outline = build_shape(parameters).outline
    assert outline is not None
    assert outline.area_um2 == pytest.approx(independent_area_um2(parameters), rel=1e-6)


@pytest.mark.parametrize("sides", ["alternate", "same"])
@pytest.mark.parametrize("stages", [5, 6, 7, 12])
def test_long_centre_line_is_the_walked_one(sides: str, stages: int) -> None:
    parameters = ChannelParameters(stages=stages, sides=sides, stage_gap_um=900)
    repeated, walked = build_shape(parameters).centreline, build_centreline(parameters)
    assert [(s.stage, s.part, s.bulge) for s in repeated.strokes] == [
        (s.stage, s.part, pytest.approx(s.bulge)) for s in walked.strokes
    ]
    for a, b in zip(repeated.strokes, walked.strokes, strict=True):
        assert np.array([a.start_um, a.end_um]) == pytest.approx(np.array([b.start_um, b.end_um]), abs=1e-6)
    for a, b in zip(repeated.stages, walked.stages, strict=True):
        assert a.loop_section_um == pytest.approx(b.loop_section_um, abs=1e-6)
    assert repeated.forward_inlet.point_um == pytest.approx(walked.forward_inlet.point_um, abs=1e-6)


@pytest.mark.parametrize(
    "changes",
    [
        {"stage_gap_um": 2.2e-16, "loop_angle_deg": 25, "run_bend_deg": 25},
        {"return_length_um": 1e-12},
        {"loop_angle_deg": 90, "run_bend_deg": 0, "loop_width_um": 200 - 1e-9},
        {"loop_angle_deg": 89.9999, "run_bend_deg": 0},
        {"corner_radius_um": 1e-17, "nose_radius_um": 1e-9},
    ],
)
def test_lengths_below_any_grid_do_no_harm(changes: dict[str, float]) -> None:
    assert check(ChannelParameters().with_values(changes)) == "good"


def test_walls_that_go_on_smoothly_but_for_a_hair_get_no_circle_at_their_joint() -> None:
    # leg and incoming run in line but for 0.01 deg: walls miss one another by a nanometre or so
    outline = build_shape(
        ChannelParameters(
            loop_angle_deg=46.137345966251516,
            run_bend_deg=46.128258214100136,
            loop_turn_deg=135.8,
            loop_radius_um=67.07542124780329,
            return_length_um=3.8964445151458618,
            loop_width_um=22.043004368112143,
            stages=1,
            sides="same",
            lead_in_um=980.0,
            lead_out_um=980.0,
            channel_width_um=22.043004368112143,
            nose_radius_um=3.86,
            corner_radius_um=1.224611353784008,
        )
    ).outline
    assert outline is not None
    assert polygon(outline, sagitta_um=1e-4).is_valid


def test_rounding_only_adds_fluid() -> None:
    sharp = build_shape(ChannelParameters(nose_radius_um=0, corner_radius_um=0)).outline
    round_ = build_shape(ChannelParameters(nose_radius_um=20, corner_radius_um=15)).outline
    assert sharp is not None
    assert round_ is not None
    lost = polygon(sharp, sagitta_um=1e-4).difference(polygon(round_, sagitta_um=1e-4))
    assert lost.area < 1e-6 * sharp.area_um2
    assert round_.area_um2 > sharp.area_um2


def test_sharp_nose_rounding_removes_the_closed_form() -> None:
    # truth: rounding a corner of opening angle a with radius r removes r^2 (1/tan(a/2) - (pi - a)/2)
    p = ChannelParameters(stages=1, loop_angle_deg=45, run_bend_deg=45, return_length_um=300, nose_radius_um=0)
    r = 12.0
    before, after = build_shape(p).outline, build_shape(replace(p, nose_radius_um=r)).outline
    assert before is not None
    assert after is not None
    removed = abs(before.islands[0].area_um2) - abs(after.islands[0].area_um2)
    a, b = np.radians(45.0), np.radians(135.0)  # the two corners between straight walls
    expected = sum(r**2 * (1 / np.tan(x / 2) - (np.pi - x) / 2) for x in (a, b))
    assert removed == pytest.approx(expected, rel=1e-9)


@pytest.mark.parametrize(
    ("changes", "code", "field"),
    [
        ({"run_bend_deg": 60}, "bend_exceeds_angle", "run_bend_deg"),
        ({"loop_turn_deg": 70, "loop_angle_deg": 65}, "loop_misses_bypass", "loop_turn_deg"),
        ({"loop_turn_deg": 80}, "leg_negative", "return_length_um"),
        ({"loop_radius_um": 90}, "turn_too_tight", "loop_radius_um"),
        ({"loop_radius_um": 105, "nose_radius_um": 10}, "turn_too_tight", "loop_radius_um"),
        ({"stage_gap_um": 100, "return_length_um": 1500}, "loop_meets_next_stage", "stage_gap_um"),
        ({"lead_out_um": 10}, "lead_too_short", "lead_out_um"),
        ({"loop_radius_um": 160, "nose_radius_um": 58}, "nose_too_round", "nose_radius_um"),
    ],
)
def test_what_cannot_be_drawn_is_named(changes: dict[str, float], code: str, field: str) -> None:
    shape = build_shape(ChannelParameters().with_values(changes))
    assert shape.outline is None
    assert [(f.code, f.field) for f in shape.findings] == [(code, field)]


def proposed(finding: Finding) -> float | None:
    found = re.search(r"(?:\(to|at least|at most|above) ([\d.e+]+)", finding.message)
    return float(found.group(1)) if found else None


@pytest.mark.parametrize("maker", [sensible, round_numbers])
def test_the_value_a_finding_proposes_cures_it(maker: Callable[[np.random.Generator], ChannelParameters]) -> None:
    rng = np.random.default_rng(4)
    tried = 0
    for _ in range(120):
        parameters = maker(rng)
        shape = build_shape(parameters)
        value = proposed(shape.findings[0]) if shape.findings else None
        if value is None or value > CHANNEL_FIELDS[shape.findings[0].field].maximum:
            continue
        tried += 1
        cured = build_shape(parameters.with_values({shape.findings[0].field: value}))
        assert [f.code for f in cured.findings] != [shape.findings[0].code], shape.findings[0].message
    assert tried > 15


def population(maker: Callable[[np.random.Generator], ChannelParameters], seed: int, count: int) -> Counter[str]:
    rng = np.random.default_rng(seed)
    return Counter(check(maker(rng)) for _ in range(count))


@pytest.mark.parametrize(("maker", "least_good"), [(anywhere, 20), (sensible, 100), (round_numbers, 40)])
def test_random_sets_are_good_or_named(
    maker: Callable[[np.random.Generator], ChannelParameters], least_good: int
) -> None:
    assert population(maker, 1, 200)["good"] >= least_good


@pytest.mark.slow
@pytest.mark.parametrize(("maker", "count"), [(anywhere, 4000), (sensible, 3500), (round_numbers, 2500)])
def test_ten_thousand_random_sets_are_good_or_named(
    maker: Callable[[np.random.Generator], ChannelParameters], count: int, capsys: pytest.CaptureFixture[str]
) -> None:
    start = time.perf_counter()
    result = population(maker, 2, count)
    with capsys.disabled():
        print(f"\n{maker.__name__}: {dict(result)} in {time.perf_counter() - start:.0f} s")
    assert result["good"] > 0.1 * count * (0.3 if maker is anywhere else 1.0)
