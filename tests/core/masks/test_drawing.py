"""Scenes as mask drawings: safe names, places on the grid, what is refused."""

from __future__ import annotations

import re

import pytest

from core.chip.scene import Block, BlockKind, Figure, Layer, PlacedBlock, Scene
from core.errors import ExportError
from core.fabrication.process import ProcessKind
from core.fabrication.shipped import shipped_process
from core.geometry.contour import Outline
from core.masks.drawing import MaskDrawing
from core.masks.options import MaskFormat, options_of
from tests.core.masks.chips import box, figures, plate_drawing

SQUARE = figures(Layer.MARKS, box(0.0, 0.0, 10.0, 10.0))


def top_of(*blocks: Block, dx_um: float = 0.0) -> Scene:
    placed = tuple(PlacedBlock(block=block, dx_um=dx_um + 100.0 * k) for k, block in enumerate(blocks))
    return Scene(top=Block(name="whatever", kind=BlockKind.CHIP, placed=placed))


def test_names_are_safe_and_unlike_one_another_and_any_layer() -> None:
    words = ["Text", "TEXT", "MARKS", "l1-chan", "L1_CHAN", "Plate 7", "x" * 40, "X" * 41, "Öl", ""]
    blocks = [Block(name=word, kind=BlockKind.MARKS, figures=SQUARE) for word in words]
    drawing = MaskDrawing(top_of(*blocks), stem="Plate 7 / B")
    names = [drawing.name_of(block) for block in drawing.blocks]
    assert drawing.stem == "PLATE_7_B" == names[-1]
    assert len(set(names)) == len(words) + 1
    assert all(re.fullmatch("[A-Z0-9_]{1,27}", name) for name in names)
    assert not set(names) & {"L1_CHAN", "L1_ISLE", "PORTS", "MARKS", "TEXT", "CUT"}


def test_places_lie_on_the_grid() -> None:
    block = Block(name="A", kind=BlockKind.MARKS, figures=SQUARE)
    scene = top_of(block, dx_um=0.123)
    assert MaskDrawing(scene, stem="A").bounds_um == pytest.approx((0.123, 0.0, 10.123, 10.0), abs=1e-12)
    assert MaskDrawing(scene, stem="A", grid_nm=50).bounds_um == pytest.approx((0.1, 0.0, 10.1, 10.0), abs=1e-12)


def test_everything_is_counted_with_its_copies() -> None:
    drawing = plate_drawing()
    copies = {drawing.name_of(block): drawing.copies_of(block) for block in drawing.blocks}
    assert copies == {"PLATE": 1, "CHIP": 4, "MAIN": 4, "CONTROL": 8, "MARK": 8, "SIGN_H": 8}
    assert (drawing.channel_count, drawing.island_count) == (12, 12)
    assert sum(1 for _ in drawing.placings()) == sum(copies.values())
    assert drawing.layers == tuple(Layer)
    assert drawing.bounds_um == pytest.approx((-8100.0, -5100.0, 8100.0, 5100.0))


@pytest.mark.parametrize(
    ("block", "words"),
    [
        (Block(name="A", kind=BlockKind.MARKS), "nothing is drawn on mask B; place a channel first"),
        (
            Block(
                name="Ring",
                kind=BlockKind.MARKS,
                figures=(
                    Figure(
                        layer=Layer.MARKS,
                        outline=Outline(box(0.0, 0.0, 9.0, 9.0).outer, (box(1.0, 1.0, 2.0, 2.0).outer.reversed(),)),
                    ),
                ),
            ),
            "block 'Ring' has a figure with a hole; only channels may have islands",
        ),
        (
            Block(name="Far", kind=BlockKind.MARKS, figures=figures(Layer.CUT, box(0.0, 0.0, 3e6, 1.0))),
            "would reach 3000 mm from its origin; allowed: 2000 mm",
        ),
    ],
)
def test_what_no_file_can_hold_is_refused_in_one_line(block: Block, words: str) -> None:
    with pytest.raises(ExportError, match=words) as caught:
        MaskDrawing(top_of(block), stem="B")
    assert "\n" not in str(caught.value)


def test_a_block_that_draws_nothing_is_refused() -> None:
    blocks = [Block(name=name, kind=BlockKind.MARKS, figures=found) for name, found in (("A", SQUARE), ("Nil", ()))]
    with pytest.raises(ExportError, match="block 'Nil' draws nothing"):
        MaskDrawing(top_of(*blocks), stem="B")


@pytest.mark.parametrize("kind", ProcessKind)
def test_the_process_chooses_how_files_are_written(kind: ProcessKind) -> None:
    process = shipped_process(kind)
    options = options_of(process)
    assert " and ".join(f for f in ("DXF", "GDSII") if f in options.formats) == process.formats
    assert all(isinstance(kind, MaskFormat) for kind in options.formats)
    assert (options.dxf_version, options.islands, options.copies, options.tone, options.reading) == (
        process.dxf_version, process.islands, process.dxf_copies, process.tone, process.reading,
    )  # fmt: skip
    assert (options.grid_nm, options.chord_tolerance_um) == (process.grid_nm, process.chord_tolerance_um)
