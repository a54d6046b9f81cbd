"""Developed flow in a straight rectangular channel, in depth modes.

The mode equations of a straight channel are linear in its cross-section and have a closed solution:
with the eigenpairs of the friction table each combination of modes is ``1 - cosh(r y) / cosh(r b)``.
As K grows this tends to the series for a rectangular duct (R. K. Shah and A. L. London, Laminar Flow
Forced Convection in Ducts, 1978); using the mode form lets it pass the solve undisturbed.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from core.flow.modes import ModeTensors


def developed_profile(tensors: ModeTensors, offset: np.ndarray, half_width: float) -> np.ndarray:
    """Return the modes of developed flow with mean speed 1.

    Parameters
    ----------
    tensors : ModeTensors
        Depth modes; plain two-dimensional flow gives the parabola.
    offset : ndarray, shape (n,)
        Distance from the middle of the section, in channel widths.
    half_width : float
        Half the width of the section, in channel widths.

    Returns
    -------
    ndarray, shape (n_u, n)
        Mode amplitudes.
    """
    rates, shapes, load = _spectrum(tensors)
    y = np.clip(np.asarray(offset, dtype=float), -half_width, half_width)
    amplitude = np.array([_bulge(rate, y, half_width) for rate in rates]) * load[:, None]
    return shapes @ amplitude / _mean_speed(rates, load, half_width)


def developed_gradient(tensors: ModeTensors, half_width: float) -> float:
    """Return the pressure drop per channel width of developed flow with mean speed 1.

    Parameters
    ----------
    tensors : ModeTensors
        Depth modes.
    half_width : float
        Half the width of the section, in channel widths.

    Returns
    -------
    float
        In units of viscosity x speed / width^2.
    """
    rates, _, load = _spectrum(tensors)
    return 1 / _mean_speed(rates, load, half_width)


def _spectrum(tensors: ModeTensors) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    squares, shapes = np.linalg.eigh(tensors.friction)
    return np.sqrt(np.maximum(squares, 0.0)), shapes, shapes.T @ tensors.mean


def _bulge(rate: float, y: np.ndarray, b: float) -> np.ndarray:
    """Solve -f'' + rate^2 f = 1, f(+-b) = 0, without overflow."""
    if rate * b < 1e-4:
        return (b * b - y * y) / 2
    ratio = (np.exp(rate * (np.abs(y) - b)) + np.exp(-rate * (np.abs(y) + b))) / (1 + np.exp(-2 * rate * b))
    return (1 - ratio) / rate**2


def _mean_speed(rates: np.ndarray, load: np.ndarray, b: float) -> float:
    def mean(rate: float) -> float:
        x = rate * b
        return b * b / 3 if x < 1e-4 else (1 - np.tanh(x) / x) / rate**2

    return float(sum(weight**2 * mean(rate) for rate, weight in zip(rates, load, strict=True)))
