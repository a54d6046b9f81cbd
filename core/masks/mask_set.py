"""The one way to mask files: drawn, written, read back, proven, and only then put in place."""

from __future__ import annotations

import hashlib
from pathlib import Path
from typing import TYPE_CHECKING

from core.masks.drawing import LONGEST_CHIP_NAME, MaskDrawing, arranged
from core.masks.dxf import dxf_rings, dxf_text
from core.masks.gdsii import gdsii_bytes
from core.masks.gdsii_cells import gdsii_cells
from core.masks.names import safe_name
from core.masks.note import note_text
from core.masks.options import DxfVersion, IslandMode, MaskFormat, MaskOptions
from core.masks.placing import put_in_place, told_plainly, workshop, write_durably
from core.masks.preview import preview_svg
from core.masks.proof import drawn_layers, prove_dxf, prove_gdsii
from core.masks.report import MaskFile, MaskSetReport, MaskSummary, PlannedFile

if TYPE_CHECKING:
    import os
    from collections.abc import Callable, Sequence

    from core.geometry.shape import ChannelShape

_ISLAND_WORDS = {
    IslandMode.PIECES: "the channel is cut into butting pieces without holes",
    IslandMode.LOOPS: "islands are loops on their own layer, to be taken out by NOT",
}


def write_mask_set(
    named_shapes: Sequence[tuple[str, ChannelShape]],
    *,
    folder: str | os.PathLike[str],
    chip_name: str,
    options: MaskOptions | None = None,
    report: Callable[[int, int, str], None] | None = None,
) -> MaskSetReport:
    """Write the mask files of a chip, with a note and a preview; all of them or none.

    Every mask is read back with readers that share nothing with the writers and compared with
    the outline before any file gets its final name. Files of the same name are replaced.

    Parameters
    ----------
    named_shapes : sequence of (str, ChannelShape)
        Name of each parameter set, and its shape.
    folder : path
        Where the files go; made if missing.
    chip_name : str
        Name of the chip as the user typed it.
    options : MaskOptions, optional
        Formats and the rest; the defaults write DXF R2000 and GDSII, one of each per set.
    report : callable, optional
        Called before each mask with step, number of steps and what is being done. Whatever it
        raises ends the work and leaves no file.

    Returns
    -------
    MaskSetReport
        Files with sizes, checksums and proofs.

    Raises
    ------
    ExportError
        If a shape cannot be used, a file cannot be written, or one does not read back as drawn.
        The folder is then as it was before.
    """
    options = options or MaskOptions()
    folder = Path(folder)
    drawings = arranged(named_shapes, chip_name=chip_name, options=options)
    with told_plainly(folder), workshop(folder) as new:
        files: list[MaskFile] = []
        for step, drawing in enumerate(drawings):
            if report is not None:
                report(step, len(drawings), f"Writing, reading back and comparing {drawing.stem}")
            files += _written(new, drawing, options)
        note = note_text(drawings, files, chip_name=chip_name, options=options)
        files.append(_kept(new / _note_name(chip_name), "text", note.encode()))
        put_in_place(new, folder, [file.name for file in files])
    return MaskSetReport(folder=folder, files=tuple(files))


def mask_summary(
    named_shapes: Sequence[tuple[str, ChannelShape]],
    options: MaskOptions | None = None,
    *,
    chip_name: str = "CHIP",
) -> MaskSummary:
    """Return what would be written, without writing it.

    Parameters
    ----------
    named_shapes : sequence of (str, ChannelShape)
        Name of each parameter set, and its shape.
    options : MaskOptions, optional
        Formats and the rest.
    chip_name : str
        Name of the chip as the user typed it.

    Returns
    -------
    MaskSummary
        File names, layers, sizes and counts.

    Raises
    ------
    ExportError
        If a shape cannot be used.
    """
    options = options or MaskOptions()
    drawings = arranged(named_shapes, chip_name=chip_name, options=options)
    files = [file for drawing in drawings for file in _planned(drawing, options)]
    files.append(PlannedFile(name=_note_name(chip_name), format="text"))
    return MaskSummary(
        files=tuple(files),
        islands=_ISLAND_WORDS[options.islands],
        chord_tolerance_um=options.chord_tolerance_um,
        sentences=(*(_planned_sentence(file) for file in files), *_choices(options)),
    )


