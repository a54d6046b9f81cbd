"""Channels as they stand on a chip: areas of parts in closed form, pads, rows, pieces, narrower copies."""

from __future__ import annotations

from dataclasses import replace
from itertools import combinations
from typing import TYPE_CHECKING

import numpy as np
import pytest
import shapely
from hypothesis import given
from hypothesis import strategies as st
from scipy.integrate import quad
from shapely import Polygon, unary_union

from core.errors import GeometryError
from core.geometry.body import ChannelBody, channel_body
from core.geometry.contour import Contour
from core.geometry.shape import build_shape
from core.parameters import ChannelParameters
from tests.core.geometry.designs import independent_area_um2, polygon, sensible
from tests.core.geometry.test_pieces import placed_polygons

if TYPE_CHECKING:
    from core.geometry.pieces import ChannelPieces


def pad_area_um2(radius: float, width: float) -> float:
    """Return the area of a circle without the segment that its lead covers."""
    half = 0.5 * width
    return np.pi * radius**2 - (radius**2 * np.arcsin(half / radius) - half * np.sqrt(radius**2 - half**2))


def random_body(rng: np.random.Generator, **changes: float) -> tuple[ChannelBody, float]:
    """Return a body of random channel, rows, pads, turn and place, and the wall asked for."""
    while True:
        channel = replace(sensible(rng, most_stages=12), **changes)
        width = channel.channel_width_um
        wall = width * float(rng.uniform(0.2, 3))
        rows = int(rng.integers(1, 5))
        if build_shape(channel).outline is None or rows > channel.stages:
            continue
        body = channel_body(
            channel,
            turn_deg=float(rng.uniform(-180, 180)),
            centre_um=(5e4, -3e4),
            rows=rows,
            pad_radius_um=float(rng.choice([0, width * rng.uniform(0.6, 6)])),
            wall_um=wall,
        )
        return body, wall


def parts(body: ChannelBody, sagitta_um: float) -> list[Polygon]:
    """Return row, bend, row and so on as polygons."""
    found = []
    rows = body.folding.rows
    for number, row in enumerate(rows):
        found.append(Polygon(row.outer().chords(sagitta_um=sagitta_um)))
        if number < len(body.folding.bends):
            walls = body.folding.bends[number].walls(row.far, rows[number + 1].start)
            ring = Contour.joined((wall.vertices_um, wall.bulges) for wall in walls)
            found.append(Polygon(ring.chords(sagitta_um=sagitta_um)))
    return found


def links(pieces: ChannelPieces) -> list[Polygon]:
    found = []
    for before, after in zip(pieces.placed, pieces.placed[1:], strict=False):
        near, far = pieces.pieces[before.piece], pieces.pieces[after.piece]
        for leaving, entry in zip(near.exit, far.entry, strict=True):
            a = leaving + np.array([before.dx_um, before.dy_um])
            b = entry + np.array([after.dx_um, after.dy_um])
            found.append(Polygon([a[0], a[1], b[1], b[0]]))
    return found


@pytest.mark.parametrize("seed", range(5))
def test_area_is_that_of_rows_bends_and_pads(seed: int) -> None:
    # truth: rows fattened by a clipping library, bends and pads in closed form
    body, _ = random_body(np.random.default_rng(seed), corner_radius_um=0.0)
    width = body.channel.channel_width_um
    expected = sum(width * bend.radius_um * abs(bend.sweep_rad) for bend in body.folding.bends)
    areas = {row.shape.parameters: independent_area_um2(row.shape.parameters) for row in body.folding.rows}
    for row in body.folding.rows:
        expected += areas[row.shape.parameters] + width * sum(row.longer_um)
    expected += sum(pad_area_um2(pad.radius_um, width) for pad in body.pads)
    assert body.outline.area_um2 == pytest.approx(expected, rel=1e-6)
    assert polygon(body.outline, sagitta_um=1e-4 * width).is_valid
    assert len(body.outline.islands) == body.channel.stages


