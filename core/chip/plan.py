"""The plan of a chip: its size, what is placed on it and where, and the plate it is copied over."""

from __future__ import annotations

from dataclasses import dataclass, field
from enum import StrEnum
from typing import TYPE_CHECKING

from core.errors import DesignValueError, did_you_mean
from core.fields import CheckedValues, Field, choice_field, length_field, table_of
from core.parameters import CHANNEL_FIELDS

if TYPE_CHECKING:
    from collections.abc import Mapping

CHIP, PORTS, FURNITURE, PLATE, PLACE, SERIES = "Chip", "Ports", "Marks and words", "Plate", "Place", "Stepped series"
YES_NO = ("yes", "no")
MOST_CHANNELS = 200
MOST_SERIES = 2
LONGEST_WORDS = 60  # signs of a label or of a set's name


class CutLines(StrEnum):
    """What shows where a chip is cut."""

    TICKS = "ticks"
    OUTLINE = "outline"
    NONE = "none"


class PlateKind(StrEnum):
    """What is written at once."""

    SINGLE = "single chip"
    WAFER = "wafer"
    PLATE = "plate"


CHIP_FIELDS: dict[str, Field] = table_of(
    length_field("chip_width_um", "Chip width", CHIP, 40000.0, (500.0, 500000.0), 1000.0,
                 "Outline of the chip along x."),
    length_field("chip_height_um", "Chip height", CHIP, 20000.0, (500.0, 500000.0), 1000.0,
                 "Outline of the chip along y."),
    length_field("edge_clearance_um", "Edge clearance", CHIP, 1000.0, (0.0, 50000.0), 100.0,
                 "Solid left between the chip's edge and any channel or port."),
    length_field("spacing_um", "Channel spacing", CHIP, 1000.0, (0.0, 50000.0), 100.0,
                 "Solid left between neighbouring channels when they are packed."),
    length_field("port_diameter_um", "Port diameter", PORTS, 1000.0, (10.0, 20000.0), 50.0,
                 "Round hole at every open end."),
    length_field("pad_margin_um", "Pad margin", PORTS, 250.0, (0.0, 10000.0), 50.0,
                 "Ring of channel around a port, so that a hole that is a little off still meets the channel."),
    length_field("port_pitch_um", "Port pitch", PORTS, 0.0, (0.0, 100000.0), 250.0,
                 "Smallest distance from centre to centre of two ports; 0 where any clearance will do."),
    length_field("port_clearance_um", "Port clearance", PORTS, 500.0, (0.0, 50000.0), 100.0,
                 "Solid left between a port's pad and another port or a channel that is not its own."),
    Field(name="alignment_pairs", label="Alignment marks", group=FURNITURE, default=1, minimum=0, maximum=4, step=1,
          whole=True, help="Pairs of alignment marks, one pair for every further layer; 0 for none."),
    choice_field("corner_marks", "Corner marks", FURNITURE, YES_NO, "Marks at the four corners of the chip."),
    choice_field("cut_lines", "Cutting", FURNITURE, CutLines,
                 "Short ticks where the chip is cut, its closed outline, or nothing."),
    choice_field("scale_bar", "Scale bar", FURNITURE, YES_NO, "A bar of known length, to check the scale on the part."),
    choice_field("test_bars", "Test bars", FURNITURE, YES_NO, "Lines and gaps of the critical widths, to measure."),
    length_field("text_height_um", "Lettering", FURNITURE, 800.0, (20.0, 20000.0), 100.0, "Height of capitals."),
    choice_field("plate", "Plate", PLATE, PlateKind,
                 "One chip, or copies over a wafer or a plate."),
    length_field("wafer_diameter_um", "Wafer diameter", PLATE, 100000.0, (10000.0, 450000.0), 1000.0,
                 "Of a round wafer."),
    length_field("plate_width_um", "Plate width", PLATE, 120000.0, (1000.0, 1000000.0), 1000.0,
                 "Of a square plate, along x."),
    length_field("plate_height_um", "Plate height", PLATE, 120000.0, (1000.0, 1000000.0), 1000.0,
                 "Of a square plate, along y."),
    length_field("edge_exclusion_um", "Edge exclusion", PLATE, 4000.0, (0.0, 50000.0), 500.0,
                 "Rim kept free of chips."),
    length_field("street_um", "Street", PLATE, 200.0, (0.0, 20000.0), 50.0,
                 "Free strip between chips, for saw or blade."),
)  # fmt: skip


PLACE_FIELDS: dict[str, Field] = table_of(
    length_field("x_um", "Across", PLACE, 0.0, (-500000.0, 500000.0), 100.0,
                 "Middle of the channel, from the chip's middle."),
    length_field("y_um", "Up", PLACE, 0.0, (-500000.0, 500000.0), 100.0,
                 "Middle of the channel, from the chip's middle."),
    Field(name="turn_deg", label="Turn", group=PLACE, default=0.0, unit="deg", minimum=-360.0, maximum=360.0, step=1.0,
          help="Turn from the drawing of the set, counter-clockwise."),
    Field(name="rows", label="Rows", group=PLACE, default=1, minimum=1, maximum=20, step=1, whole=True,
          help="Rows into which a long chain is folded; 1 leaves it whole."),
)  # fmt: skip

