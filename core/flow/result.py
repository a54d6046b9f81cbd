"""What a flow solve returns."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from core.flow.modes import in_plane_modes, pressure_modes, vertical_modes

if TYPE_CHECKING:
    from numpy.polynomial import Polynomial


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class FlowField:
    """Velocity and pressure of one direction, for drawing.

    Attributes
    ----------
    points_um : ndarray, shape (n, 2)
        Nodes [um].
    triangles : ndarray of int, shape (m, 3)
        Triangles between nodes; four for each quadratic one.
    in_plane_m_s : ndarray, shape (2, K, n)
        Amplitudes of the in-plane modes [m/s].
    vertical_m_s : ndarray, shape (K - 1, n)
        Amplitudes of the vertical modes [m/s].
    pressure_modes_pa : ndarray, shape (K, n)
        Amplitudes of the pressure modes [Pa]; the first is the mean over the depth.
    plain : bool
        True for plain two-dimensional flow, which is the same at any depth.
    """

    points_um: np.ndarray
    triangles: np.ndarray
    in_plane_m_s: np.ndarray
    vertical_m_s: np.ndarray
    pressure_modes_pa: np.ndarray
    plain: bool = False

    def velocity_m_s(self, height_share: float = 0.5) -> np.ndarray:
        """Return the in-plane velocity at one height.

        Parameters
        ----------
        height_share : float
            0 at the floor, 0.5 at mid-depth, 1 at the roof.

        Returns
        -------
        ndarray, shape (n, 2)
            At the nodes [m/s].
        """
        shapes = self._at(in_plane_modes(self.in_plane_m_s.shape[1]), height_share)
        return np.einsum("k,ckn->nc", shapes, self.in_plane_m_s)

    def vertical_velocity_m_s(self, height_share: float = 0.5) -> np.ndarray:
        """Return the vertical velocity at one height, shape (n,) [m/s]."""
        if not len(self.vertical_m_s):
            return np.zeros(len(self.points_um))
        return self._at(vertical_modes(len(self.vertical_m_s)), height_share) @ self.vertical_m_s

    def pressure_pa(self, height_share: float | None = None) -> np.ndarray:
        """Return the pressure at one height, or its mean over the depth if None; shape (n,) [Pa]."""
        if height_share is None:
            return self.pressure_modes_pa[0]
        return self._at(pressure_modes(len(self.pressure_modes_pa)), height_share) @ self.pressure_modes_pa

    def mean_velocity_m_s(self) -> np.ndarray:
        """Return the in-plane velocity averaged over the depth, shape (n, 2) [m/s]."""
        modes = in_plane_modes(self.in_plane_m_s.shape[1])
        means = [(mode.integ()(1.0) - mode.integ()(-1.0)) / 2 for mode in modes]
        return np.einsum("k,ckn->nc", np.ones(1) if self.plain else np.array(means), self.in_plane_m_s)

    def _at(self, modes: list[Polynomial], height_share: float) -> np.ndarray:
        if self.plain:
            return np.ones(1)
        return np.array([mode(2 * height_share - 1) for mode in modes])


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class DirectionResult:
    """One direction of flow.

    Attributes
    ----------
    pressure_pa : float or None
        Static pressure drop between the open ends [Pa]; None if no steady flow was found.
    reached_reynolds : float
        Highest Reynolds number (hydraulic diameter) with a steady flow, at most the one asked for.
    loop_shares : tuple of float
        Share of the flow in each loop, stages in the order of reverse flow.
    bypass_drops_pa : tuple of float
        Pressure drop from the middle of one bypass to the next [Pa], in the order of this flow; one
        fewer than stages.
    field : FlowField or None
        For drawing.
    factorisations : int
        Sparse factors computed on the finest mesh.
    """

    pressure_pa: float | None
    reached_reynolds: float
    loop_shares: tuple[float, ...] = ()
    bypass_drops_pa: tuple[float, ...] = ()
    field: FlowField | None = None
    factorisations: int = 0

    @property
    def loop_share(self) -> float | None:
        """Mean share of the flow in the loops, or None without loops."""
        return float(np.mean(self.loop_shares)) if self.loop_shares else None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class FlowResult:
    """Both directions at one flow.

    Attributes
    ----------
    flow_m3_s : float
        Volume flow [m^3/s].
    reynolds : float
        On the hydraulic diameter of the channel and its mean speed [-].
    forward, reverse : DirectionResult
        Each direction.
    error_band_percent : float or None
        Estimated error of either pressure drop, from a second, coarser answer [%].
    diodicity_band : float or None
        Estimated error of the diodicity, absolute [-].
    modes : int
        Depth modes K.
    unknowns : int
        Of the finest system.
    triangles : int
        Of the finest mesh.
    seconds : float
        Wall time.
    memory_mb : float
        Estimated peak of the solve [MB].
    quality : str
        As asked for.
    valid : bool
        True if both directions were found and nothing says that they would not be steady.
    notes : tuple of str
        Remarks for the user, plain sentences.
    """

    flow_m3_s: float
    reynolds: float
    forward: DirectionResult
    reverse: DirectionResult
    error_band_percent: float | None
    diodicity_band: float | None
    modes: int
    unknowns: int
    triangles: int
    seconds: float
    memory_mb: float
    quality: str
    valid: bool
    notes: tuple[str, ...] = ()

    @property
    def forward_pressure_pa(self) -> float | None:
        """Forward static pressure drop [Pa]."""
        return self.forward.pressure_pa

    @property
    def reverse_pressure_pa(self) -> float | None:
        """Reverse static pressure drop [Pa]."""
        return self.reverse.pressure_pa

    @property
    def diodicity(self) -> float | None:
        """Reverse over forward pressure drop at equal flow, or None."""
        if self.forward.pressure_pa is None or self.reverse.pressure_pa is None:
            return None
        return self.reverse.pressure_pa / self.forward.pressure_pa

    @property
    def loop_share_forward(self) -> float | None:
        """Mean share of the forward flow in the loops."""
        return self.forward.loop_share

    @property
    def loop_share_reverse(self) -> float | None:
        """Mean share of the reverse flow in the loops."""
        return self.reverse.loop_share

    @property
    def excess_band_percent(self) -> float | None:
        """Estimated error of Di - 1 in percent of Di - 1, or None where Di is too near 1."""
        if self.diodicity is None or self.diodicity_band is None or abs(self.diodicity - 1) < 1e-9:
            return None
        return 100 * self.diodicity_band / abs(self.diodicity - 1)
