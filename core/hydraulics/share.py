"""How the flow divides between bypass and loop, and what a stage loses beyond Stokes flow."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from core.hydraulics.losses import curved_friction_ratio
from core.hydraulics.switches import difference_switch, drive_switches, loss_switch

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    from core.hydraulics.stage import Stage

    Floats = NDArray[np.float64]

_SENSE = np.array([[-1.0], [1.0]])  # forward, reverse
_MOST_APART = 1.8  # of the mean loss
_MOST_STEPS = 80
_CLOSE = 1e-11  # the secant step that follows has all digits


@dataclass(frozen=True, slots=True, kw_only=True)
class StageFlow:
    """Both flow directions of one stage for n flows.

    Attributes
    ----------
    share_forward, share_reverse : array, shape (n,)
        Part of the flow in the loop [-].
    forward_excess : array, shape (n,)
        Forward drop beyond Stokes flow over rho U^2.
    difference : array, shape (n,)
        Reverse less forward drop over rho U^2, reckoned without subtracting nearly equal numbers;
        grows as Re^2 from zero.
    """

    share_forward: Floats
    share_reverse: Floats
    forward_excess: Floats
    difference: Floats


def stage_flow(stage: Stage, *, inertia: Floats, dean: Floats, relief: Floats) -> StageFlow:
    """Solve for the loop shares at which bypass and loop drop the same, and sum up what is lost.

    The unknown is the shift from the Stokes share, so that small shifts keep all their digits.

    Parameters
    ----------
    stage : Stage
        Network of the stage.
    inertia : array, shape (n,)
        rho U^2 over the developed drop of one channel width [-].
    dean : array, shape (n,)
        Dean number of the turn if the loop carried all the flow [-].
    relief : array, shape (n,)
        Part of the junction losses that close neighbours save, equal in both directions [-].

    Returns
    -------
    StageFlow
        Shares and drops.
    """
    stiffness = (stage.bypass + stage.loop) / inertia
    shift = _shift(stage, inertia=inertia, dean=dean)
    share = stage.stokes_share + _SENSE * shift
    turn = share * turn_friction(stage, share, inertia=inertia, dean=dean)
    forward, reverse = cubic(stage.forward_loss, share[0]), cubic(stage.reverse_loss, share[1])
    common = 0.5 * (1.0 - relief) * loss_switch(inertia) * (reverse + forward)
    apart = difference_switch(inertia, depth_ratio=stage.depth_ratio) * (reverse - forward)
    apart = np.clip(apart, -_MOST_APART * common, _MOST_APART * common)  # neither direction may gain
    shifted = stiffness * (shift[1] - shift[0]) * (shift[1] + shift[0])
    return StageFlow(
        share_forward=share[0],
        share_reverse=share[1],
        forward_excess=stiffness * shift[0] ** 2 + turn[0] + common - 0.5 * apart,
        difference=shifted + (turn[1] - turn[0]) + apart,
    )


def _shift(stage: Stage, *, inertia: Floats, dean: Floats) -> Floats:
    """Return how far the loop share moves from Stokes flow: down in forward and up in reverse flow."""
    stiffness = (stage.bypass + stage.loop) / inertia
    pull, switch = drive_switches(inertia, depth_ratio=stage.depth_ratio)

    def drive(shift: Floats) -> Floats:
        share = stage.stokes_share + _SENSE * shift
        directional = switch * cubic(stage.difference_drive, share)
        directional -= turn_friction(stage, share, inertia=inertia, dean=dean)
        return pull * cubic(stage.mean_drive, share) + _SENSE * directional

    ends = _SENSE * (np.array([0.0, 1.0]) - stage.stokes_share)
    guess = drive(np.zeros((2, len(inertia)))) / stiffness
    return _root(
        lambda shift: stiffness * shift - drive(shift),
        guess=guess,
        lower=np.broadcast_to(ends.min(axis=1, keepdims=True), guess.shape),
        upper=np.broadcast_to(ends.max(axis=1, keepdims=True), guess.shape),
    )


def turn_friction(stage: Stage, share: Floats, *, inertia: Floats, dean: Floats) -> Floats:
    """Return the drop that the curve of the turn adds to that of a straight channel, over rho U^2.

    Parameters
    ----------
    stage : Stage
        Network of the stage.
    share : array, shape (2, n)
        Loop share [-].
    inertia, dean : array, shape (n,)
        As for ``stage_flow`` [-].

    Returns
    -------
    array, shape (2, n)
        Head [-]; zero up to a Dean number of 11.6.
    """
    return stage.turn / inertia * share * (curved_friction_ratio(dean * share) - 1.0)


def cubic(coefficients: Floats, share: Floats) -> Floats:
    """Return a cubic of the loop share.

    Parameters
    ----------
    coefficients : array, shape (4,)
        Factors of 1, x, x^2, x^3 [-].
    share : array, shape (m, n)
        Loop share x [-].

    Returns
    -------
    array, shape (m, n)
        Value [-].
    """
    c0, c1, c2, c3 = coefficients
    return c0 + share * (c1 + share * (c2 + share * c3))


def _root(function: Callable[[Floats], Floats], *, guess: Floats, lower: Floats, upper: Floats) -> Floats:
    """Return where a growing function vanishes, element by element; an end where it does not.

    Secant steps from a guess, kept inside a shrinking bracket.
    """
    lower = np.where(function(upper) < 0.0, upper, lower)
    upper = np.where(function(lower) > 0.0, lower, upper)
    before, now = np.zeros_like(guess), np.clip(guess, lower, upper)
    value_before = function(before)
    for _ in range(_MOST_STEPS):
        value = function(now)
        lower = np.where(value < 0.0, np.maximum(now, lower), lower)
        upper = np.where(value > 0.0, np.minimum(now, upper), upper)
        rise = value - value_before
        is_flat = rise == 0.0
        step = np.where(is_flat, now, now - value * (now - before) / np.where(is_flat, 1.0, rise))
        after = np.where((step >= lower) & (step <= upper), step, 0.5 * (lower + upper))
        moved = np.abs(after - now)
        before, value_before, now = now, value, after
        if np.all(moved <= _CLOSE * np.abs(now)):
            break
    return now
