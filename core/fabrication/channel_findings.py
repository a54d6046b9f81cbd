"""What a process finds fault with in one channel, and what cures it."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from core.fabrication.channel_case import ChannelCase
from core.fabrication.channel_checks import CHECKS
from core.fabrication.cures import Cures

if TYPE_CHECKING:
    from collections.abc import Callable

    from core.fabrication.objection import Objection
    from core.fabrication.process import Process
    from core.findings import Finding
    from core.parameters import ChannelParameters


def channel_findings(
    channel: ChannelParameters,
    process: Process,
    *,
    pressure_pa: float | None = None,
    pressure_at: str = "",
    with_cures: bool = True,
    on_try: Callable[[], object] | None = None,
) -> tuple[Finding, ...]:
    """Return what a process finds fault with in a channel.

    Parameters
    ----------
    channel : ChannelParameters
        The design as wanted.
    process : Process
        How it is made.
    pressure_pa : float, optional
        Largest pressure in the channel [Pa]; without it the bond is not checked.
    pressure_at : str
        In words, when that pressure is there ("at 50 uL/min").
    with_cures : bool
        False: leave out the search for cures, which draws the channel anew for every value tried.
    on_try : callable, optional
        Called before each of these; whatever it raises ends the search.

    Returns
    -------
    tuple of Finding
        In the order of the checks; empty when the process can make it. What makes a shape impossible in itself is
        told by the shape's own findings and is not repeated here.

    Notes
    -----
    Widths, gaps, radii and depth ratios are those of what is made; smallest drawn features those of the mask, after
    scaling. Nothing is found fault with that misses its limit by 1 nm or less. Roofs are judged by the widths of
    bypass and loop, as the usual rules are: the open places where they meet are wider.
    """
    case = ChannelCase(channel, process, pressure_pa, pressure_at)
    cures = Cures(case, on_try)
    findings: list[Finding] = []
    for check in CHECKS:
        for objection in check(case):
            cure = cures.of(check, objection) if with_cures else None
            findings.append(_told(objection, cure))
    return tuple(findings)


def _told(objection: Objection, cure: tuple[str, float] | None) -> Finding:
    """Return the finding with its cure, and the way out in words."""
    finding = objection.finding
    if cure is None:
        field, value = objection.values[0] if objection.values else ("", 0.0)
        start = f"change {field} to {value:.6g} and other lengths with it, or " if field else ""
        return replace(finding, message=f"{finding.message}; {start}{objection.way_out}")
    message = f"{finding.message}; change {cure[0]} to {cure[1]:g}, or {objection.way_out}"
    field = cure[0] if objection.searched else finding.field
    return replace(finding, message=message, field=field, cure=cure)
