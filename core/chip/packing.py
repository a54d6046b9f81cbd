"""Channels put on a chip by themselves: level, on shelves, ports on their pitch."""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import ceil
from typing import TYPE_CHECKING

from core.chip.bodies import channel_of, level_turn, wanted_body
from core.chip.plan import ChipChannel
from core.chip.plate import distinct_steps, values_of
from core.errors import CoreError

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping

    from core.chip.plan import ChipPlan
    from core.fabrication.process import Process
    from core.parameters import ChannelParameters

SLACK_UM = 0.02  # added to every distance, so that rounding to the drawing grid does not eat into it


@dataclass(frozen=True, slots=True, kw_only=True)
class Parcel:
    """A channel as a rectangle, with its control below where it has one.

    Heights are seen from the port line: the height of the first port of the first channel.

    Attributes
    ----------
    members : tuple of (int, float)
        Number in the plan and height of the middle of each channel [um].
    width_um, above_um, below_um : float
        Size [um].
    highest_port_um, lowest_port_um : float
        How far above and below the line ports stand [um].
    side_um : float
        Distance of the nearest port from the left or right side [um].
    """

    members: tuple[tuple[int, float], ...]
    width_um: float
    above_um: float
    below_um: float
    highest_port_um: float
    lowest_port_um: float
    side_um: float


@dataclass(slots=True, kw_only=True)
class Shelf:
    """Parcels side by side with one port line."""

    parcels: list[Parcel]
    width_um: float

    def most(self, name: str) -> float:
        """Return the largest of one measure of the parcels [um]."""
        return max(float(getattr(parcel, name)) for parcel in self.parcels)


@dataclass(frozen=True, slots=True, kw_only=True)
class Packing:
    """Shelves below one another.

    Attributes
    ----------
    plan : ChipPlan
        Its channels are turned level, but not placed yet.
    shelves : tuple of Shelf
        From above downwards.
    lines_um : tuple of float
        Depth of each port line below the upper side of the whole [um].
    width_um, height_um : float
        Size of the whole [um].
    gaps : _Gaps
        Distances kept.
    """

    plan: ChipPlan
    shelves: tuple[Shelf, ...]
    lines_um: tuple[float, ...]
    width_um: float
    height_um: float
    gaps: _Gaps

    def placed(self, *, left_um: float, top_um: float) -> ChipPlan:
        """Return the plan with every channel placed, the whole hung from its upper left corner."""
        channels = list(self.plan.channels)
        for shelf, line in zip(self.shelves, self.lines_um, strict=True):
            x, before = left_um, None
            for parcel in shelf.parcels:
                x += self.gaps.between(before, parcel) if before else 0.0
                for number, up in parcel.members:
                    channels[number] = replace(
                        channels[number],
                        x_um=round(x + 0.5 * parcel.width_um, 3), y_um=round(top_um - line + up, 3),
                    )  # fmt: skip
                x, before = x + parcel.width_um, parcel
        return replace(self.plan, channels=tuple(channels))


@dataclass(frozen=True, slots=True, kw_only=True)
class _Gaps:
    """Least distances on a chip [um]."""

    clearance_um: float
    pitch_um: float

    def between(self, left: Parcel, right: Parcel) -> float:
        """Return the gap between neighbours on a shelf [um]."""
        return max(self.clearance_um, self.pitch_um - left.side_um - right.side_um + SLACK_UM)

    def down(self, upper: Parcel | Shelf, lower: Parcel | Shelf) -> float:
        """Return the distance of two port lines, a multiple of the pitch where there is one [um]."""
        below, lowest, above, highest = (
            each.most(name) if isinstance(each, Shelf) else getattr(each, name)
            for each, name in (
                (upper, "below_um"), (upper, "lowest_port_um"), (lower, "above_um"), (lower, "highest_port_um"),
            )
        )  # fmt: skip
        least = below + self.clearance_um + above
        if self.pitch_um == 0.0:
            return least
        least = max(least, lowest + self.pitch_um + highest)
        return ceil(least / self.pitch_um - 1e-9) * self.pitch_um


def with_all_sets(plan: ChipPlan, channels: Mapping[str, ChannelParameters], *, controls: bool = False) -> ChipPlan:
    """Return a plan that places something: every set once, where it placed nothing.

    Parameters
    ----------
    plan : ChipPlan
        Any.
    channels : mapping
        Parameter sets by name.
    controls : bool
        True: every rectifier that has no control gets one.
    """
    entries = list(plan.channels) or [ChipChannel(set_name=name) for name in channels]
    if controls:
        has_one = {entry.set_name for entry in entries if entry.is_control}
        names = dict.fromkeys(entry.set_name for entry in entries if not entry.is_control)
        entries += [ChipChannel(set_name=name, is_control=True) for name in names if name not in has_one]
    return replace(plan, channels=tuple(entries))


