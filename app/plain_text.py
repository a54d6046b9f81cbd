"""Answers of the command line as text to read, or as JSON for scripts."""

from __future__ import annotations

import json
import math
from typing import TYPE_CHECKING

from core.errors import shown

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping, Sequence

    from core.findings import Finding
    from core.fluids import FluidState
    from core.masks.report import MaskFile, MaskSetReport
    from core.operating import OperatingPoint

# heading, unit, key of the score
_COLUMNS = (
    ("flow", "uL/min", "flow_ul_min"),
    ("Re", "", "reynolds"),
    ("forward", "Pa", "forward_pressure_pa"),
    ("reverse", "Pa", "reverse_pressure_pa"),
    ("band", "+- %", "error_band_percent"),
    ("Di", "", "diodicity"),
    ("Di - 1", "", "rectification"),
    ("band", "+- %", "rectification_band_percent"),
    ("loop share", "forward", "loop_share_forward"),
    ("loop share", "reverse", "loop_share_reverse"),
    ("in range", "", "valid"),
)


def as_json(answer: object) -> str:
    """Return an answer as JSON; a number that does not exist becomes null."""
    return json.dumps(_with_null(answer), indent=2, allow_nan=False)


def _with_null(value: object) -> object:
    if isinstance(value, dict):
        return {key: _with_null(each) for key, each in value.items()}
    if isinstance(value, list | tuple):
        return [_with_null(each) for each in value]
    return None if isinstance(value, float) and not math.isfinite(value) else value


def score_text(
    points: Sequence[Mapping[str, object]], *, title: str, operating: OperatingPoint, fluid: FluidState
) -> str:
    """Return scores as a table, with how they were got and what to keep in mind.

    Parameters
    ----------
    points : sequence of mapping
        Scores with the keys of the JSON answer, one for each flow.
    title : str
        What was scored.
    operating : OperatingPoint
        Fluid and temperature.
    fluid : FluidState
        Its density and viscosity.

    Returns
    -------
    str
        Several lines.
    """
    notes = dict.fromkeys(note for point in points for note in point["notes"])  # type: ignore[attr-defined]
    methods = ", ".join(dict.fromkeys(str(point["method"]) for point in points))
    return "\n".join(
        [
            title,
            f"{fluid.name} at {operating.temperature_c:g} degC: "
            f"{fluid.density_kg_m3:.4g} kg/m3, {fluid.viscosity_pa_s:.4g} Pa s",
            "",
            *_table([_cells(point) for point in points]),
            "",
            f"method: {methods}; forward and reverse are pressure drops, Di is reverse over forward",
            *_list("notes", notes),
        ]
    )


def findings_text(found: Sequence[tuple[str, Finding]], *, title: str) -> str:
    """Return findings one to a line; its set, the place on the drawing and the cure behind.

    Parameters
    ----------
    found : sequence of (str, Finding)
        Name of the set, empty for the chip as a whole, and what was found.
    title : str
        What was checked.
    """
    if not found:
        return f"{title}: no findings"
    lines = [f"{title}: {len(found)} finding{'s' if len(found) > 1 else ''}"]
    return "\n".join([*lines, *(_finding_line(name, finding) for name, finding in found)])


def _finding_line(name: str, finding: Finding) -> str:
    where = f"set {shown(name)}" if name else ""
    place = "" if finding.x_um is None else f"at {finding.x_um:.0f}, {finding.y_um:.0f} um"
    cure = "" if finding.cure is None else f"try {finding.cure[0]}={finding.cure[1]}"
    behind = "; ".join(filter(None, (where, place, cure)))
    return f"  {finding.severity:7} {finding.code}: {finding.message}{f' ({behind})' if behind else ''}"


def masks_text(report: MaskSetReport, *, title: str, left_out: Sequence[str]) -> str:
    """Return what was written and how it was proved, and what was left out."""
    return "\n".join(
        [
            f"{title}: {len(report.files)} files in {report.folder}",
            *(line for file in report.files for line in _file_lines(file)),
            *_list("left out, because they cannot be drawn (see 'check')", left_out),
        ]
    )


def _file_lines(file: MaskFile) -> list[str]:
    size = f"  {file.name}: {file.format}, {file.size_bytes} bytes, SHA-256 {file.sha256}"
    return [size, *(f"    - {proof}" for proof in file.proofs)]


def _cells(point: Mapping[str, object]) -> list[str]:
    return [_cell(point[key]) for _, _, key in _COLUMNS]


def _cell(value: object) -> str:
    if isinstance(value, bool):
        return "yes" if value else "NO"
    return f"{value:.4g}" if isinstance(value, float) else "-" if value is None else str(value)


def _table(rows: Iterable[list[str]]) -> list[str]:
    """Return lines with right-aligned columns under a heading and a line of units."""
    lines = [[heading for heading, _, _ in _COLUMNS], [unit for _, unit, _ in _COLUMNS], *rows]
    widths = [max(len(line[column]) for line in lines) for column in range(len(_COLUMNS))]
    return ["  ".join(cell.rjust(width) for cell, width in zip(line, widths, strict=True)) for line in lines]


def _list(heading: str, items: Iterable[str]) -> list[str]:
    lines = [f"  - {item}" for item in items]
    return [f"{heading}:", *lines] if lines else []
