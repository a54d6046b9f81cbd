"""The order sheet as PDF, with a picture of every mask; the same bytes for the same sheet."""

from __future__ import annotations

from io import BytesIO
from typing import TYPE_CHECKING

from core.masks.picture_pdf import draw_picture

if TYPE_CHECKING:
    from collections.abc import Sequence

    from reportlab.pdfgen.canvas import Canvas

    from core.fabrication.choices import Tone
    from core.masks.drawing import MaskDrawing
    from core.masks.sheet import Sheet

_POINTS_PER_MM = 72.0 / 25.4
_PAGE = (210.0 * _POINTS_PER_MM, 297.0 * _POINTS_PER_MM)
_EDGE = 18.0 * _POINTS_PER_MM
_FONT, _BOLD = "Helvetica", "Helvetica-Bold"
_SIZE, _HEADING_SIZE, _TITLE_SIZE = 9.0, 11.0, 15.0
_LEADING = 1.3
_INDENT = 10.0
_BULLET = "\N{BULLET}"


def sheet_pdf(sheet: Sheet, drawings: Sequence[MaskDrawing], *, tone: Tone) -> bytes:
    """Return the order sheet as PDF.

    Parameters
    ----------
    sheet : Sheet
        Headings and lines.
    drawings : sequence of MaskDrawing
        A page with a picture is added for each.
    tone : Tone
        Shown in the pictures.
    """
    from reportlab.pdfgen.canvas import Canvas

    stream = BytesIO()
    canvas = Canvas(stream, pagesize=_PAGE, invariant=1, pageCompression=1)
    canvas.setTitle(_printable(sheet.title))
    canvas.setAuthor("")
    writer = _Writer(canvas, _printable(sheet.title))
    for section in sheet.sections:
        writer.heading(section.heading)
        for line in section.lines:
            writer.item(line)
    for number, drawing in enumerate(drawings):
        writer.new_page()
        writer.heading(f"Picture of mask {drawing.stem}")
        canvas.setFont(_FONT, _SIZE)
        room = (_EDGE, _EDGE, _PAGE[0] - 2.0 * _EDGE, writer.y - _EDGE - _SIZE)
        draw_picture(canvas, drawing, tone=tone, room=room, prefix=f"M{number}_")
    canvas.save()
    return stream.getvalue()


class _Writer:
    """Sets lines one below the other and turns the page when it is full."""

    def __init__(self, canvas: Canvas, title: str) -> None:
        self.canvas = canvas
        self.title = title
        self.page = 1
        self.y = _PAGE[1] - _EDGE
        self._line(title, _BOLD, _TITLE_SIZE, 0.0)
        self._foot()

    def new_page(self) -> None:
        self.canvas.showPage()
        self.page += 1
        self.y = _PAGE[1] - _EDGE
        self._foot()

    def heading(self, text: str) -> None:
        if self.y < _EDGE + 5.0 * _HEADING_SIZE:  # never a heading alone at the foot of a page
            self.new_page()
        self.y -= 0.6 * _HEADING_SIZE
        self._line(text, _BOLD, _HEADING_SIZE, 0.0)

    def item(self, text: str) -> None:
        from reportlab.lib.utils import simpleSplit

        lines = simpleSplit(_printable(text), _FONT, _SIZE, _PAGE[0] - 2.0 * _EDGE - _INDENT)
        for number, line in enumerate(lines):
            self._line(line, _FONT, _SIZE, _INDENT, before="" if number else _BULLET)

    def _line(self, text: str, font: str, size: float, indent: float, *, before: str = "") -> None:
        if self.y < _EDGE + 3.0 * _SIZE:
            self.new_page()
        self.y -= _LEADING * size
        self.canvas.setFont(font, size)
        if before:
            self.canvas.drawString(_EDGE, self.y, before)
        self.canvas.drawString(_EDGE + indent, self.y, _printable(text))

    def _foot(self) -> None:
        self.canvas.setFont(_FONT, 7.0)
        self.canvas.drawRightString(_PAGE[0] - _EDGE, 0.5 * _EDGE, f"{self.title}, page {self.page}")


def _printable(text: str) -> str:
    """Return text with a question mark for every sign that the standard fonts lack."""
    return text.encode("cp1252", "replace").decode("cp1252")
