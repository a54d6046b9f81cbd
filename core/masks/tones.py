"""How a tone looks: which areas are clear, which dark, and which lines are only shown."""

from __future__ import annotations

from dataclasses import dataclass, field

from core.chip.scene import Layer
from core.fabrication.choices import Tone
from core.masks.layers import LAYERS

ON_MASK = (Layer.CHANNELS, Layer.MARKS, Layer.TEXT)
_CLEAR, _DARK = "#fdfdf4", "#27333b"
_LINES = {
    Layer.TEXT: ("#3a6ea5", "blue"),
    Layer.MARKS: ("#6b8f3c", "green"),
    Layer.PORTS: ("#e08b2c", "orange"),
    Layer.CHANNELS: ("#12777f", "teal"),
    Layer.CUT: ("#c23b3b", "red"),
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Look:
    """Colours of a picture of a mask.

    Attributes
    ----------
    plate : str
        What is not drawn on.
    shapes : dict of Layer to str
        Layers whose shapes are filled.
    lines : dict of Layer to str
        Layers of which only the outline is shown.
    words : str
        What the picture shows, in one sentence.
    """

    plate: str
    shapes: dict[Layer, str] = field(default_factory=dict)
    lines: dict[Layer, str] = field(default_factory=dict)
    words: str = ""


def look_of(tone: Tone) -> Look:
    """Return how a tone looks.

    Parameters
    ----------
    tone : Tone
        What the drawn shapes become.
    """
    lines = {layer: line for layer, line in _LINES.items() if tone is Tone.CUT or layer not in ON_MASK}
    legend = ", ".join(f"{name} {LAYERS[layer].dxf_name}" for layer, (_, name) in lines.items())
    colours = {layer: colour for layer, (colour, _) in lines.items()}
    if tone is Tone.CUT:
        return Look(plate=_CLEAR, lines=colours, words=f"Drawn lines are CUT or worked: {legend}.")
    plate, shape = (_DARK, _CLEAR) if tone is Tone.CLEAR else (_CLEAR, _DARK)
    words = "CLEAR (light here), all else is dark" if tone is Tone.CLEAR else "DARK (dark here), all else is clear"
    return Look(
        plate=plate,
        shapes=dict.fromkeys(ON_MASK, shape),
        lines=colours,
        words=f"Drawn shapes are {words}; not on the mask: {legend}.",
    )
