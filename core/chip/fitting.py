"""From a plan to a chip on which everything has its place: packed, grown, folded."""

from __future__ import annotations

from dataclasses import replace
from math import ceil
from typing import TYPE_CHECKING

from core.chip.bodies import channel_of, level_turn, title_of, wanted_body
from core.chip.packing import packing_of, with_all_sets
from core.chip.plan import CHIP_FIELDS, PLACE_FIELDS
from core.chip.plate import distinct_steps, label_lines, values_of
from core.chip.stamps import critical_of, label_size_um, stamps_of
from core.errors import CoreError

if TYPE_CHECKING:
    from collections.abc import Mapping

    from core.chip.figures import Box
    from core.chip.packing import Packing
    from core.chip.plan import ChipChannel, ChipPlan
    from core.chip.stamps import Stamps
    from core.fabrication.process import Process
    from core.parameters import ChannelParameters

_GROWTHS = 3  # a wider chip gets a longer scale bar, which takes at most a quarter of what is added
_ROUND_UM = 100.0  # a chip that grows gets whole tenths of a millimetre


def packed(
    plan: ChipPlan,
    channels: Mapping[str, ChannelParameters],
    process: Process,
    *,
    chip_name: str = "",
    controls: bool = False,
) -> ChipPlan:
    """Return the plan with its channels turned level and placed on shelves.

    Heights of the ports of neighbouring channels differ by a multiple of ``port_pitch_um``, where that is not 0.

    Parameters
    ----------
    plan : ChipPlan
        Where it places nothing, every set is placed once and the chip grows to hold them, its marks and words.
        Otherwise the chip keeps its size: what does not fit stands over its edge, and is a finding.
    channels : mapping
        Parameter sets by name.
    process : Process
        How the chip is made.
    chip_name : str
        Name that is written on the chip when the plan has no label; it needs room too.
    controls : bool
        True: every rectifier that has no control gets one, right below it.

    Returns
    -------
    ChipPlan
        The same for the same input. Channels that cannot be built keep their places.

    Raises
    ------
    DesignValueError
        If there would be more channels than a chip may have.
    """
    may_grow = not plan.channels
    full = with_all_sets(plan, channels, controls=controls)
    edge = full.edge_clearance_um
    bare = (edge, edge, edge, edge)
    if may_grow:
        return _grown(full, channels, process, chip_name)
    for rims in (_rims_um(full, channels, process, chip_name), bare):
        packing = packing_of(full, channels, process, width_um=full.chip_width_um - rims[0] - rims[2])
        if _spare_um(full, packing, rims)[0] >= 0.0 <= _spare_um(full, packing, rims)[1]:
            break
    return _hung(full, packing, rims)


def _rims_um(plan: ChipPlan, channels: Mapping[str, ChannelParameters], process: Process, chip_name: str) -> Box:
    """Return how much is kept free along each edge: the clearance, or more where marks and words need it [um]."""
    stamps = wanted_stamps(plan, channels, process, chip_name=chip_name)
    left, low, right, up = stamps.rims_um if stamps else (0.0, 0.0, 0.0, 0.0)
    edge = plan.edge_clearance_um
    return max(edge, left), max(edge, low), max(edge, right), max(edge, up)


def _spare_um(plan: ChipPlan, packing: Packing, rims: Box) -> tuple[float, float]:
    """Return how much of the chip is left between the rims, along and up; negative where it is too small [um]."""
    along = plan.chip_width_um - rims[0] - rims[2] - packing.width_um
    return along, plan.chip_height_um - rims[1] - rims[3] - packing.height_um


def _hung(plan: ChipPlan, packing: Packing, rims: Box) -> ChipPlan:
    """Return the plan with its channels in the middle of what the rims leave free."""
    along, up = _spare_um(plan, packing, rims)
    placed = packing.placed(
        left_um=-0.5 * plan.chip_width_um + rims[0] + 0.5 * along,
        top_um=0.5 * plan.chip_height_um - rims[3] - 0.5 * up,
    )
    return replace(plan, channels=placed.channels)


def _grown(plan: ChipPlan, channels: Mapping[str, ChannelParameters], process: Process, chip_name: str) -> ChipPlan:
    """Return the plan packed on a chip that is as large as it must be, and not smaller than it was."""
    rims = _rims_um(plan, channels, process, chip_name)
    packing = packing_of(plan, channels, process, width_um=plan.chip_width_um - rims[0] - rims[2])
    width = max(plan.chip_width_um, _round_up(packing.width_um + rims[0] + rims[2], "chip_width_um"))
    for _ in range(_GROWTHS):
        stamps = wanted_stamps(replace(plan, chip_width_um=width), channels, process, chip_name=chip_name)
        width = max(width, _round_up(stamps.least_width_um if stamps else 0.0, "chip_width_um"))
    packing = packing_of(plan, channels, process, width_um=width - rims[0] - rims[2])
    height = max(plan.chip_height_um, _round_up(packing.height_um + rims[1] + rims[3], "chip_height_um"))
    return _hung(replace(plan, chip_width_um=width, chip_height_um=height), packing, rims)


def _round_up(length_um: float, name: str) -> float:
    return min(ceil(length_um / _ROUND_UM - 1e-9) * _ROUND_UM, CHIP_FIELDS[name].maximum)


