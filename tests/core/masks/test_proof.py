"""The proof must fail: every file here is sound in itself but is not the drawing."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np
import pytest

from core.errors import ExportError
from core.masks.dxf import dxf_text
from core.masks.dxf_blocks import DxfBlock, DxfRing, dxf_blocks
from core.masks.gdsii import gdsii_bytes
from core.masks.gdsii_cells import GdsiiCell, gdsii_cells
from core.masks.options import MaskOptions
from core.masks.proof import FileProof, prove_dxf, prove_gdsii
from core.masks.read_loop import ReadLoop
from tests.core.masks.samples import SETS, area_with_bulges, drawing_of

if TYPE_CHECKING:
    from collections.abc import Callable
    from pathlib import Path

NAME = "Six in turn"
OPTIONS = MaskOptions(copies="flat")


def proof_of_gdsii(folder: Path, change: Callable[[list[GdsiiCell]], object] = len) -> FileProof:
    drawing = drawing_of(NAME)
    cells = list(gdsii_cells(drawing, chord_tolerance_um=OPTIONS.chord_tolerance_um))
    change(cells)
    path = folder / "mask.gds"
    path.write_bytes(gdsii_bytes(cells, library="X"))
    return prove_gdsii(path, drawing, OPTIONS)


def proof_of_dxf(
    folder: Path, change: Callable[[list[DxfRing]], object] = len, options: MaskOptions = OPTIONS
) -> FileProof:
    drawing = drawing_of(NAME)
    (block,) = dxf_blocks(drawing, options)
    rings = list(block.rings)
    change(rings)
    blocks = [DxfBlock(name=block.name, rings=tuple(rings))]
    path = folder / "mask.dxf"
    path.write_text(dxf_text(blocks, bounds_um=drawing.bounds_um, version=options.dxf_version))
    return prove_dxf(path, drawing, options)


def test_the_unchanged_files_pass(tmp_path: Path) -> None:
    for proof in (proof_of_gdsii(tmp_path), proof_of_dxf(tmp_path)):
        assert proof.island_count == SETS[NAME]["stages"]
        assert all(sentence.endswith(".") for sentence in proof.sentences)


def moved_vertex(cells: list[GdsiiCell]) -> None:
    cells[0].rings_nm[0][1][3] += [4, 4]


def missing_link(cells: list[GdsiiCell]) -> None:
    cells[-2] = replace(cells[-2], rings_nm=cells[-2].rings_nm[1:])


def missing_piece(cells: list[GdsiiCell]) -> None:
    references = cells[-2].references
    cells[-2] = replace(cells[-2], references=references[:2] + references[3:])


def shifted_piece(cells: list[GdsiiCell]) -> None:
    name, x, y = cells[-2].references[-1]
    cells[-2] = replace(cells[-2], references=(*cells[-2].references[:-1], (name, x + 2, y)))


def shifted_channel(cells: list[GdsiiCell]) -> None:
    cells[-1] = replace(cells[-1], references=((cells[-2].name, 30, 0),))


def mirrored(cells: list[GdsiiCell]) -> None:
    for cell in cells:
        for _, ring in cell.rings_nm:
            ring[:, 1] *= -1
    cells[-2] = replace(cells[-2], references=tuple((n, x, -y) for n, x, y in cells[-2].references))


@pytest.mark.parametrize(
    ("change", "words"),
    [
        (moved_vertex, "corner is off the drawing by|overlap"),
        (missing_link, "5 islands, should be 6"),
        (missing_piece, "2 separate areas, should be 1; .*4 islands, should be 6"),
        (shifted_piece, "overlap|separate areas|corner is off"),
        (shifted_channel, r"stands at \(30, 0\) nm, should be \(0, 0\)"),
        (mirrored, "an edge is off the drawing"),
    ],
)
def test_a_changed_gdsii_file_is_refused(
    tmp_path: Path, change: Callable[[list[GdsiiCell]], object], words: str
) -> None:
    with pytest.raises(ExportError, match=rf"mask\.gds does not read back as the drawing: .*({words})") as caught:
        proof_of_gdsii(tmp_path, change)
    assert "\n" not in str(caught.value)


def other_bulge(rings: list[DxfRing]) -> None:
    chord = np.hypot(*(np.roll(rings[0].vertices_um, -1, axis=0) - rings[0].vertices_um).T)
    rings[0].bulges[np.argmax(chord * (rings[0].bulges != 0.0))] *= 1.0 + 1e-6


def wrong_scale(rings: list[DxfRing]) -> None:
    for ring in rings:
        ring.vertices_um[:] *= 1e-3


def other_corner(rings: list[DxfRing]) -> None:
    rings[0].vertices_um[2] += 1e-5


def fewer(rings: list[DxfRing]) -> None:
    del rings[-1]


def gap(rings: list[DxfRing]) -> None:
    for ring in rings[1:]:
        ring.vertices_um[:] += [0.0, 1e-3]


@pytest.mark.parametrize(
    ("change", "words"),
    [
        (other_bulge, "corner is off|area differs"),
        (wrong_scale, "area differs"),
        (other_corner, "corner is off the drawing by"),
        (fewer, "6 figures, should be 7"),
        (gap, "separate areas|overlap"),
    ],
)
def test_a_changed_dxf_file_is_refused(tmp_path: Path, change: Callable[[list[DxfRing]], object], words: str) -> None:
    with pytest.raises(ExportError, match=rf"mask\.dxf does not read back as the drawing: .*({words})"):
        proof_of_dxf(tmp_path, change)


def test_a_missing_island_loop_is_refused(tmp_path: Path) -> None:
    def without_one(rings: list[DxfRing]) -> None:
        del rings[0]

    for islands in ("loops", "nested"):
        with pytest.raises(ExportError, match="6 figures, should be 7"):
            proof_of_dxf(tmp_path, without_one, MaskOptions(islands=islands, copies="flat"))


def test_the_reader_knows_exact_areas_and_bounds_of_arcs() -> None:
    # closed forms: unit circle from two half turns, and from one arc of 300 degrees with its chord
    circle = ReadLoop(corners=[[1.0, 0.0, 1.0], [-1.0, 0.0, 1.0]])
    assert circle.area == pytest.approx(np.pi, rel=1e-15)
    assert circle.bounds == pytest.approx((-1.0, -1.0, 1.0, 1.0), abs=1e-15)
    a, b = np.array([0.5, -np.sqrt(0.75)]), np.array([0.5, np.sqrt(0.75)])
    most = ReadLoop(corners=[[*b, np.tan(np.radians(240.0) / 4.0)], [*a, 0.0]])
    sweep = np.radians(240.0)
    assert most.area == pytest.approx(0.5 * (sweep - np.sin(sweep)), rel=1e-14)
    assert most.bounds == pytest.approx((-1.0, -1.0, 0.5, 1.0), abs=1e-15)
    # and the same by another formula, both senses
    corners, bulges = [(0.0, 0.0), (3.0, 1.0), (-1.0, 2.0)], [0.2, -0.3, 0.0]
    loop = ReadLoop(corners=[[*v, q] for v, q in zip(corners, bulges, strict=True)])
    assert loop.area == pytest.approx(area_with_bulges(corners, bulges), rel=1e-14)
