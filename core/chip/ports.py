"""Ports: the round holes at the open ends of the channels, and what is drawn for them."""

from __future__ import annotations

from enum import StrEnum
from typing import TYPE_CHECKING

import numpy as np

from core.chip.figures import circle, polygon
from core.chip.scene import Figure, Layer
from core.fabrication.choices import Allowance
from core.fabrication.process import ProcessKind

if TYPE_CHECKING:
    from core.chip.plan import ChipPlan
    from core.fabrication.process import Process
    from core.geometry.pads import Pad
    from core.parameters import ChannelParameters

# A pad is at least this part of the channel's width in radius, so that the walls of the lead can meet it.
LEAST_PAD_TO_WIDTH = 0.55


class PortWay(StrEnum):
    """How a port is made."""

    PUNCHED = "punched into the cast part"
    DRILLED = "drilled"
    CUT = "cut or etched through along the drawn line"


_WAYS = {
    ProcessKind.CAST_FILM: PortWay.PUNCHED,
    ProcessKind.CAST_CHROME: PortWay.PUNCHED,
    ProcessKind.MILLED_MOULD: PortWay.PUNCHED,
    ProcessKind.WET_GLASS: PortWay.DRILLED,
    ProcessKind.DRY_SILICON: PortWay.CUT,
    ProcessKind.LASER_ACRYLIC: PortWay.CUT,
    ProcessKind.LASER_FILM: PortWay.CUT,
    ProcessKind.MILLED_CHANNEL: PortWay.CUT,
    ProcessKind.KNIFE_FILM: PortWay.CUT,
}


def port_way(process: Process) -> PortWay:
    """Return how a process makes its ports.

    Cast parts are punched by hand after they are peeled. Glass is drilled, by a drill of the wanted diameter.
    Everything else goes through along a drawn line: beam, blade, mill, or an etch with a mask of its own.
    """
    return _WAYS[ProcessKind(process.kind)]


def cut_shift_um(process: Process) -> float:
    """Return how far the wall of a hole or rim that is cut right through moves into the solid [um].

    Bias and half the kerf, as for channels; not the undercut, which grows with the depth of the channel and
    does not hold for a hole through the whole part. Nothing where the drawing does not allow for it.
    """
    if process.allowance != Allowance.IN_DRAWING or port_way(process) is not PortWay.CUT:
        return 0.0
    return process.bias_um + 0.5 * process.kerf_um


def pad_radius_um(plan: ChipPlan, channel: ChannelParameters) -> float:
    """Return the radius of the pad round a port: port and margin, but always wider than the channel [um]."""
    return max(0.5 * plan.port_diameter_um + plan.pad_margin_um, LEAST_PAD_TO_WIDTH * channel.channel_width_um)


def port_figures(
    pads: tuple[Pad, ...], *, port_diameter_um: float, process: Process, drawn: bool
) -> tuple[Figure, ...]:
    """Return what is drawn for the ports of one channel, before scaling.

    Parameters
    ----------
    pads : tuple of Pad
        Where the ports stand.
    port_diameter_um : float
        Diameter of the hole in the part [um].
    process : Process
        How they are made.
    drawn : bool
        True: what goes on the drawing. A hole that is cut is drawn smaller by what cutting widens it. A drilled
        one is drawn at its size. For a punched one a cross marks the middle, because the punch, not the drawing,
        makes the size, and a full circle would leave nothing to aim at. False: the hole in the part.

    Returns
    -------
    tuple of Figure
        One per pad, on the layer ``PORTS``. A hole that cutting would make larger than wanted however small it
        is drawn is left at a tenth of its size.
    """
    radius = 0.5 * port_diameter_um
    if drawn and port_way(process) is PortWay.PUNCHED:
        arm = min(max(process.min_drawn_um, port_diameter_um / 20.0), port_diameter_um / 5.0)
        aim = arm * np.array(_AIM)
        outlines = [polygon(pad.centre_um + aim) for pad in pads]
    else:
        shift = cut_shift_um(process) if drawn else 0.0
        outlines = [circle(pad.centre_um, max(radius - shift, 0.1 * radius)) for pad in pads]
    return tuple(Figure(layer=Layer.PORTS, outline=outline) for outline in outlines)


_AIM = ((0.5, 2), (-0.5, 2), (-0.5, 0.5), (-2, 0.5), (-2, -0.5), (-0.5, -0.5),
        (-0.5, -2), (0.5, -2), (0.5, -0.5), (2, -0.5), (2, 0.5), (0.5, 0.5))  # fmt: skip
