"""Findings about where channels and ports stand on a chip: off it, too near to its edge or to one another."""

from __future__ import annotations

from dataclasses import dataclass
from math import ceil, floor, hypot
from typing import TYPE_CHECKING

import numpy as np

from core.chip.figures import boxes_overlap, circle, grown_box
from core.chip.furniture import chip_box
from core.chip.plan import CHIP_FIELDS
from core.chip.ports import pad_radius_um
from core.errors import shown
from core.findings import Finding, Severity
from core.geometry.clearances import wall_between
from core.geometry.contour import Outline, Placement

if TYPE_CHECKING:
    from collections.abc import Iterator

    from core.chip.plan import ChipPlan
    from core.chip.stands import Stand
    from core.fabrication.process import Process
    from core.geometry.contour import Floats

SAME_UM = 2e-3  # distances that a mask on the finest grid cannot tell apart
_ROUND_UM = 10.0  # cures are whole multiples of this
_SIDES = ("left", "lower", "right", "upper")


@dataclass(frozen=True, slots=True, kw_only=True)
class Rules:
    """What is kept between the things on a chip.

    Attributes
    ----------
    plan, process : ChipPlan, Process
        Whose limits they are.
    """

    plan: ChipPlan
    process: Process

    @property
    def widest_um(self) -> float:
        """Distance beyond which two channels cannot disturb one another [um]."""
        return max(self.plan.spacing_um, self.plan.port_clearance_um, self.process.min_wall_um)


def edge_findings(stand: Stand, rules: Rules) -> Iterator[Finding]:
    """Yield what is wrong between a channel and the chip's edge: at most one finding along, and one up.

    Parameters
    ----------
    stand : Stand
        The channel.
    rules : Rules
        The chip and its limits.
    """
    for axis in (0, 1):
        finding = _edge_finding(stand, rules, axis)
        if finding is not None:
            yield finding


def _edge_finding(stand: Stand, rules: Rules, axis: int) -> Finding | None:
    plan, chip, box = rules.plan, chip_box(rules.plan), stand.box_um
    left_over = {axis: box[axis] - chip[axis], axis + 2: chip[axis + 2] - box[axis + 2]}
    side = min(left_over, key=lambda each: left_over[each])
    rest = left_over[side]
    if rest >= plan.edge_clearance_um - SAME_UM:
        return None
    field = ("chip_width_um", "chip_height_um")[axis]
    needed = 2.0 * (max(abs(box[axis]), abs(box[axis + 2])) + plan.edge_clearance_um)
    cure = _allowed(field, ceil(needed / _ROUND_UM - 1e-9) * _ROUND_UM)
    pad = plan.port_diameter_um / 2.0
    reach = (stand.ports_um[:, axis] - chip[axis] if side == axis else chip[axis + 2] - stand.ports_um[:, axis]) - pad
    name, edge = f"{shown(stand.title)}{stand.values}", _SIDES[side]
    point = _extreme_point(stand.outline, side)
    way_out = f"; move it inwards by {_up(plan.edge_clearance_um - rest):g} um{_or(cure)}"
    if reach.min() < 0.0:
        point = stand.ports_um[int(reach.argmin())]
        code, rest, limit = "port_off_chip", float(reach.min()), 0.0
        text = f"a port of {name} lies {-rest:.6g} um over the {edge} edge of the chip"
    elif rest < 0.0:
        code, limit = "channel_off_chip", 0.0
        text = f"{name} reaches {-rest:.6g} um over the {edge} edge of the chip"
    else:
        code, limit = "edge_clearance", plan.edge_clearance_um
        text = f"{name} comes within {rest:.6g} um of the {edge} edge; edge_clearance_um is {limit:g}"
    length, room = box[axis + 2] - box[axis], getattr(plan, field)
    if length + 2.0 * plan.edge_clearance_um > room + SAME_UM:
        kind = "long" if axis == 0 else "high"
        way_out = f": it is {length:.6g} um {kind}, and {field} is {room:g}; fold it into rows, turn it{_or(cure)}"
        code = "chip_too_small" if length > room and code == "channel_off_chip" else code
    is_error = rest < 0.0 or rest < min(limit, rules.process.min_wall_um)
    tip = list(map(float, point))
    tip[axis] = chip[side]
    return Finding(
        code=code, severity=Severity.ERROR if is_error else Severity.WARNING, message=text + way_out, field=field,
        value_um=rest, limit_um=limit, x_um=float(point[0]), y_um=float(point[1]), cure=cure,
        ends_um=(float(point[0]), float(point[1]), tip[0], tip[1]),
    )  # fmt: skip


