"""One channel as it stands on a chip: turned, shifted, folded into rows if wanted, with a pad at each open end."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from core.geometry.contour import Floats, Outline


@dataclass(frozen=True, slots=True, kw_only=True)
class Pad:
    """The round widening at an open end of a channel; a port stands in its middle.

    Attributes
    ----------
    centre_um : array, shape (2,)
        Middle [um].
    radius_um : float
        Radius [um].
    """

    centre_um: Floats
    radius_um: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ChannelBody:
    """A channel at its place."""

    outline: Outline
    pads: tuple[Pad, ...] = ()
