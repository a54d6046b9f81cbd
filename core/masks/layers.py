"""The layers of the files: how each is called in either format, and what is drawn on it."""

from __future__ import annotations

import re
from dataclasses import dataclass

from core.chip.scene import Layer
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


LAYERS: dict[Layer, MaskLayer] = {
    Layer.CHANNELS: MaskLayer(dxf_name="L1_CHAN", gdsii_number=1, meaning="the channels: what is to become a channel"),
    Layer.PORTS: MaskLayer(dxf_name="PORTS", gdsii_number=3, meaning="round holes for the tubing"),
    Layer.MARKS: MaskLayer(dxf_name="MARKS", gdsii_number=4, meaning="alignment marks, corners, scale and test bars"),
    Layer.TEXT: MaskLayer(dxf_name="TEXT", gdsii_number=5, meaning="lettering, as closed shapes"),
    Layer.CUT: MaskLayer(dxf_name="CUT", gdsii_number=6, meaning="where the chip is cut out"),
}
CHANNEL_LAYER = LAYERS[Layer.CHANNELS]
ISLAND_LAYER = MaskLayer(dxf_name="L1_ISLE", gdsii_number=2, meaning="the islands, to be taken out of the channels")
LAYER_NAMES = tuple(layer.dxf_name for layer in (*LAYERS.values(), ISLAND_LAYER))
NAME_OF_NUMBER = {layer.gdsii_number: layer.dxf_name for layer in (*LAYERS.values(), ISLAND_LAYER)}
# What a cutter does first: writing on the sheet, then holes, then channels; the chip is cut free last.
WORKING_ORDER = (Layer.TEXT, Layer.MARKS, Layer.PORTS, Layer.CHANNELS, Layer.CUT)
