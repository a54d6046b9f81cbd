"""How values look on the screen: units chosen by the user, few digits, plain words."""

from __future__ import annotations

import re
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from core.chip.plan import CHIP_FIELDS
from core.fabrication.process import PROCESS_FIELDS
from core.operating import OPERATING_FIELDS
from core.parameters import CHANNEL_FIELDS
from core.units import UNITS, base_unit, convert, unit_symbol

if TYPE_CHECKING:
    from app.settings import Settings
    from core.fields import Field, Value
    from core.hydraulics.estimate import Score

DIFFERENT = "\N{NOT EQUAL TO}"  # before what is not as it was, or not as beside it

# how the words of a choice are shown; words not listed are shown as they are
_WORDS = {
    "alternate": "left and right in turn",
    "same": "all on one side",
    "water": "water",
    "glycerol-water": "glycerol and water",
    "saline": "saline, 0.9 %",
    "own": "your own",
    "right-reading, chrome or emulsion side DOWN": "right-reading, coated side DOWN",
    "right-reading, chrome or emulsion side UP": "right-reading, coated side UP",
    "as seen from the side where the tool enters": "seen from the tool's side",
}

ALL_FIELDS = {**CHANNEL_FIELDS, **OPERATING_FIELDS, **PROCESS_FIELDS, **CHIP_FIELDS}
# of process and chip only the names that are no words of plain sentences ("plate", "reading") as well
_LABELS = {
    name: field.label
    for name, field in ALL_FIELDS.items()
    if "_" in name or name in CHANNEL_FIELDS or name in OPERATING_FIELDS
}
_FIELD_NAMES = re.compile(rf"\b({'|'.join(_LABELS)})\b")

# An error as large as the rectification itself: even the sign of Di - 1 is open.
_UNKNOWN_FROM_PERCENT = 100.0
_HARDLY_ANY = 0.1  # and of this little even twice as much is little: it is said roughly


@dataclass(frozen=True, slots=True, kw_only=True)
class ShownUnits:
    """The units the user has chosen.

    Attributes
    ----------
    length, flow, pressure : str
        Units from ``core.units.UNITS``.
    """

    length: str = "um"
    flow: str = "uL/min"
    pressure: str = "kPa"

    @classmethod
    def of(cls, settings: Settings) -> ShownUnits:
        """Return the units that the settings hold."""
        return cls(length=settings.unit("length"), flow=settings.unit("flow"), pressure=settings.unit("pressure"))

    def unit_for(self, base: str) -> str:
        """Return the unit in which a value stored in ``base`` is shown."""
        for quantity in UNITS:
            if base_unit(quantity) == base:
                return str(getattr(self, quantity))
        return base

    def shown(self, value: float, base: str) -> float:
        """Return a stored value in the unit in which it is shown."""
        return _between(value, base, self.unit_for(base))

    def stored(self, value: float, base: str) -> float:
        """Return a shown value in the unit in which it is stored."""
        return _between(value, self.unit_for(base), base)

    def field(self, field: Field) -> Field:
        """Return a field whose bounds, step, default and unit are those of the screen, for messages."""
        unit = self.unit_for(field.unit)
        if unit == field.unit or field.choices:
            return replace(field, unit=unit_symbol(unit))
        numbers = {
            name: self.shown(float(getattr(field, name)), field.unit)
            for name in ("minimum", "maximum", "step", "default")
        }
        return replace(field, unit=unit_symbol(unit), **numbers)  # type: ignore[arg-type]  # numbers stay numbers


def _between(value: float, from_unit: str, to_unit: str) -> float:
    if from_unit == to_unit:
        return value
    quantity = next(name for name, units in UNITS.items() if from_unit in units)
    return convert(value, quantity=quantity, from_unit=from_unit, to_unit=to_unit)


def number_text(value: float, digits: int = 4) -> str:
    """Return a number with few digits and without trailing zeros; never in powers of ten below a million."""
    text = f"{value:.{digits}g}"
    if "e" in text and 1e-6 < abs(value) < 1e9:
        text = f"{float(text):.12f}".rstrip("0").rstrip(".")
    return text.replace("-", "\N{MINUS SIGN}") if text.startswith("-") else text


def diodicity_text(score: Score) -> str:
    """Return Di as surely as it is known: in full, roughly, or as unknown, and never more than that."""
    if score.valid:
        return f"Di {score.diodicity:.3f}"
    if score.rectification_band_percent >= _UNKNOWN_FROM_PERCENT and score.rectification > _HARDLY_ANY:
        return "Di unknown"
    return f"Di about {score.diodicity:.1f}"


def entry_text(value: Value) -> str:
    """Return a value as the user would type it, with the digits it was given."""
    return value if isinstance(value, str) else f"{value:.7g}"


def word_for(choice: str) -> str:
    """Return the screen's words for a choice."""
    return _WORDS.get(choice, choice)


def value_text(field: Field, value: Value, units: ShownUnits) -> str:
    """Return a field's value with its unit, for tables and undo texts."""
    if isinstance(value, str):
        return word_for(value)
    symbol = unit_symbol(units.unit_for(field.unit))
    return f"{entry_text(units.shown(value, field.unit))} {symbol}".rstrip()


def screen_words(sentence: str) -> str:
    """Return a sentence of ``core`` with the names of fields as the screen has them.

    Examples
    --------
    >>> screen_words("raise loop_radius_um to 40 um")
    "raise 'Loop radius' to 40 µm"
    """
    named = _FIELD_NAMES.sub(lambda match: f"'{_LABELS[match[0]]}'", sentence)
    return re.sub(r"(?<=\d) (um|uL/min)\b", lambda match: f" {unit_symbol(match[1])}", named)