def test_pads_meet_the_walls_at_the_corners_of_the_end() -> None:
    body = channel_body(ChannelParameters(corner_radius_um=0.0), pad_radius_um=700.0, turn_deg=33.0)
    shape = body.shapes[0]
    turn = np.radians(33.0)
    turned = np.array([[np.cos(turn), np.sin(turn)], [-np.sin(turn), np.cos(turn)]])
    for pad, end in zip(body.pads, (shape.centreline.forward_outlet, shape.centreline.forward_inlet), strict=True):
        corners = end.section_um @ turned
        assert np.hypot(*(corners - pad.centre_um).T) == pytest.approx([700.0, 700.0], abs=1e-9)
        for corner in corners:
            assert np.hypot(*(body.outline.outer.vertices_um - corner).T).min() < 1e-9


def test_corners_between_lead_and_pad_are_rounded_like_all_others() -> None:
    # truth: a circle that touches the lead's wall and the pad from outside, and a numerical integral below it
    half, f, r = 60.0, 40.0, 300.0
    channel = ChannelParameters(stages=0, channel_width_um=2 * half, corner_radius_um=f)
    body = channel_body(channel, pad_radius_um=r)
    middle = -np.sqrt((r + f) ** 2 - (half + f) ** 2)
    touch = middle * r / (r + f)

    def added(x: float) -> float:
        return float(half + f - np.sqrt(f**2 - (x - middle) ** 2) - max(half, np.sqrt(max(r**2 - x**2, 0.0))))

    corner, _ = quad(added, middle, touch, points=[-np.sqrt(r**2 - half**2)], epsabs=1e-9)
    expected = 2000.0 * 2 * half + 2 * pad_area_um2(r, 2 * half) + 4 * corner
    assert body.outline.area_um2 == pytest.approx(expected, rel=1e-10)


@pytest.mark.parametrize("seed", range(12))
def test_no_two_parts_come_nearer_than_the_wall(seed: int) -> None:
    body, wall = random_body(np.random.default_rng(100 + seed))
    sagitta = 1e-5 * body.channel.channel_width_um
    numbered = list(enumerate(parts(body, sagitta)))
    for (i, one), (j, other) in combinations(numbered, 2):
        if j - i >= 2:
            assert one.distance(other) > wall * (1 - 1e-9) - 3 * sagitta


@pytest.mark.parametrize("seed", range(10))
def test_pieces_with_links_are_the_outline_again(seed: int) -> None:
    # truth: union of the pieces by a general geometry library
    body, _ = random_body(np.random.default_rng(200 + seed))
    sagitta = 1e-4 * body.channel.channel_width_um
    whole = polygon(body.outline, sagitta_um=sagitta)
    exact = body.pieces()
    area = sum(exact.pieces[placed.piece].contour.area_um2 for placed in exact.placed)
    assert area == pytest.approx(body.outline.area_um2, rel=1e-9)
    pieces = body.pieces(link_um=1.0)
    rings = [*placed_polygons(pieces, sagitta), *links(pieces)]
    assert all(ring.is_valid for ring in rings)
    joined = unary_union([ring.buffer(1e-6, join_style="mitre") for ring in rings])
    assert joined.geom_type == "Polygon"
    assert len(joined.interiors) == body.channel.stages
    assert joined.symmetric_difference(whole).area < 2.0 * sagitta * whole.length


def test_cuts_at_bends_are_shared_exactly_without_links() -> None:
    pieces = channel_body(ChannelParameters(stages=7), rows=3, turn_deg=12.0, pad_radius_um=500.0).pieces()
    for before, after in zip(pieces.placed, pieces.placed[1:], strict=False):
        near, far = pieces.pieces[before.piece], pieces.pieces[after.piece]
        gap = np.array([after.dx_um - before.dx_um, after.dy_um - before.dy_um])
        for leaving, entry in zip(near.exit, far.entry, strict=True):
            assert leaving == pytest.approx(entry + gap, abs=1e-9)
    for piece in pieces.pieces:
        ring = [tuple(vertex) for vertex in piece.contour.vertices_um]
        for chord, first, last in (*((c, 1, 0) for c in piece.exit), *((c, 0, 1) for c in piece.entry)):
            # counter-clockwise, the left end of a cut follows the right one where the flow leaves
            step = ring.index(tuple(chord[last])) - ring.index(tuple(chord[first]))
            assert step % len(ring) == 1


