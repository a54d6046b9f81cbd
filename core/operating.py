"""The operating point: which fluid, how warm, how fast."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from core.fields import CheckedValues, Field, table_of
from core.fluids import FLUID_RANGES_C, FluidState, fluid_state

if TYPE_CHECKING:
    from collections.abc import Mapping

FLUID, FLOW = "Fluid", "Operating point"

OPERATING_FIELDS: dict[str, Field] = table_of(
    Field(name="flow_ul_min", label="Flow", group=FLOW, default=1200.0, unit="uL/min",
          minimum=0.001, maximum=1e6, step=50.0,
          help="Volume flow at which the channel is judged, the same in both directions."),
    Field(name="fluid", label="Fluid", group=FLUID, default="water", choices=tuple(FLUID_RANGES_C),
          help="What flows. Choose own for a liquid whose density and viscosity you have measured."),
    Field(name="temperature_c", label="Temperature", group=FLUID, default=20.0, unit="degC",
          minimum=0.0, maximum=100.0, step=1.0,
          help="Temperature of the fluid in the channel. Water loses about 2 % of its viscosity per degree."),
    Field(name="glycerol_percent", label="Glycerol", group=FLUID, default=30.0, unit="%",
          minimum=0.0, maximum=100.0, step=1.0, help="Mass of glycerol in 100 parts of the mixture."),
    Field(name="own_density_kg_m3", label="Own density", group=FLUID, default=1000.0, unit="kg/m3",
          minimum=0.1, maximum=20000.0, step=1.0, help="Density of your own fluid."),
    Field(name="own_viscosity_mpa_s", label="Own viscosity", group=FLUID, default=1.0, unit="mPa s",
          minimum=0.001, maximum=1e5, step=0.1, help="Dynamic viscosity of your own fluid; it must be Newtonian."),
)  # fmt: skip


@dataclass(frozen=True, slots=True, kw_only=True)
class OperatingPoint(CheckedValues):
    """One checked operating point; every field is described in ``OPERATING_FIELDS``.

    Raises
    ------
    DesignValueError
        If a value has the wrong kind, is not finite or lies out of bounds.
    """

    flow_ul_min: float = 1200.0
    fluid: str = "water"
    temperature_c: float = 20.0
    glycerol_percent: float = 30.0
    own_density_kg_m3: float = 1000.0
    own_viscosity_mpa_s: float = 1.0

    @classmethod
    def table(cls) -> Mapping[str, Field]:
        """Return the table that describes the fields."""
        return OPERATING_FIELDS

    def fluid_state(self) -> FluidState:
        """Return density and viscosity at this operating point.

        Raises
        ------
        DesignValueError
            If the fluid's formulas do not hold at ``temperature_c``.
        """
        return fluid_state(
            fluid=self.fluid,
            temperature_c=self.temperature_c,
            glycerol_percent=self.glycerol_percent,
            own_density_kg_m3=self.own_density_kg_m3,
            own_viscosity_mpa_s=self.own_viscosity_mpa_s,
        )
