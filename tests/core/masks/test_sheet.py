"""The order sheet, as text and as PDF read by pypdf: everything that a shop must be told."""

from __future__ import annotations

from dataclasses import replace
from io import BytesIO
from typing import TYPE_CHECKING

import pytest
from pypdf import PdfReader

from core.fabrication.shipped import cautions_of, shipped_process
from core.masks.critical import critical_dimensions, usual_tolerance_um
from core.masks.drawing import MaskDrawing
from core.masks.mask_set import write_mask_set, write_scene
from core.masks.options import MaskOptions, options_of
from core.masks.order_facts import CriticalDimension, SheetFacts, process_facts
from core.masks.sheet import order_sheet
from core.masks.sheet_pdf import sheet_pdf
from core.masks.sheet_text import sheet_text
from tests.core.masks.chips import plate, plate_drawing, two_channel_chip
from tests.core.masks.samples import shape_of

if TYPE_CHECKING:
    from pathlib import Path

    from pypdf.generic import DictionaryObject

FACTS = SheetFacts(
    chip_title="Rinse é",
    lab="Fernhollow Bench Fluidics",
    date="2031-05-17",
    revision="B",
    quantity="2 plates",
    notes=("Please call before plotting.",),
    forced=("nose 3 um, limit 10 um",),
)


def sheet_of(options: MaskOptions, facts: SheetFacts = FACTS, *, scale: float = 1.0) -> str:
    scene = replace(plate(two_channel_chip()), scale=scale)
    drawing = MaskDrawing(scene, stem="Rinse B", grid_nm=options.grid_nm)
    return " ".join(sheet_text(order_sheet([drawing], [], facts=facts, options=options)).split())


def test_the_sheet_says_what_a_shop_must_know(tmp_path: Path) -> None:
    process = shipped_process("cast, chrome mask")
    facts = replace(FACTS, cautions=cautions_of(process.kind), **process_facts(process))
    options = options_of(process)
    scene = plate(two_channel_chip())
    report = write_scene(scene, folder=tmp_path, stem="Rinse B", options=options, facts=facts)
    text = " ".join((tmp_path / "RINSE_B_ORDER.txt").read_text(encoding="utf-8").split())
    pages = PdfReader(tmp_path / "RINSE_B_ORDER.pdf").pages
    printed = "".join("".join(page.extract_text().split()) for page in pages)
    masks = [file for file in report.files if file.format in {"GDSII", "DXF R2000", "SVG"}]
    for words in (
        *("Ordered by: Fernhollow Bench Fluidics", "Date: 2031-05-17", "Revision: B", "Quantity: 2 plates"),
        *("Drawn by: ______", "Defect level: ______", "Pellicle: ______", "chrome on soda-lime glass; size and"),
        *(f"{file.name}, {file.format}, {file.size_bytes} bytes, SHA-256 {file.sha256}" for file in masks),
        *("One top cell in GDSII: RINSE_B", "coordinates are millimetres ($INSUNITS 4), 1:1", "user unit 1 micrometre"),
        # two chips of 8 mm, 8.2 mm apart: known beforehand
        *("To verify: overall length along x 16.200000 mm, height along y 10.200000 mm", "Extents: x -8.100000"),
        "Centring: to stand at the centre of the plate: (0, 0) of the data",
        *("Layer L1_CHAN (GDSII layer 1, data type 0)", "Layer CUT (GDSII layer 6, data type 0)"),
        *("One mask, to be named RINSE_B on the plate: L1_CHAN OR MARKS OR TEXT.", "for drilling and cutting: PORTS"),
        *(f"Tone: {process.tone}.", f"Orientation: as drawn, {process.reading}.", "files are not mirrored"),
        *("narrowest channel of MAIN, 200 um as drawn, at x", "on the mask; tolerance +-1.9 um"),
        "Scale 1.0000: the drawing has not been enlarged",
        *(f"Made by: {process.kind}", "Edge bias:", f"Shrinkage: {process.shrink_percent:g} %"),
        *("WRITTEN IN SPITE OF THESE FINDINGS", "nose 3 um, limit 10 um", "Please call before plotting."),
        *(
            "confirm with the shop",
            "not for dosing",
            cautions_of(process.kind)[0],
            "Channel CONTROL ('Control channel')",
        ),
    ):
        assert " ".join(words.split()) in text, words
        assert "".join(words.split()) in printed, words
    lines = (tmp_path / "RINSE_B_ORDER.txt").read_text(encoding="utf-8").splitlines()
    assert max(len(line) for line in lines) <= 120


