"""GDSII stream files, written byte by byte: polygons and plain references, nothing else.

All numbers are big-endian. The time stamps are fixed, so that one drawing always gives the same
bytes. Numbers that do not fit are an error here and never wrap round.
"""

from __future__ import annotations

import struct
from typing import TYPE_CHECKING

import numpy as np

from core.errors import ExportError

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

    from core.masks.gdsii_cells import GdsiiCell
    from core.masks.grid import Whole

# record type and data type of the records used
_HEADER, _BGNLIB, _LIBNAME, _UNITS, _ENDLIB = b"\x00\x02", b"\x01\x02", b"\x02\x06", b"\x03\x05", b"\x04\x00"
_BGNSTR, _STRNAME, _ENDSTR = b"\x05\x02", b"\x06\x06", b"\x07\x00"
_BOUNDARY, _SREF, _ENDEL = b"\x08\x00", b"\x0a\x00", b"\x11\x00"
_LAYER, _DATATYPE, _XY, _SNAME = b"\x0d\x02", b"\x0e\x02", b"\x10\x03", b"\x12\x06"

_VERSION = struct.pack(">h", 600)
_STAMP = struct.pack(">12h", *(2000, 1, 1, 0, 0, 0) * 2)
# 1e-3 user units (um) and 1e-9 m for one database unit, as 8-byte base-16 reals
_NANOMETRES = bytes.fromhex("3E4189374BC6A7F0" + "3944B82FA09B5A54")


def gdsii_bytes(cells: Sequence[GdsiiCell], *, library: str) -> bytes:
    """Return a whole GDSII file.

    Parameters
    ----------
    cells : sequence of GdsiiCell
        Cells in the order of the file; the data type of every polygon is 0.
    library : str
        Name of the library, ASCII.

    Raises
    ------
    ExportError
        If a coordinate does not fit into 32 bits.
    """
    return b"".join(_records(cells, library))


def _records(cells: Sequence[GdsiiCell], library: str) -> Iterator[bytes]:
    yield _record(_HEADER, _VERSION)
    yield _record(_BGNLIB, _STAMP)
    yield _record(_LIBNAME, _text(library))
    yield _record(_UNITS, _NANOMETRES)
    boundary, datatype = _record(_BOUNDARY), _record(_DATATYPE, b"\x00\x00")
    for cell in cells:
        yield _record(_BGNSTR, _STAMP) + _record(_STRNAME, _text(cell.name))
        for layer, ring in cell.rings_nm:
            yield boundary + _record(_LAYER, struct.pack(">h", layer)) + datatype
            yield _record(_XY, _pairs(np.concatenate((ring, ring[:1])), cell.name)) + _record(_ENDEL)
        for name, x, y in cell.references:
            place = _pairs(np.array([[x, y]]), cell.name)
            yield _record(_SREF) + _record(_SNAME, _text(name)) + _record(_XY, place) + _record(_ENDEL)
        yield _record(_ENDSTR)
    yield _record(_ENDLIB)


def _record(kind: bytes, payload: bytes = b"") -> bytes:
    return struct.pack(">H", 4 + len(payload)) + kind + payload


def _text(text: str) -> bytes:
    data = text.encode("ascii")
    return data + b"\0" * (len(data) % 2)


def _pairs(points: Whole, name: str) -> bytes:
    if np.abs(points).max() > 2**31 - 1:
        raise ExportError(f"cell {name} reaches beyond 2.1 m, which GDSII cannot hold; make the drawing smaller")
    return points.astype(">i4").tobytes()
