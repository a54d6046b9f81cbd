"""The right half of the export dialog: what will be written, and the proof afterwards, as rich text."""

from __future__ import annotations

from html import escape
from typing import TYPE_CHECKING

from app.shown_values import ShownUnits, screen_words, value_text
from core.fabrication.process import FILES, PROCESS_FIELDS
from core.fabrication.shipped import CONFIRM, cautions_of
from core.findings import Severity

if TYPE_CHECKING:
    from collections.abc import Iterable
    from pathlib import Path

    from app.panels.export_work import ExportTask, Prospect
    from core.fabrication.process import Process
    from core.masks.report import MaskFile, MaskSetReport
    from core.project.checks import FoundIn

_SIGNS = {Severity.ERROR: "\N{BLACK DIAMOND} Blocks", Severity.WARNING: "\N{WHITE UP-POINTING TRIANGLE} Note"}
_STORED = ShownUnits(length="um", flow="uL/min", pressure="Pa")
_FACTS = (
    "Every file is read back and compared with the drawing before any gets its name: all are written, or none.",
    "Files of the same name are replaced.",
)


def summary_page(prospect: Prospect, task: ExportTask, *, folder: Path) -> str:
    """Return the page before writing."""
    process = task.project.process
    parts = [_findings_part(prospect.findings)]
    if prospect.sentences:
        parts.append(f"<p><b>Into</b> {escape(str(folder))}</p>{_listed(prospect.sentences)}")
        parts += [f"<p>{fact}</p>" for fact in _FACTS]
    parts.append(f"<p><b>Files as the process has them</b>, {escape(process.kind)}</p>{_files_table(process)}")
    parts.append(_cautions_part(process))
    return "".join(parts)


def proof_page(report: MaskSetReport, process: Process, *, forced: int) -> str:
    """Return the page after writing: files, sizes, checksums, what reading back has shown, and the cautions."""
    said = "findings were" if forced > 1 else "finding was"
    passed = f"<p><b>{forced} blocking {said} passed over</b>; the order sheet says so.</p>" if forced else ""
    files = "".join(_file_part(file) for file in report.files)
    return f"<p><b>In</b> {escape(str(report.folder))}</p>{passed}{files}{_cautions_part(process)}"


def _listed(sentences: Iterable[str]) -> str:
    return f"<ul>{''.join(f'<li>{escape(sentence)}</li>' for sentence in sentences)}</ul>"


def _findings_part(findings: tuple[FoundIn, ...]) -> str:
    if not findings:
        return ""
    worst_first = sorted(findings, key=lambda found: found[1].severity is not Severity.ERROR)
    return "<p><b>Findings</b></p>" + _listed(
        f"{_SIGNS[finding.severity]}{f', {name}' if name else ''}: {screen_words(finding.message)}"
        for name, finding in worst_first
    )


def _files_table(process: Process) -> str:
    rows = "".join(
        f"<tr><td>{escape(field.label)}&nbsp;&nbsp;</td>"
        f"<td>{escape(value_text(field, getattr(process, name), _STORED))}</td></tr>"
        for name, field in PROCESS_FIELDS.items()
        if field.group == FILES
    )
    return f"<table>{rows}</table>"


def _cautions_part(process: Process) -> str:
    return f"<p><b>Cautions</b></p>{_listed((*cautions_of(process.kind), CONFIRM))}"


def _file_part(file: MaskFile) -> str:
    proofs = _listed(file.proofs) if file.proofs else ""
    return (
        f"<p><b>{escape(file.name)}</b><br>{escape(file.format)}, {file.size_bytes:,} bytes<br>"
        f"<small>SHA-256 {file.sha256}</small></p>{proofs}"
    )
