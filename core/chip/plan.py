"""The plan of a chip: its size, what is placed on it and where, and the plate it is copied over."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from core.fields import CheckedValues, Field, table_of

if TYPE_CHECKING:
    from collections.abc import Mapping

CHIP, PORTS, FURNITURE, PLATE = "Chip", "Ports", "Marks and words", "Plate"
YES_NO = ("yes", "no")


def _um(
    name: str, label: str, group: str, default: float, bounds: tuple[float, float], step: float, text: str
) -> Field:
    return Field(name=name, label=label, group=group, default=default, unit="um",
                 minimum=bounds[0], maximum=bounds[1], step=step, help=text)  # fmt: skip


def _word(name: str, label: str, group: str, choices: tuple[str, ...], text: str) -> Field:
    return Field(name=name, label=label, group=group, default=choices[0], choices=choices, help=text)


CHIP_FIELDS: dict[str, Field] = table_of(
    _um("chip_width_um", "Chip width", CHIP, 40000.0, (500.0, 500000.0), 1000.0, "Outline of the chip along x."),
    _um("chip_height_um", "Chip height", CHIP, 20000.0, (500.0, 500000.0), 1000.0, "Outline of the chip along y."),
    _um("edge_clearance_um", "Edge clearance", CHIP, 1000.0, (0.0, 50000.0), 100.0,
        "Solid left between the chip's edge and any channel or port."),
    _um("spacing_um", "Channel spacing", CHIP, 1000.0, (0.0, 50000.0), 100.0,
        "Solid left between neighbouring channels when they are packed."),
    _um("port_diameter_um", "Port diameter", PORTS, 1000.0, (10.0, 20000.0), 50.0, "Round hole at every open end."),
    _um("pad_margin_um", "Pad margin", PORTS, 250.0, (0.0, 10000.0), 50.0,
        "Ring of channel around a port, so that a hole that is a little off still meets the channel."),
    _um("port_pitch_um", "Port pitch", PORTS, 0.0, (0.0, 100000.0), 250.0,
        "Smallest distance from centre to centre of two ports; 0 where any clearance will do."),
    _um("port_clearance_um", "Port clearance", PORTS, 500.0, (0.0, 50000.0), 100.0,
        "Solid left between a port's pad and another port or a channel that is not its own."),
    Field(name="alignment_pairs", label="Alignment marks", group=FURNITURE, default=1, minimum=0, maximum=4, step=1,
          whole=True, help="Pairs of alignment marks, one pair for every further layer; 0 for none."),
    _word("corner_marks", "Corner marks", FURNITURE, YES_NO, "Marks at the four corners of the chip."),
    _word("cut_lines", "Cutting", FURNITURE, ("ticks", "outline", "none"),
          "Short ticks where the chip is cut, its closed outline, or nothing."),
    _word("scale_bar", "Scale bar", FURNITURE, YES_NO, "A bar of known length, to check the scale on the part."),
    _word("test_bars", "Test bars", FURNITURE, YES_NO, "Lines and gaps of the critical widths, to measure."),
    _um("text_height_um", "Lettering", FURNITURE, 800.0, (20.0, 20000.0), 100.0, "Height of capitals."),
    _word("plate", "Plate", PLATE, ("single chip", "wafer", "plate"), "One chip, or copies over a wafer or a plate."),
    _um("wafer_diameter_um", "Wafer diameter", PLATE, 100000.0, (10000.0, 450000.0), 1000.0, "Of a round wafer."),
    _um("plate_width_um", "Plate width", PLATE, 120000.0, (1000.0, 1000000.0), 1000.0, "Of a square plate, along x."),
    _um("plate_height_um", "Plate height", PLATE, 120000.0, (1000.0, 1000000.0), 1000.0,
        "Of a square plate, along y."),
    _um("edge_exclusion_um", "Edge exclusion", PLATE, 4000.0, (0.0, 50000.0), 500.0, "Rim kept free of chips."),
    _um("street_um", "Street", PLATE, 200.0, (0.0, 20000.0), 50.0, "Free strip between chips, for saw or blade."),
)  # fmt: skip


@dataclass(frozen=True, slots=True, kw_only=True)
class ChipChannel:
    """One channel on the chip.

    Attributes
    ----------
    set_name : str
        Parameter set that it follows.
    x_um, y_um : float
        Middle of its bounds, from the middle of the chip [um].
    turn_deg : float
        Turn from the drawing of the set, counter-clockwise [deg].
    rows : int
        Rows into which a long chain is folded; 1 leaves it whole.
    is_control : bool
        True: the plain straight channel of the same section and leads, to measure against.
    """

    set_name: str
    x_um: float = 0.0
    y_um: float = 0.0
    turn_deg: float = 0.0
    rows: int = 1
    is_control: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class SteppedField:
    """A field of the channel that varies in equal steps from chip to chip of a plate."""

    name: str
    first: float
    last: float
    steps: int


@dataclass(frozen=True, slots=True, kw_only=True)
class ChipPlan(CheckedValues):
    """One checked plan; every number and word is described in ``CHIP_FIELDS``.

    Attributes
    ----------
    label : str
        Words drawn on the chip; empty for the chip's name.
    channels : tuple of ChipChannel
        What is placed; empty lets every set be packed, and the chip grow to hold them.
    series : tuple of SteppedField
        At most two fields that vary over the plate: the first along x, the second along y.

    Raises
    ------
    DesignValueError
        If a value cannot be used.
    """

    chip_width_um: float = 40000.0
    chip_height_um: float = 20000.0
    edge_clearance_um: float = 1000.0
    spacing_um: float = 1000.0
    port_diameter_um: float = 1000.0
    pad_margin_um: float = 250.0
    port_pitch_um: float = 0.0
    port_clearance_um: float = 500.0
    alignment_pairs: int = 1
    corner_marks: str = "yes"
    cut_lines: str = "ticks"
    scale_bar: str = "yes"
    test_bars: str = "yes"
    text_height_um: float = 800.0
    plate: str = "single chip"
    wafer_diameter_um: float = 100000.0
    plate_width_um: float = 120000.0
    plate_height_um: float = 120000.0
    edge_exclusion_um: float = 4000.0
    street_um: float = 200.0
    label: str = ""
    channels: tuple[ChipChannel, ...] = field(default=())
    series: tuple[SteppedField, ...] = field(default=())

    @classmethod
    def table(cls) -> Mapping[str, Field]:
        """Return the table that describes the fields."""
        return CHIP_FIELDS