def test_a_boolean_is_stated_where_one_is_needed() -> None:
    assert "left to right: L1_CHAN NOT L1_ISLE OR MARKS OR TEXT." in sheet_of(MaskOptions(islands="loops"))
    assert "nothing is to be taken out" in sheet_of(MaskOptions(islands="pieces"))
    assert "NOT L1_ISLE" not in sheet_of(MaskOptions(islands="pieces"))


def test_operations_are_stated_where_lines_are_cut() -> None:
    words = sheet_of(MaskOptions(islands="nested", tone="drawn lines are CUT", formats="DXF"))
    assert "in this order, which is also the order in the DXF file: TEXT, MARKS, PORTS, L1_CHAN, CUT." in words
    assert "between drawn lines" in words


def test_a_scale_is_stated_once_and_by_whom() -> None:
    words = sheet_of(MaskOptions(), scale=1.0 / (1.0 - 0.015))
    # mask scale factor for 1.5 % shrinkage: 1.01523, check value of the trade
    assert "Scale 1.015228 is ALREADY APPLIED in the files, once, about (0, 0), by the designer" in words


@pytest.mark.parametrize(
    ("allowance", "words"),
    [
        ("in the drawing", "Already allowed for IN THE DRAWING: kerf 200 um. The shop must not allow for it again."),
        ("by the shop", "NOT in the drawing: kerf 200 um. The SHOP is asked to allow for it, once."),
        ("not at all", "Allowed for by NOBODY: kerf 200 um."),
    ],
)
def test_the_allowance_is_never_both(allowance: str, words: str) -> None:
    process = shipped_process("laser-cut acrylic").with_values({"kerf_um": 200.0, "bias_um": 0.0})
    facts = process_facts(process.with_values({"allowance": allowance}))
    (sentence,) = facts["allowance"]
    assert sentence.startswith(words)


def test_the_critical_dimension_is_measured_where_it_stands() -> None:
    width, gap = critical_dimensions(plate_drawing())
    # all channels are 200 um wide; the island of the default stage is thicker than that
    assert (width.value_um, width.is_drawn, gap.is_drawn) == (pytest.approx(200.0, abs=1e-6), True, False)
    assert gap.value_um > 200.0
    x0, y0, x1, y1 = plate_drawing().bounds_um
    assert all(x0 < each.x_um < x1 and y0 < each.y_um < y1 for each in (width, gap))


def test_a_critical_dimension_of_the_user_goes_first() -> None:
    own = CriticalDimension(what="nose", value_um=20.0, x_um=1500.0, y_um=-250.0, is_drawn=False, tolerance_um=0.4)
    words = sheet_of(MaskOptions(tone="drawn shapes are CLEAR"), replace(FACTS, critical=own))
    assert "nose, 20 um as drawn, at x 1.500000 mm, y -0.250000 mm; dark on the mask; tolerance +-0.4 um." in words
    assert "narrowest channel" not in words


@pytest.mark.parametrize(("value", "tolerance"), [(9.0, 0.5), (50.0, 1.0), (127.0, 1.3), (200.0, 1.9), (900.0, 2.5)])
def test_tolerances_follow_the_published_list(value: float, tolerance: float) -> None:
    assert usual_tolerance_um(value) == tolerance


def symbols_of(drawn: DictionaryObject) -> set[str]:
    """Return the names of the symbols that a page or a symbol uses, those within symbols too."""
    used = drawn.get("/Resources", {}).get("/XObject", {})
    return set(used).union(*(symbols_of(used[name]) for name in used))


def test_the_pdf_shows_every_block_once_and_is_the_same_every_time() -> None:
    drawing, options = plate_drawing(), MaskOptions()
    sheet = order_sheet([drawing], [], facts=FACTS, options=options)
    data = sheet_pdf(sheet, [drawing], tone=options.tone)
    assert data == sheet_pdf(sheet, [drawing], tone=options.tone)
    reader = PdfReader(BytesIO(data))
    last = reader.pages[-1]
    assert "Drawn shapes are CLEAR (light here), all else is dark" in last.extract_text().replace("\n", " ")
    # four chips by reference; what a chip holds is not drawn again on the page
    drawn = last.get_contents().get_data().decode("latin-1")
    assert drawn.count(" Do") == 4
    assert len(symbols_of(last)) == len(drawing.blocks) - 1


def test_strange_signs_do_not_break_the_sheet(tmp_path: Path) -> None:
    report = write_mask_set([("β\n7", shape_of("Control"))], folder=tmp_path, chip_name="Kanal \N{SNOWMAN} ½\n")
    names = [file.name for file in report.files]
    assert "KANAL_1_2_ORDER.pdf" in names
    assert all(name.isascii() for name in names)
    assert len(PdfReader(tmp_path / "KANAL_1_2_ORDER.pdf").pages) >= 2