def pair_findings(first: Stand, second: Stand, rules: Rules) -> Iterator[Finding]:
    """Yield what is wrong between two channels: the wall between them, or the clearance of their ports.

    Measured on the true outlines; boxes only tell which pairs are worth it.

    Parameters
    ----------
    first, second : Stand
        Two channels of one chip.
    rules : Rules
        The chip and its limits.
    """
    if not boxes_overlap(grown_box(first.box_um, rules.widest_um), second.box_um):
        return
    nearest = wall_between(first.outline, second.outline)
    names = f"{shown(first.title)} and {shown(second.title)}{first.values}"
    plan, wall = rules.plan, rules.process.min_wall_um
    if nearest.um == 0.0:
        yield _between("channels_overlap", Severity.ERROR, f"{names} overlap", 0.0, max(wall, plan.spacing_um),
                       nearest.at_um, first, second, "spacing_um")  # fmt: skip
        return
    if nearest.um < wall - SAME_UM:
        text = f"the wall between {names} is {nearest.um:.6g} um; this process needs {wall:g} um"
        yield _between("wall_between_channels", Severity.ERROR, text, nearest.um, wall, nearest.at_um,
                       first, second, "min_wall_um")  # fmt: skip
    elif nearest.um < plan.spacing_um - SAME_UM:
        text = f"the wall between {names} is {nearest.um:.6g} um; spacing_um is {plan.spacing_um:g}"
        cure = _lower("spacing_um", nearest.um)
        yield _between("spacing", Severity.WARNING, text, nearest.um, plan.spacing_um, nearest.at_um,
                       first, second, "spacing_um", cure)  # fmt: skip
    if nearest.um < plan.port_clearance_um - SAME_UM:
        found = [*_port_clearance(first, second, rules), *_port_clearance(second, first, rules)]
        yield from sorted(found, key=lambda finding: finding.value_um or 0.0)[:1]


def _port_clearance(owner: Stand, other: Stand, rules: Rules) -> Iterator[Finding]:
    """Yield the finding of the pad of one channel that is nearest to another channel."""
    limit = rules.plan.port_clearance_um
    radius = pad_radius_um(rules.plan, owner.channel)
    found = [wall_between(circle(port, radius), other.outline) for port in owner.ports_um]
    nearest = min(found, key=lambda each: each.um)
    if nearest.um >= limit - SAME_UM:
        return
    text = (
        f"a port of {shown(owner.title)}{owner.values} leaves {nearest.um:.6g} um between its pad and "
        f"{shown(other.title)}; port_clearance_um is {limit:g}"
    )
    cure = _lower("port_clearance_um", nearest.um)
    yield _between("port_clearance", Severity.WARNING, text, nearest.um, limit, nearest.at_um, owner, other,
                   "port_clearance_um", cure)  # fmt: skip


def _between(
    code: str, severity: Severity, text: str, value: float, limit: float, at_um: Floats,
    first: Stand, second: Stand, field: str, cure: tuple[str, float] | None = None,
) -> Finding:  # fmt: skip
    """Return a finding between two channels, with a move of the second that ends it."""
    (x1, y1), (x2, y2) = at_um.tolist()
    dx, dy = _way_apart(first, second, limit)
    way = ", ".join(
        f"{abs(by):g} um {words[by > 0.0]}"
        for by, words in ((dx, ("to the left", "to the right")), (dy, ("down", "up")))
        if by
    )
    return Finding(
        code=code, severity=severity, field=field, value_um=value, limit_um=limit, cure=cure,
        message=f"{text}; move {shown(second.title)} {way}{_or(cure)}, or pack the channels anew",
        x_um=0.5 * (x1 + x2), y_um=0.5 * (y1 + y2), ends_um=(x1, y1, x2, y2),
    )  # fmt: skip