SERIES_FIELDS: dict[str, Field] = table_of(
    Field(name="first", label="First", group=SERIES, default=0.0, minimum=-1e6, maximum=1e6,
          help="Value of the first chip, in the field's own unit."),
    Field(name="last", label="Last", group=SERIES, default=0.0, minimum=-1e6, maximum=1e6,
          help="Value of the last chip, in the field's own unit."),
    Field(name="steps", label="Steps", group=SERIES, default=5, minimum=2, maximum=50, step=1, whole=True,
          help="Number of values, first and last included."),
)  # fmt: skip


@dataclass(frozen=True, slots=True, kw_only=True)
class ChipChannel(CheckedValues):
    """One channel on the chip; numbers are described in ``PLACE_FIELDS``.

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

    Raises
    ------
    DesignValueError
        If a value cannot be used.
    """

    set_name: str
    x_um: float = 0.0
    y_um: float = 0.0
    turn_deg: float = 0.0
    rows: int = 1
    is_control: bool = False

    @classmethod
    def table(cls) -> Mapping[str, Field]:
        """Return the table that describes the numbers."""
        return PLACE_FIELDS

    def __post_init__(self) -> None:
        """Check the numbers, the name and the choice."""
        CheckedValues.__post_init__(self)
        _check_line("set_name", self.set_name, least=1)
        if not isinstance(self.is_control, bool):
            raise DesignValueError(
                field="is_control", value=self.is_control, limit="true or false", way_out="give one of them"
            )


@dataclass(frozen=True, slots=True, kw_only=True)
class SteppedField(CheckedValues):
    """A number of the channel that varies in equal steps from chip to chip of a plate.

    Attributes
    ----------
    name : str
        A numeric field of ``CHANNEL_FIELDS``; it is set in every channel of the chip.
    first, last : float
        Values at both ends, in the field's own unit and bounds.
    steps : int
        Number of values, 2 to 50.

    Raises
    ------
    DesignValueError
        If a value cannot be used.
    """

    name: str
    first: float
    last: float
    steps: int

    @classmethod
    def table(cls) -> Mapping[str, Field]:
        """Return the table that describes the numbers."""
        return SERIES_FIELDS

    def __post_init__(self) -> None:
        """Check the numbers by their own bounds and by those of the field that is stepped."""
        numbers = [name for name, field in CHANNEL_FIELDS.items() if not field.choices]
        if self.name not in numbers:
            raise DesignValueError(
                field="series name", value=self.name, limit="a number of the channel",
                way_out=did_you_mean(str(self.name), numbers),
            )  # fmt: skip
        CheckedValues.__post_init__(self)
        for end in ("first", "last"):
            object.__setattr__(self, end, self.field.checked(getattr(self, end)))
        if len(set(self.values)) < self.steps:
            raise DesignValueError(
                field="steps", value=self.steps, limit=f"values of {self.name} that all differ",
                way_out="move first and last apart, or lower steps",
            )  # fmt: skip

    @property
    def field(self) -> Field:
        """The field that is stepped."""
        return CHANNEL_FIELDS[self.name]

    @property
    def values(self) -> tuple[float | int, ...]:
        """All values in order, rounded to the nearest whole number where the field counts."""
        step = (self.last - self.first) / (self.steps - 1)
        exact = [self.first + step * n for n in range(self.steps - 1)] + [self.last]
        return tuple(round(value) if self.field.whole else float(f"{value:.9g}") for value in exact)


@dataclass(frozen=True, slots=True, kw_only=True)
class ChipPlan(CheckedValues):
    """One checked plan; every number and word is described in ``CHIP_FIELDS``.

    Attributes
    ----------
    label : str
        Words drawn on the chip; empty for the chip's name.
    channels : tuple of ChipChannel
        What is placed, at most 200; empty lets every set be packed, and the chip grow to hold them.
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
    cut_lines: str = str(CutLines.TICKS)
    scale_bar: str = "yes"
    test_bars: str = "yes"
    text_height_um: float = 800.0
    plate: str = str(PlateKind.SINGLE)
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

    def __post_init__(self) -> None:
        """Check every number and word, what is placed, and what is stepped."""
        CheckedValues.__post_init__(self)
        _check_line("label", self.label)
        object.__setattr__(self, "channels", _checked_list("channels", self.channels, ChipChannel, MOST_CHANNELS))
        object.__setattr__(self, "series", _checked_list("series", self.series, SteppedField, MOST_SERIES))
        names = [each.name for each in self.series]
        if len(set(names)) < len(names):
            raise DesignValueError(
                field="series", value=names[0], limit="a field that no other series steps",
                way_out="step another field, or keep one series",
            )  # fmt: skip


def _check_line(name: str, value: object, *, least: int = 0) -> None:
    if not (isinstance(value, str) and value.isprintable() and least <= len(value) <= LONGEST_WORDS):
        raise DesignValueError(
            field=name, value=value, limit=f"{least} to {LONGEST_WORDS} printable characters in one line",
            way_out="shorten it, or leave out what cannot be printed",
        )  # fmt: skip


def _checked_list(name: str, values: object, kind: type[CheckedValues], most: int) -> tuple[CheckedValues, ...]:
    if not isinstance(values, tuple | list) or not all(isinstance(value, kind) for value in values):
        raise DesignValueError(
            field=name, value=values, limit=f"a list of {kind.__name__}", way_out="give each of its parts by name"
        )
    if len(values) > most:
        raise DesignValueError(
            field=name, value=len(values), limit=f"at most {most}", way_out="use fewer, or more than one chip"
        )
    return tuple(values)
