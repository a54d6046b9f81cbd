"""What the user may choose about mask files."""

from __future__ import annotations

from dataclasses import dataclass, replace
from enum import StrEnum
from typing import TYPE_CHECKING, TypeVar

from core.errors import DesignValueError, did_you_mean
from core.fabrication.choices import CopyMode, DxfVersion, IslandMode, ReadingSide, Tone
from core.fabrication.process import PROCESS_FIELDS
from core.fields import Field, table_of

if TYPE_CHECKING:
    from collections.abc import Mapping

    from core.fabrication.process import Process

MASKS = "Mask files"


class MaskFormat(StrEnum):
    """File format of a mask."""

    DXF = "DXF"
    GDSII = "GDSII"


MASK_FIELDS: dict[str, Field] = table_of(
    replace(PROCESS_FIELDS["chord_tolerance_um"], group=MASKS),
    replace(PROCESS_FIELDS["grid_nm"], group=MASKS),
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
    copies : CopyMode
        How repeated shapes stand in DXF files; nested loops are always written flat, for cutters.
    tone : Tone
        What the drawn shapes become.
    reading : str
        From which side the drawing reads correctly; a word of the process.
    chord_tolerance_um : float
        Largest distance between an arc and its chords in GDSII files [um].
    grid_nm : int
        Every corner and shift in GDSII files, and every shift in DXF files, is a multiple of it [nm].
    one_file_per_set : bool
        True: one mask for each parameter set. False: all on one mask, one above the other.
    clearance_um : float
        Free space between channels on one mask [um].
    has_preview : bool
        Write a small picture (SVG) of each mask as well.

    Raises
    ------
    DesignValueError
        For an unknown word, a number out of bounds, or no format.
    """

    formats: tuple[MaskFormat, ...] = (MaskFormat.DXF, MaskFormat.GDSII)
    dxf_version: DxfVersion = DxfVersion.R2000
    islands: IslandMode = IslandMode.PIECES
    copies: CopyMode = CopyMode.INSERTS
    tone: Tone = Tone.CLEAR
    reading: str = str(ReadingSide.LAYER_DOWN)
    chord_tolerance_um: float = 0.02
    grid_nm: int = 1
    one_file_per_set: bool = True
    clearance_um: float = 2000.0
    has_preview: bool = True

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
        object.__setattr__(self, "copies", _choice(CopyMode, "copies", self.copies))
        object.__setattr__(self, "tone", _choice(Tone, "tone", self.tone))
        PROCESS_FIELDS["reading"].checked(self.reading)
        for field in MASK_FIELDS.values():
            object.__setattr__(self, field.name, field.checked(getattr(self, field.name)))

    @property
    def is_flat(self) -> bool:
        """Whether DXF files hold no blocks."""
        return self.copies is CopyMode.FLAT or self.islands is IslandMode.NESTED

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


def options_of(process: Process) -> MaskOptions:
    """Return the choices that a process makes for its files.

    Parameters
    ----------
    process : Process
        The process of the project.
    """
    return MaskOptions(
        formats=tuple(kind for kind in MaskFormat if kind in process.formats),
        dxf_version=DxfVersion(process.dxf_version),
        islands=IslandMode(process.islands),
        copies=CopyMode(process.dxf_copies),
        tone=Tone(process.tone),
        reading=process.reading,
        chord_tolerance_um=process.chord_tolerance_um,
        grid_nm=process.grid_nm,
    )


def _choice(kind: type[_Choice], field: str, word: object) -> _Choice:
    for choice in kind:
        if isinstance(word, str) and word.casefold() == choice.casefold():
            return choice
    raise DesignValueError(field=field, value=word, limit=_words(kind), way_out=did_you_mean(str(word), list(kind)))


def _words(kind: type[StrEnum]) -> str:
    return ", ".join(kind)