def _way_apart(first: Stand, second: Stand, limit: float) -> tuple[float, float]:
    """Return the shortest tried move of the second channel, along or up, that leaves the limit between both."""
    a, b = first.box_um, second.box_um
    moves = [
        (0.0, a[3] + limit - b[1]),
        (0.0, a[1] - limit - b[3]),
        (a[2] + limit - b[0], 0.0),
        (a[0] - limit - b[2], 0.0),
    ]
    dx, dy = min(moves, key=lambda move: abs(move[0]) + abs(move[1]))
    apart = wall_between(first.outline, second.outline)
    if apart.um > 0.0:  # a shorter move, where walls are only near
        short = _up(limit - apart.um + SAME_UM)
        for sx, sy in ((0.0, 1.0), (0.0, -1.0), (1.0, 0.0), (-1.0, 0.0)):
            trial = second.outline.placed(Placement(dx_um=sx * short, dy_um=sy * short))
            if short < abs(dx) + abs(dy) and wall_between(first.outline, trial).um >= limit:
                return sx * short, sy * short
    return _up(dx), _up(dy)


def pitch_findings(first: Stand, second: Stand, rules: Rules) -> Iterator[Finding]:
    """Yield the finding of two ports that stand closer than the pitch.

    Parameters
    ----------
    first, second : Stand
        Two channels of one chip, or twice the same one for its own two ports.
    rules : Rules
        The chip and its limits.
    """
    pitch = rules.plan.port_pitch_um
    pairs = [(0, 1)] if first is second else [(i, j) for i in (0, 1) for j in (0, 1)]
    apart = {(i, j): hypot(*(second.ports_um[j] - first.ports_um[i])) for i, j in pairs}
    (i, j), value = min(apart.items(), key=lambda item: item[1])
    if value >= pitch - SAME_UM:
        return
    (x1, y1), (x2, y2) = first.ports_um[i].tolist(), second.ports_um[j].tolist()
    cure = _lower("port_pitch_um", value)
    whose = f"both ports of {shown(first.title)}" if first is second else \
        f"ports of {shown(first.title)} and {shown(second.title)}"  # fmt: skip
    way_out = "raise lead_in_um and lead_out_um" if first is second else f"move {shown(second.title)} away"
    yield Finding(
        code="port_pitch", severity=Severity.ERROR, field="port_pitch_um", value_um=value, limit_um=pitch, cure=cure,
        message=f"{whose}{first.values} stand {value:.6g} um apart; port_pitch_um is {pitch:g}; {way_out}{_or(cure)}",
        x_um=0.5 * (x1 + x2), y_um=0.5 * (y1 + y2), ends_um=(x1, y1, x2, y2),
    )  # fmt: skip


def _allowed(field: str, value: float) -> tuple[str, float] | None:
    """Return a change of the plan that cures what was measured, if the field takes the value."""
    spec = CHIP_FIELDS[field]
    return (field, value) if spec.minimum <= value <= spec.maximum else None


def _lower(field: str, measured_um: float) -> tuple[str, float] | None:
    """Return the limit lowered to just below what was measured: the places of channels do not depend on it."""
    return _allowed(field, floor(measured_um * 10.0) / 10.0)


def _or(cure: tuple[str, float] | None) -> str:
    return "" if cure is None else f", or set {cure[0]} to {cure[1]:g}"


def _up(value: float) -> float:
    """Return a length rounded away from zero to a whole micrometre."""
    return float(np.sign(value) * ceil(abs(value) - 1e-9))


def _extreme_point(outline: Outline, side: int) -> Floats:
    """Return a point of the outline that reaches farthest to a side (left, lower, right, upper), to 0.1 um."""
    points = outline.outer.chords(sagitta_um=0.1)
    along = points[:, side % 2]
    point: Floats = points[int(along.argmin() if side < 2 else along.argmax())]
    return point