def _written(new: Path, drawing: MaskDrawing, options: MaskOptions) -> list[MaskFile]:
    files = []
    for kind in options.formats:
        path = new / _mask_name(drawing, kind, options)
        if kind is MaskFormat.DXF:
            rings = dxf_rings(drawing, options)
            data = dxf_text(rings, bounds_um=drawing.bounds_um, version=options.dxf_version).encode("ascii")
            prove = prove_dxf
        else:
            cells = gdsii_cells(drawing, chord_tolerance_um=options.chord_tolerance_um)
            data = gdsii_bytes(cells, layer=options.channel_layer.gdsii_number, library=drawing.stem)
            prove = prove_gdsii
        write_durably(path, data)
        proof = prove(path, drawing, options)
        files.append(
            MaskFile(
                name=path.name,
                format=_format_words(kind, options),
                size_bytes=len(data),
                sha256=hashlib.sha256(data).hexdigest(),
                area_um2=proof.area_um2,
                bounds_um=proof.bounds_um,
                island_count=proof.island_count,
                proofs=proof.sentences,
            )
        )
    if options.has_preview:
        files.append(_kept(new / f"{drawing.stem}.svg", "SVG", preview_svg(drawing).encode("ascii")))
    return files


def _kept(path: Path, words: str, data: bytes) -> MaskFile:
    write_durably(path, data)
    return MaskFile(name=path.name, format=words, size_bytes=len(data), sha256=hashlib.sha256(data).hexdigest())


def _planned(drawing: MaskDrawing, options: MaskOptions) -> list[PlannedFile]:
    x0, y0, x1, y1 = drawing.bounds_um
    files = []
    for kind in options.formats:
        if kind is MaskFormat.DXF:
            counts = [len(ring.bulges) for ring in dxf_rings(drawing, options)]
            layers = drawn_layers(drawing, options)
        else:
            cells = gdsii_cells(drawing, chord_tolerance_um=options.chord_tolerance_um)
            counts = [len(ring) for cell in cells for ring in cell.rings_nm]
            layers = (str(options.channel_layer.gdsii_number),)
        files.append(
            PlannedFile(
                name=_mask_name(drawing, kind, options),
                format=_format_words(kind, options),
                layers=layers,
                width_um=x1 - x0,
                height_um=y1 - y0,
                channel_count=len(drawing.channels),
                island_count=drawing.island_count,
                figure_count=len(counts),
                vertex_count=sum(counts),
            )
        )
    if options.has_preview:
        files.append(PlannedFile(name=f"{drawing.stem}.svg", format="SVG"))
    return files


def _choices(options: MaskOptions) -> list[str]:
    sentences = []
    if MaskFormat.DXF in options.formats:
        sentences.append(f"DXF: millimetres, true arcs; {_ISLAND_WORDS[options.islands]}.")
    if MaskFormat.GDSII in options.formats:
        sentences.append(f"GDSII: 1 nm grid; arcs become straight edges within {options.chord_tolerance_um:g} um.")
    return sentences


def _planned_sentence(file: PlannedFile) -> str:
    if not file.layers:
        return f"{file.name}: {file.format}."
    plural = "s" * (len(file.layers) > 1)
    return (
        f"{file.name}: {file.format}, layer{plural} {', '.join(file.layers)}, "
        f"{file.width_um / 1000.0:.3f} x {file.height_um / 1000.0:.3f} mm, "
        f"{file.channel_count} channel{'s' * (file.channel_count != 1)}, "
        f"{file.island_count} island{'s' * (file.island_count != 1)}, "
        f"{file.figure_count} figures with {file.vertex_count} vertices."
    )


def _format_words(kind: MaskFormat, options: MaskOptions) -> str:
    return f"DXF {options.dxf_version}" if kind is MaskFormat.DXF else str(kind)


def _mask_name(drawing: MaskDrawing, kind: MaskFormat, options: MaskOptions) -> str:
    if kind is MaskFormat.GDSII:
        return f"{drawing.stem}.gds"
    # R12 cannot say its unit in the header, so that its name does
    return f"{drawing.stem}_R12_MM.dxf" if options.dxf_version is DxfVersion.R12 else f"{drawing.stem}.dxf"


def _note_name(chip_name: str) -> str:
    return f"{safe_name(chip_name, longest=LONGEST_CHIP_NAME, fallback='CHIP')}_README.txt"
