"""The right half of the export dialog: what will be written, and the proof afterwards, as rich text."""

from __future__ import annotations

from html import escape
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from pathlib import Path

    from core.masks.report import MaskFile, MaskSetReport, MaskSummary


def summary_page(summary: MaskSummary, *, folder: Path) -> str:
    """Return the page before writing."""
    rows = "".join(f"<li>{escape(sentence)}</li>" for sentence in summary.sentences)
    facts = (
        "Every mask is read back and compared with the drawing before its file gets its name.",
        "Files of the same name are replaced.",
    )
    told = "".join(f"<p>{fact}</p>" for fact in facts)
    return f"<p><b>Into</b> {escape(str(folder))}</p><ul>{rows}</ul>{told}"


def proof_page(report: MaskSetReport) -> str:
    """Return the page after writing: files, sizes, checksums and what reading back has shown."""
    return f"<p><b>In</b> {escape(str(report.folder))}</p>" + "".join(_file_part(file) for file in report.files)


def _file_part(file: MaskFile) -> str:
    proofs = "".join(f"<li>{escape(sentence)}</li>" for sentence in file.proofs)
    return (
        f"<p><b>{escape(file.name)}</b><br>{escape(file.format)}, {file.size_bytes:,} bytes<br>"
        f"<small>SHA-256 {file.sha256}</small></p>" + (f"<ul>{proofs}</ul>" if proofs else "")
    )
