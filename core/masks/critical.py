"""The critical dimension: the narrowest channel and gap and where they stand, for whoever inspects the mask."""

from __future__ import annotations

from dataclasses import replace
from math import isfinite
from typing import TYPE_CHECKING

from core.fabrication.choices import Tone
from core.geometry.clearances import narrowest
from core.masks.order_facts import TO_FILL_IN, CriticalDimension
from core.units import NM_PER_UM, UM_PER_MM

if TYPE_CHECKING:
    from collections.abc import Sequence

    from core.chip.scene import Block
    from core.masks.drawing import MaskDrawing
    from core.masks.options import MaskOptions
    from core.masks.order_facts import SheetFacts

# What a published price list of a mask shop holds, by size [um]; the shop's own word counts.
TOLERANCES_UM = ((10.0, 0.5), (50.0, 1.0), (127.0, 1.3), (250.0, 1.9))
_LARGEST_TOLERANCE_UM = 2.5
CUT_TOLERANCE_UM = 100.0  # what cutting services promise (common practice, no source)


def critical_dimensions(drawing: MaskDrawing) -> tuple[CriticalDimension, ...]:
    """Return the narrowest width and the narrowest gap of all channels on a mask, the smaller one first.

    Parameters
    ----------
    drawing : MaskDrawing
        Blocks and their places.

    Returns
    -------
    tuple of CriticalDimension
        Empty when the mask holds no channel.
    """
    found = [(each, block) for block in drawing.blocks for each in _narrowest(drawing, block)]
    smallest = (
        min((pair for pair in found if pair[0].is_drawn == is_drawn), key=lambda pair: pair[0].value_um, default=None)
        for is_drawn in (True, False)
    )
    placed = (_placed(drawing, *pair) for pair in smallest if pair is not None)
    return tuple(sorted(placed, key=lambda each: each.value_um))


def usual_tolerance_um(value_um: float) -> float:
    """Return the tolerance usually promised for a dimension of that size on a mask, to either side [um].

    Examples
    --------
    >>> usual_tolerance_um(40.0)
    1.0
    """
    return next((tolerance for size, tolerance in TOLERANCES_UM if value_um <= size), _LARGEST_TOLERANCE_UM)


def critical_lines(drawings: Sequence[MaskDrawing], facts: SheetFacts, options: MaskOptions) -> list[str]:
    """Return what the sheet says about the critical dimension of each mask.

    Parameters
    ----------
    drawings : sequence of MaskDrawing
        Every mask of the set.
    facts : SheetFacts
        May name a critical dimension, which then counts for all masks.
    options : MaskOptions
        Tells what drawn shapes become.
    """
    if facts.critical is not None:
        return [_words(facts.critical, options)]
    lines = []
    for drawing in drawings:
        found = critical_dimensions(drawing)
        lines += [f"{drawing.stem}: {_words(each, options)}" for each in found] or [f"{drawing.stem}: {TO_FILL_IN}"]
    return lines


def _words(critical: CriticalDimension, options: MaskOptions) -> str:
    tolerance = critical.tolerance_um
    usual = CUT_TOLERANCE_UM if options.tone is Tone.CUT else usual_tolerance_um(critical.value_um)
    given = f"+-{tolerance:g} um" if tolerance is not None else f"+-{usual:g} um unless the shop promises otherwise"
    return (
        f"{critical.what}, {critical.value_um:.6g} um as drawn, at x {critical.x_um / UM_PER_MM:.6f} mm, "
        f"y {critical.y_um / UM_PER_MM:.6f} mm; {_tone_of(critical, options)}; tolerance {given}."
    )


def _tone_of(critical: CriticalDimension, options: MaskOptions) -> str:
    if options.tone is Tone.CUT:
        return "between drawn lines"
    is_clear = (options.tone is Tone.CLEAR) == critical.is_drawn
    return f"{'clear' if is_clear else 'dark'} on the mask"


def _narrowest(drawing: MaskDrawing, block: Block) -> list[CriticalDimension]:
    """Return the narrowest width and gap of the channel of a block as drawn, in the block's own coordinates."""
    body, found = block.body, []
    if body is None:
        return []
    for row in {id(row.shape): row for row in reversed(body.folding.rows)}.values():
        narrow = narrowest(row.shape)
        for what, um, ends, is_drawn in (
            ("narrowest channel", narrow.width_um, narrow.width_at_um, True),
            ("narrowest solid", narrow.gap_um, narrow.gap_at_um, False),
        ):
            if isfinite(um):
                x, y = body.scale * row.placement.points(ends).mean(axis=0)
                found.append(
                    CriticalDimension(
                        what=f"{what} of {drawing.name_of(block)}",
                        value_um=float(um * body.scale),
                        x_um=float(x),
                        y_um=float(y),
                        is_drawn=is_drawn,
                    )
                )
    return found


def _placed(drawing: MaskDrawing, critical: CriticalDimension, block: Block) -> CriticalDimension:
    """Return a dimension of a block where the block first stands on the mask."""
    x, y = next((x, y) for other, x, y in drawing.placings() if other is block)
    return replace(critical, x_um=critical.x_um + x / NM_PER_UM, y_um=critical.y_um + y / NM_PER_UM)
