"""Many flows through one chain, and long chains from short ones.

A ladder of levels is kept from flow to flow, so that meshes, orders of elimination and the last
field serve again. A chain whose drop per stage has settled is lengthened by that settled drop.
"""

from __future__ import annotations

import time
from dataclasses import dataclass
from typing import TYPE_CHECKING

from core.flow.ladder import DIRECTIONS, Answer, Climb, Progress, solve_level
from core.flow.newton import FlowStopped, follow
from core.flow.quality import first_levels, good_enough, next_level
from core.flow.scales import scales
from core.flow.solve import MEMORY_LIMIT_MB, as_result

if TYPE_CHECKING:
    from collections.abc import Callable

    from core.flow.domain import FlowDomain
    from core.flow.quality import Level, Quality
    from core.flow.result import DirectionResult, FlowResult

SETTLED_SHARE = 0.01  # change of the drop per stage from one stage to the next that counts as settled
_STEPS = 1000  # of a whole job, as told to the caller
_AGAIN = 0.6  # work of a level that starts from another flow, against one that starts anew


class Meter(Progress):
    """Tells how far a job of many levels and flows is, each weighted by its work.

    Parameters
    ----------
    work : float
        Of the whole job, in any unit.
    report : callable or None
        Called as ``report(step, total, text)``.
    should_stop : callable or None
        Answers True to stop.
    """

    def __init__(
        self, work: float, report: Callable[[int, int, str], None] | None, should_stop: Callable[[], bool] | None
    ) -> None:
        super().__init__(_STEPS, report, should_stop)
        self._tell, self._asks = report, should_stop
        self._whole, self._done, self._part, self._parts, self._work = work, 0.0, 0, 1, 0.0
        self.prefix = ""

    def begin(self, work: float, parts: int) -> None:
        """Start a level: so much work in so many parts, each of which ticks when it starts."""
        self._done += self._work
        self._work, self._parts, self._part = work, parts, 0

    def tick(self, text: str, *, advance: bool = True) -> None:
        """Report; raises FlowStopped if the caller wants to stop."""
        if self._asks is not None and self._asks():
            raise FlowStopped("the flow solve was stopped")
        self._part += advance
        share = min(max(self._part - 1, 0) / self._parts, 1.0)
        step = round(_STEPS * (self._done + share * self._work) / self._whole)
        if self._tell is not None:
            self._tell(min(step, _STEPS), _STEPS, self.prefix + text)


def work_of(level: Level, stages: int) -> float:
    """Return how much work a level is, against others: unknowns, and the fill that grows with modes."""
    return (stages + 1) * level.modes**1.5 / level.size**2


def work_of_flows(quality: Quality, depth_to_width: float, *, stages: int, flows: int) -> float:
    """Return the work of several flows of one quality, for a ``Meter``."""
    once = sum(work_of(level, stages) for level in first_levels(quality, depth_to_width))
    return once * (1.0 + _AGAIN * (flows - 1))


