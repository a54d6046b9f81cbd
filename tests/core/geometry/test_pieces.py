"""Pieces: no holes, nothing lost, shared cuts, each shape once."""

from __future__ import annotations

import numpy as np
import pytest
from shapely import Polygon, unary_union

from core.errors import GeometryError
from core.geometry.pieces import LONGEST_PIECE_NAME, ChannelPieces, Piece, cut_pieces
from core.geometry.shape import build_shape
from core.parameters import ChannelParameters
from tests.core.geometry.designs import polygon, sensible


def placed_polygons(pieces: ChannelPieces, sagitta_um: float) -> list[Polygon]:
    return [
        Polygon(pieces.pieces[p.piece].contour.chords(sagitta_um=sagitta_um) + np.array([p.dx_um, p.dy_um]))
        for p in pieces.placed
    ]


def links(pieces: ChannelPieces) -> list[Polygon]:
    found = []
    for before, after in zip(pieces.placed, pieces.placed[1:], strict=False):
        leaving, entry = pieces.pieces[before.piece].exit, pieces.pieces[after.piece].entry
        assert len(leaving) == len(entry) == 2
        for a, b in zip(leaving, entry, strict=True):
            a = a + np.array([before.dx_um, before.dy_um])
            b = b + np.array([after.dx_um, after.dy_um])
            found.append(Polygon([a[0], a[1], b[1], b[0]]))
    return found


@pytest.mark.parametrize("stages", [0, 1, 2, 3, 4, 5, 9, 100])
@pytest.mark.parametrize("sides", ["alternate", "same"])
def test_pieces_fill_the_outline_exactly(stages: int, sides: str) -> None:
    shape = build_shape(ChannelParameters(stages=stages, sides=sides))
    assert shape.outline is not None
    pieces = cut_pieces(shape)
    area = sum(pieces.pieces[p.piece].contour.area_um2 for p in pieces.placed)
    assert area == pytest.approx(shape.outline.area_um2, rel=1e-12)
    assert len(pieces.placed) == stages + 1
    assert len(pieces.pieces) <= 4


def test_long_chain_repeats_two_shapes_only() -> None:
    names = [piece.name for piece in cut_pieces(build_shape(ChannelParameters(stages=100))).pieces]
    assert names == ["START", "STEP_A", "STEP_B", "END"]


def test_random_designs_cut_and_joined_are_the_outline_again() -> None:
    # truth: union of the pieces by a general geometry library
    rng = np.random.default_rng(11)
    done = 0
    while done < 60:
        parameters = sensible(rng, most_stages=7)
        shape = build_shape(parameters)
        if shape.outline is None:
            continue
        done += 1
        sagitta = 1e-4 * parameters.channel_width_um
        pieces = cut_pieces(shape, link_um=1.0)
        parts = [*placed_polygons(pieces, sagitta), *links(pieces)]
        assert all(part.is_valid for part in parts), parameters
        joined = unary_union([part.buffer(1e-6, join_style="mitre") for part in parts])
        assert joined.geom_type == "Polygon"
        assert len(joined.interiors) == parameters.stages
        whole = polygon(shape.outline, sagitta_um=sagitta)
        # arcs cut at other places have other chords: within the sagitta all along the outline
        assert joined.symmetric_difference(whole).area < sagitta * whole.length
        link_sagitta = 1.0 / (8 * (parameters.loop_radius_um - 0.5 * parameters.loop_width_um))
        assert joined.hausdorff_distance(whole) < 2.0 * sagitta + link_sagitta


def test_cut_chords_are_vertices_of_their_pieces() -> None:
    for piece in cut_pieces(build_shape(ChannelParameters(stages=6)), link_um=2.0).pieces:
        for chord in (*piece.entry, *piece.exit):
            for end in chord:
                assert np.any(np.all(piece.contour.vertices_um == end, axis=1))


def test_impossible_shape_cannot_be_cut() -> None:
    with pytest.raises(GeometryError, match="cannot be cut"):
        cut_pieces(build_shape(ChannelParameters(run_bend_deg=60)))


def test_names_of_many_pieces_differ_and_stay_short() -> None:
    ring = build_shape(ChannelParameters(stages=0)).outline.outer
    names = [Piece(kind, ring, number=n).name for kind in ("START", "STEP", "END", "BEND") for n in range(800)]
    assert len(set(names)) == len(names)
    assert max(map(len, names)) <= LONGEST_PIECE_NAME
    assert [Piece("STEP", ring, number=n).name for n in (0, 25, 26, 27)] == ["STEP_A", "STEP_Z", "STEP_AA", "STEP_AB"]
    assert [Piece("START", ring, number=n).name for n in (0, 1, 26)] == ["START", "START_B", "STAR_AA"]
