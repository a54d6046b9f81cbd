"""What turns the pure numbers of the solve into units."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from core.errors import SolveError

if TYPE_CHECKING:
    from core.flow.domain import FlowDomain


@dataclass(frozen=True, slots=True, kw_only=True)
class Scales:
    """Speed, length and liquid of one solve.

    Attributes
    ----------
    speed_m_s : float
        Mean speed in the channel [m/s].
    width_m : float
        Channel width [m].
    density_kg_m3, viscosity_pa_s : float
        Of the liquid.
    depth_to_width : float
        [-].
    """

    speed_m_s: float
    width_m: float
    density_kg_m3: float
    viscosity_pa_s: float
    depth_to_width: float

    @property
    def width_reynolds(self) -> float:
        """Reynolds number on the channel width."""
        return self.density_kg_m3 * self.speed_m_s * self.width_m / self.viscosity_pa_s

    @property
    def reynolds(self) -> float:
        """Reynolds number on the hydraulic diameter."""
        return self.on_hydraulic_diameter(self.width_reynolds)

    @property
    def pressure_pa(self) -> float:
        """Unit of pressure in the solve [Pa]."""
        return self.viscosity_pa_s * self.speed_m_s / self.width_m

    def on_hydraulic_diameter(self, width_reynolds: float) -> float:
        """Return a Reynolds number on 2 w h / (w + h) from one on the width."""
        return width_reynolds * 2 * self.depth_to_width / (1 + self.depth_to_width)


def scales(domain: FlowDomain, *, flow_m3_s: float, density_kg_m3: float, viscosity_pa_s: float) -> Scales:
    """Return the scales of a solve.

    Parameters
    ----------
    domain : FlowDomain
        Gives width and depth.
    flow_m3_s, density_kg_m3, viscosity_pa_s : float
        Volume flow [m^3/s], density [kg/m^3], dynamic viscosity [Pa s].

    Raises
    ------
    SolveError
        If a value is not positive and finite.
    """
    for name, value in (("flow_m3_s", flow_m3_s), ("density_kg_m3", density_kg_m3), ("viscosity_pa_s", viscosity_pa_s)):
        if not 0 < value < float("inf"):
            raise SolveError(f"{name} is {value}; it must be positive and finite")
    width = float(domain.channel_width_um) * 1e-6
    return Scales(
        speed_m_s=float(flow_m3_s) / (width * float(domain.depth_um) * 1e-6),
        width_m=width,
        density_kg_m3=density_kg_m3,
        viscosity_pa_s=viscosity_pa_s,
        depth_to_width=float(domain.depth_to_width),
    )
