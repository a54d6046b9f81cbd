"""Local losses of laminar flow: corners, dividing and combining junctions, curved channels.

Junction formulas are balances of momentum and energy for inertia alone; ``inertia_switch`` brings
them in from zero as the flow grows. In Stokes flow a junction only shortens or lengthens the
channels that meet (``corner_reach``), equally in both directions.

Speeds are over the mean speed U of the channel, losses are of total pressure over rho U^2 / 2.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    Floats = NDArray[np.float64]


def dividing_loss(speed: ArrayLike, *, turn_deg: float, turned: float = 0.75) -> Floats:
    """Return the loss of a stream that leaves a common channel into a branch.

    Formula: K = 1 + u^2 - 2 u cos(k delta), k = 0.75 in the published form. A branch in straight
    line with a wider section gives (1 - u)^2, the loss of an abrupt expansion.

    Parameters
    ----------
    speed : float or array
        Speed in the branch over the speed in the common channel [-].
    turn_deg : float
        Angle by which the branch turns away from straight on [deg].
    turned : float
        Share k of that angle through which the stream is turned [-].

    Returns
    -------
    array
        Loss of total pressure over rho U^2 / 2 [-], never negative.

    Notes
    -----
    Asymptotic (inertia only); 0 to 150 deg. Has no meaning in Stokes flow: multiply by a switch
    that vanishes there. Source: Hager 1984; Bassett et al., Proc. IMechE C 215 (2001) 861.

    Examples
    --------
    >>> round(float(dividing_loss(0.5, turn_deg=90.0)), 4)
    0.8673
    """
    u = np.asarray(speed, dtype=float)
    return 1.0 + u * u - 2.0 * u * np.cos(np.radians(turned * turn_deg))


def combining_losses(
    speeds: tuple[ArrayLike, ArrayLike], *, turns_deg: tuple[float, float], area_ratios: tuple[float, float]
) -> tuple[Floats, Floats]:
    """Return the losses of two streams that join in a common channel.

    Balance of momentum along the common channel, static pressure equal where the streams meet:
    (p - p_c) / (rho U^2 / 2) = 2 (1 - sum of A u^2 cos delta); K = that + u^2 - 1.

    Parameters
    ----------
    speeds : pair of float or array
        Speeds of the two streams over the speed in the common channel [-].
    turns_deg : pair of float
        Angle by which each stream turns into the common channel [deg].
    area_ratios : pair of float
        Section of each stream over that of the common channel [-].

    Returns
    -------
    pair of array
        Losses of total pressure over rho U^2 / 2 [-]; one of them may be negative, as one stream
        may pull the other along, but their mean by flow is not.

    Notes
    -----
    Asymptotic (inertia only): multiply by ``inertia_switch``. Source: momentum balance as in
    Idelchik, Handbook of Hydraulic Resistance, converging wyes of equal sections.

    Examples
    --------
    >>> run, branch = combining_losses((0.5, 0.5), turns_deg=(0.0, 45.0), area_ratios=(1.0, 1.0))
    >>> round(float(run), 3), round(float(branch), 3)
    (0.396, 0.396)
    """
    first, second = (np.asarray(speed, dtype=float) ** 2 for speed in speeds)
    along = area_ratios * np.cos(np.radians(turns_deg))
    head = 1.0 - 2.0 * (along[0] * first + along[1] * second)
    return head + first, head + second


def corner_reach(*, angle_deg: float, width_ratio: float) -> float:
    """Return how far two channels that meet at an angle run merged, measured from where their centre lines cross.

    Formula: sqrt(w1 w2) / 2 * cot(phi / 2), exact for equal widths.

    Parameters
    ----------
    angle_deg : float
        Angle between the two channels, seen from their crossing [deg]; 180 is straight on.
    width_ratio : float
        Width of one over width of the other [-].

    Returns
    -------
    float
        Reach over the width of the first [-].

    Examples
    --------
    >>> round(corner_reach(angle_deg=90.0, width_ratio=1.0), 6)
    0.5
    """
    half = np.radians(np.clip(angle_deg, 5.0, 180.0)) / 2.0
    return float(0.5 * np.sqrt(width_ratio) / np.tan(half))


def curved_friction_ratio(dean: ArrayLike) -> Floats:
    """Return friction in a curved channel over friction in a straight one.

    Formula: 1 / (1 - (1 - (11.6 / De)^0.45)^(1 / 0.45)) above De = 11.6, 1 below.

    Parameters
    ----------
    dean : float or array
        Dean number Re sqrt(D_h / (2 R)) [-], R the radius of the centre line.

    Returns
    -------
    array
        Ratio [-], 1 in Stokes flow.

    Notes
    -----
    De up to 2000, developed flow in a gentle curve; below 11.6 the true excess is under 0.6 %.
    A loop's turn is tighter and shorter, which the error band of the estimate covers. Source:
    White, Proc. R. Soc. A 123 (1929) 645.

    Examples
    --------
    >>> round(float(curved_friction_ratio(100.0)), 5)
    1.53023
    """
    ratio = 11.6 / np.maximum(np.asarray(dean, dtype=float), 11.6)
    return 1.0 / (1.0 - (1.0 - ratio**0.45) ** (1.0 / 0.45))
