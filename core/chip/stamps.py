"""The marks that a plan asks for, and the room that they take."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from core.chip.marks import (
    LONGEST_SCALE_BAR_UM,
    MOST_UNITS,
    Stamp,
    alignment_mark,
    mark_unit_um,
    measuring_bars,
    scale_bar,
    words_stamp,
)
from core.fabrication.making import making_of
from core.units import round_length_um

if TYPE_CHECKING:
    from collections.abc import Iterable

    from core.chip.figures import Box
    from core.chip.plan import ChipPlan
    from core.fabrication.process import Process
    from core.parameters import ChannelParameters


@dataclass(frozen=True, slots=True, kw_only=True)
class Critical:
    """The narrowest channel of the chip.

    Attributes
    ----------
    width_um, drawn_um : float
        Its width as wanted, and as drawn for it (or as made, where that is shown) [um].
    depth_um : float
        Largest depth on the chip [um].
    """

    width_um: float
    drawn_um: float
    depth_um: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Stamps:
    """The marks that a plan asks for, not placed yet; see ``stamps_of``."""

    unit_um: float
    gap_um: float  # between marks and channels
    word_gap_um: float  # between words that belong to different things: one height of their letters
    pairs: tuple[Stamp, ...]
    label_um: tuple[float, float]
    scale_bar: Stamp | None
    bars: Stamp | None

    @property
    def rims_um(self) -> Box:
        """Room along the left, lower, right and upper edge that the marks take when channels leave it free [um]."""
        u = self.unit_um
        side = 2.0 * self.pairs[0].box_um[2] if self.pairs else 3.0 * u
        low = max([stamp.box_um[3] for stamp in (self.scale_bar, self.bars) if stamp], default=0.0)
        gap = self.gap_um + u
        return side + gap, 2.0 * u + low + gap, side + gap, 2.0 * u + self.label_um[1] + gap

    @property
    def least_width_um(self) -> float:
        """Width of a chip on which label, and scale bar beside test bars, have room between the corner marks [um]."""
        low = sum(stamp.box_um[2] + self.word_gap_um for stamp in (self.scale_bar, self.bars) if stamp)
        return max(self.label_um[0], low) + 2.0 * (MOST_UNITS + 4) * self.unit_um


def stamps_of(
    plan: ChipPlan, process: Process, *, critical: Critical, label_um: tuple[float, float], width_um: float
) -> Stamps:
    """Return the marks that a plan asks for.

    Parameters
    ----------
    plan, process : ChipPlan, Process
        What is wanted, and how it is made.
    critical : Critical
        What the test bars show.
    label_um : tuple of float
        Width and height of the largest label [um].
    width_um : float
        Width of the chip, of which the scale bar takes up to a quarter [um].
    """
    unit = mark_unit_um(process, depth_um=critical.depth_um)
    text = plan.text_height_um
    pairs = [
        alignment_mark(unit_um=unit, number=number + 1, finest_um=process.min_drawn_um)
        for number in range(plan.alignment_pairs)
    ]
    bar = bars = None
    if plan.scale_bar == "yes":
        length = round_length_um(max(min(0.25 * width_um, LONGEST_SCALE_BAR_UM), 5.0 * unit))
        bar = scale_bar(length_um=length, unit_um=unit, text_height_um=text)
    if plan.test_bars == "yes":
        bars = measuring_bars(
            width_um=critical.width_um, drawn_um=critical.drawn_um, least_um=process.min_drawn_um,
            length_um=max(6.0 * unit, text), text_height_um=text,
        )  # fmt: skip
    gap = max(process.min_wall_um, unit)
    return Stamps(
        unit_um=unit, gap_um=gap, word_gap_um=max(text, unit), pairs=tuple(pairs), label_um=label_um,
        scale_bar=bar, bars=bars,
    )  # fmt: skip


def label_size_um(labels: Iterable[tuple[str, ...]], *, height_um: float) -> tuple[float, float]:
    """Return width and height that hold every one of some labels [um]."""
    boxes = [words_stamp(lines, height_um=height_um).box_um for lines in labels]
    return max((box[2] for box in boxes), default=0.0), max((box[3] for box in boxes), default=0.0)


def critical_of(chosen: Iterable[ChannelParameters], process: Process, *, drawn: bool) -> Critical:
    """Return the narrowest of some channels; there must be one.

    Parameters
    ----------
    chosen : iterable of ChannelParameters
        The channels of a chip as wanted.
    process : Process
        How they are made.
    drawn : bool
        Whether what is drawn for them is told, or what is made of them.
    """
    found: list[tuple[float, float]] = []
    depth = 0.0
    for channel in dict.fromkeys(chosen):
        making = making_of(channel, process)
        changed = making.drawn if drawn else making.made
        found.append((channel.channel_width_um, changed.channel_width_um))
        if channel.stages:
            found.append((channel.loop_width_um, changed.loop_width_um))
        depth = max(depth, channel.depth_um)
    width, drawn_um = min(found)
    return Critical(width_um=width, drawn_um=drawn_um, depth_um=depth)
