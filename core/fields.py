"""What a field is: unit, bounds, default, step, label and help, said once.

Sliders, project files, the command line and every message read the same ``Field``.
"""

from __future__ import annotations

import math
from abc import ABC, abstractmethod
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, NoReturn, Self

from core.errors import DesignValueError, did_you_mean

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

Value = float | int | str


@dataclass(frozen=True, slots=True, kw_only=True)
class Field:
    """One named value of a design.

    Attributes
    ----------
    name : str
        Name in files, on the command line and in messages; carries the unit.
    label : str
        Name on the screen.
    help : str
        One or two sentences for a tool tip.
    group : str
        Heading under which the field is shown.
    unit : str
        ``um``, ``deg``, ``degC``, ``uL/min``, ``%``, ``kg/m3``, ``mPa s`` or empty.
    default : float, int or str
        Value of a new design.
    minimum, maximum : float
        Bounds, both allowed; unused for choices.
    step : float
        One press of an arrow key.
    choices : tuple of str
        Accepted words; empty for numbers.
    whole : bool
        True for counts.
    """

    name: str
    label: str
    help: str
    group: str
    default: Value
    unit: str = ""
    minimum: float = -math.inf
    maximum: float = math.inf
    step: float = 1.0
    choices: tuple[str, ...] = ()
    whole: bool = False

    @property
    def limit(self) -> str:
        """What is accepted, in words with units."""
        if self.choices:
            return ", ".join(self.choices)
        kind = "whole number from " if self.whole else ""
        unit = f" {self.unit}" if self.unit else ""
        return f"{kind}{self.minimum:g} to {self.maximum:g}{unit}"

    def checked(self, value: object) -> Value:
        """Return the value in its own type, or say why it cannot be used.

        Parameters
        ----------
        value : object
            Number, word, or text holding either.

        Returns
        -------
        float, int or str
            The accepted value.

        Raises
        ------
        DesignValueError
            If the value has the wrong kind, is not finite or lies out of bounds.
        """
        if self.choices:
            return self._checked_choice(value)
        number = self._number(value)
        if self.whole and number != int(number):
            self._refuse(value, "give a whole number")
        if number < self.minimum:
            self._refuse(value, f"raise it to at least {self.minimum:g}")
        if number > self.maximum:
            self._refuse(value, f"lower it to at most {self.maximum:g}")
        return int(number) if self.whole else number

    def _checked_choice(self, value: object) -> str:
        if isinstance(value, str) and value in self.choices:
            return str(value)  # the bare word of an enum
        return self._refuse(value, did_you_mean(str(value), self.choices))

    def _number(self, value: object) -> float:
        if isinstance(value, bool) or not isinstance(value, int | float | str):
            self._refuse(value, "give a number")
        try:
            number = float(value)
        except (ValueError, OverflowError):
            self._refuse(value, "give a number such as " + f"{self.default:g}")
        if not math.isfinite(number):
            self._refuse(value, "give a finite number")
        return number

    def _refuse(self, value: object, way_out: str) -> NoReturn:
        raise DesignValueError(field=self.name, value=value, limit=self.limit, way_out=way_out)


class CheckedValues(ABC):
    """Base of frozen dataclasses whose fields are all described in one table.

    Raises
    ------
    DesignValueError
        If a value has the wrong kind, is not finite or lies out of bounds.
    """

    __slots__ = ()

    @classmethod
    @abstractmethod
    def table(cls) -> Mapping[str, Field]:
        """Return the table that describes the fields."""

    def __post_init__(self) -> None:
        """Check every field and keep it in its own type."""
        for field in self.table().values():
            object.__setattr__(self, field.name, field.checked(getattr(self, field.name)))

    def with_values(self, values: Mapping[str, object]) -> Self:
        """Return a copy with some fields replaced.

        Parameters
        ----------
        values : mapping
            Field names to new values (numbers, words or text holding them).

        Raises
        ------
        DesignValueError
            For the first unknown name or unusable value.
        """
        for name, value in values.items():
            if name not in self.table():
                raise unknown_field(name, value, self.table())
        return replace(self, **dict(values))  # type: ignore[type-var]  # subclasses are dataclasses

    def as_dict(self) -> dict[str, Value]:
        """Return all fields by name, in the order of the field table."""
        return {name: getattr(self, name) for name in self.table()}


def length_field(
    name: str, label: str, group: str, default: float, bounds: tuple[float, float], step: float, text: str
) -> Field:
    """Return the field of a length: one row of a table, all lengths in it in micrometres.

    Parameters
    ----------
    name, label, group : str
        As for ``Field``; the name ends in ``_um``.
    default : float
        Value of a new design [um].
    bounds : tuple of float
        Smallest and largest value [um].
    step : float
        One press of an arrow key [um].
    text : str
        Its help.
    """
    return Field(name=name, label=label, group=group, default=default, unit="um",
                 minimum=bounds[0], maximum=bounds[1], step=step, help=text)  # fmt: skip


def choice_field(name: str, label: str, group: str, choices: Iterable[str], text: str) -> Field:
    """Return the field of a choice between words: one row of a table.

    Parameters
    ----------
    name, label, group : str
        As for ``Field``.
    choices : iterable of str
        Words, or an enum of words; the first is the default.
    text : str
        Its help.
    """
    words = tuple(map(str, choices))
    return Field(name=name, label=label, group=group, default=words[0], choices=words, help=text)


def table_of(*fields: Field) -> dict[str, Field]:
    """Return fields as an ordered table, name first."""
    return {field.name: field for field in fields}


def unknown_field(name: str, value: object, table: Mapping[str, Field]) -> DesignValueError:
    """Return the error for a name that no field has."""
    return DesignValueError(
        field=str(name), value=value, limit="a known field name", way_out=did_you_mean(str(name), table)
    )
