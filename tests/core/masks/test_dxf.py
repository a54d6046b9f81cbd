"""DXF text: neighbours share corners to the last bit."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest

from core.fabrication.choices import DxfVersion
from core.masks.dxf import dxf_text
from core.masks.dxf_blocks import DxfRing, dxf_blocks
from core.masks.options import MaskOptions
from tests.core.masks.samples import SETS, drawing_of


def rings_of(name: str, **options: object) -> tuple[DxfRing, ...]:
    (block,) = dxf_blocks(drawing_of(name), MaskOptions(copies="flat", **options))
    return block.rings


@pytest.mark.parametrize("name", SETS)
def test_neighbouring_pieces_share_their_corners_exactly(name: str) -> None:
    rings = rings_of(name)
    stages = SETS[name]["stages"]
    assert len(rings) == stages + 1
    for ring, after in pairwise(rings):
        shared = {tuple(v) for v in ring.vertices_um.tolist()} & {tuple(v) for v in after.vertices_um.tolist()}
        assert len(shared) == 4


@pytest.mark.parametrize("name", SETS)
def test_loops_are_islands_and_then_one_outline(name: str) -> None:
    stages = SETS[name]["stages"]
    assert [ring.layer for ring in rings_of(name, islands="loops")] == ["L1_ISLE"] * stages + ["L1_CHAN"]
    assert [ring.layer for ring in rings_of(name, islands="nested")] == ["L1_CHAN"] * (stages + 1)


def test_extents_are_set_even_at_the_origin() -> None:
    blocks = dxf_blocks(drawing_of("Control"), MaskOptions())
    for version in DxfVersion:
        text = dxf_text(blocks, bounds_um=(0.0, 0.0, 2000.0, 1500.0), version=version)
        assert "$EXTMIN\n 10\n0.0\n 20\n0.0\n" in text
        assert "$EXTMAX\n 10\n2.0\n 20\n1.5\n" in text


def test_a_point_written_twice_is_dropped() -> None:
    from core.masks.dxf_blocks import _ring

    corners = np.array([[0.0, 0.0], [5.0, 0.0], [5.0, 1e-8], [0.0, 5.0]])
    assert len(_ring("L1_CHAN", corners, np.zeros(4)).bulges) == 3
