"""Words as closed shapes that no plotter fills wrongly and out of which nothing drops."""

from __future__ import annotations

import unicodedata
from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING

import numpy as np

from core.chip.figures import polygon, thick_line
from core.chip.glyphs import BETWEEN_SIGNS, LEAST_GAP, SPACE, STAND_INS, STROKE, STROKES, UNITS_HIGH
from core.chip.scene import Block, BlockKind, Figure, Layer, PlacedBlock
from core.units import NM_PER_UM

if TYPE_CHECKING:
    from core.geometry.contour import Outline

UNKNOWN = "?"  # drawn for a sign that has no shape
THINNEST = min(STROKE, LEAST_GAP) / UNITS_HIGH  # thinnest stroke or gap, as a part of the height


@dataclass(frozen=True, slots=True, kw_only=True)
class Lettering:
    """One line of words.

    Attributes
    ----------
    placed : tuple of PlacedBlock
        One block per sign, from the lower left corner of the line; equal signs share one block.
    width_um, height_um : float
        Size of the line [um].
    unknown : str
        Signs that could not be drawn, each once; a question mark stands for each.
    """

    placed: tuple[PlacedBlock, ...]
    width_um: float
    height_um: float
    unknown: str


def drawable(text: str) -> tuple[str, str]:
    """Return the signs that will be drawn, and those that cannot be, each once.

    Small letters become capitals, accents are dropped.

    Examples
    --------
    >>> drawable("Größe 5 µm")
    ('GROSSE 5 UM', '')
    >>> drawable("Chip №7 ☃")
    ('CHIP NO7 ?', '☃')
    """
    signs: list[str] = []
    unknown: list[str] = []
    for given in text:
        decomposed = unicodedata.normalize("NFKD", STAND_INS.get(given, given)).upper()
        for sign in decomposed:
            for drawn in STAND_INS.get(sign, sign):
                if drawn in STROKES or drawn.isspace():
                    signs.append(" " if drawn.isspace() else drawn)
                elif not unicodedata.combining(drawn):
                    signs.append(UNKNOWN)
                    unknown.append(given)
    return " ".join("".join(signs).split()), "".join(dict.fromkeys(unknown))


def lettered(text: str, *, height_um: float) -> Lettering:
    """Return a line of words as blocks.

    Parameters
    ----------
    text : str
        Any text.
    height_um : float
        Height of capitals; strokes are 1/7 of it, gaps at least 1/10 [um].

    Returns
    -------
    Lettering
        Without blocks for text that is empty or blank.
    """
    signs, unknown = drawable(text)
    unit = height_um / UNITS_HIGH
    placed: list[PlacedBlock] = []
    along = 0.0
    for sign in signs:
        if sign == " ":
            along += SPACE * unit
            continue
        block, width = _sign_block(sign, height_um)
        placed.append(PlacedBlock(block=block, dx_um=round(along, 3)))
        along += width + BETWEEN_SIGNS * unit
    width = max(0.0, along - BETWEEN_SIGNS * unit) if placed else 0.0
    return Lettering(placed=tuple(placed), width_um=width, height_um=height_um, unknown=unknown)


@lru_cache(maxsize=1024)
def _sign_block(sign: str, height_um: float) -> tuple[Block, float]:
    """Return the block of a sign with its lower left corner at the origin, and its width [um]."""
    outlines = [_outline(stroke.split(), height_um / UNITS_HIGH) for stroke in STROKES[sign].split("|")]
    name = f"SIGN_{ord(sign):X}_{round(height_um * NM_PER_UM)}"
    figures = tuple(Figure(layer=Layer.TEXT, outline=outline) for outline in outlines)
    return Block(name=name, kind=BlockKind.SIGN, title=sign, figures=figures), max(
        outline.bounds_um[2] for outline in outlines
    )


def _outline(words: list[str], unit_um: float) -> Outline:
    is_area = words[0] == "area"
    points = unit_um * np.array([word.split(",") for word in words[is_area:]], dtype=float)
    return polygon(points) if is_area else thick_line(points, STROKE * unit_um)
