"""What flows: density and viscosity of the liquids and gases that labs put through a chip.

All values are for atmospheric pressure (101.325 kPa). A fluid that does not exist as such at the
asked temperature is refused, never extrapolated.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

from core.errors import DesignValueError, did_you_mean

if TYPE_CHECKING:
    from collections.abc import Callable

ATMOSPHERE_PA = 101325.0
ZERO_CELSIUS_K = 273.15
WATER_MOLAR_SALT = 154.0  # mol/m^3 of sodium chloride in 9 g/L


@dataclass(frozen=True, slots=True, kw_only=True)
class FluidState:
    """One fluid at one temperature.

    Attributes
    ----------
    name : str
        One of the fluid names of ``FLUID_RANGES_C``.
    density_kg_m3 : float
        Density [kg/m^3].
    viscosity_pa_s : float
        Dynamic viscosity [Pa*s].
    error_percent : float
        Error of the viscosity to be expected [%]; it carries over to pressures in full.
    source : str
        Where the values come from.
    notes : tuple of str
        Cautions for the user, in plain words.
    is_gas : bool
        True where compressibility and slip may matter.
    """

    name: str
    density_kg_m3: float
    viscosity_pa_s: float
    error_percent: float
    source: str
    notes: tuple[str, ...] = ()
    is_gas: bool = False

    @property
    def kinematic_viscosity_m2_s(self) -> float:
        """Viscosity over density [m^2/s]."""
        return self.viscosity_pa_s / self.density_kg_m3


@dataclass(frozen=True, slots=True, kw_only=True)
class _Recipe:
    """The part of an operating point that a fluid's formulas read."""

    temperature_c: float
    glycerol_percent: float
    own_density_kg_m3: float
    own_viscosity_mpa_s: float

    @property
    def temperature_k(self) -> float:
        return self.temperature_c + ZERO_CELSIUS_K


def _water_values(temperature_k: float) -> tuple[float, float]:
    from chemicals.iapws import iapws95_rho
    from chemicals.viscosity import mu_IAPWS

    density = iapws95_rho(temperature_k, ATMOSPHERE_PA)
    return density, mu_IAPWS(temperature_k, density)


def _water(recipe: _Recipe) -> FluidState:
    density, viscosity = _water_values(recipe.temperature_k)
    return FluidState(
        name="water", density_kg_m3=density, viscosity_pa_s=viscosity, error_percent=1.0,
        source="IAPWS-95 density, IAPWS R12-08 viscosity",
    )  # fmt: skip


def _glycerol_water(recipe: _Recipe) -> FluidState:
    # Cheng, Ind. Eng. Chem. Res. 47 (2008) 3285; mPa s and degC inside, as printed there
    t, mass = recipe.temperature_c, recipe.glycerol_percent / 100.0
    water = 1.790 * math.exp((-1230.0 - t) * t / (36100.0 + 360.0 * t))
    glycerol = 12100.0 * math.exp((-1233.0 + t) * t / (9900.0 + 70.0 * t))
    a = 0.705 - 0.0017 * t
    b = (4.9 + 0.036 * t) * a**2.5
    weight = 1.0 - mass + a * b * mass * (1.0 - mass) / (a * mass + b * (1.0 - mass))
    density_water = 1000.0 * (1.0 - abs((t - 4.0) / 622.0) ** 1.7)
    density = mass * (1277.0 - 0.654 * t) + (1.0 - mass) * density_water
    return FluidState(
        name="glycerol-water", density_kg_m3=density, error_percent=4.0,
        viscosity_pa_s=1e-3 * water**weight * glycerol ** (1.0 - weight),
        source="Cheng 2008 viscosity; density of the two parts mixed by mass (0.6 %)",
        notes=("Glycerol takes up water from the air, and viscosity follows: measure the mixture you use.",),
    )  # fmt: skip


def _ethanol(recipe: _Recipe) -> FluidState:
    # Perry's Chemical Engineers' Handbook, 8th edition, tables 2-313 (viscosity) and 2-32 (density)
    t = recipe.temperature_k
    kmol_m3 = 1.6288 / 0.27469 ** (1.0 + (1.0 - t / 514.0) ** 0.23178)
    return FluidState(
        name="ethanol", density_kg_m3=46.06844 * kmol_m3, error_percent=2.0,
        viscosity_pa_s=math.exp(7.875 + 781.98 / t - 3.0418 * math.log(t)),
        source="Perry's Handbook, 8th edition, liquid correlations",
        notes=("Dry ethanol. It takes up water, and 40 % water makes it more than twice as viscous.",),
    )  # fmt: skip


