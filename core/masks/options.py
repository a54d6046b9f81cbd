"""What the user may choose about mask files."""

from __future__ import annotations

from dataclasses import dataclass, replace
from enum import StrEnum
from typing import TYPE_CHECKING, TypeVar

from core.errors import DesignValueError, did_you_mean
from core.fields import Field, table_of
from core.masks.layers import CHANNEL_LAYER, ISLAND_LAYER, MaskLayer

if TYPE_CHECKING:
    from collections.abc import Mapping

MASKS = "Mask files"


class MaskFormat(StrEnum):
    """File format of a mask."""

    DXF = "DXF"
    GDSII = "GDSII"


class DxfVersion(StrEnum):
    """Version of the DXF files: R2000 is taken nearly everywhere, R12 by the oldest readers."""

    R2000 = "R2000"
    R12 = "R12"


class IslandMode(StrEnum):
    """How islands are left out in DXF files; GDSII files always hold pieces."""

    PIECES = "pieces"  # the channel is cut into butting pieces without holes
    LOOPS = "loops"  # outer loops and island loops on two layers, to be combined by NOT


MASK_FIELDS: dict[str, Field] = table_of(
    Field(name="chord_tolerance_um", label="Chord tolerance", group=MASKS, default=0.02, unit="um",
          minimum=0.002, maximum=5.0, step=0.01,
          help="Largest distance between an arc and the straight edges that stand for it in GDSII files."),
    Field(name="clearance_um", label="Clearance", group=MASKS, default=2000.0, unit="um",
          minimum=10.0, maximum=100000.0, step=100.0,
          help="Free space between the channels when several are put on one mask."),
)  # fmt: skip

_Choice = TypeVar("_Choice", bound=StrEnum)


@dataclass(frozen=True, slots=True, kw_only=True)
class MaskOptions:
    """Checked choices for one mask set; words are taken for enums.

    Attributes
    ----------
    formats : tuple of MaskFormat
        Formats to write, each once.
    dxf_version : DxfVersion
        Version of the DXF files.
    islands : IslandMode
        How islands are left out in DXF files.
    chord_tolerance_um : float
        Largest distance between an arc and its chords in GDSII files [um].
    one_file_per_set : bool
        True: one mask for each parameter set. False: all on one mask, one above the other.
    clearance_um : float
        Free space between channels on one mask [um].
    has_preview : bool
        Write a small picture (SVG) of each mask as well.
    channel_layer, island_layer : MaskLayer
        Layers for the channel and, with ``islands`` "loops", for the islands.

    Raises
    ------
    DesignValueError
        For an unknown word, a number out of bounds, no format, or two layers that are the same.
    """

    formats: tuple[MaskFormat, ...] = (MaskFormat.DXF, MaskFormat.GDSII)
    dxf_version: DxfVersion = DxfVersion.R2000
    islands: IslandMode = IslandMode.PIECES
    chord_tolerance_um: float = 0.02
    one_file_per_set: bool = True
    clearance_um: float = 2000.0
    has_preview: bool = True
    channel_layer: MaskLayer = CHANNEL_LAYER
    island_layer: MaskLayer = ISLAND_LAYER

    def __post_init__(self) -> None:
        """Check every choice and keep it in its own type."""
        given = (self.formats,) if isinstance(self.formats, str) else self.formats
        formats = tuple(dict.fromkeys(_choice(MaskFormat, "formats", word) for word in given))
        if not formats:
            raise DesignValueError(
                field="formats", value="nothing", limit=_words(MaskFormat), way_out="choose at least one"
            )
        object.__setattr__(self, "formats", formats)
        object.__setattr__(self, "dxf_version", _choice(DxfVersion, "dxf_version", self.dxf_version))
        object.__setattr__(self, "islands", _choice(IslandMode, "islands", self.islands))
        for field in MASK_FIELDS.values():
            object.__setattr__(self, field.name, field.checked(getattr(self, field.name)))
        self._check_layers()

    def _check_layers(self) -> None:
        channel, island = self.channel_layer, self.island_layer
        if channel.dxf_name == island.dxf_name or channel.gdsii_number == island.gdsii_number:
            raise DesignValueError(
                field="island_layer",
                value=island.dxf_name,
                limit="a layer of its own",
                way_out="give the islands another layer name and number than the channel",
            )

    def with_values(self, values: Mapping[str, object]) -> MaskOptions:
        """Return a copy with some choices replaced.

        Raises
        ------
        DesignValueError
            For an unknown name or an unusable value.
        """
        for name, value in values.items():
            if name not in self.__dataclass_fields__:
                limit, way_out = "a known mask option", did_you_mean(name, self.__dataclass_fields__)
                raise DesignValueError(field=name, value=value, limit=limit, way_out=way_out)
        return replace(self, **dict(values))  # type: ignore[arg-type]  # checked in __post_init__


def _choice(kind: type[_Choice], field: str, word: object) -> _Choice:
    for choice in kind:
        if isinstance(word, str) and word.casefold() == choice.casefold():
            return choice
    raise DesignValueError(field=field, value=word, limit=_words(kind), way_out=did_you_mean(str(word), list(kind)))


def _words(kind: type[StrEnum]) -> str:
    return ", ".join(kind)
