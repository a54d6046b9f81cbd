"""Fully developed laminar flow in a straight rectangular channel: the exact series.

Everything depends on one number, the side ratio ``aspect`` = shorter side / longer side, 0 (parallel
plates) to 1 (square). All functions take arrays as well as numbers.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING

import numpy as np

from core.errors import DesignValueError

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    Floats = NDArray[np.float64]

# Corrections shrink like exp(-n pi): six odd terms leave nothing in double precision.
_ODD = np.arange(1.0, 12.0, 2.0)
_ALL_ODD_FIFTH = 31.0 / 32.0 * 1.0369277551433699  # sum of 1/n^5 over odd n; zeta(5) * 31/32


@dataclass(frozen=True, slots=True, kw_only=True)
class ProfileFactors:
    """What the shape of the velocity profile does to fluxes.

    Attributes
    ----------
    momentum : float
        Mean of u^2 over U^2 (beta).
    kinetic : float
        Mean of u^3 over U^3 (alpha).
    peak : float
        Largest velocity over U.
    """

    momentum: float
    kinetic: float
    peak: float


def section_aspect(width_m: ArrayLike, depth_m: ArrayLike) -> Floats:
    """Return the side ratio of a section, shorter over longer side.

    Parameters
    ----------
    width_m : float or array
        Width [m].
    depth_m : float or array
        Depth [m].

    Returns
    -------
    array
        Side ratio [-], 0 to 1.

    Raises
    ------
    DesignValueError
        If a side is not positive.
    """
    width, depth = np.asarray(width_m, dtype=float), np.asarray(depth_m, dtype=float)
    _need_positive("width_m", width)
    _need_positive("depth_m", depth)
    return np.minimum(width, depth) / np.maximum(width, depth)


def hydraulic_diameter_m(width_m: ArrayLike, depth_m: ArrayLike) -> Floats:
    """Return 2wh/(w + h), the hydraulic diameter of a rectangular section.

    Parameters
    ----------
    width_m : float or array
        Width [m].
    depth_m : float or array
        Depth [m].

    Returns
    -------
    array
        Hydraulic diameter [m].
    """
    width, depth = np.asarray(width_m, dtype=float), np.asarray(depth_m, dtype=float)
    return 2.0 * width * depth / (width + depth)


def flow_factor(aspect: ArrayLike) -> Floats:
    """Return F, the flow of a channel over that between wide plates of the same depth.

    Formula: F = 1 - (192 a / pi^5) * sum over odd n of tanh(n pi / (2 a)) / n^5. The slowly
    converging part of the sum is known in closed form; only 1 - tanh is summed.

    Parameters
    ----------
    aspect : float or array
        Side ratio [-], 0 to 1.

    Returns
    -------
    array
        F [-], 1 for plates, 0.42173 for a square.

    Raises
    ------
    DesignValueError
        If a ratio lies outside 0 to 1.

    Notes
    -----
    Exact for developed laminar flow. Source: series solution, see Shah and London, Laminar Flow
    Forced Convection in Ducts, 1978.

    Examples
    --------
    >>> round(float(flow_factor(1.0)), 8)
    0.42173104
    """
    a = _checked_aspect(aspect)
    with np.errstate(divide="ignore", over="ignore"):
        deficit = 2.0 / (np.exp(np.minimum(np.pi * _ODD / a[..., None], 700.0)) + 1.0)
    total = _ALL_ODD_FIFTH - (deficit / _ODD**5).sum(axis=-1)
    return 1.0 - 192.0 * a / np.pi**5 * total


def friction_product(aspect: ArrayLike) -> Floats:
    """Return f*Re, Darcy friction factor times Reynolds number on the hydraulic diameter.

    Formula: f Re = 24 (D_h / h)^2 / F = 96 / ((1 + a)^2 F), h the shorter side.

    Parameters
    ----------
    aspect : float or array
        Side ratio [-], 0 to 1.

    Returns
    -------
    array
        f*Re [-], 96 for plates, 56.908 for a square.

    Notes
    -----
    Exact for developed laminar flow; a quarter of it is the Fanning product.
    """
    a = _checked_aspect(aspect)
    return 96.0 / ((1.0 + a) ** 2 * flow_factor(a))


def resistance_pa_s_m3(
    *, length_m: ArrayLike, width_m: ArrayLike, depth_m: ArrayLike, viscosity_pa_s: ArrayLike
) -> Floats:
    """Return pressure drop over flow of a straight channel with developed flow.

    Formula: R = 12 mu L / (w h^3 F) with h the shorter side.

    Parameters
    ----------
    length_m : float or array
        Length [m].
    width_m : float or array
        Width [m]; may be larger or smaller than the depth.
    depth_m : float or array
        Depth [m].
    viscosity_pa_s : float or array
        Dynamic viscosity [Pa*s].

    Returns
    -------
    array
        Resistance [Pa*s/m^3].

    Raises
    ------
    DesignValueError
        If a side is not positive.

    Examples
    --------
    >>> r = resistance_pa_s_m3(length_m=0.01, width_m=1e-4, depth_m=1e-4, viscosity_pa_s=1.0016e-3)
    >>> round(float(r) / 1e12, 6)
    2.849968
    """
    a = section_aspect(width_m, depth_m)
    width, depth = np.asarray(width_m, dtype=float), np.asarray(depth_m, dtype=float)
    area, shorter = width * depth, np.minimum(width, depth)
    return 12.0 * np.asarray(viscosity_pa_s) * np.asarray(length_m) / (area * shorter**2 * flow_factor(a))


@lru_cache(maxsize=256)
def profile_factors(aspect: float) -> ProfileFactors:
    """Return momentum, kinetic-energy and peak factors of the developed profile.

    The series for the velocity is integrated by Gauss points over a quarter of the section.

    Parameters
    ----------
    aspect : float
        Side ratio [-], 0 to 1.

    Returns
    -------
    ProfileFactors
        All factors are free of dimension; plates have 6/5, 54/35 and 3/2.

    Raises
    ------
    DesignValueError
        If the ratio lies outside 0 to 1.

    Examples
    --------
    >>> round(profile_factors(0.5).momentum, 4)
    1.3475
    """
    a = float(_checked_aspect(aspect))
    if a < 1e-4:  # side walls are out of sight
        return ProfileFactors(momentum=1.2, kinetic=54.0 / 35.0, peak=1.5)
    nodes, weights = np.polynomial.legendre.leggauss(48)
    # Two panels along the long side, so that the layer at the side wall is resolved at any ratio.
    split = min(0.5, 2.0 * a)
    along = np.concatenate((0.5 * (1.0 - split) * (nodes + 1.0), 1.0 - 0.5 * split * (1.0 - nodes)))
    share = np.concatenate((0.5 * (1.0 - split) * weights, 0.5 * split * weights))
    across, weight = 0.5 * (nodes + 1.0), 0.5 * weights
    u = _velocity(along, across, a)
    mean = share @ u @ weight
    peak = _velocity(np.zeros(1), np.zeros(1), a)[0, 0]
    return ProfileFactors(
        momentum=float(share @ u**2 @ weight / mean**2),
        kinetic=float(share @ u**3 @ weight / mean**3),
        peak=float(peak / mean),
    )


def _velocity(along: Floats, across: Floats, aspect: float) -> Floats:
    """Velocity at (y, z) from the middle, each 0 to 1 at the wall: plates' parabola less the side walls' part."""
    n = np.arange(1.0, 120.0, 2.0)
    sign = np.where(n % 4 == 1, 1.0, -1.0)
    rate = 0.5 * np.pi * n / aspect
    decay = np.exp(-np.outer(1.0 - along, rate)) * (1.0 + np.exp(-2.0 * np.outer(along, rate)))
    decay /= 1.0 + np.exp(-2.0 * rate)
    wave = np.cos(0.5 * np.pi * np.outer(n, across))
    return 1.0 - across**2 - (decay * (32.0 * sign / (np.pi * n) ** 3)) @ wave


def _checked_aspect(aspect: ArrayLike) -> Floats:
    a = np.asarray(aspect, dtype=float)
    if not np.all((a >= 0.0) & (a <= 1.0)):
        raise DesignValueError(
            field="aspect",
            value=float(np.ravel(a)[0]),
            limit="0 to 1",
            way_out="give the shorter side over the longer side",
        )
    return a


def _need_positive(name: str, values: Floats) -> None:
    if not np.all(values > 0.0):
        raise DesignValueError(
            field=name, value=float(np.min(values)), limit="above 0 m", way_out="give a positive length"
        )
