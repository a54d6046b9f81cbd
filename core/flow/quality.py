"""How fine a solve is: the ladder of meshes and modes, the error band, and memory beforehand."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from core.errors import SolveError

if TYPE_CHECKING:
    from core.flow.domain import FlowDomain


@dataclass(frozen=True, slots=True, kw_only=True)
class Level:
    """One discretisation.

    Attributes
    ----------
    modes : int
        Depth modes K.
    size : float
        Length of triangle sides away from noses, in channel widths.
    """

    modes: int
    size: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Quality:
    """What accuracy is wanted and how far to go for it.

    Attributes
    ----------
    name : str
        As the user chooses it.
    steps : tuple of (int, float)
        Levels always solved, each started from the one before: modes relative to the number that
        suits the depth, and mesh size.
    pressure_tolerance_percent, excess_tolerance_percent : float
        Wanted error of the pressure drops and of Di - 1.
    excess_floor : float
        Error of the diodicity that is good enough in any case.
    smallest_size : float
        Mesh size below which the ladder ends although the tolerance may not be met.
    most_modes : int
        Modes beyond the number that suits the depth that may be added.
    newton_tolerance : float
        Size of the last correction against the size of the solution.
    least_pressure_percent, least_excess_percent : float
        Error stated even where two answers agree: scatter between equally fine meshes of one design,
        measured by mirroring it.
    excess_growth_percent : float
        What the error of Di - 1 gains up to Re 150 on the width, beyond what two coarse answers show:
        coarse triangles lose the thin jets of fast flow. Measured against the normal quality: a third
        at Re 110, nearly half at Re 150; with it all of 30 random channels of Re 8 to 200 lie in the
        bands.
    """

    name: str
    steps: tuple[tuple[int, float], ...]
    pressure_tolerance_percent: float
    excess_tolerance_percent: float
    excess_floor: float
    smallest_size: float
    most_modes: int
    newton_tolerance: float
    least_pressure_percent: float
    least_excess_percent: float
    excess_growth_percent: float = 0.0


QUALITIES = {
    q.name: q
    for q in (
        Quality(
            name="coarse",
            steps=((-2, 0.75), (-1, 0.5)),
            pressure_tolerance_percent=3.0,
            excess_tolerance_percent=80.0,
            excess_floor=0.02,
            smallest_size=0.5,
            most_modes=-1,
            newton_tolerance=1e-5,
            least_pressure_percent=2.0,
            least_excess_percent=25.0,
            excess_growth_percent=45.0,
        ),
        Quality(
            name="normal",
            steps=((-2, 0.75), (-1, 0.5), (0, 0.5), (0, 0.33)),
            pressure_tolerance_percent=1.0,
            excess_tolerance_percent=5.0,
            excess_floor=0.003,
            smallest_size=0.2,
            most_modes=1,
            newton_tolerance=1e-6,
            least_pressure_percent=0.25,
            least_excess_percent=2.5,
        ),
        Quality(
            name="fine",
            steps=((-2, 0.75), (-1, 0.5), (0, 0.5), (0, 0.3), (0, 0.2)),
            pressure_tolerance_percent=0.3,
            excess_tolerance_percent=2.0,
            excess_floor=0.001,
            smallest_size=0.13,
            most_modes=2,
            newton_tolerance=1e-7,
            least_pressure_percent=0.2,
            least_excess_percent=1.5,
        ),
    )
}

_SUITED = ((0.35, 2), (1.5, 3), (3.0, 4))  # largest depth / width, and the modes that suit it
_FINER = 0.66  # ratio of mesh sizes from one level to the next
_MODE_SHARES = {1: 0.35}  # of the change by one more mode that is left as error, by the modes before
_MODE_SHARE = 0.15  # ... measured: 0.22 after the step from 1 to 2, 0.04 after 2 to 3
_JOINT_SHARE = 0.35  # the same where modes and mesh changed together
_SAFETY = 1.25


@dataclass(frozen=True, slots=True, kw_only=True)
class Band:
    """Estimated error of an answer.

    Attributes
    ----------
    pressure_percent : float
        Of the pressure drops [%].
    diodicity : float
        Of Di, absolute.
    """

    pressure_percent: float = 0.0
    diodicity: float = 0.0

    def __add__(self, other: Band) -> Band:
        """Return the error from two independent sources: root of the sum of squares."""
        return Band(
            pressure_percent=math.hypot(self.pressure_percent, other.pressure_percent),
            diodicity=math.hypot(self.diodicity, other.diodicity),
        )


def quality_named(name: str) -> Quality:
    """Return a quality by name.

    Raises
    ------
    SolveError
        If there is no such quality.
    """
    if name not in QUALITIES:
        raise SolveError(f"quality is '{name}'; known: {', '.join(QUALITIES)}")
    return QUALITIES[name]


def first_levels(quality: Quality, depth_to_width: float) -> list[Level]:
    """Return the levels that are always solved for a channel of some depth."""
    suited = suited_modes(depth_to_width)
    least = 1 if quality.steps[0][0] < -1 else 2
    made: list[Level] = []
    for step, size in quality.steps:
        level = Level(modes=max(least, suited + step), size=size)
        least = 2
        if not made or level != made[-1]:
            made.append(level)
    return made


def suited_modes(depth_to_width: float) -> int:
    """Return the number of depth modes that suits a depth, from trials at Re up to 100."""
    return next((modes for limit, modes in _SUITED if depth_to_width <= limit), 5)


def next_level(quality: Quality, last: Level, depth_to_width: float, by_modes: Band, by_size: Band) -> Level | None:
    """Return the level that should lower the larger error, or None at the end of the ladder."""
    more = Level(modes=last.modes + 1, size=last.size)
    finer = Level(modes=last.modes, size=last.size * _FINER)
    may_more = more.modes <= suited_modes(depth_to_width) + quality.most_modes
    may_finer = finer.size >= quality.smallest_size
    if may_more and (by_modes.diodicity > by_size.diodicity or not may_finer):
        return more
    return finer if may_finer else None


def band_of_step(coarse: Level, fine: Level, drops: list[tuple[float, float]], diodicity: tuple[float, float]) -> Band:
    """Return the error left in the finer of two answers.

    By mesh size the difference is scaled as if the error fell with the square of the size (corners
    hold it below the order of the triangles) and never counted for less than half; by modes with the
    shares measured in trials.

    Parameters
    ----------
    coarse, fine : Level
        The two discretisations.
    drops : list of (float, float)
        Coarse and fine value of each pressure drop, any unit.
    diodicity : tuple of float
        Coarse and fine value.

    Returns
    -------
    Band
    """
    if coarse.size == fine.size:
        share = _MODE_SHARES.get(coarse.modes, _MODE_SHARE)
    elif coarse.modes == fine.modes:
        share = min(max(0.5, 1 / ((coarse.size / fine.size) ** 2 - 1)), 1.0)
    else:
        share = _JOINT_SHARE
    share *= _SAFETY
    worst = max(abs(a - b) / abs(b) for a, b in drops)
    return Band(pressure_percent=float(100 * share * worst), diodicity=float(share * abs(diodicity[0] - diodicity[1])))


def least_band(quality: Quality, diodicity: float, reynolds: float) -> Band:
    """Return the error that is stated even where two answers agree.

    Triangles are not the same seen from both ends: a plain straight channel shows up to 1e-4 in Di,
    and nothing at creeping flow.
    """
    uneven = 2e-4 * reynolds / (reynolds + 20) + 1e-6
    share = quality.least_excess_percent + quality.excess_growth_percent * min(reynolds / 150, 1.5)
    return Band(
        pressure_percent=quality.least_pressure_percent,
        diodicity=share / 100 * abs(diodicity - 1) + uneven,
    )


def good_enough(quality: Quality, band: Band, diodicity: float) -> bool:
    """Return whether the tolerances of a quality are met."""
    wanted = max(quality.excess_tolerance_percent / 100 * abs(diodicity - 1), quality.excess_floor)
    return band.pressure_percent <= quality.pressure_tolerance_percent and band.diodicity <= wanted


def check_size(domain: FlowDomain, level: Level, memory_limit_mb: float) -> None:
    """Refuse a domain that is far too large before it is meshed.

    Raises
    ------
    SolveError
        Names what is too large and what to change.
    """
    rings = domain.rings()
    area = abs(sum(float(r[:, 0] @ (np.roll(r[:, 1], -1) - np.roll(r[:, 1], 1))) / 2 for r in rings))
    unknowns = 4.0 * area / level.size**2 * (4 * level.modes - 1)
    megabytes = unknowns * 250 * 12 / 1e6
    if not math.isfinite(megabytes) or megabytes > 2 * memory_limit_mb:
        raise SolveError(
            f"the outline covers {area:.0f} channel widths squared; the flow solve would need about "
            f"{megabytes / 1000:.1f} GB where {memory_limit_mb / 1000:.1f} GB may be used; "
            "use fewer stages, a shorter lead_in_um or lead_out_um, or a smaller loop_radius_um"
        )


def needed_memory_mb(entries: int, unknowns: int) -> float:
    """Return the memory of one level [MB]: a factor of known size, matrices and work space."""
    return float(250 + (entries * 5 + unknowns * 4000) / 1e6)


def check_memory(megabytes: float, stages: int, memory_limit_mb: float) -> None:
    """Refuse a level that would not fit.

    Raises
    ------
    SolveError
        Names the field to change.
    """
    if megabytes > memory_limit_mb:
        raise SolveError(
            f"stages is {stages}: the flow solve would need {megabytes / 1000:.1f} GB, "
            f"{memory_limit_mb / 1000:.1f} GB may be used; "
            "use fewer stages (longer chains can be extended from fewer) or quality 'coarse'"
        )
