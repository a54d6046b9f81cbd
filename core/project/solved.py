"""Results of flow solves kept with a chip: numbers alone, with the design and conditions they belong to."""

from __future__ import annotations

import math
from dataclasses import dataclass, fields
from typing import TYPE_CHECKING

from core.errors import DesignValueError
from core.parameters import CHANNEL_FIELDS
from core.project.text import checked_line, checked_name

if TYPE_CHECKING:
    from core.operating import OperatingPoint
    from core.parameters import ChannelParameters

MOST_SOLVED = 500
_MOST_NOTES = 6
_LONGEST_NOTE = 300


@dataclass(frozen=True, slots=True, kw_only=True)
class SolvedResult:
    """What one flow solve gave at one flow.

    It belongs to the channel that was solved and its conditions, not to whatever the set is now: once
    what the process makes of the set differs, the result is *stale*.

    Attributes
    ----------
    set_name : str
        Parameter set for which it was solved.
    channel : ChannelParameters
        What was solved: what the process makes of the set, which may differ from what the set asks for.
    operating : OperatingPoint
        Fluid, temperature, and the flow that was solved.
    reynolds : float
        rho U D_h / mu of the channel section [-].
    forward_pressure_pa, reverse_pressure_pa : float or None
        Pressure drops [Pa]; None where no steady flow was found.
    loop_share_forward, loop_share_reverse : float or None
        Mean part of the flow in the loops.
    loop_shares_forward, loop_shares_reverse : tuple of float
        The same stage by stage, in the order of the reverse flow.
    stage_drops_forward_pa, stage_drops_reverse_pa : tuple of float
        Pressure drops from one stage to the next, in the same order [Pa].
    error_band_percent : float or None
        Error to be expected of either drop [%].
    diodicity_band : float or None
        Error to be expected of the diodicity, absolute.
    reached_reynolds : float
        Highest Reynolds number with a steady flow in both directions.
    valid : bool
        Whether the answer can be relied on within its bands.
    quality : str
        How fine the solve was.
    notes : tuple of str
        Remarks of the solve.

    Raises
    ------
    DesignValueError
        If a number is not finite or a text cannot be used.
    """

    set_name: str
    channel: ChannelParameters
    operating: OperatingPoint
    reynolds: float
    forward_pressure_pa: float | None = None
    reverse_pressure_pa: float | None = None
    loop_share_forward: float | None = None
    loop_share_reverse: float | None = None
    loop_shares_forward: tuple[float, ...] = ()
    loop_shares_reverse: tuple[float, ...] = ()
    stage_drops_forward_pa: tuple[float, ...] = ()
    stage_drops_reverse_pa: tuple[float, ...] = ()
    error_band_percent: float | None = None
    diodicity_band: float | None = None
    reached_reynolds: float = 0.0
    valid: bool = False
    quality: str = "normal"
    notes: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        """Check numbers and words."""
        put = object.__setattr__
        put(self, "set_name", checked_name(self.set_name, field="set_name"))
        put(self, "quality", checked_line(self.quality, field="quality"))
        put(self, "notes", tuple(_note(note) for note in self.notes[:_MOST_NOTES]))
        if not isinstance(self.valid, bool):
            raise DesignValueError(
                field="valid", value=self.valid, limit="true or false", way_out="write true or false"
            )
        for name in NUMBERS:
            put(self, name, _number(name, getattr(self, name)))
        for name in LISTS:
            put(self, name, _numbers(name, getattr(self, name)))

    @property
    def flow_ul_min(self) -> float:
        """The flow that was solved [uL/min]."""
        return self.operating.flow_ul_min

    def shares_of(self, stage: int) -> tuple[float, float] | None:
        """Return the loop shares, forward and reverse, of a stage counted from 0 in the reverse flow.

        The mean of all stages stands in where single ones were not kept; None where there is neither.
        """
        if stage < min(len(self.loop_shares_forward), len(self.loop_shares_reverse)):
            return self.loop_shares_forward[stage], self.loop_shares_reverse[stage]
        if self.loop_share_forward is None or self.loop_share_reverse is None:
            return None
        return self.loop_share_forward, self.loop_share_reverse

    @property
    def diodicity(self) -> float | None:
        """Reverse over forward pressure drop, or None."""
        if self.forward_pressure_pa is None or self.reverse_pressure_pa is None:
            return None
        return self.reverse_pressure_pa / self.forward_pressure_pa

    @property
    def highest_pressure_pa(self) -> float | None:
        """The larger of both drops at the upper end of its error band [Pa], or None."""
        if self.forward_pressure_pa is None or self.reverse_pressure_pa is None:
            return None
        highest_pa = max(self.forward_pressure_pa, self.reverse_pressure_pa)
        return highest_pa * (1.0 + (self.error_band_percent or 0.0) / 100.0)

    def belongs_to(self, channel: ChannelParameters, operating: OperatingPoint, *, at_any_flow: bool = False) -> bool:
        """Return whether it was solved for this channel in these conditions.

        Parameters
        ----------
        channel : ChannelParameters
            What is made of a design.
        operating : OperatingPoint
            Fluid, temperature and flow.
        at_any_flow : bool
            True to let the flow differ, as for a point of a curve.
        """
        same = self.operating.with_values({"flow_ul_min": operating.flow_ul_min}) if at_any_flow else self.operating
        return self.channel == channel and same == operating


_OPTIONAL = frozenset(
    {"forward_pressure_pa", "reverse_pressure_pa", "loop_share_forward", "loop_share_reverse", "error_band_percent",
     "diodicity_band"}
)  # fmt: skip
NUMBERS = (*sorted(_OPTIONAL), "reynolds", "reached_reynolds")
LISTS = ("loop_shares_forward", "loop_shares_reverse", "stage_drops_forward_pa", "stage_drops_reverse_pa")
_LONGEST_LIST = int(CHANNEL_FIELDS["stages"].maximum)
KEYS = tuple(field.name for field in fields(SolvedResult))


def kept_results(results: tuple[SolvedResult, ...], *, most_per_set: int = 24) -> tuple[SolvedResult, ...]:
    """Return the results worth keeping: the latest of every question, the latest questions of every set.

    Parameters
    ----------
    results : tuple of SolvedResult
        The oldest first.
    most_per_set : int
        How many a set may have.
    """
    latest = {(each.set_name, each.channel, each.operating): each for each in results}
    kept: list[SolvedResult] = []
    for name in dict.fromkeys(each.set_name for each in results):
        own = [each for each in results if each.set_name == name and latest[name, each.channel, each.operating] is each]
        kept += own[-most_per_set:]
    return tuple(kept)


def _number(name: str, value: object) -> float | None:
    if value is None and name in _OPTIONAL:
        return None
    limit = f"a finite number{' or null' if name in _OPTIONAL else ''}"
    if isinstance(value, bool) or not isinstance(value, int | float) or not math.isfinite(value):
        raise DesignValueError(field=name, value=value, limit=limit, way_out="solve again")
    return float(value)


def _numbers(name: str, given: object) -> tuple[float, ...]:
    if not isinstance(given, list | tuple) or len(given) > _LONGEST_LIST:
        limit = f"a list of at most {_LONGEST_LIST} numbers"
        raise DesignValueError(field=name, value=given, limit=limit, way_out="solve again")
    return tuple(number for each in given if (number := _number(name, each)) is not None)


def _note(note: object) -> str:
    if not isinstance(note, str):
        raise DesignValueError(field="notes", value=note, limit="a list of texts", way_out="give texts")
    return "".join(c if c.isprintable() else " " for c in note[:_LONGEST_NOTE])
