"""Findings: what is wrong, or doubtful, with a design that is otherwise well formed."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum


class Severity(StrEnum):
    """How much a finding matters."""

    ERROR = "error"  # no usable shape, or one the process cannot make
    WARNING = "warning"  # usable, but the user should know


@dataclass(frozen=True, slots=True, kw_only=True)
class Finding:
    """One result of a check.

    Attributes
    ----------
    code : str
        Stable name, for scripts.
    severity : Severity
        Error or warning.
    message : str
        What was found, its value, the limit and the change that cures it.
    field : str
        The field to change first.
    value_um, limit_um : float or None
        Measured value and limit [um]; None where the finding is not a length.
    x_um, y_um : float or None
        Place on the drawing [um].
    cure : tuple of (str, value) or None
        Nearest value of a field that was tried and takes the finding away, ready to be applied.
    ends_um : tuple of four float, or None
        Both ends (x, y, x, y) of the line along which the value was measured, on the drawing [um].
    """

    code: str
    severity: Severity
    message: str
    field: str
    value_um: float | None = None
    limit_um: float | None = None
    x_um: float | None = None
    y_um: float | None = None
    cure: tuple[str, float | int | str] | None = None
    ends_um: tuple[float, float, float, float] | None = None

    def as_dict(self) -> dict[str, object]:
        """Return the finding with the keys used in machine-readable output."""
        return {
            "code": self.code,
            "severity": str(self.severity),
            "message": self.message,
            "field": self.field,
            "value_um": self.value_um,
            "limit_um": self.limit_um,
            "x_um": self.x_um,
            "y_um": self.y_um,
            "cure": None if self.cure is None else {"field": self.cure[0], "value": self.cure[1]},
        }
