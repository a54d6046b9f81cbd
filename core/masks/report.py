"""What is told about a mask set: before it is written, and after it has been proven."""

from __future__ import annotations

from dataclasses import asdict, dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from pathlib import Path


@dataclass(frozen=True, slots=True, kw_only=True)
class PlannedFile:
    """One file that will be written.

    Attributes
    ----------
    name : str
        File name.
    format : str
        ``DXF R2000``, ``DXF R12``, ``GDSII``, ``SVG``, ``text``, ``PDF``, ``checksums`` or ``ZIP``.
    layers : tuple of str
        Layers drawn on.
    width_um, height_um : float
        Size of the drawing [um].
    channel_count, island_count : int
        What is on it.
    figure_count, vertex_count : int
        Closed figures and their corners as stored; copies by reference are not counted again.
    """

    name: str
    format: str
    layers: tuple[str, ...] = ()
    width_um: float = 0.0
    height_um: float = 0.0
    channel_count: int = 0
    island_count: int = 0
    figure_count: int = 0
    vertex_count: int = 0


@dataclass(frozen=True, slots=True, kw_only=True)
class MaskSummary:
    """What will be written.

    Attributes
    ----------
    files : tuple of PlannedFile
        In the order of writing.
    islands : str
        How islands are left out in DXF files, in words.
    chord_tolerance_um : float
        Largest distance between arcs and their chords in GDSII files [um].
    sentences : tuple of str
        The same in words.
    """

    files: tuple[PlannedFile, ...]
    islands: str
    chord_tolerance_um: float
    sentences: tuple[str, ...]

    def as_dict(self) -> dict[str, object]:
        """Return everything as plain values for machine-readable output."""
        return asdict(self)


@dataclass(frozen=True, slots=True, kw_only=True)
class MaskFile:
    """One file that was written and, if it holds a mask, read back.

    Attributes
    ----------
    name : str
        File name.
    format : str
        ``DXF R2000``, ``DXF R12``, ``GDSII``, ``SVG``, ``text``, ``PDF``, ``checksums`` or ``ZIP``.
    size_bytes : int
        Size.
    sha256 : str
        Checksum, hexadecimal.
    area_um2 : float or None
        Area read back [um^2]; None for files without a mask.
    bounds_um : tuple of float or None
        (x_min, y_min, x_max, y_max) read back [um].
    island_count : int or None
        Islands read back.
    proofs : tuple of str
        What reading back has shown, in words.
    """

    name: str
    format: str
    size_bytes: int
    sha256: str
    area_um2: float | None = None
    bounds_um: tuple[float, float, float, float] | None = None
    island_count: int | None = None
    proofs: tuple[str, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class MaskSetReport:
    """A mask set that stands in its folder.

    Attributes
    ----------
    folder : Path
        Where it is.
    files : tuple of MaskFile
        All files, the archive last.
    """

    folder: Path
    files: tuple[MaskFile, ...]

    def as_dict(self) -> dict[str, object]:
        """Return everything as plain values for machine-readable output."""
        return {"folder": str(self.folder), "files": [asdict(file) for file in self.files]}
