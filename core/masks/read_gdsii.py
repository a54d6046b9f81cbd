"""A reader of GDSII files for checking: takes every record apart and shares nothing with the writer.

It reads what is there, well formed or not, as far as records can be told apart; the rules are
applied elsewhere.
"""

from __future__ import annotations

import struct
from dataclasses import dataclass, field
from enum import IntEnum
from typing import TYPE_CHECKING

import numpy as np

from core.errors import ExportError

if TYPE_CHECKING:
    from collections.abc import Iterator
    from pathlib import Path

    from numpy.typing import NDArray

    Whole = NDArray[np.int64]

DEEPEST = 64  # levels of references followed before a loop is assumed


class Tag(IntEnum):
    """Record types that mean something here."""

    HEADER = 0x00
    BGNLIB = 0x01
    LIBNAME = 0x02
    UNITS = 0x03
    ENDLIB = 0x04
    BGNSTR = 0x05
    STRNAME = 0x06
    ENDSTR = 0x07
    BOUNDARY = 0x08
    PATH = 0x09
    SREF = 0x0A
    AREF = 0x0B
    TEXT = 0x0C
    LAYER = 0x0D
    DATATYPE = 0x0E
    XY = 0x10
    ENDEL = 0x11
    SNAME = 0x12
    COLROW = 0x13
    STRANS = 0x1A
    MAG = 0x1B
    ANGLE = 0x1C
    NODE = 0x15
    BOX = 0x2D


OPENING = (Tag.HEADER, Tag.BGNLIB, Tag.LIBNAME, Tag.UNITS)
ELEMENTS = {Tag.BOUNDARY, Tag.PATH, Tag.SREF, Tag.AREF, Tag.TEXT, Tag.NODE, Tag.BOX}


@dataclass(slots=True)
class ReadElement:
    """One element as it stands in the file.

    Attributes
    ----------
    kind : str
        ``BOUNDARY``, ``SREF`` and so on.
    layer, datatype : int
        -1 when absent.
    points_nm : array of int, shape (n, 2)
        All pairs in database units, the repeated one included.
    target : str
        Name of the cell referred to.
    changes : tuple of str
        Records that turn, scale or mirror a reference, if any.
    """

    kind: str
    layer: int = -1
    datatype: int = -1
    points_nm: Whole = field(default_factory=lambda: np.empty((0, 2), np.int64))
    target: str = ""
    changes: tuple[str, ...] = ()


@dataclass(slots=True)
class ReadGdsii:
    """A GDSII file, taken apart.

    Attributes
    ----------
    version : int
        Number in the header.
    user_unit : float
        User units in one database unit.
    database_unit_m : float
        Size of one database unit [m].
    cells : dict of str to list of ReadElement
        In the order of the file.
    repeated_names : tuple of str
        Cell names that occur more than once.
    opening : tuple of int
        Types of the first four records.
    """

    version: int = 0
    user_unit: float = 0.0
    database_unit_m: float = 0.0
    cells: dict[str, list[ReadElement]] = field(default_factory=dict)
    repeated_names: tuple[str, ...] = ()
    opening: tuple[int, ...] = ()

    def targets(self, name: str) -> set[str]:
        """Return the names of the cells that a cell refers to."""
        return {element.target for element in self.cells.get(name, ()) if element.kind in {"SREF", "AREF"}}

    def top_cells(self) -> list[str]:
        """Return the cells that no other cell refers to."""
        used = set().union(*(self.targets(name) for name in self.cells))
        return [name for name in self.cells if name not in used]

    def depth(self, name: str, level: int = 1) -> int:
        """Return the number of levels from a cell downwards, itself included."""
        if level > DEEPEST:
            return level
        return max((self.depth(target, level + 1) for target in self.targets(name)), default=level)


def read_gdsii(path: Path) -> ReadGdsii:
    """Read a GDSII file.

    Parameters
    ----------
    path : Path
        The file.

    Returns
    -------
    ReadGdsii
        Cells, elements and units.

    Raises
    ------
    ExportError
        If the bytes cannot be taken apart into records.
    OSError
        If the file cannot be opened.
    """
    try:
        return _read(path.read_bytes())
    except (ValueError, struct.error) as error:
        raise ExportError(f"{path.name} is not a readable GDSII file: {error}") from error


def _read(data: bytes) -> ReadGdsii:
    result = ReadGdsii()
    name, element = "", None
    for tag, payload in _records(data):
        if len(result.opening) < len(OPENING):
            result.opening += (tag,)
        if tag == Tag.HEADER:
            (result.version,) = struct.unpack(">h", payload[:2])
        elif tag == Tag.UNITS:
            result.user_unit, result.database_unit_m = _real(payload[:8]), _real(payload[8:16])
        elif tag == Tag.STRNAME:
            name = _name(payload)
            if name in result.cells:
                result.repeated_names += (name,)
            result.cells[name] = []
        elif tag in ELEMENTS:
            element = ReadElement(kind=Tag(tag).name)
            result.cells.setdefault(name, []).append(element)
        elif element is not None:
            _fill(element, tag, payload)
    return result


def _fill(element: ReadElement, tag: int, payload: bytes) -> None:
    if tag == Tag.LAYER:
        (element.layer,) = struct.unpack(">h", payload[:2])
    elif tag == Tag.DATATYPE:
        (element.datatype,) = struct.unpack(">h", payload[:2])
    elif tag == Tag.XY:
        element.points_nm = np.frombuffer(payload[: len(payload) // 8 * 8], ">i4").astype(np.int64).reshape(-1, 2)
    elif tag == Tag.SNAME:
        element.target = _name(payload)
    elif tag == Tag.STRANS and any(payload):
        element.changes += ("STRANS",)
    elif tag == Tag.MAG and _real(payload[:8]) != 1.0:
        element.changes += ("MAG",)
    elif tag == Tag.ANGLE and _real(payload[:8]) != 0.0:
        element.changes += ("ANGLE",)


def _records(data: bytes) -> Iterator[tuple[int, bytes]]:
    place = 0
    while place + 4 <= len(data):
        length, tag, _ = struct.unpack_from(">HBB", data, place)
        if length < 4 or length % 2 or place + length > len(data):
            raise ValueError(f"broken record of length {length} at byte {place}")
        yield tag, data[place + 4 : place + length]
        place += length
        if tag == Tag.ENDLIB:
            if any(data[place:]):
                raise ValueError("there is data after the end record")
            return
    raise ValueError("the file ends before its end record")


def _name(payload: bytes) -> str:
    return payload.rstrip(b"\0").decode("latin-1")


def _real(data: bytes) -> float:
    """Return an 8-byte real: sign, exponent of 16 in excess 64, 56-bit mantissa."""
    (bits,) = struct.unpack(">Q", data)
    sign = -1.0 if bits >> 63 else 1.0
    exponent = ((bits >> 56) & 0x7F) - 64
    return sign * (bits & (2**56 - 1)) / 2.0**56 * 16.0**exponent
