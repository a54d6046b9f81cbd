"""The order sheet as plain text."""

from __future__ import annotations

from textwrap import fill
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from core.masks.sheet import Sheet

_WIDTH = 110


def sheet_text(sheet: Sheet) -> str:
    """Return the order sheet as plain text, lines of 110 signs at most where words allow it.

    Parameters
    ----------
    sheet : Sheet
        Headings and lines.
    """
    lines = [sheet.title, "=" * min(len(sheet.title), _WIDTH)]
    for section in sheet.sections:
        lines += ["", section.heading]
        lines += [_wrapped(line) for line in section.lines]
    return "\n".join(lines) + "\n"


def _wrapped(line: str) -> str:
    return fill(line, _WIDTH, initial_indent="- ", subsequent_indent="  ", break_long_words=False)
