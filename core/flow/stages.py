"""What a solved point says stage by stage."""

from __future__ import annotations

from dataclasses import asdict, dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Sequence


@dataclass(frozen=True, slots=True, kw_only=True)
class StageFlow:
    """One stage of a solved channel.

    Attributes
    ----------
    number : int
        From 1, in the order of the reverse flow.
    loop_share_forward, loop_share_reverse : float or None
        Part of the flow in its loop; negative where the loop is run through against the flow. None
        where no steady flow was found.
    to_next_forward_pa, to_next_reverse_pa : float or None
        Pressure drop between the middle of its bypass and that of the next stage's [Pa]; None for the
        last stage and where no steady flow was found.
    """

    number: int
    loop_share_forward: float | None
    loop_share_reverse: float | None
    to_next_forward_pa: float | None
    to_next_reverse_pa: float | None

    def as_dict(self) -> dict[str, object]:
        """Return the stage with the names of its fields as keys."""
        return asdict(self)


def stage_flows(
    *,
    shares_forward: Sequence[float],
    shares_reverse: Sequence[float],
    drops_forward_pa: Sequence[float],
    drops_reverse_pa: Sequence[float],
) -> tuple[StageFlow, ...]:
    """Return all stages of a channel.

    Parameters
    ----------
    shares_forward, shares_reverse : sequence of float
        Loop shares of all stages in the order of the reverse flow; empty where nothing was found.
    drops_forward_pa, drops_reverse_pa : sequence of float
        From bypass to bypass of the stages solved, each in the order of its flow [Pa]. Stages that were
        not solved stand before the last drop, with the mean of the two drops before it.
    """
    stages = max(len(shares_forward), len(shares_reverse))
    forward, reverse = _all_drops(drops_forward_pa, stages)[::-1], _all_drops(drops_reverse_pa, stages)
    return tuple(
        StageFlow(
            number=k + 1,
            loop_share_forward=_at(shares_forward, k),
            loop_share_reverse=_at(shares_reverse, k),
            to_next_forward_pa=_at(forward, k),
            to_next_reverse_pa=_at(reverse, k),
        )
        for k in range(stages)
    )


def _all_drops(solved: Sequence[float], stages: int) -> list[float]:
    """Return the drops between all stages in the order of the flow."""
    missing = stages - 1 - len(solved)
    if len(solved) < 3 or missing <= 0:
        return list(solved)
    return [*solved[:-1], *[(solved[-2] + solved[-3]) / 2] * missing, solved[-1]]


def _at(values: Sequence[float], index: int) -> float | None:
    return values[index] if index < len(values) else None
