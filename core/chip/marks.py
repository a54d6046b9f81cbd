"""Marks on a chip: for alignment, for its corners and cuts, and to measure by.

Each mark is a block of disjoint figures without holes. Everything is a multiple of one unit, the thinnest
line that comes out well. A mark has no mirror image of its own, so that a plate laid the wrong way round is seen.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from math import ceil
from typing import TYPE_CHECKING

from core.chip.figures import Box, polygon, rectangle
from core.chip.lettering import lettered
from core.chip.scene import Block, BlockKind, Figure, Layer, PlacedBlock
from core.fabrication.choices import Allowance
from core.fabrication.making import wall_shift_um
from core.units import UM_PER_MM

if TYPE_CHECKING:
    from collections.abc import Iterable

    from core.fabrication.process import Process
    from core.geometry.contour import Outline

LEAST_UNIT_UM = 20.0
FINEST_UM = 3.0  # smallest mark still told from its neighbours through thick resist
MOST_UNITS = 8  # length of the arms of corner marks, in units
LONGEST_SCALE_BAR_UM = 10000.0
LINE_PITCH = 1.7  # from line to line of words, in heights
_MARK_HALF = 6  # half the size of an alignment mark, in units


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Stamp:
    """A mark or a line of words, ready to be put somewhere.

    Attributes
    ----------
    block : Block
        What is drawn, round its own origin.
    box_um : tuple of float
        Room that it takes, with the clear window it needs round itself [um].
    parts_um : tuple of boxes
        What it covers of that room, where that is much less [um].
    """

    block: Block
    box_um: Box
    parts_um: tuple[Box, ...] = ()


def finest_um(process: Process, *, depth_um: float) -> float:
    """Return the finest line or gap of marks and words that comes out [um].

    Parameters
    ----------
    process : Process
        How the chip is made; nothing is finer than its smallest drawn feature.
    depth_um : float
        Largest depth on the chip. Marks and words are drawn as they shall be: unless the shop allows for it, walls
        of lines and gaps move by bias, undercut and kerf, and stay apart at four times that shift [um].
    """
    by_shop = process.allowance == Allowance.BY_SHOP
    shift = 0.0 if by_shop else abs(wall_shift_um(process, depth_um=depth_um))
    return max(process.min_drawn_um, 4.0 * shift)


def mark_unit_um(process: Process, *, depth_um: float) -> float:
    """Return the thickness of the lines of all marks: the finest that comes out, but at least 20 um [um]."""
    return float(ceil(max(finest_um(process, depth_um=depth_um), LEAST_UNIT_UM)))


@lru_cache(maxsize=64)
def alignment_mark(*, unit_um: float, number: int, finest_um: float) -> Stamp:
    """Return the mark to which a further layer is aligned.

    A cross to find it by, four brackets in place of a ring (lines along the axes come out best on film), and
    squares that halve from quarter to quarter down to the finest that the process draws. A row of dots counts
    the layer. A window of two units is kept free all round.

    Parameters
    ----------
    unit_um : float
        Thickness of the coarse lines; the mark is 12 units wide [um].
    number : int
        Number of the further layer, 1 to 4.
    finest_um : float
        Smallest square drawn, but never below 3 um [um].
    """
    u = unit_um
    outlines: list[Outline] = [polygon([(u * x, u * y) for x, y in _CROSS])]
    for across, up in _QUARTERS:
        outlines.append(polygon([(u * across * x, u * up * y) for x, y in _BRACKET]))
    side = 2.0 * u
    for across, up in _QUARTERS:
        if side < max(finest_um, FINEST_UM):
            break
        outlines.append(_square(across * 2.75 * u, up * 2.75 * u, side))
        side *= 0.5
    dots = [((2 * dot + 1 - _MARK_HALF) * u, -(_MARK_HALF + 1.5) * u) for dot in range(number)]
    outlines += [_square(x, y, u) for x, y in dots]
    reach = (_MARK_HALF + 2) * u
    title = f"Alignment mark for further layer {number}"
    return Stamp(block=_marks(f"ALIGN_{number}", title, outlines), box_um=(-reach, -reach - 2.0 * u, reach, reach))


_QUARTERS = ((1, 1), (-1, 1), (-1, -1), (1, -1))
_CROSS = ((0.5, 3), (-0.5, 3), (-0.5, 0.5), (-3, 0.5), (-3, -0.5), (-0.5, -0.5),
          (-0.5, -3), (0.5, -3), (0.5, -0.5), (3, -0.5), (3, 0.5), (0.5, 0.5))  # fmt: skip
_BRACKET = ((2, 6), (6, 6), (6, 2), (5, 2), (5, 5), (2, 5))


@lru_cache(maxsize=64)
def corner_mark(*, arm_um: float, unit_um: float, across: int, up: int, layer: Layer = Layer.MARKS) -> Stamp:
    """Return an L whose outer corner is the origin and whose arms run inwards.

    Parameters
    ----------
    arm_um, unit_um : float
        Length and thickness of the arms [um].
    across, up : int
        1 or -1: to which corner it belongs, right or left, upper or lower.
    layer : Layer
        ``MARKS``; or ``CUT``, where the outer sides of the arms are the cutting lines.
    """
    a, u = arm_um, unit_um
    ring = ((0.0, 0.0), (-a, 0.0), (-a, -u), (-u, -u), (-u, -a), (0.0, -a))
    outline = polygon([(across * x, up * y) for x, y in ring])
    name, title = ("CORNER", "Corner mark") if layer is Layer.MARKS else ("TICK", "Cutting tick")
    arms = tuple(_box_of(across * x, up * y) for x, y in ((-a, -u), (-u, -a)))
    side = f"{'U' if up > 0 else 'L'}{'R' if across > 0 else 'L'}"
    return Stamp(block=_marks(f"{name}_{side}", title, [outline], layer), box_um=outline.bounds_um, parts_um=arms)


def _box_of(x_um: float, y_um: float) -> Box:
    """Return the box between the origin and a point."""
    return min(0.0, x_um), min(0.0, y_um), max(0.0, x_um), max(0.0, y_um)


@lru_cache(maxsize=64)
def scale_bar(*, length_um: float, unit_um: float, text_height_um: float) -> Stamp:
    """Return a bar with upturned ends, from outer side to outer side of the length said beside it.

    Parameters
    ----------
    length_um : float
        Length on the part, at least three units [um].
    unit_um, text_height_um : float
        Thickness of its line, height of its words [um].
    """
    n, u = length_um, unit_um
    bar = polygon([(0, 0), (n, 0), (n, 3 * u), (n - u, 3 * u), (n - u, u), (u, u), (u, 3 * u), (0, 3 * u)])
    words = f"{n / UM_PER_MM:g} MM" if n >= UM_PER_MM else f"{n:g} UM"
    return _with_words(_marks("SCALE_BAR", f"Scale bar, {words}", [bar]), (n, 3.0 * u), words, text_height_um)


@lru_cache(maxsize=64)
def measuring_bars(
    *, width_um: float, drawn_um: float, least_um: float, length_um: float, text_height_um: float
) -> Stamp:
    """Return lines and gaps of the critical width of the chip and of its neighbours, to be measured.

    Parameters
    ----------
    width_um : float
        Critical width as wanted on the part: of the middle group, and said beside the bars [um].
    drawn_um : float
        What is drawn for it. Lines are drawn by the same amount off, and gaps by it the other way, so that lines
        and gaps of a group come out alike [um].
    least_um : float
        Smallest line or gap that may be drawn; groups below it are left out [um].
    length_um : float
        Length of the lines [um].
    text_height_um : float
        Height of the words [um].
    """
    off = width_um - drawn_um
    widths = [width_um * share for share in (0.75, 1.0, 1.25, 1.5)]
    widths = [width for width in widths if width - abs(off) >= least_um - 1e-9][:3] or [width_um]
    outlines: list[Outline] = []
    along = 0.0
    for width in widths:
        for line in range(3):
            left = along + 2.0 * line * width + 0.5 * off
            outlines.append(rectangle((left, 0.0, left + width - off, length_um)))
        along += 5.0 * width + 3.0 * widths[-1]
    size = (along - 3.0 * widths[-1], length_um)
    words = f"{width_um:.4g} UM"
    return _with_words(_marks("TEST_BARS", f"Test bars, {words}", outlines), size, words, text_height_um)


def words_stamp(lines: tuple[str, ...], *, height_um: float) -> Stamp:
    """Return lines of words below one another, from the lower left corner.

    Parameters
    ----------
    lines : tuple of str
        From the top downwards; blank ones are left out.
    height_um : float
        Height of capitals [um].
    """
    placed: list[PlacedBlock] = []
    width = 0.0
    written = [each for each in (lettered(line, height_um=height_um) for line in lines) if each.placed]
    for number, line in enumerate(reversed(written)):
        up = round(number * LINE_PITCH * height_um, 3)
        placed += [PlacedBlock(block=each.block, dx_um=each.dx_um, dy_um=up) for each in line.placed]
        width = max(width, line.width_um)
    height = (len(written) - 1) * LINE_PITCH * height_um + height_um if written else 0.0
    block = Block(name="LABEL", kind=BlockKind.MARKS, title=" / ".join(lines), placed=tuple(placed))
    return Stamp(block=block, box_um=(0.0, 0.0, width, height))


def _with_words(block: Block, size_um: tuple[float, float], words: str, text_height_um: float) -> Stamp:
    """Return a mark with its words to the right, all standing on one line."""
    line = lettered(words, height_um=text_height_um)
    left = round(size_um[0] + 0.7 * text_height_um, 3)
    placed = tuple(PlacedBlock(block=each.block, dx_um=left + each.dx_um) for each in line.placed)
    joined = Block(name=block.name, kind=block.kind, title=block.title, figures=block.figures, placed=placed)
    return Stamp(block=joined, box_um=(0.0, 0.0, left + line.width_um, max(size_um[1], text_height_um)))


def _square(x_um: float, y_um: float, side_um: float) -> Outline:
    half = 0.5 * side_um
    return rectangle((x_um - half, y_um - half, x_um + half, y_um + half))


def _marks(name: str, title: str, outlines: Iterable[Outline], layer: Layer = Layer.MARKS) -> Block:
    figures = tuple(Figure(layer=layer, outline=outline) for outline in outlines)
    return Block(name=name, kind=BlockKind.MARKS, title=title, figures=figures)
