"""Where a value sits on its slider, and which value a place on the slider means."""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from core.fields import Field

TICKS = 1000

# A range of more steps than this is given a curved scale, so that small values stay within reach.
_STEPS_ON_A_STRAIGHT_SCALE = 300.0


@dataclass(frozen=True, slots=True, kw_only=True)
class SliderScale:
    """The scale of one slider: straight for narrow ranges, curved for wide ones.

    Attributes
    ----------
    minimum, maximum : float
        Ends of the scale.
    bend : float
        Value above the minimum below which the curved scale is nearly straight; 0 for straight.
    step : float
        Values on a straight scale are whole numbers of steps from the minimum.
    """

    minimum: float
    maximum: float
    bend: float
    step: float

    @classmethod
    def of(cls, field: Field) -> SliderScale:
        """Return the scale that suits a field."""
        is_wide = (field.maximum - field.minimum) / field.step > _STEPS_ON_A_STRAIGHT_SCALE
        bend = 4.0 * field.step if is_wide else 0.0
        return cls(minimum=field.minimum, maximum=field.maximum, bend=bend, step=field.step)

    @property
    def tick_count(self) -> int:
        """Number of the last place on the slider; the first is 0."""
        return TICKS if self.bend else max(1, round((self.maximum - self.minimum) / self.step))

    def tick(self, value: float) -> int:
        """Return the place of a value."""
        above = min(max(value, self.minimum), self.maximum) - self.minimum
        return round(self.tick_count * self._part(above))

    def value(self, tick: int) -> float:
        """Return the value at a place, rounded as finely as the place can tell."""
        if tick <= 0:
            return self.minimum
        if tick >= self.tick_count:
            return self.maximum
        if not self.bend:
            return self.minimum + tick * self.step
        here, next_one = self._exact(tick), self._exact(tick + 1)
        grain = _round_grain(next_one - here)
        rounded = round(here / grain) * grain
        return min(max(float(f"{rounded:.9g}"), self.minimum), self.maximum)

    def _part(self, above: float) -> float:
        span = self.maximum - self.minimum
        if not self.bend:
            return above / span
        return math.log1p(above / self.bend) / math.log1p(span / self.bend)

    def _exact(self, tick: int) -> float:
        span = self.maximum - self.minimum
        return self.minimum + self.bend * math.expm1(tick / self.tick_count * math.log1p(span / self.bend))


def _round_grain(wanted: float) -> float:
    """Return the largest of ... 0.1, 0.2, 0.5, 1, 2, 5 ... that is not above ``wanted``."""
    decade = 10.0 ** math.floor(math.log10(wanted))
    return next(decade * lead for lead in (5.0, 2.0, 1.0) if decade * lead <= wanted * 1.0000001)
