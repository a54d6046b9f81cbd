"""The layers of a mask: how each is called in either format, and what is drawn on it."""

from __future__ import annotations

import re
from dataclasses import dataclass

from core.errors import DesignValueError

# The strictest mask shops take eight characters; this satisfies them all.
DXF_LAYER_PATTERN = re.compile(r"[A-Z][A-Z0-9_-]{0,7}")
GDSII_LAYERS = range(1, 64)  # the oldest readers stop at 63; 0 is kept free


@dataclass(frozen=True, slots=True, kw_only=True)
class MaskLayer:
    """One layer.

    Attributes
    ----------
    dxf_name : str
        Up to 8 characters A-Z, 0-9, ``_`` and ``-``, a letter first.
    gdsii_number : int
        1 to 63; the data type is always 0.
    meaning : str
        What is drawn on it, in words.

    Raises
    ------
    DesignValueError
        If a name or number would not be taken everywhere.
    """

    dxf_name: str
    gdsii_number: int
    meaning: str

    def __post_init__(self) -> None:
        """Refuse names and numbers that some reader rejects."""
        if not DXF_LAYER_PATTERN.fullmatch(self.dxf_name):
            raise DesignValueError(
                field="dxf_layer",
                value=self.dxf_name,
                limit="1 to 8 characters A-Z, 0-9, _ and -, a letter first",
                way_out="use a name such as L1_CHAN",
            )
        if self.gdsii_number not in GDSII_LAYERS:
            raise DesignValueError(
                field="gdsii_layer",
                value=self.gdsii_number,
                limit="whole number from 1 to 63",
                way_out="choose a number that old readers take",
            )


CHANNEL_LAYER = MaskLayer(dxf_name="L1_CHAN", gdsii_number=1, meaning="the channel: what is to become a channel")
ISLAND_LAYER = MaskLayer(dxf_name="L1_ISLE", gdsii_number=2, meaning="the islands, to be taken out of the channel")
