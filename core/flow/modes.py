"""Depth modes: how velocity and pressure are spread between floor and roof.

With ``s = 2 z / depth`` in [-1, 1] the in-plane velocity is a sum of K even functions
``(1 - s^2) * polynomial`` times fields of (x, y), the vertical velocity a sum of K - 1 odd functions
``(1 - s^2) * polynomial``, the pressure a sum of K even polynomials. Each family is orthonormal in the
depth average, so the equations of motion turn into plane equations coupled by small constant tables.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.polynomial import Polynomial

_BUBBLE = Polynomial([1.0, 0.0, -1.0])  # 1 - s^2: no slip on floor and roof


@dataclass(frozen=True, slots=True, kw_only=True)
class ModeTensors:
    """Depth averages of products of modes; index letters name the families in order.

    Lengths are in channel widths. ``u`` in-plane, ``w`` vertical velocity, ``p`` pressure, ``d``
    derivative along the depth.

    Attributes
    ----------
    mean : ndarray, shape (n_u,)
        Depth average of each in-plane mode: flow through a section is ``sum mean_k * U_k``.
    friction, vertical_friction : ndarray, shapes (n_u, n_u) and (n_w, n_w)
        Averages of products of depth derivatives.
    divergence : ndarray, shape (n_p, n_u)
        Pressure mode times in-plane mode.
    vertical_divergence : ndarray, shape (n_p, n_w)
        Pressure mode times depth derivative of vertical mode.
    uuu, uwu, wuw, www : ndarray
        Convection: (test, carrier, carried); a vertical carrier acts through the depth derivative
        of what it carries, less half of the product rule, so that it makes no kinetic energy.
    """

    mean: np.ndarray
    friction: np.ndarray
    vertical_friction: np.ndarray
    divergence: np.ndarray
    vertical_divergence: np.ndarray
    uuu: np.ndarray
    uwu: np.ndarray
    wuw: np.ndarray
    www: np.ndarray

    @property
    def n_in_plane(self) -> int:
        """Number of in-plane velocity modes."""
        return self.friction.shape[0]

    @property
    def n_vertical(self) -> int:
        """Number of vertical velocity modes."""
        return self.vertical_friction.shape[0]

    @property
    def n_pressure(self) -> int:
        """Number of pressure modes."""
        return self.divergence.shape[0]


def in_plane_modes(count: int) -> list[Polynomial]:
    """Return the even in-plane velocity modes.

    Parameters
    ----------
    count : int
        Number K of modes, 1 to 12.

    Returns
    -------
    list of Polynomial
        Functions of s, zero at s = +-1, orthonormal in the average over [-1, 1].
    """
    return [_normalised(_BUBBLE * _gegenbauer(2 * k, 2.5)) for k in range(count)]


def vertical_modes(count: int) -> list[Polynomial]:
    """Return the odd vertical velocity modes, orthonormal, zero at floor, roof and mid-depth.

    Parameters
    ----------
    count : int
        Number of modes, K - 1.

    Returns
    -------
    list of Polynomial
        Functions of s.
    """
    return [_normalised(_BUBBLE * _gegenbauer(2 * k + 1, 2.5)) for k in range(count)]


def pressure_modes(count: int) -> list[Polynomial]:
    """Return the even pressure modes (Legendre polynomials); the first is the constant 1.

    Parameters
    ----------
    count : int
        Number K of modes.

    Returns
    -------
    list of Polynomial
        Functions of s, orthonormal in the average over [-1, 1].
    """
    return [_normalised(_gegenbauer(2 * k, 0.5)) for k in range(count)]


def depth_tensors(count: int, depth_to_width: float) -> ModeTensors:
    """Return the mode tables of a channel of finite depth.

    Parameters
    ----------
    count : int
        Number K of modes, 1 to 12. K = 1 is the depth-averaged model with parabolic profile.
    depth_to_width : float
        Depth over channel width [-].

    Returns
    -------
    ModeTensors
        Exact to rounding: Gauss-Legendre points for the highest product of three modes.

    Raises
    ------
    ValueError
        If ``count`` is outside 1 to 12 or ``depth_to_width`` is not positive.
    """
    if not 1 <= count <= 12 or not depth_to_width > 0:
        raise ValueError(f"count is {count}, depth_to_width {depth_to_width}; allowed: 1 to 12 and > 0")
    nodes, weights = np.polynomial.legendre.leggauss(3 * count + 3)
    weights = weights / 2
    per_width = 2 / depth_to_width
    u, du = _sampled(in_plane_modes(count), nodes, per_width)
    w, dw = _sampled(vertical_modes(count - 1), nodes, per_width)
    p, _ = _sampled(pressure_modes(count), nodes, per_width)

    def average(pattern: str, *families: np.ndarray) -> np.ndarray:
        return np.einsum(f"q,{pattern}", weights, *families)

    return ModeTensors(
        mean=average("iq->i", u),
        friction=average("iq,jq->ij", du, du),
        vertical_friction=average("iq,jq->ij", dw, dw),
        divergence=average("iq,jq->ij", p, u),
        vertical_divergence=average("iq,jq->ij", p, dw),
        uuu=average("iq,jq,kq->ijk", u, u, u),
        uwu=(average("iq,jq,kq->ijk", u, w, du) - average("iq,jq,kq->ijk", du, w, u)) / 2,
        wuw=average("iq,jq,kq->ijk", w, u, w),
        www=(average("iq,jq,kq->ijk", w, w, dw) - average("iq,jq,kq->ijk", dw, w, w)) / 2,
    )


def plane_tensors() -> ModeTensors:
    """Return the tables of plain two-dimensional flow: one mode, no floor and no roof."""
    one, none = np.ones((1, 1)), np.zeros((0, 0))
    return ModeTensors(
        mean=np.ones(1),
        friction=np.zeros((1, 1)),
        vertical_friction=none,
        divergence=one,
        vertical_divergence=np.zeros((1, 0)),
        uuu=np.ones((1, 1, 1)),
        uwu=np.zeros((1, 0, 1)),
        wuw=np.zeros((0, 1, 0)),
        www=np.zeros((0, 0, 0)),
    )


def _gegenbauer(degree: int, order: float) -> Polynomial:
    """Return the Gegenbauer polynomial by its three-term recurrence (DLMF 18.9)."""
    s = Polynomial([0.0, 1.0])
    before, now = Polynomial([0.0]), Polynomial([1.0])
    for n in range(degree):
        before, now = now, (2 * (n + order) * s * now - (n + 2 * order - 1) * before) / (n + 1)
    return now


def _normalised(mode: Polynomial) -> Polynomial:
    square = (mode * mode).integ()
    return mode / np.sqrt((square(1.0) - square(-1.0)) / 2)


def _sampled(modes: list[Polynomial], nodes: np.ndarray, per_width: float) -> tuple[np.ndarray, np.ndarray]:
    """Return values and depth derivatives per channel width, each of shape (n_modes, n_nodes)."""
    if not modes:
        empty = np.zeros((0, len(nodes)))
        return empty, empty
    values = np.array([mode(nodes) for mode in modes])
    slopes = np.array([mode.deriv()(nodes) for mode in modes]) * per_width
    return values, slopes
