"""Units shown to users, and the one place where they are converted.

Inside ``core`` lengths in names are micrometres (``_um``) for drawings and metres (``_m``)
for physics; flows and pressures are SI unless the name says otherwise.
"""

from __future__ import annotations

from math import floor, log10

from core.errors import DesignValueError, did_you_mean

M_PER_UM = 1e-6
UM_PER_MM = 1000.0
NM_PER_UM = 1000.0
M3_S_PER_UL_MIN = 1e-9 / 60.0

# quantity -> unit -> size of that unit in the quantity's first (base) unit
UNITS: dict[str, dict[str, float]] = {
    "length": {"um": 1.0, "mm": UM_PER_MM},
    "flow": {"uL/min": 1.0, "mL/min": 1000.0},
    "pressure": {"Pa": 1.0, "kPa": 1000.0, "mbar": 100.0, "psi": 6894.757293168},
}

# how a unit is written on the screen
_SYMBOLS = {"um": "µm", "uL/min": "µL/min", "deg": "°", "degC": "°C"}


def base_unit(quantity: str) -> str:
    """Return the unit in which a quantity is stored (``um``, ``uL/min``, ``Pa``)."""
    return next(iter(UNITS[quantity]))


def convert(value: float, *, quantity: str, from_unit: str, to_unit: str) -> float:
    """Convert between two units of one quantity.

    Parameters
    ----------
    value : float
        Number in ``from_unit``.
    quantity : str
        One of the keys of ``UNITS``.
    from_unit, to_unit : str
        Units of that quantity.

    Returns
    -------
    float
        Number in ``to_unit``.

    Raises
    ------
    DesignValueError
        If a unit is not known for the quantity.

    Examples
    --------
    >>> convert(1.5, quantity="flow", from_unit="mL/min", to_unit="uL/min")
    1500.0
    """
    table = UNITS[quantity]
    for unit in (from_unit, to_unit):
        if unit not in table:
            raise DesignValueError(
                field=f"{quantity}_unit",
                value=unit,
                limit=", ".join(table),
                way_out=did_you_mean(unit, table),
            )
    return value * table[from_unit] / table[to_unit]


def unit_symbol(unit: str) -> str:
    """Return how a unit is written on the screen."""
    return _SYMBOLS.get(unit, unit)


def round_length_um(most_um: float) -> float:
    """Return the longest of 1, 2 or 5 times a power of ten that is not above a length [um], as scale bars have it.

    Examples
    --------
    >>> round_length_um(10000.0), round_length_um(4999.0), round_length_um(0.3)
    (10000.0, 2000.0, 0.2)
    """
    power = 10.0 ** floor(log10(most_um) + 1e-9)
    return max(step * power for step in (1.0, 2.0, 5.0) if step * power <= most_um * (1.0 + 1e-9))
