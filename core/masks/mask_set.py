"""The one way to mask files: drawn, written, read back, proven, and only then put in place."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

from core.fabrication.choices import CopyMode, IslandMode
from core.masks.bare import bare_drawings
from core.masks.drawing import LONGEST_STEM, MaskDrawing
from core.masks.mask_files import kept, planned_files, written_mask, written_picture
from core.masks.names import safe_name
from core.masks.options import MaskFormat, MaskOptions
from core.masks.order_facts import SheetFacts
from core.masks.package import archive_bytes, checksum_list, prove_archive
from core.masks.placing import put_in_place, told_plainly, workshop
from core.masks.report import MaskFile, MaskSetReport, MaskSummary, PlannedFile
from core.masks.sheet import order_sheet
from core.masks.sheet_pdf import sheet_pdf
from core.masks.sheet_text import sheet_text
from core.units import UM_PER_MM

if TYPE_CHECKING:
    import os
    from collections.abc import Callable, Sequence

    from core.chip.scene import Scene
    from core.geometry.shape import ChannelShape

    Report = Callable[[int, int, str], None]

_ISLAND_WORDS = {
    IslandMode.PIECES: "the channel is cut into butting pieces without holes",
    IslandMode.LOOPS: "islands are loops on their own layer, to be taken out by NOT",
    IslandMode.NESTED: "islands are loops within loops, inner ones first, for cutting",
}
_WHOLE_SET = (("_ORDER.txt", "text"), ("_ORDER.pdf", "PDF"), ("_SHA256.txt", "checksums"), (".zip", "ZIP"))


def write_scene(
    scene: Scene,
    *,
    folder: str | os.PathLike[str],
    stem: str,
    options: MaskOptions,
    facts: SheetFacts,
    report: Report | None = None,
) -> MaskSetReport:
    """Write the mask set of a chip or plate: mask files, pictures, order sheet, checksums and an archive.

    Every mask is read back with readers that share nothing with the writers and compared with
    the scene before any file gets its final name. Files of the same name are replaced.

    Parameters
    ----------
    scene : Scene
        What stands on the mask, already enlarged if at all.
    folder : path
        Where the files go; made if missing.
    stem : str
        Name of the files without ending, for instance project and revision; made safe.
    options : MaskOptions
        Formats, tone and the rest; see ``options_of``.
    facts : SheetFacts
        What the order sheet says besides.
    report : callable, optional
        Called before each piece of work with step, number of steps and what is being done. Whatever it
        raises ends the work and leaves no file.

    Returns
    -------
    MaskSetReport
        Files with sizes, checksums and proofs.

    Raises
    ------
    ExportError
        If a shape cannot be held, a file cannot be written, or one does not read back as drawn.
        The folder is then as it was before.
    """
    drawing = MaskDrawing(scene, stem=stem, grid_nm=options.grid_nm)
    return _write([drawing], folder=Path(folder), stem=drawing.stem, options=options, facts=facts, report=report)


def scene_summary(scene: Scene, *, stem: str, options: MaskOptions) -> MaskSummary:
    """Return what ``write_scene`` would write, without writing it.

    Raises
    ------
    ExportError
        If a shape cannot be held.
    """
    drawing = MaskDrawing(scene, stem=stem, grid_nm=options.grid_nm)
    return _summary([drawing], stem=drawing.stem, options=options)


def write_mask_set(
    named_shapes: Sequence[tuple[str, ChannelShape]],
    *,
    folder: str | os.PathLike[str],
    chip_name: str,
    options: MaskOptions | None = None,
    facts: SheetFacts | None = None,
    report: Report | None = None,
) -> MaskSetReport:
    """Write the mask set of bare channels; all files or none. See ``write_scene``.

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
    facts : SheetFacts, optional
        What the order sheet says besides.
    report : callable, optional
        As for ``write_scene``.

    Returns
    -------
    MaskSetReport
        Files with sizes, checksums and proofs.

    Raises
    ------
    ExportError
        If a shape cannot be used, or as for ``write_scene``.
    """
    options = _for_bare_channels(options)
    drawings = bare_drawings(named_shapes, chip_name=chip_name, options=options)
    return _write(
        drawings,
        folder=Path(folder),
        stem=_set_stem(chip_name),
        options=options,
        facts=facts or SheetFacts(chip_title=chip_name),
        report=report,
    )


def mask_summary(
    named_shapes: Sequence[tuple[str, ChannelShape]],
    options: MaskOptions | None = None,
    *,
    chip_name: str = "CHIP",
) -> MaskSummary:
    """Return what ``write_mask_set`` would write, without writing it.

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
    options = _for_bare_channels(options)
    drawings = bare_drawings(named_shapes, chip_name=chip_name, options=options)
    return _summary(drawings, stem=_set_stem(chip_name), options=options)


