"""Cures found by trying: the nearest value of a field with which an objection is gone and the channel still drawn."""

from __future__ import annotations

from functools import cached_property
from math import ceil, floor
from typing import TYPE_CHECKING

from core.fabrication.channel_checks import CHECKS
from core.fabrication.existence import RADII, WIDTHS
from core.findings import Severity
from core.parameters import CHANNEL_FIELDS

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

    from core.fabrication.channel_case import ChannelCase
    from core.fabrication.channel_checks import Check
    from core.fabrication.objection import Objection

_PER_UM = 100.0  # cures are told to a hundredth
_MOST_TRIES = 6  # of one field
_FIRST_TURN_DEG = 3.0


class Cures:
    """Searches cures for the objections to one channel; whatever was drawn for one serves the others.

    Parameters
    ----------
    case : ChannelCase
        The channel objected to.
    on_try : callable, optional
        Called before anything is drawn; whatever it raises ends the search.
    """

    def __init__(self, case: ChannelCase, on_try: Callable[[], object] | None = None) -> None:
        self.case, self._on_try = case, on_try
        self._tried: dict[tuple[str, float], ChannelCase] = {}

    def of(self, check: Check, objection: Objection) -> tuple[str, float] | None:
        """Return a field and a value that were tried and cure an objection.

        Parameters
        ----------
        check : callable
            The check that objected.
        objection : Objection
            With the fields that may help.

        Returns
        -------
        tuple of (str, float) or None
            One that brings no new error if there is such, any other that cures if not, None if none does.
        """
        second_best = None
        for cure in _Search(self, check, objection).cures():
            if _errors(self.tried(*cure)) <= self._known_errors:
                return cure
            second_best = second_best or cure
        return second_best

    def tried(self, field: str, value: float) -> ChannelCase:
        """Return the channel with one field changed."""
        key = field, value
        if key not in self._tried:
            if self._on_try is not None:
                self._on_try()
            self._tried[key] = self.case.with_value(field, value)
        return self._tried[key]

    @cached_property
    def _known_errors(self) -> set[str]:
        return _errors(self.case)


class _Search:
    """The values that may cure one objection."""

    def __init__(self, cures: Cures, check: Check, objection: Objection) -> None:
        self.all, self.check, self.objection = cures, check, objection
        self.wanted = cures.case.wanted

    def cures(self) -> Iterator[tuple[str, float]]:
        """Yield fields and values with which the objection is gone."""
        for field, value in self.objection.values:
            rounded = self.rounded(field, value)
            if rounded is not None and self.left_um(field, rounded) == 0.0:
                yield field, rounded
        for field, sense in self.objection.searched:
            found = self.searched(field, sense)
            if found is not None:
                yield field, found

    def rounded(self, field: str, value: float) -> float | None:
        """Return a value rounded away from the present one; None where the field cannot have it."""
        outwards = ceil if value > getattr(self.wanted, field) else floor
        rounded = outwards(round(value * _PER_UM, 6)) / _PER_UM
        return rounded if CHANNEL_FIELDS[field].minimum <= rounded <= CHANNEL_FIELDS[field].maximum else None

    def left_um(self, field: str, value: float) -> float | None:
        """Return by how much a value still fails [um]: 0 where it cures, None where no channel can be drawn."""
        case = self.all.tried(field, value)
        if not case.is_drawable:
            return None
        finding = self.objection.finding
        for left in self.check(case):
            same_field = left.finding.field == finding.field or finding.field not in (*WIDTHS, *RADII)
            if left.finding.code == finding.code and same_field:
                return abs((left.finding.limit_um or 0.0) - (left.finding.value_um or 0.0)) or 1.0
        return 0.0

    def searched(self, field: str, sense: int) -> float | None:
        """Return the nearest value of a field that cures: by straight lines through what was tried, then by halving."""
        finding = self.objection.finding
        value, left = (
            float(getattr(self.wanted, field)),
            abs((finding.limit_um or 1.0) - (finding.value_um or 0.0)),
        )
        step = sense * (_FIRST_TURN_DEG if CHANNEL_FIELDS[field].unit == "deg" else left)
        for _ in range(_MOST_TRIES):
            tried = self.rounded(field, value + step)
            now = None if tried is None else self.left_um(field, tried)
            if tried is None or now is None or now >= left:
                return None
            if now == 0.0:
                return self.nearer(field, value, tried)
            step = 1.001 * (tried - value) * now / (left - now)
            value, left = tried, now
        return None

    def nearer(self, field: str, failing: float, curing: float) -> float:
        """Return a curing value nearer to the last that failed."""
        for _ in range(3):
            middle = self.rounded(field, 0.5 * (failing + curing))
            if middle is None or middle in (failing, curing):
                break
            if self.left_um(field, middle) == 0.0:
                curing = middle
            else:
                failing = middle
        return curing


def _errors(case: ChannelCase) -> set[str]:
    """Return the codes of all errors of a case."""
    found = (objection.finding for check in CHECKS for objection in check(case))
    return {finding.code for finding in found if finding.severity is Severity.ERROR}