def _air(recipe: _Recipe) -> FluidState:
    from chemicals.air import lemmon2000_rho
    from chemicals.viscosity import mu_air_lemmon

    t = recipe.temperature_k
    mol_m3 = lemmon2000_rho(t, ATMOSPHERE_PA)
    return FluidState(
        name="air", density_kg_m3=0.02896546 * mol_m3, viscosity_pa_s=mu_air_lemmon(t, mol_m3), error_percent=1.0,
        source="Lemmon et al. 2000 density, Lemmon and Jacobsen 2004 viscosity, dry air",
        notes=(
            "Air is treated as incompressible: trust pressure drops below about 5 kPa and speeds below about "
            "100 m/s (Mach 0.3).",
        ),
        is_gas=True,
    )  # fmt: skip


def _saline(recipe: _Recipe) -> FluidState:
    # Salt raises the viscosity by Jones and Dole 1929 (A 0.0062, B 0.0793 at 25 degC, litre and mole);
    # each mole brings 58.44 g and takes 16.6 cm^3 of room.
    density, viscosity = _water_values(recipe.temperature_k)
    mol_l = WATER_MOLAR_SALT / 1000.0
    return FluidState(
        name="saline", error_percent=2.0,
        density_kg_m3=density + WATER_MOLAR_SALT * (0.05844 - 16.6e-6 * density),
        viscosity_pa_s=viscosity * (1.0 + 0.0062 * math.sqrt(mol_l) + 0.0793 * mol_l),
        source="IAPWS water; sodium chloride after Jones and Dole 1929",
        notes=(
            "0.9 % sodium chloride stands in for buffered saline; culture medium with serum is thicker "
            "and blood is not Newtonian: enter measured values as your own fluid.",
        ),
    )  # fmt: skip


def _own(recipe: _Recipe) -> FluidState:
    return FluidState(
        name="own", density_kg_m3=recipe.own_density_kg_m3, viscosity_pa_s=1e-3 * recipe.own_viscosity_mpa_s,
        error_percent=0.0, source="your own values",
        notes=("Your own density and viscosity are used at every temperature; the liquid is taken as Newtonian.",),
    )  # fmt: skip


# fluid -> (lowest, highest temperature in degC, formulas). Limits: freezing and boiling at
# atmospheric pressure with a degree in hand, or the range a correlation is published for.
_FLUIDS: dict[str, tuple[float, float, Callable[[_Recipe], FluidState]]] = {
    "water": (0.0, 99.0, _water),
    "glycerol-water": (0.0, 100.0, _glycerol_water),
    "ethanol": (0.0, 77.0, _ethanol),
    "air": (0.0, 100.0, _air),
    "saline": (0.0, 60.0, _saline),
    "own": (0.0, 100.0, _own),
}

FLUID_RANGES_C: dict[str, tuple[float, float]] = {name: (low, high) for name, (low, high, _) in _FLUIDS.items()}


def fluid_state(
    *,
    fluid: str,
    temperature_c: float = 20.0,
    glycerol_percent: float = 30.0,
    own_density_kg_m3: float = 1000.0,
    own_viscosity_mpa_s: float = 1.0,
) -> FluidState:
    """Return density and viscosity of a fluid at one temperature and atmospheric pressure.

    Parameters
    ----------
    fluid : str
        A key of ``FLUID_RANGES_C``.
    temperature_c : float
        Temperature [degC].
    glycerol_percent : float
        Mass fraction of glycerol [%]; read by ``glycerol-water`` only.
    own_density_kg_m3 : float
        Density [kg/m^3]; read by ``own`` only.
    own_viscosity_mpa_s : float
        Viscosity [mPa*s]; read by ``own`` only.

    Returns
    -------
    FluidState
        Values with their source, error and cautions.

    Raises
    ------
    DesignValueError
        For an unknown fluid, or a temperature at which the fluid's formulas do not hold.

    Examples
    --------
    >>> round(fluid_state(fluid="water", temperature_c=20.0).density_kg_m3, 3)
    998.207
    """
    if fluid not in _FLUIDS:
        raise DesignValueError(
            field="fluid", value=fluid, limit=", ".join(_FLUIDS), way_out=did_you_mean(str(fluid), _FLUIDS)
        )
    low, high, formulas = _FLUIDS[fluid]
    if not low <= temperature_c <= high:
        way_out = f"lower it to at most {high:g}" if temperature_c > high else f"raise it to at least {low:g}"
        raise DesignValueError(
            field="temperature_c",
            value=temperature_c,
            limit=f"{low:g} to {high:g} degC for {fluid}",
            way_out=f"{way_out} degC, or choose another fluid",
        )
    return formulas(
        _Recipe(
            temperature_c=temperature_c,
            glycerol_percent=glycerol_percent,
            own_density_kg_m3=own_density_kg_m3,
            own_viscosity_mpa_s=own_viscosity_mpa_s,
        )
    )