@pytest.mark.parametrize(("sides", "most"), [("alternate", 12), ("same", 10)])
def test_rows_that_are_alike_share_their_pieces(sides: str, most: int) -> None:
    pieces = channel_body(ChannelParameters(stages=100, sides=sides), rows=10, pad_radius_um=750.0).pieces(link_um=1.0)
    assert len(pieces.pieces) == most
    assert len(pieces.placed) == 100 + 10 + 9
    names = [piece.name for piece in pieces.pieces]
    assert len(set(names)) == len(names)
    assert max(map(len, names)) <= 7
    assert [pieces.pieces[pieces.placed[k].piece].name for k in (0, -1)] == ["START", "END_C"]


@pytest.mark.parametrize("seed", range(8))
def test_a_narrower_channel_on_the_same_centre_lines_is_the_wanted_one_eroded(seed: int) -> None:
    # truth: erosion by a general geometry library, true to a hundred-thousandth of the width or so
    rng = np.random.default_rng(300 + seed)
    while True:
        body, _ = random_body(rng)
        width = body.channel.channel_width_um
        by = 0.05 * width
        drawn = body.channel.with_values({
            "channel_width_um": width - 2 * by,
            "loop_width_um": body.channel.loop_width_um - 2 * by,
            "nose_radius_um": body.channel.nose_radius_um + by,
            "corner_radius_um": body.channel.corner_radius_um + by,
        })  # fmt: skip
        if body.pads and build_shape(drawn).outline is not None:
            break
    narrow = channel_body(drawn, like=body)
    for pad, wanted in zip(narrow.pads, body.pads, strict=True):
        assert pad.centre_um == pytest.approx(wanted.centre_um, abs=1e-9)
        assert pad.radius_um == pytest.approx(wanted.radius_um - by, abs=1e-9)
    eroded = polygon(body.outline, sagitta_um=1e-5 * width).buffer(-by, quad_segs=256)
    result = polygon(narrow.outline, sagitta_um=1e-5 * width)
    assert eroded.symmetric_difference(result).area < 1e-5 * width * result.length
    assert narrow.outline.bounds_um == pytest.approx(
        np.array(body.bounds_um) + by * np.array([1, 1, -1, -1]), abs=1e-4 * width
    )
    back = channel_body(body.channel, like=narrow)
    assert back.outline.outer.vertices_um == pytest.approx(body.outline.outer.vertices_um, abs=1e-6)


@given(turn=st.floats(-180, 180), rows=st.integers(1, 4), pad=st.sampled_from([0.0, 150.0, 800.0]))
def test_turn_and_place(turn: float, rows: int, pad: float) -> None:
    flat = channel_body(ChannelParameters(), rows=rows, pad_radius_um=pad)
    body = channel_body(ChannelParameters(), rows=rows, pad_radius_um=pad, turn_deg=turn, centre_um=(300.0, -70.0))
    x0, y0, x1, y1 = body.bounds_um
    assert (0.5 * (x0 + x1), 0.5 * (y0 + y1)) == pytest.approx((300.0, -70.0), abs=1e-6)
    moved = flat.ends_um[1] - flat.ends_um[0], body.ends_um[1] - body.ends_um[0]
    before, after = (complex(*vector) for vector in moved)
    assert after == pytest.approx(before * np.exp(1j * np.radians(turn)), abs=1e-6)
    assert body.outline.area_um2 == pytest.approx(flat.outline.area_um2, rel=1e-10)


