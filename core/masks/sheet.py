"""The order sheet: all that a shop must be told besides the files, as headings and lines.

The same sheet is written as text and as PDF. What nobody knows yet is left as a line to be filled in.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from core.chip.scene import BlockKind
from core.fabrication.choices import DxfVersion, IslandMode, Tone
from core.masks.critical import critical_lines
from core.masks.layers import ISLAND_LAYER, LAYERS, WORKING_ORDER
from core.masks.options import MaskFormat
from core.masks.order_facts import TO_FILL_IN
from core.masks.tones import ON_MASK
from core.units import UM_PER_MM

if TYPE_CHECKING:
    from collections.abc import Sequence

    from core.chip.scene import Block
    from core.masks.drawing import MaskDrawing
    from core.masks.options import MaskOptions
    from core.masks.order_facts import SheetFacts
    from core.masks.report import MaskFile

_CONFIRM = (
    "Units, layers, tone and orientation as said here, and the dimension to verify.",
    "The smallest feature and gap that the process can hold; values of the process are starting points.",
)
_CONFIRM_PIECES = "Whether figures may share an edge. If not, order the DXF with islands as loops."
_CAUTIONS_OF_ANY_PROCESS = (
    "Work with resists, developers, solvents, etchants, lasers and plasma only where trained and equipped for it; "
    "follow the rules of the place where the work is done.",
    "A channel under pressure can burst or lose its tubing: wear eye protection, prove with liquid before gas.",
    "Flows and pressures are design estimates: not for dosing, infusion, life support or any use where a wrong flow "
    "can hurt a person. A passive rectifier always leaks backwards.",
)


@dataclass(frozen=True, slots=True, kw_only=True)
class Section:
    """A heading and what stands under it, one item a line."""

    heading: str
    lines: tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Sheet:
    """A whole order sheet."""

    title: str
    sections: tuple[Section, ...]


def order_sheet(
    drawings: Sequence[MaskDrawing], files: Sequence[MaskFile], *, facts: SheetFacts, options: MaskOptions
) -> Sheet:
    """Return the order sheet of a mask set, the same for the same input.

    Parameters
    ----------
    drawings : sequence of MaskDrawing
        Every mask of the set.
    files : sequence of MaskFile
        Every mask file and picture, proven.
    facts : SheetFacts
        What only user and process know.
    options : MaskOptions
        How the files were written.
    """
    sections = [
        Section(heading="Order", lines=_order_lines(facts)),
        *([_forced(facts)] if facts.forced else []),
        Section(heading="Files", lines=tuple(line for file in files for line in _file_lines(file))),
        Section(heading="Units", lines=tuple(_unit_lines(options))),
        *(_drawing_section(drawing, options) for drawing in drawings),
        Section(heading="Tone and orientation", lines=_tone_lines(options)),
        Section(heading="Critical dimension", lines=tuple(critical_lines(drawings, facts, options))),
        Section(heading="Scale and allowance", lines=tuple(_scale_lines(drawings[0].scene.scale, facts))),
        Section(heading="Process", lines=_process_lines(facts)),
        *([Section(heading="Notes", lines=facts.notes)] if facts.notes else []),
        Section(
            heading="Please confirm with the shop before ordering",
            lines=_CONFIRM if options.tone is Tone.CUT else (*_CONFIRM, _CONFIRM_PIECES),
        ),
        Section(heading="Cautions", lines=facts.cautions or _CAUTIONS_OF_ANY_PROCESS),
    ]
    return Sheet(title=f"Mask order for chip {plain(facts.chip_title)}", sections=tuple(sections))


def plain(text: str) -> str:
    """Return text with a question mark for every sign that cannot be printed."""
    return "".join(c if c.isprintable() else "?" for c in text)


def _order_lines(facts: SheetFacts) -> tuple[str, ...]:
    return tuple(
        f"{label}: {plain(value) or TO_FILL_IN}"
        for label, value in (
            ("Ordered by", facts.lab),
            ("Drawn by", facts.author),
            ("Date", facts.date),
            ("Revision", facts.revision),
            ("Substrate", facts.substrate and f"{facts.substrate}; size and thickness: {TO_FILL_IN}"),
            ("Quantity", facts.quantity),
            ("Defect level", facts.defect_level),
            ("Pellicle", ""),
            ("Contact for questions", ""),
        )
    )


def _forced(facts: SheetFacts) -> Section:
    return Section(
        heading="WRITTEN IN SPITE OF THESE FINDINGS",
        lines=("Whoever ordered overrode them knowingly; they have not been cured.", *map(plain, facts.forced)),
    )


def _file_lines(file: MaskFile) -> list[str]:
    return [f"{file.name}, {file.format}, {file.size_bytes} bytes, SHA-256 {file.sha256}", *file.proofs]


def _unit_lines(options: MaskOptions) -> list[str]:
    lines = []
    if MaskFormat.DXF in options.formats:
        header = "" if options.dxf_version is DxfVersion.R12 else " ($INSUNITS 4)"
        copies = "no blocks" if options.is_flat else "repeated shapes are inserts that only shift"
        lines.append(
            f"DXF {options.dxf_version}: coordinates are millimetres{header}, 1:1, model space, true arcs; {copies}."
        )
    if MaskFormat.GDSII in options.formats:
        lines.append(
            f"GDSII: user unit 1 micrometre, database unit 1 nanometre, drawing grid {options.grid_nm} nm; arcs are "
            f"straight edges that lie within {options.chord_tolerance_um:g} um of the arc."
        )
    return lines


def _drawing_section(drawing: MaskDrawing, options: MaskOptions) -> Section:
    x0, y0, x1, y1 = (value / UM_PER_MM for value in drawing.bounds_um)
    middle = f"({(x0 + x1) / 2.0:.6f}, {(y0 + y1) / 2.0:.6f}) mm"
    is_centred = drawing.scene.top.kind in {BlockKind.PLATE, BlockKind.CHIP}
    where = f"(0, 0) of the data; the middle of the extents is {middle}" if is_centred else f"the middle, {middle}"
    lines = [
        *_layer_lines(drawing, options),
        *(_operation_lines(drawing) if options.tone is Tone.CUT else _mask_lines(drawing, options)),
        f"Extents: x {x0:.6f} to {x1:.6f} mm, y {y0:.6f} to {y1:.6f} mm.",
        f"To verify: overall length along x {x1 - x0:.6f} mm, height along y {y1 - y0:.6f} mm.",
        f"Centring: to stand at the centre of the plate: {where}.",
        *(_channel_line(drawing, block) for block in drawing.blocks if block.body is not None),
    ]
    return Section(heading=f"Mask {drawing.stem}", lines=tuple(lines))


def _layer_lines(drawing: MaskDrawing, options: MaskOptions) -> list[str]:
    has_gdsii, has_dxf = (kind in options.formats for kind in (MaskFormat.GDSII, MaskFormat.DXF))
    lines = [f"One top cell in GDSII: {drawing.stem}."] if has_gdsii else []
    if has_dxf:
        lines.append("In DXF everything stands in the model space.")
    for layer in drawing.layers:
        number = f" (GDSII layer {LAYERS[layer].gdsii_number}, data type 0)" if has_gdsii else ""
        lines.append(f"Layer {LAYERS[layer].dxf_name}{number}: {LAYERS[layer].meaning}.")
    return lines


def _mask_lines(drawing: MaskDrawing, options: MaskOptions) -> list[str]:
    on_mask = [LAYERS[layer].dxf_name for layer in drawing.layers if layer in ON_MASK]
    apart = [LAYERS[layer].dxf_name for layer in drawing.layers if layer not in ON_MASK]
    lines = [f"One mask, to be named {drawing.stem} on the plate: {' OR '.join(on_mask)}."] if on_mask else []
    if MaskFormat.DXF in options.formats and options.islands is IslandMode.LOOPS and drawing.island_count:
        first, *others = on_mask
        formula = " OR ".join([f"{first} NOT {ISLAND_LAYER.dxf_name}", *others])
        lines.append(f"Layer {ISLAND_LAYER.dxf_name} (DXF alone): {ISLAND_LAYER.meaning}.")
        lines.append(f"In DXF please combine, left to right: {formula}. In GDSII nothing is to be taken out.")
    elif on_mask:
        lines.append("Channels are cut into butting pieces without holes; nothing is to be taken out.")
    if apart:
        lines.append(f"Not on the mask, for drilling and cutting: {', '.join(apart)}.")
    return lines


def _operation_lines(drawing: MaskDrawing) -> list[str]:
    order = [LAYERS[layer].dxf_name for layer in WORKING_ORDER if layer in drawing.layers]
    return [
        f"One operation for each layer, in this order, which is also the order in the DXF file: {', '.join(order)}.",
        "TEXT and MARKS are to be engraved or scored, or left out; every other line is worked through or to its depth.",
        "Inner loops come before the loops they lie in; CUT frees the chip and comes last.",
    ]


def _channel_line(drawing: MaskDrawing, block: Block) -> str:
    assert block.body is not None
    channel, scale, copies = block.body.channel, block.body.scale, drawing.copies_of(block)
    islands = len(block.body.outline.islands)
    return (
        f"Channel {drawing.name_of(block)} ('{plain(block.title or block.name)}'), {copies} time{'s' * (copies != 1)}: "
        f"drawn channel width {channel.channel_width_um * scale:.6g} um, loop width "
        f"{channel.loop_width_um * scale:.6g} um, depth {channel.depth_um:g} um, "
        f"{islands} island{'s' * (islands != 1)}."
    )


def _tone_lines(options: MaskOptions) -> tuple[str, ...]:
    rest = {
        Tone.CLEAR: "Everything that is not drawn is dark. The shapes on the mask's layers become transparent.",
        Tone.DARK: "Everything that is not drawn is clear. The shapes on the mask's layers become opaque.",
        Tone.CUT: "Lines are closed and of zero width; the beam, blade or tool follows them as said under allowance.",
    }
    return (
        f"Tone: {options.tone}. {rest[options.tone]} See the picture.",
        f"Orientation: as drawn, {options.reading}. The files are not mirrored; nothing may be mirrored silently.",
    )


def _scale_lines(scale: float, facts: SheetFacts) -> list[str]:
    if scale == 1.0:
        lines = ["Scale 1.0000: the drawing has not been enlarged, and the shop does not scale it."]
    else:
        lines = [
            f"Scale {scale:.6f} is ALREADY APPLIED in the files, once, about (0, 0), by the designer; "
            "the shop does not scale again."
        ]
    return [*lines, *([facts.scale_words] if facts.scale_words else []), *facts.allowance]


def _process_lines(facts: SheetFacts) -> tuple[str, ...]:
    values = tuple(f"{label}: {value}" for label, value in facts.process_values)
    return (f"Made by: {plain(facts.process_name) or TO_FILL_IN}", *values)
