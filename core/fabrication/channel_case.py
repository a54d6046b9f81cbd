"""One channel under one process, measured only as far as it is asked for."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property
from math import inf
from typing import TYPE_CHECKING

import numpy as np

from core.fabrication.existence import RADII, SAME_UM, WIDTHS
from core.fabrication.making import Making, making_of
from core.geometry.clearances import Gap, narrowest_gap
from core.geometry.shape import ChannelShape, build_shape
from core.units import NM_PER_UM

if TYPE_CHECKING:
    from core.fabrication.process import Process
    from core.fields import Value
    from core.geometry.contour import Floats
    from core.parameters import ChannelParameters

Ends = tuple[float, float, float, float]
# A length of fewer grid steps than this is rounded by more than a tenth of itself.
FEWEST_STEPS = 10
_NOISE_UM = 1e-9


@dataclass(frozen=True)
class ChannelCase:
    """A channel, a process, and what follows from both.

    Attributes
    ----------
    wanted : ChannelParameters
        The design.
    process : Process
        How it is made.
    pressure_pa : float or None
        Largest pressure in the channel, if known [Pa].
    pressure_at : str
        In words, when that pressure is there.
    """

    wanted: ChannelParameters
    process: Process
    pressure_pa: float | None = None
    pressure_at: str = ""

    def with_value(self, field: str, value: Value) -> ChannelCase:
        """Return the case of the same channel with one field changed."""
        return replace(self, wanted=self.wanted.with_values({field: value}))

    @property
    def widths(self) -> tuple[str, ...]:
        """Fields of the widths that the channel really has."""
        return WIDTHS if self.wanted.stages else WIDTHS[:1]

    @property
    def radii(self) -> tuple[str, ...]:
        """Fields of the radii that the channel really has."""
        return RADII if self.wanted.stages else ()

    @cached_property
    def making(self) -> Making:
        """As drawn and as made."""
        return making_of(self.wanted, self.process)

    @cached_property
    def shape(self) -> ChannelShape:
        """The design as wanted."""
        return build_shape(self.wanted)

    @cached_property
    def made_shape(self) -> ChannelShape:
        """As made."""
        return build_shape(self.making.made)

    @cached_property
    def drawn_shape(self) -> ChannelShape:
        """As drawn."""
        return build_shape(self.making.drawn)

    @property
    def is_drawable(self) -> bool:
        """Whether the channel exists as wanted, as drawn and as made."""
        if self.making.findings or not self.shape.is_usable:
            return False
        return self.made_shape.is_usable and self.drawn_shape.is_usable

    @property
    def leaning_limit_um(self) -> float:
        """The narrowest that a width or a solid of this depth may be [um]."""
        return self.wanted.depth_um / self.process.max_depth_to_width

    @property
    def grid_limit_um(self) -> float:
        """The shortest length that the drawing grid holds well [um]."""
        return self.process.grid_nm / NM_PER_UM * FEWEST_STEPS

    @cached_property
    def _gap(self) -> Gap | None:
        """The narrowest solid as made, where it is narrower than some limit."""
        if not self._has_gaps(self.making.made):
            return None
        on_drawing = max(self.process.min_drawn_um, self.grid_limit_um) / self.making.scale
        limit = max(self.process.min_gap_um, self.leaning_limit_um, on_drawing - 2.0 * self._shift_um)
        return narrowest_gap(self.made_shape, below_um=limit + SAME_UM)

    def _has_gaps(self, channel: ChannelParameters) -> bool:
        shape = self.drawn_shape if channel is self.making.drawn else self.made_shape
        return self.wanted.stages > 0 and not self.making.findings and shape.is_usable

    @property
    def _shift_um(self) -> float:
        return 0.5 * (self.making.made.channel_width_um - self.making.drawn.channel_width_um)

    @property
    def made_gap_um(self) -> float:
        """The narrowest solid between walls as made; infinite where it is wider than any limit [um]."""
        return inf if self._gap is None else self._gap.um

    @cached_property
    def drawn_gap_um(self) -> float:
        """The narrowest solid between walls on the mask, after scaling; infinite where wider than any limit [um]."""
        drawn, made, shift = self.making.drawn, self.making.made, self._shift_um
        # nothing clipped: every wall of the drawing stands by the shift behind the wall as made
        if all(abs(getattr(drawn, name) - shift - getattr(made, name)) < _NOISE_UM for name in RADII):
            return self.making.scale * (self.made_gap_um + 2.0 * shift)
        if not self._has_gaps(drawn):
            return inf
        limit = max(self.process.min_drawn_um, self.grid_limit_um) / self.making.scale
        gap = narrowest_gap(self.drawn_shape, below_um=limit + SAME_UM)
        return inf if gap is None else self.making.scale * gap.um

    @property
    def gap_ends(self) -> Ends | None:
        """Both ends of the line across the narrowest solid, as made."""
        return None if self._gap is None else _ends(*self._gap.at_um)

    @property
    def is_gap_in_island(self) -> bool:
        """Whether the narrowest solid is an island."""
        return self._gap is not None and self._gap.is_in_island

    def width_ends(self, name: str, width_um: float) -> Ends | None:
        """Return both ends of a line straight across the bypass or loop of the first stage, or across a lead."""
        if self.shape.chain is None:
            return None
        line = self.shape.chain.centreline
        if line.stages:
            place = line.stages[0]
            section = place.bypass_section_um if name == WIDTHS[0] else place.loop_section_um
        else:
            section = line.forward_outlet.section_um + 0.5 * (
                line.forward_inlet.point_um - line.forward_outlet.point_um
            )
        middle = section.mean(axis=0)
        ends = middle + (section - middle) * (width_um / getattr(self.wanted, name))
        return _ends(ends[0], ends[1])

    def corner_place(self, name: str) -> tuple[float, float] | None:
        """Return a corner of the first stage that a radius belongs to."""
        outline, chain = self.shape.outline, self.shape.chain
        if outline is None or chain is None or not outline.islands:
            return None
        place = chain.centreline.stages[0]
        is_nose = name == RADII[0]
        vertices = (outline.islands[0] if is_nose else outline.outer).vertices_um
        near = vertices[np.argmin(np.hypot(*(vertices - (place.fork_um if is_nose else place.mouth_um)).T))]
        return float(near[0]), float(near[1])


def _ends(first: Floats, last: Floats) -> Ends:
    return float(first[0]), float(first[1]), float(last[0]), float(last[1])
