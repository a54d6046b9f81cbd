"""One channel more on a chip on which others have their places already."""

from __future__ import annotations

from dataclasses import replace
from math import hypot
from typing import TYPE_CHECKING

import numpy as np

from core.chip.bodies import channel_of, level_turn, wanted_body
from core.chip.free_space import free_places
from core.chip.packing import SLACK_UM
from core.chip.plan import ChipChannel
from core.chip.stands import Stand, stands_of

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from core.chip.figures import Box
    from core.chip.plan import ChipPlan
    from core.fabrication.process import Process
    from core.geometry.contour import Floats
    from core.parameters import ChannelParameters


def added(
    plan: ChipPlan,
    channels: Mapping[str, ChannelParameters],
    process: Process,
    *,
    set_name: str,
    is_control: bool = False,
) -> ChipPlan:
    """Return the plan with one channel more, level, at a free place.

    Parameters
    ----------
    plan : ChipPlan
        A plan that places channels; none of them is moved, and the chip keeps its size.
    channels : mapping
        Parameter sets by name.
    process : Process
        How the chip is made.
    set_name : str
        Set that the channel follows.
    is_control : bool
        True for the plain channel to measure against; it goes as near to its rectifier as there is room.

    Returns
    -------
    ChipPlan
        The new channel comes last: from above downwards at the first place beside, above or below another channel
        where its bounds keep all clearances, and in the middle of the chip where there is none.

    Raises
    ------
    DesignValueError
        If there is no such set, or there would be more channels than a chip may have.
    GeometryError
        If the channel cannot be built.
    """
    entry = ChipChannel(set_name=set_name, is_control=is_control)
    channel = channel_of(entry, channels)
    entry = replace(entry, turn_deg=level_turn(plan, entry, channel, process))
    box = wanted_body(plan, entry, channel, process).bounds_um
    stands = [stand for stand in next(stands_of(plan, channels, process)) if isinstance(stand, Stand)]
    gap_um = max(plan.spacing_um, plan.port_clearance_um, process.min_wall_um) + SLACK_UM
    half_x, half_y = (
        0.5 * plan.chip_width_um - plan.edge_clearance_um,
        0.5 * plan.chip_height_um - plan.edge_clearance_um,
    )
    within = (-half_x, -half_y, half_x, half_y)
    places = _places(box, [stand.box_um for stand in stands], within, gap_um)
    owner = next((stand for stand in stands if is_control and plan.channels[stand.number].set_name == set_name), None)
    if owner is not None:
        x, y = owner.at_um
        places = sorted(places, key=lambda place: hypot(place[0] - x, place[1] - y))
    taken = [(x0 - gap_um, y0 - gap_um, x1 + gap_um, y1 + gap_um) for x0, y0, x1, y1 in (s.box_um for s in stands)]
    free = free_places(
        _array(places), box, taken=_shrunk(taken), obstacles=[], within=within, clearance_um=0.0,
    )  # fmt: skip
    x, y = next(free, (0.0, 0.0))
    return replace(plan, channels=(*plan.channels, replace(entry, x_um=round(x, 3), y_um=round(y, 3))))


def _places(box: Box, others: Sequence[Box], within: Box, gap_um: float) -> list[tuple[float, float]]:
    """Return where the middle of a box may lie: along the sides of others and of the chip, from above downwards."""
    x0, y0, x1, y1 = box
    across = {within[0] - x0, within[2] - x1, 0.0}
    up = {within[3] - y1, within[1] - y0}
    for left, low, right, high in others:
        across |= {left - x0, right - x1, right + gap_um - x0, left - gap_um - x1}
        up |= {low - gap_um - y1, high + gap_um - y0, high - y1, low - y0}
    return [(x, y) for y in sorted(up, reverse=True) for x in sorted(across)]


def _shrunk(boxes: Sequence[Box]) -> list[Box]:
    """Return boxes a hair smaller, so that what just touches one is free of it."""
    hair = 0.5 * SLACK_UM
    return [(x0 + hair, y0 + hair, x1 - hair, y1 - hair) for x0, y0, x1, y1 in boxes]


def _array(places: Sequence[tuple[float, float]]) -> Floats:
    return np.array(places, dtype=float).reshape(-1, 2)
