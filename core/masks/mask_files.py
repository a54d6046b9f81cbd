"""The files of one mask: written, read back and proven; or only foretold."""

from __future__ import annotations

import hashlib
from typing import TYPE_CHECKING

from core.fabrication.choices import DxfVersion
from core.masks.dxf import dxf_text
from core.masks.dxf_blocks import dxf_blocks
from core.masks.gdsii import gdsii_bytes
from core.masks.gdsii_cells import gdsii_cells
from core.masks.layers import LAYERS
from core.masks.options import MaskFormat
from core.masks.placing import write_durably
from core.masks.preview import preview_svg
from core.masks.proof import drawn_layers, prove_dxf, prove_gdsii
from core.masks.report import MaskFile, PlannedFile

if TYPE_CHECKING:
    from pathlib import Path

    from core.masks.drawing import MaskDrawing
    from core.masks.options import MaskOptions

LARGE_BYTES = 50_000_000
_LARGE_WORDS = "The file is larger than 50 MB: ask the shop whether it takes that, or write copies by reference."


def written_mask(new: Path, drawing: MaskDrawing, kind: MaskFormat, options: MaskOptions) -> MaskFile:
    """Write one mask file and prove it.

    Parameters
    ----------
    new : Path
        Folder to write into.
    drawing : MaskDrawing
        Blocks and their places.
    kind : MaskFormat
        DXF or GDSII.
    options : MaskOptions
        How it is written.

    Raises
    ------
    ExportError
        If a shape cannot be held, or the file does not read back as drawn.
    """
    path = new / mask_name(drawing, kind, options)
    if kind is MaskFormat.DXF:
        blocks = dxf_blocks(drawing, options)
        data = dxf_text(blocks, bounds_um=drawing.bounds_um, version=options.dxf_version).encode("ascii")
        prove = prove_dxf
    else:
        cells = gdsii_cells(drawing, chord_tolerance_um=options.chord_tolerance_um)
        data = gdsii_bytes(cells, library=drawing.stem)
        prove = prove_gdsii
    write_durably(path, data)
    proof = prove(path, drawing, options)
    return MaskFile(
        name=path.name,
        format=_format_words(kind, options),
        size_bytes=len(data),
        sha256=hashlib.sha256(data).hexdigest(),
        area_um2=proof.area_um2,
        bounds_um=proof.bounds_um,
        island_count=proof.island_count,
        proofs=(*proof.sentences, *([_LARGE_WORDS] if len(data) > LARGE_BYTES else [])),
    )


def written_picture(new: Path, drawing: MaskDrawing, options: MaskOptions) -> MaskFile:
    """Write the picture of a mask."""
    return kept(new / f"{drawing.stem}.svg", "SVG", preview_svg(drawing, options.tone).encode("ascii"))


def kept(path: Path, words: str, data: bytes) -> MaskFile:
    """Write a file that holds no mask, ``words`` telling its format."""
    write_durably(path, data)
    return MaskFile(name=path.name, format=words, size_bytes=len(data), sha256=hashlib.sha256(data).hexdigest())


def planned_files(drawing: MaskDrawing, options: MaskOptions) -> list[PlannedFile]:
    """Return the files of one mask as they would be written.

    Raises
    ------
    ExportError
        If a shape cannot be held.
    """
    files = [_planned(drawing, kind, options) for kind in options.formats]
    if options.has_preview:
        files.append(PlannedFile(name=f"{drawing.stem}.svg", format="SVG"))
    return files


def _planned(drawing: MaskDrawing, kind: MaskFormat, options: MaskOptions) -> PlannedFile:
    x0, y0, x1, y1 = drawing.bounds_um
    if kind is MaskFormat.DXF:
        counts = [len(ring.bulges) for block in dxf_blocks(drawing, options) for ring in block.rings]
        layers = drawn_layers(drawing, options)
    else:
        cells = gdsii_cells(drawing, chord_tolerance_um=options.chord_tolerance_um)
        counts = [len(ring) for cell in cells for _, ring in cell.rings_nm]
        layers = tuple(str(LAYERS[layer].gdsii_number) for layer in drawing.layers)
    return PlannedFile(
        name=mask_name(drawing, kind, options),
        format=_format_words(kind, options),
        layers=layers,
        width_um=x1 - x0,
        height_um=y1 - y0,
        channel_count=drawing.channel_count,
        island_count=drawing.island_count,
        figure_count=len(counts),
        vertex_count=sum(counts),
    )


def mask_name(drawing: MaskDrawing, kind: MaskFormat, options: MaskOptions) -> str:
    """Return the name of a mask file."""
    if kind is MaskFormat.GDSII:
        return f"{drawing.stem}.gds"
    # R12 cannot say its unit in the header, so that its name does
    return f"{drawing.stem}_R12_MM.dxf" if options.dxf_version is DxfVersion.R12 else f"{drawing.stem}.dxf"


def _format_words(kind: MaskFormat, options: MaskOptions) -> str:
    return f"DXF {options.dxf_version}" if kind is MaskFormat.DXF else str(kind)
