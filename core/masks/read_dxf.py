"""A reader of DXF files for checking: a plain reader of tags that shares nothing with the writer.

It understands LWPOLYLINE, POLYLINE with VERTEX, and INSERT, in the model space and in blocks; of
everything else it keeps the name, so that rules can refuse it.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from core.errors import ExportError
from core.masks.read_loop import ReadLoop

if TYPE_CHECKING:
    from collections.abc import Iterator
    from pathlib import Path

Pair = tuple[int, str]
# of an INSERT: what must be as it is when the tag is absent
_SCALES_AND_COUNTS = {41: 1.0, 42: 1.0, 43: 1.0, 70: 1.0, 71: 1.0}
_TURNS_AND_HEIGHTS = {50: 0.0, 30: 0.0, 210: 0.0, 220: 0.0}
_MODEL, _PAPER = "MODEL_SPACE", "PAPER_SPACE"


@dataclass(slots=True)
class ReadInsert:
    """A block placed.

    Attributes
    ----------
    name : str
        Block referred to.
    layer : str
        Layer of the insert itself.
    x, y : float
        Place [drawing units].
    is_plain : bool
        Whether it only shifts: no scale, turn, mirror, array or height.
    in_paper_space : bool
        Whether it is marked as paper space.
    """

    name: str
    layer: str
    x: float
    y: float
    is_plain: bool = True
    in_paper_space: bool = False


@dataclass(slots=True)
class ReadSpace:
    """The model space or a block.

    Attributes
    ----------
    loops : list of ReadLoop
        Polylines in the order of the file.
    inserts : list of ReadInsert
        Blocks placed in it.
    base : tuple of float
        Base point of a block [drawing units].
    """

    loops: list[ReadLoop] = field(default_factory=list)
    inserts: list[ReadInsert] = field(default_factory=list)
    base: tuple[float, float] = (0.0, 0.0)


@dataclass(slots=True)
class ReadDxf:
    """A DXF file, taken apart.

    Attributes
    ----------
    header : dict of str to list of str
        Values of the header variables.
    layers : tuple of str
        Names in the layer table.
    model : ReadSpace
        What stands in the entities section.
    blocks : dict of str to ReadSpace
        Blocks but for those that the format itself demands.
    repeated_names : tuple of str
        Names of blocks that occur more than once.
    others : tuple of str
        Types of all other entities.
    is_ascii : bool
        Whether every byte is plain ASCII.
    has_end : bool
        Whether the end mark is there.
    """

    header: dict[str, list[str]] = field(default_factory=dict)
    layers: tuple[str, ...] = ()
    model: ReadSpace = field(default_factory=ReadSpace)
    blocks: dict[str, ReadSpace] = field(default_factory=dict)
    repeated_names: tuple[str, ...] = ()
    others: tuple[str, ...] = ()
    is_ascii: bool = True
    has_end: bool = False

    @property
    def spaces(self) -> tuple[ReadSpace, ...]:
        """Return the model space and every block."""
        return (self.model, *self.blocks.values())

    @property
    def loops(self) -> list[ReadLoop]:
        """Return all polylines as they stand in the file, those of blocks once."""
        return [loop for space in self.spaces for loop in space.loops]


def read_dxf(path: Path) -> ReadDxf:
    """Read a DXF file.

    Parameters
    ----------
    path : Path
        The file.

    Returns
    -------
    ReadDxf
        Header, layers, polylines, blocks and inserts.

    Raises
    ------
    ExportError
        If it is not made of tags.
    OSError
        If the file cannot be opened.
    """
    try:
        return _read(path.read_bytes())
    except ValueError as error:
        raise ExportError(f"{path.name} is not a readable DXF file: {error}") from error


def _read(data: bytes) -> ReadDxf:
    result = ReadDxf(is_ascii=data.isascii())
    section, space = "", result.model
    for record in _records(_pairs(data)):
        kind = record[0][1]
        if kind == "SECTION":
            section, space = _value(record, 2, ""), result.model
            if section == "HEADER":
                result.header = _variables(record)
        elif kind == "EOF":
            result.has_end = True
        elif section == "TABLES" and kind == "LAYER":
            result.layers += (_value(record, 2, ""),)
        elif section == "BLOCKS" and kind == "BLOCK":
            space = _opened_block(result, record)
        elif section in {"ENTITIES", "BLOCKS"}:
            _take_entity(result, space, record, where=" in a block" * (section == "BLOCKS"))
    return result


def _opened_block(result: ReadDxf, record: list[Pair]) -> ReadSpace:
    """Return the space of a block; what stands in a layout's own block counts as drawn there."""
    name = _value(record, 2, "").strip()
    if name.upper().lstrip("*$") in {_MODEL, _PAPER}:
        return result.model
    if name in result.blocks:
        result.repeated_names += (name,)
    space = ReadSpace(base=(float(_value(record, 10, "0")), float(_value(record, 20, "0"))))
    result.blocks[name] = space
    return space


