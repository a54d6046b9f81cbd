"""Both directions at one flow or several, on finer and finer levels, each started from the one before."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from core.errors import SolveError
from core.flow.following import follow_direction
from core.flow.levels import Levels
from core.flow.newton import FlowStopped
from core.flow.quality import Band, band_of_step, first_levels, good_enough, least_band, next_level
from core.flow.side_by_side import Companion

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence
    from types import TracebackType
    from typing import Self

    from core.flow.domain import FlowDomain
    from core.flow.following import Found
    from core.flow.quality import Level, Quality

DIRECTIONS = ("forward", "reverse")
_WORTH_A_PROCESS = 1e7  # entries of factors, below which another process takes longer to start than it saves
_MOST_MISSES = 3  # levels on which a flow could not be reached, after which it is given up


class Progress:
    """Tells the caller how far a solve is, and asks whether to stop.

    Parameters
    ----------
    total : int
        Steps expected.
    report : callable or None
        Called as ``report(step, total, text)``.
    should_stop : callable or None
        Answers True to stop.
    """

    def __init__(
        self, total: int, report: Callable[[int, int, str], None] | None, should_stop: Callable[[], bool] | None
    ) -> None:
        self._step, self._total, self._report, self._should_stop = 0, total, report, should_stop

    def pause(self) -> None:
        """Raise FlowStopped if the caller wants to stop."""
        if self._should_stop is not None and self._should_stop():
            raise FlowStopped("the flow solve was stopped")

    def skip(self, steps: int) -> None:
        """Count steps that need not be done."""
        self._step += steps
        self._total = max(self._total, self._step)

    def tick(self, text: str, advance: bool = True) -> None:
        """Report one step; raises FlowStopped if the caller wants to stop."""
        self.pause()
        if advance:
            self._step += 1
            self._total = max(self._total, self._step)
        if self._report is not None:
            self._report(self._step, self._total, text)


@dataclass(frozen=True, slots=True, eq=False)
class Answer:
    """Both directions at one flow on one level.

    Attributes
    ----------
    found : dict of Found
        By direction.
    memory_mb : float
        Estimated need [MB].
    """

    found: dict[str, Found]
    memory_mb: float

    @property
    def level(self) -> Level:
        """Where it was found."""
        return self.found["forward"].level

    @property
    def complete(self) -> bool:
        """Whether both directions reached the flow asked for."""
        return all(each.reached for each in self.found.values())

    @property
    def diodicity(self) -> float:
        """Reverse over forward drop."""
        return self.found["reverse"].drop / self.found["forward"].drop


@dataclass(slots=True)
class Climb:
    """The answers of a ladder so far at one flow, and the errors left by modes and by mesh.

    Attributes
    ----------
    quality : Quality
    reynolds : float
        On channel width.
    answers : list of Answer
        The coarsest first.
    by_modes, by_size : Band or None
        None as long as nothing is known.
    """

    quality: Quality
    reynolds: float
    answers: list[Answer] = field(default_factory=list)
    by_modes: Band | None = None
    by_size: Band | None = None

    @property
    def answer(self) -> Answer:
        """The last answer; there is one as soon as a level has been solved."""
        return self.answers[-1]

    @property
    def is_given_up(self) -> bool:
        """Whether the flow was not reached on the last levels."""
        return len(self.answers) >= _MOST_MISSES and not any(each.complete for each in self.answers[-_MOST_MISSES:])

    @property
    def band(self) -> Band | None:
        """Error of the last answer, or None if no two answers can be compared."""
        if not self.answers or not self.answer.complete or (self.by_modes is None and self.by_size is None):
            return None
        least = least_band(self.quality, self.answer.diodicity, self.reynolds)
        return (self.by_modes or Band()) + (self.by_size or Band()) + least

    @property
    def is_poor(self) -> bool:
        """Whether there is a band, and it is wider than the quality wants."""
        band = self.band
        return band is not None and not good_enough(self.quality, band, self.answer.diodicity)

    def add(self, answer: Answer) -> None:
        """Take the next answer and compare it with the one before."""
        before = self.answers[-1] if self.answers else None
        self.answers.append(answer)
        if before is None or not (before.complete and answer.complete):
            return
        drops = [(before.found[d].drop, answer.found[d].drop) for d in DIRECTIONS]
        band = band_of_step(before.level, answer.level, drops, (before.diodicity, answer.diodicity))
        if before.level.size == answer.level.size:
            self.by_modes = band
        else:
            self.by_size = band


class Ladder:
    """Solves one domain at one quality after another; levels that were solved once are not solved again.

    Parameters
    ----------
    domain : FlowDomain
    memory_limit_mb : float
        Most memory to use [MB]. Levels beyond the first ones of a quality are left out rather than refused.
    processes : int
        With 2, reverse flow is solved in a process of its own as far as the memory allows. Scripts that
        ask for it must be importable without side effects.
    """

    def __init__(self, domain: FlowDomain, *, memory_limit_mb: float, processes: int = 1) -> None:
        self.domain, self.levels = domain, Levels(domain, memory_limit_mb)
        self._companion = Companion(domain, memory_limit_mb) if processes > 1 else None
        self._known: dict[tuple[float, Level], Answer] = {}

    def __enter__(self) -> Self:
        """Return the ladder itself."""
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        """End the other process."""
        self.end()

    def end(self) -> None:
        """End the other process, if there is one."""
        if self._companion is not None:
            self._companion.end()

    def climb(self, reynolds: Sequence[float], quality: Quality, progress: Progress) -> list[Climb]:
        """Solve levels until the tolerance is met, the ladder ends, or a flow is given up.

        Parameters
        ----------
        reynolds : sequence of float
            Flows, rising, as Reynolds numbers on channel width.
        quality : Quality
        progress : Progress

        Returns
        -------
        list of Climb
            One for each flow.

        Raises
        ------
        SolveError
            If the domain cannot be meshed or its first levels do not fit the memory.
        FlowStopped
            If the caller stopped.
        """
        climbs = [Climb(quality, each) for each in reynolds]
        for level in first_levels(quality, self.domain.depth_to_width):
            todo = [each for each in climbs if not each.is_given_up]
            for each, answer in zip(todo, self._solved(level, todo, progress), strict=True):
                each.add(answer)
        while poor := [each for each in climbs if each.is_poor]:
            finer = _next_for(poor, self.domain.depth_to_width)
            if finer is None or _too_large(poor[0].answer, finer, self.levels.memory_limit_mb):
                break
            try:
                answers = self._solved(finer, poor, progress)
            except SolveError as error:
                if isinstance(error, FlowStopped):
                    raise
                break  # the finer level would not fit; the answers so far stand, with their bands
            for each, answer in zip(poor, answers, strict=True):
                if answer.complete:
                    each.add(answer)
            if not any(answer.complete for answer in answers):
                break
        return climbs

    def _solved(self, level: Level, climbs: list[Climb], progress: Progress) -> list[Answer]:
        """Return the answers of one level at the flows of some climbs."""
        new = [each for each in climbs if (each.reynolds, level) not in self._known]
        if new:
            memory = self.levels.at(level, progress.tick).memory_mb
            found = self._both_directions(level, new, memory, progress)
            for each, forward, reverse in zip(new, found["forward"], found["reverse"], strict=True):
                self._known[each.reynolds, level] = Answer({"forward": forward, "reverse": reverse}, memory)
        else:
            progress.skip(1 + 2 * len(climbs))
        return [self._known[each.reynolds, level] for each in climbs]

    def _both_directions(
        self, level: Level, climbs: list[Climb], memory_mb: float, progress: Progress
    ) -> dict[str, list[Found]]:
        def work(direction: str) -> dict[str, object]:
            starts = [each.answer.found[direction] if each.answers else None for each in climbs]
            flows = [each.reynolds for each in climbs]
            tolerance = climbs[0].quality.newton_tolerance
            return {"level": level, "reynolds": flows, "starts": starts, "tolerance": tolerance}

        def here(direction: str) -> list[Found]:
            return follow_direction(self.levels, direction, tell=progress.tick, **work(direction))  # type: ignore[arg-type]

        is_small = self.levels.at(level).problems["forward"].fill * len(climbs) < _WORTH_A_PROCESS
        if self._companion is None or is_small or 2 * memory_mb > self.levels.memory_limit_mb:
            return {direction: here(direction) for direction in DIRECTIONS}
        self._companion.ask("reverse", work("reverse"))
        forward = here("forward")
        for _ in climbs:
            progress.tick(f"reverse flow, triangles of {level.size:.2g} widths, {level.modes} depth modes")
        reverse = self._companion.answer(progress.pause)
        if reverse is None:  # it died, perhaps for want of memory: one direction after the other needs less
            self._companion = None
            reverse = here("reverse")
        return {"forward": forward, "reverse": reverse}


def _next_for(poor: list[Climb], depth_to_width: float) -> Level | None:
    """Return the level that should help the flow with the widest band most."""
    worst = max(poor, key=lambda each: (each.band or Band()).diodicity)
    finest = min((each.answer.level for each in poor), key=lambda level: (level.size, -level.modes))
    return next_level(worst.quality, finest, depth_to_width, worst.by_modes or Band(), worst.by_size or Band())


def _too_large(last: Answer, level: Level, memory_limit_mb: float) -> bool:
    growth = ((last.level.size / level.size) * (level.modes / last.level.modes)) ** 2
    return last.memory_mb * growth > memory_limit_mb