def packing_of(
    plan: ChipPlan, channels: Mapping[str, ChannelParameters], process: Process, *, width_um: float
) -> Packing:
    """Return the channels of a plan on shelves.

    Every channel is turned level. Tall ones come first; each goes to the first shelf with room, a control right
    below its rectifier. Channels that cannot be built keep their places and take no room.

    Parameters
    ----------
    plan : ChipPlan
        With channels.
    channels : mapping
        Parameter sets by name.
    process : Process
        How the chip is made.
    width_um : float
        Room for a shelf; a wider parcel gets a shelf of its own [um].
    """
    clearance = max(plan.spacing_um, plan.port_clearance_um, process.min_wall_um) + SLACK_UM
    gaps = _Gaps(clearance_um=clearance, pitch_um=plan.port_pitch_um)
    level = replace(plan, channels=tuple(_levelled(plan, channels, process)))
    parcels = sorted(_parcels(level, channels, process, gaps), key=lambda each: -(each.above_um + each.below_um))
    shelves: list[Shelf] = []
    for parcel in parcels:
        for shelf in shelves:
            wider = shelf.width_um + gaps.between(shelf.parcels[-1], parcel) + parcel.width_um
            if wider <= width_um:
                shelf.parcels.append(parcel)
                shelf.width_um = wider
                break
        else:
            shelves.append(Shelf(parcels=[parcel], width_um=parcel.width_um))
    lines: list[float] = []
    for number, shelf in enumerate(shelves):
        lines.append(lines[-1] + gaps.down(shelves[number - 1], shelf) if lines else shelf.most("above_um"))
    return Packing(
        plan=level, shelves=tuple(shelves), lines_um=tuple(lines), gaps=gaps,
        width_um=max((shelf.width_um for shelf in shelves), default=0.0),
        height_um=lines[-1] + shelves[-1].most("below_um") if lines else 0.0,
    )  # fmt: skip


def _levelled(plan: ChipPlan, channels: Mapping[str, ChannelParameters], process: Process) -> Iterator[ChipChannel]:
    values = values_of(plan, distinct_steps(plan)[0])
    for entry in plan.channels:
        try:
            turn = level_turn(plan, entry, channel_of(entry, channels, values), process)
            yield replace(entry, turn_deg=turn)
        except CoreError:
            yield entry


def _parcels(plan: ChipPlan, channels: Mapping[str, ChannelParameters], process: Process, gaps: _Gaps) -> list[Parcel]:
    """Return every channel as a parcel, controls joined to the first rectifier of their set that has none."""
    single: dict[int, Parcel] = {}
    for number, entry in enumerate(plan.channels):
        try:
            single[number] = _parcel(plan, number, entry, channels, process)
        except CoreError:
            continue
    waiting: dict[str, list[int]] = {}
    for number in single:
        if not plan.channels[number].is_control:
            waiting.setdefault(plan.channels[number].set_name, []).append(number)
    for number in list(single):
        rectifiers = waiting.get(plan.channels[number].set_name)
        if plan.channels[number].is_control and rectifiers:
            home = rectifiers.pop(0)
            single[home] = _joined(single[home], single.pop(number), gaps)
    return list(single.values())


def _parcel(
    plan: ChipPlan,
    number: int,
    entry: ChipChannel,
    channels: Mapping[str, ChannelParameters],
    process: Process,
) -> Parcel:
    """Return one channel as a parcel that holds it in every copy of the chip."""
    values = [values_of(plan, steps) for steps in distinct_steps(plan)]
    chosen = dict.fromkeys(channel_of(entry, channels, each) for each in values)
    bodies = [wanted_body(plan, entry, channel, process) for channel in chosen]
    half_width = max(body.bounds_um[2] for body in bodies)
    half_height = max(body.bounds_um[3] for body in bodies)
    first = float(bodies[0].ends_um[0, 1])
    heights = [float(y) - first for body in bodies for y in body.ends_um[:, 1]]
    reach = max(abs(float(x)) for body in bodies for x in body.ends_um[:, 0])
    return Parcel(
        members=((number, -first),), width_um=2.0 * half_width,
        above_um=half_height - first, below_um=half_height + first,
        highest_port_um=max(heights), lowest_port_um=-min(heights), side_um=half_width - reach,
    )  # fmt: skip


def _joined(upper: Parcel, lower: Parcel, gaps: _Gaps) -> Parcel:
    """Return two parcels below one another as one."""
    down = gaps.down(upper, lower)
    return Parcel(
        members=(*upper.members, *((number, up - down) for number, up in lower.members)),
        width_um=max(upper.width_um, lower.width_um),
        above_um=upper.above_um,
        below_um=down + lower.below_um,
        highest_port_um=upper.highest_port_um,
        lowest_port_um=down + lower.lowest_port_um,
        side_um=min(parcel.side_um for parcel in (upper, lower)),
    )