def _take_entity(result: ReadDxf, space: ReadSpace, record: list[Pair], *, where: str) -> None:
    kind = record[0][1]
    if kind in {"LWPOLYLINE", "POLYLINE"}:
        space.loops.append(_loop(record))
        if kind == "LWPOLYLINE":
            space.loops[-1].corners = _light_corners(record)
    elif kind == "VERTEX" and space.loops:
        x, y, bulge = (float(_value(record, code, "0")) for code in (10, 20, 42))
        space.loops[-1].corners.append([x, y, bulge])
        space.loops[-1].widest = max(space.loops[-1].widest, _widest(record))
    elif kind == "INSERT":
        space.inserts.append(_insert(record))
    elif kind not in {"SEQEND", "ENDSEC", "ENDBLK"}:
        result.others += (f"{kind}{where}",)


def _insert(record: list[Pair]) -> ReadInsert:
    plain = {**_SCALES_AND_COUNTS, **_TURNS_AND_HEIGHTS}
    return ReadInsert(
        name=_value(record, 2, "").strip(),
        layer=_value(record, 8, "0"),
        x=float(_value(record, 10, "0")),
        y=float(_value(record, 20, "0")),
        is_plain=all(float(value) == plain[code] for code, value in record if code in plain),
        in_paper_space=_value(record, 67, "0").strip() == "1",
    )


def _loop(record: list[Pair]) -> ReadLoop:
    return ReadLoop(
        layer=_value(record, 8, "0"),
        is_closed=bool(int(_value(record, 70, "0")) & 1),
        widest=_widest(record),
        declared_count=int(_value(record, 90, "-1")),
        in_paper_space=_value(record, 67, "0").strip() == "1",
    )


def _light_corners(record: list[Pair]) -> list[list[float]]:
    corners: list[list[float]] = []
    for code, value in record:
        if code == 10:
            corners.append([float(value), 0.0, 0.0])
        elif code in {20, 42} and corners:
            corners[-1][1 if code == 20 else 2] = float(value)
    return corners


def _widest(record: list[Pair]) -> float:
    return max((abs(float(value)) for code, value in record if code in {40, 41, 43}), default=0.0)


def _variables(record: list[Pair]) -> dict[str, list[str]]:
    found: dict[str, list[str]] = {}
    values: list[str] = []
    for code, value in record:
        if code == 9:
            values = found.setdefault(value, [])
        else:
            values.append(value)
    return found


def _value(record: list[Pair], code: int, default: str) -> str:
    return next((value for found, value in record if found == code), default)


def _records(pairs: Iterator[Pair]) -> Iterator[list[Pair]]:
    """Group tags: each record starts at a tag with code 0."""
    record: list[Pair] = []
    for pair in pairs:
        if pair[0] == 0 and record:
            yield record
            record = []
        record.append(pair)
    if record:
        yield record


def _pairs(data: bytes) -> Iterator[Pair]:
    lines = data.decode("latin-1").splitlines()
    for place in range(0, len(lines) - 1, 2):
        yield int(lines[place]), lines[place + 1].strip()
