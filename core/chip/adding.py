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
        True for the plain channel to measure against.

    Returns
    -------
    ChipPlan
        The new channel comes last. It stands as near as there is room to its rectifier, or else to the channel
        placed last: where its bounds keep all clearances, and in the middle of the chip where no such place is.

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
    rim_um = plan.edge_clearance_um + SLACK_UM
    half_x, half_y = 0.5 * plan.chip_width_um - rim_um, 0.5 * plan.chip_height_um - rim_um
    within = (-half_x, -half_y, half_x, half_y)
    near_x, near_y = _neighbour_um(plan, stands, set_name if is_control else None)
    places = sorted(
        _places(box, [stand.box_um for stand in stands], within, gap_um),
        key=lambda place: hypot(place[0] - near_x, place[1] - near_y),
    )
    taken = [(x0 - gap_um, y0 - gap_um, x1 + gap_um, y1 + gap_um) for x0, y0, x1, y1 in (s.box_um for s in stands)]
    free = free_places(
        _array(places), box, taken=_shrunk(taken), obstacles=[], within=within, clearance_um=0.0,
    )  # fmt: skip
    x, y = next(free, (0.0, 0.0))
    return replace(plan, channels=(*plan.channels, replace(entry, x_um=round(x, 3), y_um=round(y, 3))))


def _neighbour_um(plan: ChipPlan, stands: Sequence[Stand], owner: str | None) -> tuple[float, float]:
    """Return the middle of the rectifier of a control, or else of the channel placed last [um]."""
    owned = [stand for stand in stands if plan.channels[stand.number].set_name == owner]
    return next((stand.at_um for stand in (*owned[:1], *stands[::-1])), (0.0, 0.0))


def _places(box: Box, others: Sequence[Box], within: Box, gap_um: float) -> list[tuple[float, float]]:
    """Return where the middle of a box may lie: beside, above and below each other one, and along the chip's sides."""
    x0, y0, x1, y1 = box
    sides, ends = {within[0] - x0, within[2] - x1, 0.0}, {within[1] - y0, within[3] - y1, 0.0}
    places = {(x, y) for x in sides for y in ends}
    for left, low, right, high in others:
        across = sides | {left - x0, right - x1, right + gap_um - x0, left - gap_um - x1}
        up = ends | {low - gap_um - y1, high + gap_um - y0, high - y1, low - y0}
        places |= {(x, y) for x in across for y in up}
    return sorted(places)


def _shrunk(boxes: Sequence[Box]) -> list[Box]:
    """Return boxes a hair smaller, so that what just touches one is free of it."""
    hair = 0.5 * SLACK_UM
    return [(x0 + hair, y0 + hair, x1 - hair, y1 - hair) for x0, y0, x1, y1 in boxes]


def _array(places: Sequence[tuple[float, float]]) -> Floats:
    return np.array(places, dtype=float).reshape(-1, 2)