def _for_bare_channels(options: MaskOptions | None) -> MaskOptions:
    """Return the choices for channels each of which stands there once: nothing is gained by inserts."""
    return replace(options or MaskOptions(), copies=CopyMode.FLAT)


def _set_stem(chip_name: str) -> str:
    return safe_name(chip_name, longest=LONGEST_STEM, fallback="CHIP")


def _write(
    drawings: Sequence[MaskDrawing],
    *,
    folder: Path,
    stem: str,
    options: MaskOptions,
    facts: SheetFacts,
    report: Report | None,
) -> MaskSetReport:
    work = [(drawing, kind) for drawing in drawings for kind in options.formats]
    with told_plainly(folder), workshop(folder) as new:
        files: list[MaskFile] = []
        for step, (drawing, kind) in enumerate(work):
            _tell(report, step, len(work) + 1, f"Writing, reading back and comparing {drawing.stem}, {kind}")
            files.append(written_mask(new, drawing, kind, options))
            if kind is options.formats[-1] and options.has_preview:
                files.append(written_picture(new, drawing, options))
        _tell(report, len(work), len(work) + 1, "Writing the order sheet and packing everything")
        sheet = order_sheet(drawings, files, facts=facts, options=options)
        data = (sheet_text(sheet).encode(), sheet_pdf(sheet, drawings, tone=options.tone))
        files += [kept(new / f"{stem}{end}", words, each) for (end, words), each in zip(_WHOLE_SET, data, strict=False)]
        (end, words), (zip_end, zip_words) = _WHOLE_SET[2:]
        files.append(kept(new / f"{stem}{end}", words, checksum_list(files).encode("ascii")))
        archive = kept(new / f"{stem}{zip_end}", zip_words, archive_bytes(new, [file.name for file in files]))
        prove_archive(new / archive.name, files)
        files.append(replace(archive, proofs=(f"Read back: all {len(files)} files, each with its checksum.",)))
        put_in_place(new, folder, [file.name for file in files])
    return MaskSetReport(folder=folder, files=tuple(files))


def _tell(report: Report | None, step: int, steps: int, text: str) -> None:
    if report is not None:
        report(step, steps, text)


def _summary(drawings: Sequence[MaskDrawing], *, stem: str, options: MaskOptions) -> MaskSummary:
    files = [file for drawing in drawings for file in planned_files(drawing, options)]
    files += [PlannedFile(name=f"{stem}{end}", format=words) for end, words in _WHOLE_SET]
    return MaskSummary(
        files=tuple(files),
        islands=_ISLAND_WORDS[options.islands],
        chord_tolerance_um=options.chord_tolerance_um,
        sentences=(*(_planned_sentence(file) for file in files), *_choices(options)),
    )


def _choices(options: MaskOptions) -> list[str]:
    sentences = []
    if MaskFormat.DXF in options.formats:
        sentences.append(f"DXF: millimetres, true arcs; {_ISLAND_WORDS[options.islands]}.")
    if MaskFormat.GDSII in options.formats:
        sentences.append(
            f"GDSII: {options.grid_nm} nm grid; arcs become straight edges within {options.chord_tolerance_um:g} um."
        )
    return [*sentences, f"Tone: {options.tone}; {options.reading}; nothing is mirrored."]


def _planned_sentence(file: PlannedFile) -> str:
    if not file.layers:
        return f"{file.name}: {file.format}."
    plural = "s" * (len(file.layers) > 1)
    return (
        f"{file.name}: {file.format}, layer{plural} {', '.join(file.layers)}, "
        f"{file.width_um / UM_PER_MM:.3f} x {file.height_um / UM_PER_MM:.3f} mm, "
        f"{file.channel_count} channel{'s' * (file.channel_count != 1)}, "
        f"{file.island_count} island{'s' * (file.island_count != 1)}, "
        f"{file.figure_count} figures with {file.vertex_count} vertices."
    )
