"""A reader of DXF files for checking: a plain reader of tags that shares nothing with the writer.

It understands LWPOLYLINE and POLYLINE with VERTEX, in the model space; of everything else it
keeps the name, so that rules can refuse it.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from math import atan, hypot, sin
from typing import TYPE_CHECKING

import numpy as np

from core.errors import ExportError

if TYPE_CHECKING:
    from collections.abc import Iterator
    from pathlib import Path

    from numpy.typing import NDArray

    Floats = NDArray[np.float64]

Pair = tuple[int, str]


@dataclass(slots=True)
class ReadLoop:
    """One polyline as it stands in the file.

    Attributes
    ----------
    layer : str
        Name of its layer.
    corners : list of [x, y, bulge]
        As written [drawing units].
    is_closed : bool
        Whether the closed flag is set.
    widest : float
        Largest width found on it; 0 for a line without width.
    declared_count : int
        Number of vertices it claims to have; -1 when it claims none.
    in_paper_space : bool
        Whether it is marked as paper space.
    """

    layer: str = "0"
    corners: list[list[float]] = field(default_factory=list)
    is_closed: bool = False
    widest: float = 0.0
    declared_count: int = -1
    in_paper_space: bool = False

    @property
    def area(self) -> float:
        """Exact signed area: shoelace plus circular segments [square drawing units]."""
        total = 0.0
        for (x0, y0, bulge), (x1, y1, _) in _edges(self.corners):
            total += 0.5 * ((x0 - self.corners[0][0]) * (y1 - y0) - (y0 - self.corners[0][1]) * (x1 - x0))
            if bulge:
                sweep = 4.0 * atan(abs(bulge))
                radius = hypot(x1 - x0, y1 - y0) / (2.0 * sin(sweep / 2.0))
                total += (1.0 if bulge > 0.0 else -1.0) * 0.5 * radius**2 * (sweep - sin(sweep))
        return total

    @property
    def bounds(self) -> tuple[float, float, float, float]:
        """(x_min, y_min, x_max, y_max), bellies of arcs included [drawing units]."""
        points = [complex(x, y) for x, y, _ in self.corners]
        for (x0, y0, bulge), (x1, y1, _) in _edges(self.corners):
            if bulge:
                points += _extremes(complex(x0, y0), complex(x1, y1), bulge)
        x, y = [point.real for point in points], [point.imag for point in points]
        return min(x), min(y), max(x), max(y)

    def chords(self, sagitta: float) -> Floats:
        """Return the loop with arcs as chords no further from them than ``sagitta``, shape (m, 2)."""
        points: list[complex] = []
        for (x0, y0, bulge), (x1, y1, _) in _edges(self.corners):
            start, end = complex(x0, y0), complex(x1, y1)
            points.append(start)
            if bulge and start != end:
                points += _on_arc(start, end, bulge, sagitta)
        return np.array([[point.real, point.imag] for point in points]).reshape(-1, 2)


@dataclass(slots=True)
class ReadDxf:
    """A DXF file, taken apart.

    Attributes
    ----------
    header : dict of str to list of str
        Values of the header variables.
    layers : tuple of str
        Names in the layer table.
    loops : list of ReadLoop
        Polylines of the entities section.
    others : tuple of str
        Types of all other entities, and of anything inside a block.
    is_ascii : bool
        Whether every byte is plain ASCII.
    has_end : bool
        Whether the end mark is there.
    """

    header: dict[str, list[str]] = field(default_factory=dict)
    layers: tuple[str, ...] = ()
    loops: list[ReadLoop] = field(default_factory=list)
    others: tuple[str, ...] = ()
    is_ascii: bool = True
    has_end: bool = False


def read_dxf(path: Path) -> ReadDxf:
    """Read a DXF file.

    Parameters
    ----------
    path : Path
        The file.

    Returns
    -------
    ReadDxf
        Header, layers, polylines.

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
    section = ""
    for record in _records(_pairs(data)):
        kind = record[0][1]
        if kind == "SECTION":
            section = _value(record, 2, "")
            if section == "HEADER":
                result.header = _variables(record)
        elif kind == "EOF":
            result.has_end = True
        elif section == "TABLES" and kind == "LAYER":
            result.layers += (_value(record, 2, ""),)
        elif section == "BLOCKS" and kind not in {"BLOCK", "ENDBLK", "ENDSEC"}:
            result.others += (f"{kind} in a block",)
        elif section == "ENTITIES":
            _take_entity(result, record)
    return result


def _take_entity(result: ReadDxf, record: list[Pair]) -> None:
    kind = record[0][1]
    if kind in {"LWPOLYLINE", "POLYLINE"}:
        result.loops.append(_loop(record))
        if kind == "LWPOLYLINE":
            result.loops[-1].corners = _light_corners(record)
    elif kind == "VERTEX" and result.loops:
        x, y, bulge = (float(_value(record, code, "0")) for code in (10, 20, 42))
        result.loops[-1].corners.append([x, y, bulge])
        result.loops[-1].widest = max(result.loops[-1].widest, _widest(record))
    elif kind not in {"SEQEND", "ENDSEC"}:
        result.others += (kind,)


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


def _edges(corners: list[list[float]]) -> Iterator[tuple[list[float], list[float]]]:
    return zip(corners, corners[1:] + corners[:1], strict=True)


def _centre(start: complex, end: complex, bulge: float) -> complex:
    return (start + end) / 2.0 + 1j * (end - start) * (1.0 - bulge**2) / (4.0 * bulge)


def _extremes(start: complex, end: complex, bulge: float) -> list[complex]:
    """Return the outermost points of the circle that lie on the arc: to the right of its chord if it turns left."""
    centre = _centre(start, end, bulge)
    radius = abs(start - centre)
    outermost = [centre + radius * direction for direction in (1, 1j, -1, -1j)]
    return [point for point in outermost if ((end - start).conjugate() * (point - start)).imag * bulge < 0.0]


def _on_arc(start: complex, end: complex, bulge: float, sagitta: float) -> list[complex]:
    """Return the points between two ends of an arc."""
    sweep = 4.0 * atan(bulge)
    centre = _centre(start, end, bulge)
    step = 2.0 * np.arccos(max(0.0, 1.0 - sagitta / abs(start - centre)))
    count = max(1, int(np.ceil(abs(sweep) / step)))
    return [centre + (start - centre) * np.exp(1j * sweep * k / count) for k in range(1, count)]
