"""The proof of whole plates must fail: every file here is sound in itself but is not the drawing."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np
import pytest

from core.errors import ExportError
from core.fabrication.choices import CopyMode
from core.geometry.body import channel_body
from core.masks.drawing import MaskDrawing
from core.masks.dxf import dxf_text
from core.masks.dxf_blocks import DxfBlock, dxf_blocks
from core.masks.gdsii import gdsii_bytes
from core.masks.gdsii_cells import GdsiiCell, gdsii_cells
from core.masks.options import MaskOptions
from core.masks.proof import FileProof, prove_dxf, prove_gdsii
from tests.core.masks.chips import channel_block, chip_block, plate
from tests.core.masks.samples import shape_of

if TYPE_CHECKING:
    from collections.abc import Callable
    from pathlib import Path

NAME = "Six in turn"


def chip_drawing() -> MaskDrawing:
    body = channel_body(shape_of(NAME).parameters, centre_um=(0.0, 0.0), pad_radius_um=300.0)
    chip = chip_block([(channel_block(body, "Six"), 0.0, 0.0)], corners=(-9000.0, -2000.0, 9000.0, 2000.0))
    return MaskDrawing(plate(chip, pitch_um=(18200.0, 4200.0)), stem="Wafer")


def proof_of_chip_gdsii(folder: Path, change: Callable[[dict[str, GdsiiCell]], object] = len) -> FileProof:
    drawing = chip_drawing()
    cells = {cell.name: cell for cell in gdsii_cells(drawing, chord_tolerance_um=0.02)}
    change(cells)
    path = folder / "mask.gds"
    path.write_bytes(gdsii_bytes(list(cells.values()), library="X"))
    return prove_gdsii(path, drawing, MaskOptions())


def proof_of_chip_dxf(
    folder: Path, change: Callable[[dict[str, DxfBlock]], object] = len, options: MaskOptions | None = None
) -> FileProof:
    options = options or MaskOptions()
    drawing = chip_drawing()
    blocks = {block.name: block for block in dxf_blocks(drawing, options)}
    change(blocks)
    path = folder / "mask.dxf"
    bounds = drawing.bounds_um
    path.write_text(dxf_text(list(blocks.values()), bounds_um=bounds, version=options.dxf_version))
    return prove_dxf(path, drawing, options)


def drop_ring(blocks: dict[str, DxfBlock], name: str, number: int) -> None:
    rings = blocks[name].rings
    blocks[name] = replace(blocks[name], rings=rings[:number] + rings[number + 1 :])


def test_the_unchanged_chips_pass(tmp_path: Path) -> None:
    for options in (MaskOptions(islands=i, copies=c) for i in ("pieces", "loops", "nested") for c in CopyMode):
        assert proof_of_chip_dxf(tmp_path, options=options).island_count == 4 * 6
    assert proof_of_chip_gdsii(tmp_path).island_count == 4 * 6


def chip_moved(cells: dict[str, GdsiiCell]) -> None:
    (name, x, y), *others = cells["WAFER"].references
    cells["WAFER"] = replace(cells["WAFER"], references=((name, x + 1, y), *others))


def chip_missing(cells: dict[str, GdsiiCell]) -> None:
    cells["WAFER"] = replace(cells["WAFER"], references=cells["WAFER"].references[1:])


def chip_twice(cells: dict[str, GdsiiCell]) -> None:
    references = cells["WAFER"].references
    cells["WAFER"] = replace(cells["WAFER"], references=(*references, references[0]))


def signs_exchanged(cells: dict[str, GdsiiCell]) -> None:
    swap = {"MARK": "SIGN_H", "SIGN_H": "MARK"}
    references = tuple((swap.get(name, name), x, y) for name, x, y in cells["CHIP"].references)
    cells["CHIP"] = replace(cells["CHIP"], references=references)


def port_smaller(cells: dict[str, GdsiiCell]) -> None:
    rings = [(layer, ring * 99 // 100 if layer == 3 else ring) for layer, ring in cells["SIX"].rings_nm]
    cells["SIX"] = replace(cells["SIX"], rings_nm=tuple(rings))


def port_on_another_layer(cells: dict[str, GdsiiCell]) -> None:
    rings = [(4 if layer == 3 else layer, ring) for layer, ring in cells["SIX"].rings_nm]
    cells["SIX"] = replace(cells["SIX"], rings_nm=tuple(rings))


def sign_over_sign(cells: dict[str, GdsiiCell]) -> None:
    (layer, ring), *others = cells["SIGN_H"].rings_nm
    cells["SIGN_H"] = replace(cells["SIGN_H"], rings_nm=((layer, ring + np.array([200_000, 0])), *others))


@pytest.mark.parametrize(
    ("change", "words"),
    [
        (chip_moved, "block WAFER: CHIP stands at"),
        (chip_missing, "block WAFER: 3 copies of CHIP, should be 4"),
        (chip_twice, "block WAFER: 5 copies of CHIP, should be 4"),
        (signs_exchanged, "block CHIP: MARK stands at|block CHIP: SIGN_H stands at"),
        (port_smaller, "block SIX, layer PORTS: .*differs by|corner is off"),
        (port_on_another_layer, "block SIX: layer PORTS is not drawn on"),
        (sign_over_sign, "block CHIP, layer TEXT: SIGN_H and SIGN_H overlap"),
    ],
)
def test_a_changed_gdsii_chip_is_refused(
    tmp_path: Path, change: Callable[[dict[str, GdsiiCell]], object], words: str
) -> None:
    with pytest.raises(ExportError, match=words):
        proof_of_chip_gdsii(tmp_path, change)


def insert_moved(blocks: dict[str, DxfBlock]) -> None:
    first, *others = blocks["WAFER"].inserts
    blocks["WAFER"] = replace(blocks["WAFER"], inserts=(replace(first, dx_um=first.dx_um + 1e-5), *others))


def insert_missing(blocks: dict[str, DxfBlock]) -> None:
    blocks["WAFER"] = replace(blocks["WAFER"], inserts=blocks["WAFER"].inserts[1:])


def ring_moved(blocks: dict[str, DxfBlock]) -> None:
    blocks["MARK"].rings[0].vertices_um[:] += 1e-5


def other_block(blocks: dict[str, DxfBlock]) -> None:
    blocks["SIX"] = replace(blocks["SIX"], name="SEVEN")
    inserts = [replace(each, name="SEVEN") if each.name == "SIX" else each for each in blocks["CHIP"].inserts]
    blocks["CHIP"] = replace(blocks["CHIP"], inserts=tuple(inserts))


@pytest.mark.parametrize(
    ("change", "words"),
    [
        (insert_moved, "block WAFER: CHIP stands at"),
        (insert_missing, "block WAFER: 3 copies of CHIP, should be 4"),
        (ring_moved, "block MARK, layer MARKS: .*corner is off"),
        (other_block, "blocks SEVEN, SIX are in the file or in the drawing alone"),
        (lambda blocks: drop_ring(blocks, "SIX", 3), "block SIX, layer L1_CHAN: 2 separate areas"),
        (lambda blocks: drop_ring(blocks, "SIX", 0), "block SIX, layer PORTS: 1 separate areas, should be 2"),
    ],
)
def test_a_changed_dxf_chip_is_refused(
    tmp_path: Path, change: Callable[[dict[str, DxfBlock]], object], words: str
) -> None:
    with pytest.raises(ExportError, match=words):
        proof_of_chip_dxf(tmp_path, change)


def copy_moved(blocks: dict[str, DxfBlock]) -> None:
    blocks["WAFER"].rings[-1].vertices_um[:] += 1e-5


def copy_bulged(blocks: dict[str, DxfBlock]) -> None:
    rings = list(blocks["WAFER"].rings)
    last = max(k for k, ring in enumerate(rings) if ring.layer == "PORTS")
    rings[last] = replace(rings[last], bulges=rings[last].bulges * (1.0 + 1e-6))
    blocks["WAFER"] = replace(blocks["WAFER"], rings=tuple(rings))


def copies_exchanged(blocks: dict[str, DxfBlock]) -> None:
    rings = list(blocks["WAFER"].rings)
    rings[0], rings[2] = rings[2], rings[0]
    blocks["WAFER"] = replace(blocks["WAFER"], rings=tuple(rings))


def outer_first(blocks: dict[str, DxfBlock]) -> None:
    rings = list(blocks["WAFER"].rings)
    first = next(k for k, ring in enumerate(rings) if ring.layer == "L1_CHAN")
    for place in range(first, first + 4 * 7, 7):
        rings[place : place + 7] = reversed(rings[place : place + 7])
    blocks["WAFER"] = replace(blocks["WAFER"], rings=tuple(rings))


def chip_cut_first(blocks: dict[str, DxfBlock]) -> None:
    rings = blocks["WAFER"].rings
    blocks["WAFER"] = replace(blocks["WAFER"], rings=rings[-1:] + rings[:-1])


@pytest.mark.parametrize(
    ("change", "words"),
    [
        (copy_moved, r"a copy of CHIP near \(9\.1, 2\.1\) mm is not as drawn"),
        (copy_bulged, "a copy of SIX near .* mm is not as drawn"),
        (copies_exchanged, "is not as drawn|corner is off"),
        (lambda blocks: drop_ring(blocks, "WAFER", 1), "is not as drawn|figures, should be"),
        (outer_first, "an outer loop comes before one that lies inside it"),
        (chip_cut_first, "a figure of layer CUT comes before one of layer TEXT"),
    ],
)
def test_a_changed_flat_chip_is_refused(
    tmp_path: Path, change: Callable[[dict[str, DxfBlock]], object], words: str
) -> None:
    with pytest.raises(ExportError, match=words):
        proof_of_chip_dxf(tmp_path, change, MaskOptions(islands="nested"))


def test_a_missing_island_of_a_chip_is_refused(tmp_path: Path) -> None:
    with pytest.raises(ExportError, match="5 islands, should be 6"):
        proof_of_chip_dxf(tmp_path, lambda blocks: drop_ring(blocks, "SIX", 3), MaskOptions(islands="loops"))


def test_islands_on_the_channel_layer_are_refused(tmp_path: Path) -> None:
    # drawn inside one another on one layer, islands would be filled
    def merged(blocks: dict[str, DxfBlock]) -> None:
        rings = blocks["SIX"].rings
        (number, ring), *_ = ((k, ring) for k, ring in enumerate(rings) if ring.layer == "L1_ISLE")
        changed = (*rings[:number], replace(ring, layer="L1_CHAN"), *rings[number + 1 :])
        blocks["SIX"] = replace(blocks["SIX"], rings=changed)

    with pytest.raises(ExportError, match=r"block SIX, layer L1_CHAN: figures .* lie inside one another"):
        proof_of_chip_dxf(tmp_path, merged, MaskOptions(islands="loops"))
