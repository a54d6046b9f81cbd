"""Long chains: drop per stage settles, so that a solved chain may be extended."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from core.errors import SolveError

if TYPE_CHECKING:
    from collections.abc import Sequence

# Change of the drop from one stage to the next that counts as settled; coarse triangles alone scatter
# the drops by 1.3 %, and whatever change is left counts in the error.
_SETTLED_PERCENT = 2.0
_SLOWEST = 0.8  # largest ratio of successive changes that is believed


@dataclass(frozen=True, slots=True, kw_only=True)
class ExtendedDrop:
    """Pressure drop of a longer chain in one direction.

    Attributes
    ----------
    pressure_pa : float
        Whole chain [Pa].
    error_pa : float
        What the extension may be wrong by [Pa], on top of the error of the solve.
    increment_pa : float
        Drop of one further stage [Pa].
    settled : bool
        Whether the drop per stage had settled in the chain that was solved.
    """

    pressure_pa: float
    error_pa: float
    increment_pa: float
    settled: bool


def extend_settled(*, pressure_pa: float, bypass_drops_pa: Sequence[float], stages: int) -> ExtendedDrop:
    """Extend the drop of a solved chain to more stages by the drop that each further stage adds.

    Parameters
    ----------
    pressure_pa : float
        Drop of the solved chain, leads included [Pa].
    bypass_drops_pa : sequence of float
        Drops from bypass to bypass in the order of the flow [Pa], one fewer than stages solved, at
        least three. The last one feels the end of the chain and is not used.
    stages : int
        Stages of the long chain, not fewer than solved.

    Returns
    -------
    ExtendedDrop

    Raises
    ------
    SolveError
        If there are too few drops or stages.

    Notes
    -----
    A further stage adds the mean of the last two inner drops. Error: half the difference of the two
    (scatter of the triangles) for every stage added; where the last changes go the same way, they are
    taken to shrink like a geometric series, and what it still adds counts as well. Source: derived here.
    """
    solved = len(bypass_drops_pa) + 1
    if solved < 4 or stages < solved:
        raise SolveError(f"stages is {stages}, solved are {solved}; solve 4 or more, and not more than stages")
    inner = list(bypass_drops_pa[:-1])
    increment = 0.5 * (inner[-1] + inner[-2])
    change = inner[-1] - inner[-2]
    before = inner[-2] - inner[-3] if len(inner) > 2 else 2 * change
    # changes that go to and fro are scatter, not a series
    ratio = min(change / before, _SLOWEST) if change * before > 0 else 0.0
    per_stage = abs(change) * (0.5 + ratio / (1 - ratio))
    added = stages - solved
    return ExtendedDrop(
        pressure_pa=pressure_pa + added * increment,
        error_pa=added * per_stage,
        increment_pa=increment,
        settled=abs(change) <= _SETTLED_PERCENT / 100 * abs(increment),
    )
