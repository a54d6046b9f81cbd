"""The plain text that goes with mask files: units, layers, a dimension to verify, cautions."""

from __future__ import annotations

from textwrap import fill
from typing import TYPE_CHECKING

from core.masks.options import DxfVersion, IslandMode, MaskFormat

if TYPE_CHECKING:
    from collections.abc import Sequence

    from core.masks.drawing import MaskDrawing, PlacedChannel
    from core.masks.options import MaskOptions
    from core.masks.report import MaskFile

_CAUTIONS = """\
Please confirm with the shop before ordering
- Units, layer, tone and orientation as said above, and the dimension to verify.
- The smallest feature and gap the process can hold; no allowance for etching, kerf or shrinkage has been made.
- Whether figures may share an edge. If not, order the DXF with islands as loops.

Cautions
- Work with resists, developers, solvents, etchants, lasers and plasma only where trained and equipped for it.
- A channel under pressure can burst or lose its tubing: wear eye protection, prove with liquid before gas.
- Flows and pressures are design estimates: not for dosing, infusion, life support or any use where a wrong
  flow can hurt a person. A passive rectifier always leaks backwards.
"""


def note_text(
    drawings: Sequence[MaskDrawing], files: Sequence[MaskFile], *, chip_name: str, options: MaskOptions
) -> str:
    """Return the note for a mask set, the same for the same input.

    Parameters
    ----------
    drawings : sequence of MaskDrawing
        Every mask of the set.
    files : sequence of MaskFile
        Every file of the set but this note, proven.
    chip_name : str
        Name of the chip as the user typed it.
    options : MaskOptions
        How the files were written.
    """
    lines = [f"Mask files of chip {_plain(chip_name)}", "", "Drawn shapes are the channel.", *_orientation(), ""]
    lines += ["Units and layers", *_units(options), ""]
    for drawing in drawings:
        lines += _drawing_lines(drawing)
    lines += ["Files", *(line for file in files for line in _file_lines(file)), ""]
    return "\n".join(lines) + "\n" + _CAUTIONS


def _orientation() -> list[str]:
    return [
        "Orientation: as drawn, seen from the side from which the channels are to be seen; nothing is mirrored.",
        "Scale 1.0000: nothing has been compensated.",
    ]


def _units(options: MaskOptions) -> list[str]:
    channel, island = options.channel_layer, options.island_layer
    lines = []
    if MaskFormat.DXF in options.formats:
        header = "" if options.dxf_version is DxfVersion.R12 else " ($INSUNITS 4)"
        lines.append(f"- DXF {options.dxf_version}: coordinates are millimetres{header}, arcs are true arcs.")
        lines.append(f"  Layer {channel.dxf_name}: {channel.meaning}.")
        if options.islands is IslandMode.LOOPS:
            lines.append(f"  Layer {island.dxf_name}: {island.meaning}.")
            lines.append(f"  Please combine, left to right: {channel.dxf_name} NOT {island.dxf_name}")
        else:
            lines.append("  Channels are cut into butting pieces without holes; no boolean is needed.")
    if MaskFormat.GDSII in options.formats:
        lines.append("- GDSII: user unit 1 micrometre, grid 1 nanometre; arcs are straight edges that lie within")
        lines.append(f"  {options.chord_tolerance_um:g} um of the arc. No boolean is needed.")
        lines.append(f"  Layer {channel.gdsii_number}, data type 0: {channel.meaning}.")
    return lines


def _drawing_lines(drawing: MaskDrawing) -> list[str]:
    x0, y0, x1, y1 = (value / 1000.0 for value in drawing.bounds_um)
    return [
        f"Mask {drawing.stem} (top cell in GDSII)",
        f"- Extents: x {x0:.6f} to {x1:.6f} mm, y {y0:.6f} to {y1:.6f} mm.",
        f"- To verify: overall length along x {x1 - x0:.6f} mm, height along y {y1 - y0:.6f} mm.",
        *(_channel_line(channel) for channel in drawing.channels),
        "",
    ]


def _channel_line(channel: PlacedChannel) -> str:
    parameters = channel.shape.parameters
    islands = len(channel.outline.islands)
    return (
        f"- {channel.name} ('{_plain(channel.title)}'): channel width {parameters.channel_width_um:g} um, "
        f"loop width {parameters.loop_width_um:g} um, depth {parameters.depth_um:g} um, "
        f"{islands} island{'s' * (islands != 1)}."
    )


def _file_lines(file: MaskFile) -> list[str]:
    proofs = "\n".join(fill(proof, 110, initial_indent="  ", subsequent_indent="  ") for proof in file.proofs)
    return [
        f"- {file.name}, {file.format}, {file.size_bytes} bytes",
        f"  SHA-256 {file.sha256}",
        *proofs.splitlines(),
    ]


def _plain(text: str) -> str:
    return "".join(c if c.isprintable() else "?" for c in text)
