"""How inertia comes in from Stokes flow: smooth switches on the inertia number.

The inertia number is rho U^2 over the developed pressure drop of one channel width. Junction losses
of designs 0.17 to 1.8 widths deep fall on one curve against it, where the Reynolds number scatters
them: it knows that floor and roof brake a shallow channel. For a square section it is Re / 28.45.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from core.hydraulics.coefficients import coefficient

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    Floats = NDArray[np.float64]


def loss_switch(inertia: ArrayLike) -> Floats:
    """Return how far junction losses have come in: c x / (1 + x), x the inertia number over its scale.

    Parameters
    ----------
    inertia : float or array
        Inertia number [-].

    Returns
    -------
    array
        Proportional to Re from zero, towards ``loss_level``.
    """
    x = np.asarray(inertia, dtype=float) / coefficient("loss_scale")
    return coefficient("loss_level") * x / (1.0 + x)


def difference_switch(inertia: ArrayLike, *, depth_ratio: float) -> Floats:
    """Return how far the difference of losses between the directions has come in: c y^2 / (1 + y^2).

    Parameters
    ----------
    inertia : float or array
        Inertia number [-].
    depth_ratio : float
        Depth over channel width [-]; y is the inertia number over a scale that falls with depth.

    Returns
    -------
    array
        Proportional to Re^2 from zero, towards ``difference_level``: one power more than the losses,
        as the two directions may part as Re^3 of the Stokes drop and not earlier.
    """
    y = np.asarray(inertia, dtype=float) / coefficient("difference_scale")
    y2 = y * y * depth_ratio ** (2.0 * coefficient("difference_depth"))
    return coefficient("difference_level") * y2 / (1.0 + y2)


def drive_switches(inertia: ArrayLike, *, depth_ratio: float) -> tuple[Floats, Floats]:
    """Return the strengths of the common and of the directional drive between bypass and loop.

    The common part is there from Re = 0, where in shallow channels floor and roof leave little of it;
    it grows with S^2, S = x / sqrt(1 + x^2). The directional part is S itself.

    Parameters
    ----------
    inertia : float or array
        Inertia number [-].
    depth_ratio : float
        Depth over channel width [-].

    Returns
    -------
    pair of array
        Strengths [-].
    """
    x = np.asarray(inertia, dtype=float) / coefficient("drive_scale")
    switch = x / np.sqrt(1.0 + x * x)
    k = coefficient("drive_depth")
    return depth_ratio * (1.0 + k) / (depth_ratio + k) + coefficient("drive_growth") * switch**2, switch