def wanted_stamps(
    plan: ChipPlan, channels: Mapping[str, ChannelParameters], process: Process, *, chip_name: str, drawn: bool = True
) -> Stamps | None:
    """Return the marks that a chip shall carry; None where it has no channel to go by."""
    chosen = []
    for steps in distinct_steps(plan):
        for entry in plan.channels:
            try:
                chosen.append(channel_of(entry, channels, values_of(plan, steps)))
            except CoreError:
                continue
    if not chosen:
        return None
    labels = {label_lines(plan, chip_name, steps) for steps in distinct_steps(plan)}
    return stamps_of(
        plan, process, critical=critical_of(chosen, process, drawn=drawn),
        label_um=label_size_um(labels, height_um=plan.text_height_um), width_um=plan.chip_width_um,
    )  # fmt: skip


def rows_that_fit(plan: ChipPlan, entry: ChipChannel, channel: ChannelParameters, process: Process) -> int | None:
    """Return the fewest rows with which a channel, turned level, fits the chip between its edge clearances.

    Parameters
    ----------
    plan : ChipPlan
        The chip.
    entry : ChipChannel
        Its place on the chip; rows and turn do not matter.
    channel : ChannelParameters
        The channel itself.
    process : Process
        How it is made.

    Returns
    -------
    int or None
        None when no number of rows does.
    """
    room = _room_um(plan)
    stage = _stage_length_um(plan, entry, channel, process)
    for rows in range(1, min(int(PLACE_FIELDS["rows"].maximum), max(channel.stages, 1)) + 1):
        if (ceil(channel.stages / rows) - 1) * stage > room[0]:
            continue  # its stages alone are too long, leads and pads left aside
        size = _level_size_um(plan, replace(entry, rows=rows), channel, process)
        if size is None:
            continue
        if size[0] <= room[0] and size[1] <= room[1]:
            return rows
        if rows > 1 and size[1] > room[1]:
            return None  # more rows are higher still
    return None


def _stage_length_um(plan: ChipPlan, entry: ChipChannel, channel: ChannelParameters, process: Process) -> float:
    """Return by how much a chain grows with each stage along its level line; 0 where that cannot be told [um]."""
    one, half = replace(entry, rows=1), channel.stages // 2
    whole = _level_size_um(plan, one, channel, process)
    part = _level_size_um(plan, one, replace(channel, stages=half), process)
    if half == 0 or whole is None or part is None:
        return 0.0
    return (whole[0] - part[0]) / (channel.stages - half)


def _level_size_um(
    plan: ChipPlan, entry: ChipChannel, channel: ChannelParameters, process: Process
) -> tuple[float, float] | None:
    """Return length and height of a channel turned level, or None if it cannot be built so [um]."""
    try:
        flat = replace(entry, turn_deg=0.0)
        level = replace(flat, turn_deg=level_turn(plan, flat, channel, process))
        x0, y0, x1, y1 = wanted_body(plan, level, channel, process).bounds_um
    except CoreError:
        return None
    return x1 - x0, y1 - y0


def too_large(plan: ChipPlan, channels: Mapping[str, ChannelParameters], process: Process) -> tuple[str, ...]:
    """Return the titles of channels that do not fit the chip, folded as they are and turned level.

    Parameters
    ----------
    plan : ChipPlan
        The chip, with what is placed on it.
    channels : mapping
        Parameter sets by name.
    process : Process
        How the chip is made.

    Returns
    -------
    tuple of str
        Channels that cannot be built are not among them: they are findings of their own.
    """
    room = _room_um(plan)
    titles = []
    for entry in plan.channels:
        try:
            channel = channel_of(entry, channels)
        except CoreError:
            continue
        size = _level_size_um(plan, entry, channel, process)
        if size is not None and (size[0] > room[0] or size[1] > room[1]):
            titles.append(title_of(entry))
    return tuple(dict.fromkeys(titles))


def _room_um(plan: ChipPlan) -> tuple[float, float]:
    """Return width and height of the chip between its edge clearances [um]."""
    return plan.chip_width_um - 2.0 * plan.edge_clearance_um, plan.chip_height_um - 2.0 * plan.edge_clearance_um


def folded(
    plan: ChipPlan, channels: Mapping[str, ChannelParameters], process: Process, *, chip_name: str = ""
) -> ChipPlan:
    """Return the plan with channels that are longer than the chip folded into the fewest rows that fit, and packed.

    Parameters
    ----------
    plan : ChipPlan
        Where it places nothing, every set is placed once; the chip keeps its size.
    channels : mapping
        Parameter sets by name.
    process : Process
        How the chip is made.
    chip_name : str
        Name that is written on the chip when the plan has no label.

    Returns
    -------
    ChipPlan
        Channels that no folding makes fit keep their rows.
    """
    full = with_all_sets(plan, channels)
    entries = []
    for entry in full.channels:
        rows = rows_that_fit(full, entry, channels[entry.set_name], process) if entry.set_name in channels else None
        entries.append(replace(entry, rows=rows) if rows and not entry.is_control else entry)
    return packed(replace(full, channels=tuple(entries)), channels, process, chip_name=chip_name)
