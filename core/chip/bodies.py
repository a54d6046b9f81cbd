"""The channels of a chip as areas: as wanted, as drawn and as made, each worked out once."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import lru_cache
from math import atan2, degrees, radians
from typing import TYPE_CHECKING

from core.chip.ports import pad_radius_um
from core.errors import DesignValueError, GeometryError, did_you_mean, shown
from core.fabrication.making import making_of
from core.geometry.body import ChannelBody, channel_body
from core.geometry.contour import Placement

if TYPE_CHECKING:
    from collections.abc import Mapping

    from core.chip.plan import ChipChannel, ChipPlan
    from core.fabrication.process import Process
    from core.fields import Value
    from core.parameters import ChannelParameters


@dataclass(frozen=True, slots=True, kw_only=True)
class Stance:
    """How a channel stands on a chip, its place left aside.

    Attributes
    ----------
    rows : int
        Rows into which it is folded.
    turn_deg : float
        Turn from the drawing of the set [deg].
    pad_radius_um : float
        Radius of its pads [um].
    wall_um : float
        Least solid between its rows [um]; 0 for a single row, which has no such thing.
    """

    rows: int
    turn_deg: float
    pad_radius_um: float
    wall_um: float


def stance_of(plan: ChipPlan, entry: ChipChannel, channel: ChannelParameters, process: Process) -> Stance:
    """Return how a channel of a plan stands on the chip.

    Parameters
    ----------
    plan, entry : ChipPlan, ChipChannel
        The chip, and what is placed on it.
    channel : ChannelParameters
        Its parameters on the chip; see ``channel_of``.
    process : Process
        How it is made.
    """
    wall = max(process.min_wall_um, plan.spacing_um) if entry.rows > 1 else 0.0
    pad = pad_radius_um(plan, channel)
    return Stance(rows=entry.rows, turn_deg=entry.turn_deg, pad_radius_um=pad, wall_um=wall)


def channel_of(
    entry: ChipChannel, channels: Mapping[str, ChannelParameters], values: Mapping[str, Value] | None = None
) -> ChannelParameters:
    """Return the parameters of a channel on the chip.

    Parameters
    ----------
    entry : ChipChannel
        What is placed.
    channels : mapping
        Parameter sets by name.
    values : mapping, optional
        Values that a stepped series gives to this chip, by field.

    Returns
    -------
    ChannelParameters
        Those of the set; for a control the same section and leads without stages.

    Raises
    ------
    DesignValueError
        If there is no such set.
    """
    if entry.set_name not in channels:
        raise DesignValueError(
            field="set_name", value=entry.set_name, limit="a parameter set of this chip",
            way_out=did_you_mean(entry.set_name, channels),
        )  # fmt: skip
    channel = channels[entry.set_name]
    if values:
        channel = channel.with_values(values)
    return replace(channel, stages=0) if entry.is_control else channel


def title_of(entry: ChipChannel) -> str:
    """Return what a channel on the chip is called."""
    return f"{entry.set_name} control" if entry.is_control else entry.set_name


def wanted_body(plan: ChipPlan, entry: ChipChannel, channel: ChannelParameters, process: Process) -> ChannelBody:
    """Return the area that a channel shall have on the part, the middle of its bounds at the origin.

    Parameters
    ----------
    plan, entry, channel, process
        As for ``stance_of``.

    Raises
    ------
    GeometryError
        If it has no shape, cannot be folded so, or its pads do not go with it; the set is named.
    """
    return _wanted(channel, stance_of(plan, entry, channel, process), title_of(entry))


@lru_cache(maxsize=512)
def changed_body(
    channel: ChannelParameters, stance: Stance, process: Process, *, title: str, drawn: bool
) -> ChannelBody:
    """Return the area to be drawn for a channel, or the one that is made of it, before scaling.

    Centre lines, pads and bends are those of the area as wanted.

    Parameters
    ----------
    channel : ChannelParameters
        Its parameters on the chip, as wanted.
    stance : Stance
        How it stands there.
    process : Process
        How it is made.
    title : str
        What it is called when something is wrong.
    drawn : bool
        True: as drawn. False: as made.

    Raises
    ------
    GeometryError
        As ``wanted_body``, or if nothing can be drawn for it by this process.
    """
    wanted = _wanted(channel, stance, title)
    making = making_of(channel, process)
    if making.findings:
        raise GeometryError(f"{shown(title)} cannot be made: {making.findings[0].message}")
    changed = making.drawn if drawn else making.made
    if changed == channel:
        return wanted
    try:
        return channel_body(changed, like=wanted)
    except GeometryError as error:
        raise GeometryError(f"{shown(title)} cannot be {'drawn' if drawn else 'made'}: {error}") from error


def level_turn(plan: ChipPlan, entry: ChipChannel, channel: ChannelParameters, process: Process) -> float:
    """Return the turn that puts both ports of a channel at one height [deg].

    A chain folded into an even number of rows has both ports on one side: it is left with its rows as they are.

    Parameters
    ----------
    plan, entry, channel, process
        As for ``stance_of``; the turn of the entry is left aside.

    Raises
    ------
    GeometryError
        As ``wanted_body``.
    """
    if entry.rows % 2 == 0:
        return 0.0
    ends = wanted_body(plan, replace(entry, turn_deg=0.0), channel, process).ends_um
    along, up = ends[1] - ends[0]
    turn = -degrees(atan2(up, along))
    return turn if abs(turn) <= 90.0 else turn - 180.0 if turn > 0.0 else turn + 180.0


def _wanted(channel: ChannelParameters, stance: Stance, title: str) -> ChannelBody:
    try:
        return _turned(channel, stance)
    except GeometryError as error:
        raise GeometryError(f"{shown(title)} cannot be put on the chip: {error}") from error


@lru_cache(maxsize=512)
def _turned(channel: ChannelParameters, stance: Stance) -> ChannelBody:
    flat = _flat(channel, stance.rows, stance.pad_radius_um, stance.wall_um)
    if isinstance(flat, str):
        raise GeometryError(flat)
    turned = _moved(flat, Placement(angle=radians(stance.turn_deg))) if stance.turn_deg else flat
    x0, y0, x1, y1 = turned.bounds_um
    return _moved(turned, Placement(dx_um=-0.5 * (x0 + x1), dy_um=-0.5 * (y0 + y1)))


@lru_cache(maxsize=512)
def _flat(channel: ChannelParameters, rows: int, pad_um: float, wall_um: float) -> ChannelBody | str:
    """Return the body as drawn by its set, or why there is none: finding that out takes as long."""
    try:
        return channel_body(channel, rows=rows, pad_radius_um=pad_um, wall_um=wall_um)
    except GeometryError as error:
        return str(error)


def _moved(body: ChannelBody, placement: Placement) -> ChannelBody:
    return replace(body, folding=body.folding.moved(placement))