class Ladder:
    """Solves one domain at several flows, each started from the one before on every level.

    Parameters
    ----------
    domain : FlowDomain
        Outline, depth, open ends, sections.
    density_kg_m3, viscosity_pa_s : float
        Of the fluid.
    quality : Quality
        How fine.
    meter : Meter
        Is told of progress.
    memory_limit_mb : float
        Most memory to use [MB].
    """

    def __init__(
        self,
        domain: FlowDomain,
        *,
        density_kg_m3: float,
        viscosity_pa_s: float,
        quality: Quality,
        meter: Meter,
        memory_limit_mb: float = MEMORY_LIMIT_MB,
    ) -> None:
        self._domain, self._quality, self._meter, self._limit = domain, quality, meter, memory_limit_mb
        self._density, self._viscosity = density_kg_m3, viscosity_pa_s
        self._levels = first_levels(quality, domain.depth_to_width)
        self._kept: list[Answer] = []

    def result(self, flow_m3_s: float) -> FlowResult:
        """Return both directions at one flow.

        Raises
        ------
        SolveError
            If the domain cannot be meshed or does not fit the memory.
        FlowStopped
            If the caller stopped.
        """
        began = time.perf_counter()
        unit = scales(
            self._domain, flow_m3_s=flow_m3_s, density_kg_m3=self._density, viscosity_pa_s=self._viscosity
        )
        climbed = self._climb(unit.width_reynolds)
        return as_result(
            self._domain,
            unit,
            climbed,
            flow_m3_s=flow_m3_s,
            quality=self._quality,
            began=began,
            progress=self._meter,
        )

    def _climb(self, reynolds: float) -> Climb:
        state, misses = Climb(), 0
        for number in range(len(self._levels)):
            answer = self._answer(number, state.last, reynolds)
            state.add(answer)
            misses = 0 if answer.complete else misses + 1
            if misses == 2:
                return state
        while (level := self._next_level(state)) is not None:
            self._levels.append(level)
            answer = self._answer(len(self._levels) - 1, state.last, reynolds)
            if not answer.complete:
                del self._levels[-1], self._kept[-1]
                break
            state.add(answer)
        return state

    def _next_level(self, state: Climb) -> Level | None:
        """Return the level that the tolerance asks for, if it is within reach."""
        last, band = state.last, state.band
        if last is None or band is None or good_enough(self._quality, band, last.diodicity):
            return None
        parts = [part or type(band)() for part in (state.by_modes, state.by_size)]
        level = next_level(self._quality, last.level, self._domain.depth_to_width, *parts)
        if level is None:
            return None
        growth = ((last.level.size / level.size) * (level.modes / last.level.modes)) ** 2
        return level if last.memory_mb * growth <= self._limit else None

    def _answer(self, number: int, before: Answer | None, reynolds: float) -> Answer:
        level = self._levels[number]
        work = work_of(level, self._domain.stages)
        if number < len(self._kept):
            self._meter.begin(_AGAIN * work, parts=2)
            self._kept[number] = self._moved(self._kept[number], reynolds)
        else:
            self._meter.begin(work, parts=3)
            self._kept.append(
                solve_level(self._domain, level, before, reynolds, self._quality, self._meter, self._limit)
            )
        return self._kept[number]

    def _moved(self, kept: Answer, reynolds: float) -> Answer:
        """Return an answer brought to another flow; only the finest keeps its factors, for the memory."""
        answer = Answer(kept.level, kept.problems, kept.memory_mb)
        level = kept.level
        for direction in DIRECTIONS:
            self._meter.tick(f"{direction} flow, triangles of {level.size:.2g} widths, {level.modes} depth modes")
            problem, branch = kept.problems[direction], kept.branches[direction]
            if branch.factor is None:
                branch.factor = problem.factorised(branch.state, branch.reynolds)
            answer.reached[direction] = follow(
                problem, branch, reynolds, tolerance=self._quality.newton_tolerance, pause=self._pause
            )
            answer.branches[direction] = branch
            if level != self._levels[-1]:
                branch.factor = None
        return answer

    def _pause(self, _reynolds: float) -> None:
        self._meter.tick("following the flow to another speed", advance=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Lengthened:
    """One direction of a chain longer than the one that was solved.

    Attributes
    ----------
    pressure_pa : float
        Drop between the open ends [Pa].
    added_pa : float
        Part of it that belongs to the stages not solved [Pa].
    error_pa : float
        Error to be expected of that part [Pa].
    loop_shares : tuple of float
        Of all stages, in the order of the reverse flow.
    """

    pressure_pa: float
    added_pa: float
    error_pa: float
    loop_shares: tuple[float, ...]


def unsettled_share(direction: DirectionResult) -> float:
    """Return how much the drop per stage still changes from stage to stage, as a share of itself.

    Parameters
    ----------
    direction : DirectionResult
        Of a chain of at least four stages.
    """
    drops = direction.bypass_drops_pa
    return max(abs(drops[-2] - drops[-3]), abs(drops[-1] - drops[-2]) / 2) / abs(_settled_drop(direction))


def _settled_drop(direction: DirectionResult) -> float:
    """Return the mean of the last two drops per stage that the leaving flow has not touched [Pa]."""
    return (direction.bypass_drops_pa[-3] + direction.bypass_drops_pa[-2]) / 2


def lengthened(direction: DirectionResult, *, stages: int, is_forward: bool) -> Lengthened:
    """Return a direction as it would be with more stages.

    Parameters
    ----------
    direction : DirectionResult
        Of a chain of at least four stages that was solved, with its pressure drop.
    stages : int
        Wanted, not fewer than solved.
    is_forward : bool
        Whether the flow passes the stages against their numbering.

    Returns
    -------
    Lengthened

    Notes
    -----
    Each further stage is counted with the drop from one bypass to the next near the end of the
    chain, in the order of the flow: far from where the flow enters, and not yet touched by its
    leaving. The error is the change of that drop among its neighbours, for every stage added.
    """
    assert direction.pressure_pa is not None
    solved, more = len(direction.loop_shares), stages - len(direction.loop_shares)
    drop = _settled_drop(direction)
    place = 1 if is_forward else solved - 2  # the last but one that the flow passes
    shares = direction.loop_shares
    added = more * drop
    return Lengthened(
        pressure_pa=direction.pressure_pa + added,
        added_pa=added,
        error_pa=more * unsettled_share(direction) * abs(drop),
        loop_shares=(*shares[:place], *(shares[place],) * more, *shares[place:]),
    )
