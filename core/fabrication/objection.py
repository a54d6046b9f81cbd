"""An objection: a finding before a cure was tried, and where one may be found.

A length shorter than its limit by more than one nanometre is an objection.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from core.fabrication.existence import SAME_UM
from core.findings import Finding, Severity

if TYPE_CHECKING:
    from collections.abc import Iterator

    from core.fabrication.channel_case import ChannelCase

_ISLAND_FIELDS = (("loop_radius_um", 1), ("loop_angle_deg", 1), ("return_length_um", 1), ("loop_width_um", -1))
_OUTER_FIELDS = (("stage_gap_um", 1), ("loop_turn_deg", -1), ("loop_angle_deg", 1), ("loop_width_um", -1))


@dataclass(frozen=True, slots=True, kw_only=True)
class Objection:
    """What a check has against a channel.

    Attributes
    ----------
    finding : Finding
        Without a cure; its message tells value and limit.
    values : tuple of (str, float)
        Fields and values that ought to cure it, the most sensible first.
    searched : tuple of (str, int)
        Fields of which a curing value must be searched for, and whether by raising (+1) or lowering (-1) it.
    way_out : str
        What else to change, in words.
    """

    finding: Finding
    values: tuple[tuple[str, float], ...] = ()
    searched: tuple[tuple[str, int], ...] = ()
    way_out: str


def too_short(
    case: ChannelCase, name: str, value: float, limit: float, *, code: str, words: str, way_out: str,
    per_um: float = 1.0, severity: Severity = Severity.ERROR, also: tuple[tuple[str, float], ...] = (),
    is_depth_first: bool = False,
) -> Iterator[Objection]:  # fmt: skip
    """Yield the objection to a width below its limit, if it is.

    Parameters
    ----------
    case : ChannelCase
        The channel and its process.
    name : str
        Field of the width.
    value, limit : float
        The width, as drawn or as made, and the least it may be [um].
    code, severity, way_out
        As for ``Finding`` and ``Objection``.
    words : str
        What is wrong, with ``{value}`` and ``{limit}`` where the numbers go.
    per_um : float
        How much the width grows with its field: the scale, for a width on the drawing.
    also : tuple of (str, float)
        Further fields and values that ought to cure it.
    is_depth_first : bool
        True: a depth lower in the same proportion is tried before a wider channel.
    """
    if case.making.findings or value >= limit - SAME_UM:
        return
    wider = (name, getattr(case.wanted, name) + (limit - value) / per_um)
    shallower = (("depth_um", case.wanted.depth_um * value / limit),) if is_depth_first else ()
    said = words.format(value=f"{value:.6g}", limit=f"{limit:.6g}")
    yield Objection(
        finding=placed(
            case, name, value, code=code, limit=limit, severity=severity,
            message=f"{name} is {getattr(case.wanted, name):g}: {said}",
        ),
        values=(*shallower, wider, *also),
        way_out=way_out,
    )  # fmt: skip


def placed(
    case: ChannelCase, name: str, value: float, *, code: str, limit: float, severity: Severity, message: str
) -> Finding:
    """Return a finding about a width, with a place on the drawing.

    Parameters
    ----------
    case : ChannelCase
        The channel and its process.
    name : str
        Field of the width.
    value, limit : float
        The width and its limit [um].
    code, severity, message
        As for ``Finding``.
    """
    ends = case.width_ends(name, getattr(case.making.made, name))
    return Finding(
        code=code, severity=severity, message=message, field=name, value_um=value, limit_um=limit, ends_um=ends,
        x_um=None if ends is None else 0.5 * (ends[0] + ends[2]),
        y_um=None if ends is None else 0.5 * (ends[1] + ends[3]),
    )  # fmt: skip


def gap_objection(
    case: ChannelCase, code: str, value: float, limit: float, words: str, way_out: str, *,
    severity: Severity = Severity.ERROR, values: tuple[tuple[str, float], ...] = (),
) -> Objection:  # fmt: skip
    """Return the objection to the narrowest gap.

    Parameters
    ----------
    case : ChannelCase
        The channel and its process.
    code, severity, way_out
        As for ``Finding`` and ``Objection``.
    value, limit : float
        The gap, as drawn or as made, and the least it may be [um].
    words : str
        What is wrong, with ``{value}`` where the number goes.
    values : tuple of (str, float)
        What to try before fields are searched.
    """
    ends, in_island = case.gap_ends, case.is_gap_in_island
    searched = (*_ISLAND_FIELDS, *_OUTER_FIELDS) if in_island else (*_OUTER_FIELDS, *_ISLAND_FIELDS)
    where = "the solid of an island" if in_island else "the solid between two parts of the channel"
    return Objection(
        finding=Finding(
            code=code, severity=severity, field=searched[0][0], value_um=value, limit_um=limit, ends_um=ends,
            x_um=None if ends is None else 0.5 * (ends[0] + ends[2]),
            y_um=None if ends is None else 0.5 * (ends[1] + ends[3]),
            message=f"{where} {words.format(value=f'{value:.6g}')}",
        ),
        values=values,
        searched=tuple(dict(searched).items()),
        way_out=way_out,
    )  # fmt: skip
