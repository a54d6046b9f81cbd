"""Lengths against limits: what is drawn and what is made must not be too narrow, too sharp or gone."""

from __future__ import annotations

from typing import TYPE_CHECKING

from core.fabrication.channel_case import FEWEST_STEPS
from core.fabrication.choices import Allowance, ToolRuns
from core.fabrication.existence import RADII, SAME_UM
from core.fabrication.making import smallest_radius_um, wall_shift_um
from core.fabrication.objection import Objection, gap_objection, too_short
from core.findings import Finding, Severity
from core.parameters import CHANNEL_FIELDS

if TYPE_CHECKING:
    from collections.abc import Iterator

    from core.fabrication.channel_case import ChannelCase


def check_existence(case: ChannelCase) -> Iterator[Objection]:
    """Yield where the drawing or the part cannot exist at all."""
    for finding in case.making.findings:
        value, limit, wanted = finding.value_um or 0.0, finding.limit_um or 0.0, getattr(case.wanted, finding.field)
        values: tuple[tuple[str, float], ...] = ((finding.field, max(wanted + limit - value, 0.0)),)
        if finding.code == "walls_meet":
            values = (*values, ("depth_um", case.wanted.depth_um * wanted / (wanted - value)))
        elif finding.field in case.widths:
            values = (*values, *_depths_for(case, finding.field, CHANNEL_FIELDS[finding.field].minimum))
        yield Objection(finding=finding, values=values, way_out="change all widths and the depth together")


def check_shapes(case: ChannelCase) -> Iterator[Objection]:
    """Yield where the channel as wanted has a shape, but not as drawn or as made."""
    if case.making.findings or not case.shape.is_usable:
        return
    least = smallest_radius_um(case.process)
    for shape, words in ((case.made_shape, "made"), (case.drawn_shape, "drawn")):
        if not shape.is_usable:
            found = shape.findings[0]
            yield Objection(
                finding=Finding(
                    code=f"no_shape_as_{words}", severity=Severity.ERROR, field=found.field,
                    x_um=found.x_um, y_um=found.y_um,
                    message=f"as {words} by this process, with corners at least {least:g} um round, the channel has no "
                    f"shape: {found.message}",
                ),
                searched=(("loop_radius_um", 1), ("loop_angle_deg", 1), ("stage_gap_um", 1)),
                way_out="choose a process that rounds and shifts walls less",
            )  # fmt: skip
            return


def check_widths(case: ChannelCase) -> Iterator[Objection]:
    """Yield widths that come out narrower than the process or its tool can make."""
    process = case.process
    tool = process.tool_diameter_um if process.tool_runs == ToolRuns.IN_CHANNEL else 0.0
    is_tool = tool > process.min_width_um
    limit = max(tool, process.min_width_um)
    for name in case.widths:
        yield from too_short(
            case, name, getattr(case.making.made, name), limit,
            code="width_below_tool" if is_tool else "width_below_min",
            words="{value} um wide as made, narrower than the "
            + ("tool's {limit} um" if is_tool else "{limit} um that the process can make"),
            way_out="choose a smaller tool" if is_tool else "choose a finer process",
        )  # fmt: skip


def check_gap(case: ChannelCase) -> Iterator[Objection]:
    """Yield the narrowest solid where it comes out narrower than the process can make.

    A tool that does not fit into a gap fills it with its own radius: ``check_shapes`` and ``check_radii`` tell that.
    """
    limit = case.process.min_gap_um
    if case.made_gap_um < limit - SAME_UM:
        yield gap_objection(
            case, "gap_below_min", case.made_gap_um, limit,
            f"comes out {{value}} um wide, narrower than the {limit:g} um that the process can make",
            "choose a finer process",
        )  # fmt: skip


def check_drawn_widths(case: ChannelCase) -> Iterator[Objection]:
    """Yield widths that are narrower on the mask than it can hold."""
    scale = case.making.scale
    for name in case.widths:
        yield from too_short(
            case, name, scale * getattr(case.making.drawn, name), case.process.min_drawn_um,
            code="drawn_width_below_min", per_um=scale,
            words="{value} um wide on the drawing, where {limit} um is the least", way_out="take a finer mask",
            also=_depths_for(case, name, case.process.min_drawn_um / scale),
        )  # fmt: skip


def check_drawn_gap(case: ChannelCase) -> Iterator[Objection]:
    """Yield the narrowest solid where it is narrower on the mask than it can hold."""
    limit = case.process.min_drawn_um
    if case.drawn_gap_um < limit - SAME_UM:
        yield gap_objection(
            case, "drawn_gap_below_min", case.drawn_gap_um, limit,
            f"is {{value}} um wide on the drawing, where {limit:g} um is the least", "take a finer mask",
        )  # fmt: skip


def check_radii(case: ChannelCase) -> Iterator[Objection]:
    """Yield corners that come out rounder than wanted."""
    shift = wall_shift_um(case.process, depth_um=case.wanted.depth_um)
    for name in case.radii if not case.making.findings else ():
        wanted, made = getattr(case.wanted, name), getattr(case.making.made, name)
        if made <= wanted + SAME_UM:
            continue
        least = smallest_radius_um(case.process)
        cause = (
            "the process and its tool leave"
            if made <= least + SAME_UM
            else f"walls that move in by {-shift:g} um leave"
        )
        place = case.corner_place(name) or (None, None)
        yield Objection(
            finding=Finding(
                code="nose_too_sharp" if name == RADII[0] else "corner_too_sharp",
                severity=Severity.WARNING, field=name,
                message=f"{name} is {wanted:g}; {cause} no corner sharper than {made:.6g} um, and it comes out so",
                value_um=wanted, limit_um=made, x_um=place[0], y_um=place[1],
            ),
            values=((name, made),),
            way_out="choose a smaller tool or a finer process",
        )  # fmt: skip


def check_grid(case: ChannelCase) -> Iterator[Objection]:
    """Yield lengths on the drawing of few grid steps only."""
    if case.making.findings:
        return
    limit, scale = case.grid_limit_um, case.making.scale
    for name in case.widths:
        yield from too_short(
            case, name, scale * getattr(case.making.drawn, name), limit, code="grid_too_coarse", per_um=scale,
            words=f"{{value}} um wide on the drawing, less than {FEWEST_STEPS} steps of the grid of "
            f"{case.process.grid_nm} nm", way_out="take a finer grid", severity=Severity.WARNING,
        )  # fmt: skip
    if case.drawn_gap_um < limit - SAME_UM:
        yield gap_objection(
            case, "grid_too_coarse", case.drawn_gap_um, limit, f"is {{value}} um wide on the drawing, less than "
            f"{FEWEST_STEPS} steps of the grid of {case.process.grid_nm} nm", "take a finer grid",
            severity=Severity.WARNING,
        )  # fmt: skip


def _depths_for(case: ChannelCase, name: str, least_um: float) -> tuple[tuple[str, float], ...]:
    """Return the depth at which a width on the drawing is the least there may be, where the depth decides it."""
    process = case.process
    if process.undercut_ratio == 0.0 or process.allowance != Allowance.IN_DRAWING:
        return ()
    room = 0.5 * (getattr(case.wanted, name) - least_um) - process.bias_um - 0.5 * process.kerf_um
    return (("depth_um", room / process.undercut_ratio),) if room > 0.0 else ()
