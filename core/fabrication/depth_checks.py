"""The depth against limits, alone and with widths and gaps, and the pressure against the bond."""

from __future__ import annotations

from typing import TYPE_CHECKING

from core.fabrication.existence import SAME_UM
from core.fabrication.objection import Objection, gap_objection, placed, too_short
from core.fabrication.process import ProcessKind
from core.findings import Finding, Severity

if TYPE_CHECKING:
    from collections.abc import Iterator

    from core.fabrication.channel_case import ChannelCase

CAST_KINDS = frozenset({ProcessKind.CAST_FILM, ProcessKind.CAST_CHROME, ProcessKind.MILLED_MOULD})


def check_depth(case: ChannelCase) -> Iterator[Objection]:
    """Yield a depth that the process cannot reach or hold."""
    depth, low, high = case.wanted.depth_um, case.process.min_depth_um, case.process.max_depth_um
    if low - SAME_UM <= depth <= high + SAME_UM:
        return
    code, limit, words = ("too_shallow", low, "shallower") if depth < low else ("too_deep", high, "deeper")
    yield Objection(
        finding=Finding(
            code=code, severity=Severity.ERROR, field="depth_um", value_um=depth, limit_um=limit,
            message=f"depth_um is {depth:g}, {words} than the {limit:g} um that the process can make",
        ),
        values=(("depth_um", limit),),
        way_out="choose another process",
    )  # fmt: skip


def check_leaning(case: ChannelCase) -> Iterator[Objection]:
    """Yield channels, and solids between them, that are too narrow for their depth."""
    process, depth = case.process, case.wanted.depth_um
    needed = case.leaning_limit_um
    is_cast = process.kind in CAST_KINDS
    ratio = f"depth_um {depth:g} may be {process.max_depth_to_width:g} times that at most"
    what = "ridges of the mould lean or break off" if is_cast else "such deep channels come out uneven or not at all"
    for name in case.widths:
        yield from too_short(
            case, name, getattr(case.making.made, name), needed, code="too_deep_for_width", is_depth_first=True,
            words=f"{{value}} um wide as made: {ratio}, or {what}", way_out="make it both wider and shallower",
        )  # fmt: skip
    # etched round, solids widen downwards: they cannot lean
    if process.kind != ProcessKind.WET_GLASS and case.made_gap_um < needed - SAME_UM:
        what = "it leans, and its trench in the mould stays closed" if is_cast else "it leans or breaks off"
        depths = (("depth_um", case.made_gap_um * process.max_depth_to_width),)
        yield gap_objection(
            case, "too_deep_for_gap", case.made_gap_um, needed, f"is {{value}} um wide: {ratio}, or {what}",
            "make the channel shallower and the gap wider", values=depths,
        )  # fmt: skip


def check_sagging(case: ChannelCase) -> Iterator[Objection]:
    """Yield channels that are so wide for their depth that the lid may sag or closes them."""
    process, depth = case.process, case.wanted.depth_um
    if case.making.findings:
        return
    for name in case.widths:
        width = getattr(case.making.made, name)
        careful, most = process.max_width_to_depth * depth, process.collapse_width_to_depth * depth
        if width <= careful + SAME_UM:
            continue
        closes = width > most + SAME_UM
        limit, ratio = (most, process.collapse_width_to_depth) if closes else (careful, process.max_width_to_depth)
        yield Objection(
            finding=placed(
                case, name, width, code="roof_closes" if closes else "roof_sags", limit=limit,
                severity=Severity.ERROR if closes else Severity.WARNING,
                message=f"{name} is {width:.6g} um as made, {width / depth:.3g} times depth_um {depth:g}: above "
                f"{ratio:g} times the lid {'closes the channel' if closes else 'may sag'}",
            ),
            values=(("depth_um", width / ratio), (name, getattr(case.wanted, name) + limit - width)),
            way_out="make it both narrower and deeper, or the lid stiffer",
        )  # fmt: skip


def check_bond(case: ChannelCase) -> Iterator[Objection]:
    """Yield a pressure that the bond may not hold."""
    process, pressure = case.process, case.pressure_pa
    allowed = 1e3 * process.bond_limit_kpa / process.safety_factor
    if pressure is None or not pressure > allowed:
        return
    when = f" {case.pressure_at}" if case.pressure_at else ""
    yield Objection(
        finding=Finding(
            code="bond_too_weak", severity=Severity.ERROR, field="depth_um",
            message=f"the pressure in the channel is {pressure / 1e3:.4g} kPa{when}; the bond holds "
            f"{process.bond_limit_kpa:g} kPa, over safety_factor {process.safety_factor:g} {allowed / 1e3:.4g} kPa",
        ),
        way_out="lower the flow, raise depth_um or channel_width_um, take fewer stages, or bond more strongly",
    )  # fmt: skip
