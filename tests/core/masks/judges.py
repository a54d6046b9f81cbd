"""Independent judges of mask files: the rules again, as klamath and a plain reader of tags see them."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

import klamath.elements
import klamath.library
import numpy as np
import shapely

from tests.core.masks import tags
from tests.core.masks.readers import dxf_layers_by_tags, gdsii_layers_by_klamath

if TYPE_CHECKING:
    from collections.abc import Sequence
    from pathlib import Path


def gdsii_objections(path: Path, *, top: str, layers: Sequence[int], grid_nm: int = 1) -> list[str]:
    """Return which rules for GDSII masks a file breaks, as klamath sees it; what it cannot read is one."""
    try:
        return _gdsii_objections(path, top, layers, grid_nm)
    except Exception as error:  # whatever a foreign reader raises on a broken file
        return [f"unreadable: {error!r}"]


def _gdsii_objections(path: Path, top: str, layers: Sequence[int], grid_nm: int) -> list[str]:
    found, cells, names = [], {}, []
    data = path.read_bytes()
    if data[:6] != b"\x00\x06\x00\x02\x02\x58" or data.rstrip(b"\0")[-1:] != b"\x04":
        found.append("opening or end")
    with path.open("rb") as stream:
        header = klamath.library.FileHeader.read(stream)
        if (
            abs(header.meters_per_db_unit / 1e-9 - 1.0) > 1e-12
            or abs(header.user_units_per_db_unit * 1e3 - 1.0) > 1e-12
        ):
            found.append("unit")
        while (struct := klamath.library.try_read_struct(stream)) is not None:
            names.append(struct[0].decode("latin-1"))
            cells[names[-1]] = struct[1]
    found += ["name" for name in names if not re.fullmatch("[A-Z0-9_]{1,27}", name) or names.count(name) > 1]
    used = {
        element.struct_name.decode("latin-1")
        for elements in cells.values()
        for element in elements
        if isinstance(element, klamath.elements.Reference)
    }
    if set(cells) - used != {top} or used - set(cells):
        found.append("top or dangling")
    for element in (element for elements in cells.values() for element in elements):
        found += _element_objections(element, layers, grid_nm)
    if found:
        return found
    if _levels(cells, top) > 16:
        return ["depth"]
    return _figure_objections(gdsii_layers_by_klamath(path, top), is_nested=False)


def _levels(cells: dict[str, list], name: str) -> int:
    inner = {e.struct_name.decode() for e in cells[name] if isinstance(e, klamath.elements.Reference)}
    return 1 + max((_levels(cells, other) for other in inner), default=0)


def _element_objections(element: object, layers: Sequence[int], grid_nm: int) -> list[str]:
    if isinstance(element, klamath.elements.Reference):
        is_plain = not element.invert_y and (element.mag, element.angle_deg, element.colrow) == (1.0, 0.0, None)
        on_grid = not (np.asarray(element.xy, np.int64) % grid_nm).any()
        return [] if is_plain and len(element.xy) == 1 and on_grid else ["reference"]
    if not isinstance(element, klamath.elements.Boundary):
        return [type(element).__name__]
    xy = np.asarray(element.xy, np.int64)
    found = [] if tuple(element.layer) in {(layer, 0) for layer in layers} else ["layer"]
    if (xy[0] != xy[-1]).any() or not 4 <= len(xy) <= 200:
        found.append("closed or long")
    if (xy % grid_nm).any() or np.abs(xy).max() > 2_000_000_000:
        found.append("grid or reach")
    return found


def dxf_objections(
    path: Path,
    *,
    version: str,
    layers: tuple[str, ...],
    is_flat: bool = False,
    is_nested: bool = False,
    order: Sequence[str] = (),
) -> list[str]:
    """Return which rules for DXF masks a file breaks, as a plain reader of tags sees it."""
    try:
        found = tags.objections(path, version=version, layers=layers, is_flat=is_flat)
    except Exception as error:  # as above
        return [f"unreadable: {error!r}"]
    if found:
        return found
    drawing = tags.tagged(path)
    drawn = [tags.first(entity, 8) for entity in drawing.entities if entity[0][1].endswith("POLYLINE")]
    if is_nested and [order.index(layer) for layer in drawn] != sorted(order.index(layer) for layer in drawn):
        return ["order of layers"]
    found = dxf_layers_by_tags(path)
    if set(found) != set(layers):
        return ["layers drawn on"]
    return _figure_objections(found, is_nested=is_nested) or _extent_objections(path, drawing)


def _extent_objections(path: Path, drawing: tags.Drawing) -> list[str]:
    points = np.concatenate([ring for rings in dxf_layers_by_tags(path).values() for ring in rings]) / 1000.0
    low, high = ([float(tags.first(drawing.header[f"$EXT{end}"], code)) for code in (10, 20)] for end in ("MIN", "MAX"))
    # chords of a thousandth of a radian stay within a ten-millionth of the radius
    is_near = np.allclose([points.min(axis=0), points.max(axis=0)], [low, high], rtol=0.0, atol=1e-5 * np.ptp(points))
    return [] if is_near else ["extents"]


def _figure_objections(layers: dict[str, list[np.ndarray]], *, is_nested: bool) -> list[str]:
    return [f"{layer}: {what}" for layer, rings in layers.items() for what in _ring_objections(rings, is_nested)]


def _ring_objections(rings: list[np.ndarray], is_nested: bool) -> list[str]:
    for ring in rings:
        ahead = np.roll(ring, -1, axis=0) - ring
        if len(ring) < 3 or (np.hypot(*ahead.T) < 1e-6).any():
            return ["doubled vertex"]
        if not shapely.LinearRing(ring).is_simple or not shapely.Polygon(ring).is_valid:
            return ["crossing, touching or spur"]
    areas = np.array([shapely.Polygon(ring) for ring in rings])
    if not is_nested:
        covered = shapely.union_all(areas).area
        return [] if abs(sum(shapely.area(areas)) - covered) <= 1e-9 * covered else ["overlap"]
    lines = shapely.boundary(areas)
    first, second = shapely.STRtree(lines).query(lines, predicate="intersects")
    if (first != second).any():
        return ["loops touch"]
    outer, inner = shapely.STRtree(areas).query(areas, predicate="contains_properly")
    is_deep = np.isin(outer, inner).any()
    return ["outer loop first, or too deep"] if is_deep or (outer < inner).any() else []