def test_scaled_about_the_origin() -> None:
    body = channel_body(ChannelParameters(stages=6), rows=2, pad_radius_um=500.0, centre_um=(1e4, 2e4))
    larger = body.scaled(1.02)
    assert larger.outline.area_um2 == pytest.approx(1.02**2 * body.outline.area_um2)
    assert larger.bounds_um == pytest.approx(1.02 * np.array(body.bounds_um))
    assert larger.ends_um == pytest.approx(1.02 * body.ends_um)
    assert larger.extra_length_um == pytest.approx(1.02 * body.extra_length_um)
    pieces = larger.pieces()
    area = sum(pieces.pieces[placed.piece].contour.area_um2 for placed in pieces.placed)
    assert area == pytest.approx(larger.outline.area_um2, rel=1e-9)


def test_a_straight_control_in_rows_keeps_its_length_but_for_the_bends() -> None:
    channel = ChannelParameters(stages=0, lead_in_um=4000.0, lead_out_um=2000.0)
    body = channel_body(channel, rows=3, wall_um=300.0)
    assert [bend.radius_um for bend in body.folding.bends] == pytest.approx([250.0, 250.0])
    assert body.extra_length_um == pytest.approx(2 * np.pi * 250.0)
    assert body.outline.area_um2 == pytest.approx(200.0 * (6000.0 + 2 * np.pi * 250.0))


def test_extra_length_is_what_the_centre_lines_have_more_than_unfolded() -> None:
    channel = ChannelParameters(stages=6, loop_width_um=150.0, corner_radius_um=0.0, nose_radius_um=0.0)
    folded, flat = channel_body(channel, rows=2), channel_body(channel)
    # a plain channel of the full width stands for the length; where bypasses meet at an angle nothing changes
    more = (folded.outline.area_um2 - flat.outline.area_um2) / channel.channel_width_um
    assert folded.extra_length_um == pytest.approx(more, rel=1e-9)
    assert flat.extra_length_um == 0.0


@pytest.mark.parametrize(
    ("changes", "how", "words"),
    [
        ({"stages": 3}, {"rows": 4}, "4 rows cannot be made of 3 stages"),
        ({}, {"rows": 0}, "0 rows cannot be made"),
        ({"run_bend_deg": 60}, {}, "run_bend_deg"),
        ({}, {"pad_radius_um": 100.0}, "a pad must be wider than its lead"),
        ({"stages": 0, "lead_in_um": 30.0, "lead_out_um": 30.0, "corner_radius_um": 100.0}, {"pad_radius_um": 800.0},
         "too short for the rounded corners"),
        ({"stages": 1, "loop_angle_deg": 20, "run_bend_deg": 20, "loop_radius_um": 1000, "lead_in_um": 500},
         {"pad_radius_um": 1500.0}, "runs into the channel itself"),
    ],
)  # fmt: skip
def test_what_cannot_be_is_told_in_one_line(changes: dict[str, float], how: dict[str, float], words: str) -> None:
    with pytest.raises(GeometryError, match=words) as caught:
        channel_body(ChannelParameters().with_values(changes), **how)
    assert "\n" not in str(caught.value)


def test_a_body_is_not_like_one_with_other_centre_lines() -> None:
    with pytest.raises(GeometryError, match="other centre lines"):
        channel_body(ChannelParameters(loop_radius_um=350.0), like=channel_body(ChannelParameters()))


def test_islands_keep_the_order_of_the_reverse_flow() -> None:
    body = channel_body(ChannelParameters(stages=7), rows=3, pad_radius_um=400.0)
    middles = np.array([island.vertices_um.mean(axis=0) for island in body.outline.islands])
    rows = [3, 2, 2]
    for number, count in enumerate(rows):
        x = middles[sum(rows[:number]) : sum(rows[: number + 1]), 0]
        assert np.all(np.diff(x) > 0.0 if number % 2 == 0 else np.diff(x) < 0.0)
        assert len(x) == count
    assert shapely.is_valid(polygon(body.outline, sagitta_um=0.01))
