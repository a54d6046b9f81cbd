"""Whether the drawing and the part of a channel can exist at all: nothing may vanish, or outgrow every channel."""

from __future__ import annotations

from typing import TYPE_CHECKING

from core.fabrication.section import floor_width_um
from core.findings import Finding, Severity
from core.parameters import CHANNEL_FIELDS

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping

    from core.fabrication.process import Process
    from core.parameters import ChannelParameters

# Widths and radii closer than this are the same: a mask cannot tell them apart.
SAME_UM = 1e-3
WIDTHS = ("channel_width_um", "loop_width_um")
RADII = ("nose_radius_um", "corner_radius_um")
STEPS = {"drawn": "on the drawing", "made": "as made", "flow": "on average over the depth"}


def what_cannot_exist(
    channel: ChannelParameters, process: Process, ways: Mapping[str, Mapping[str, float]]
) -> Iterator[Finding]:
    """Yield an error for every width and radius that leaves the bounds of a channel on the way to the part.

    Parameters
    ----------
    channel : ChannelParameters
        The design as wanted.
    process : Process
        How it is made.
    ways : mapping
        Field to step (see ``STEPS``) to value [um].
    """
    for name, way in ways.items():
        beyond = next((step for step, value in way.items() if not _is_allowed(name, value)), None)
        if beyond is not None:
            yield _beyond(channel, name, step=beyond, value_um=way[beyond])
        elif name in WIDTHS:
            floor = floor_width_um(process, width_um=way["made"], depth_um=channel.depth_um)
            if floor < -SAME_UM:
                yield _walls_meet(channel, name, width_um=way["made"], floor_um=floor)


def _is_allowed(name: str, value: float) -> bool:
    return CHANNEL_FIELDS[name].minimum <= value <= CHANNEL_FIELDS[name].maximum


def _beyond(channel: ChannelParameters, name: str, *, step: str, value_um: float) -> Finding:
    spec, wanted = CHANNEL_FIELDS[name], getattr(channel, name)
    bound = spec.minimum if value_um < spec.minimum else spec.maximum
    if name in WIDTHS:
        change = "raise" if value_um < bound else "lower"
        way_out = f"{change} {name} to {wanted + bound - value_um:.6g}, change depth_um, or let the walls shift less"
    else:
        way_out = f"lower {name}, or take a smaller tool or a smaller shift of the walls"
    return Finding(
        code=f"{step}_{'width' if name in WIDTHS else 'radius'}_gone",
        severity=Severity.ERROR,
        message=f"{name} is {wanted:g} and would be {value_um:.6g} um {STEPS[step]}, beyond the {bound:g} um that any "
        f"channel can have; {way_out}",
        field=name,
        value_um=value_um,
        limit_um=bound,
    )


def _walls_meet(channel: ChannelParameters, name: str, *, width_um: float, floor_um: float) -> Finding:
    needed = getattr(channel, name) - floor_um
    return Finding(
        code="walls_meet",
        severity=Severity.ERROR,
        message=f"{name} comes out as {width_um:g} um: at depth_um {channel.depth_um:g} walls meet above the floor, "
        f"where {floor_um:.6g} um would be left; raise {name} to {needed:.6g} or lower depth_um",
        field=name,
        value_um=floor_um,
        limit_um=0.0,
    )
