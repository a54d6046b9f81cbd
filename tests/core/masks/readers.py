"""What five independent readers see in mask files: rings of every layer, all references in place [um]."""

from __future__ import annotations

from collections import defaultdict
from math import atan
from typing import TYPE_CHECKING

import dxfgrabber
import gdstk
import klamath.elements
import klamath.library
import numpy as np
import pyogrio.raw
import shapely
from gdsii.elements import Boundary
from gdsii.library import Library

from tests.core.masks import tags
from tests.core.masks.samples import area_with_bulges

if TYPE_CHECKING:
    from collections.abc import Iterable
    from pathlib import Path

Layers = dict[str, list[np.ndarray]]
NUMBERS = {1: "L1_CHAN", 3: "PORTS", 4: "MARKS", 5: "TEXT", 6: "CUT"}  # as ordered; said here a second time
TURN_RAD = 8e-3  # of one chord: it strays by 8e-6 of the radius


def gdsii_layers_by_klamath(path: Path, top: str) -> Layers:
    """Read with klamath."""
    cells = {}
    with path.open("rb") as stream:
        klamath.library.FileHeader.read(stream)
        while (found := klamath.library.try_read_struct(stream)) is not None:
            cells[found[0].decode()] = found[1]
    layers: Layers = defaultdict(list)

    def take(name: str, shift: np.ndarray) -> None:
        for element in cells[name]:
            xy = np.asarray(element.xy, float)
            if isinstance(element, klamath.elements.Boundary):
                layers[NUMBERS[element.layer[0]]].append((xy[:-1] + shift) / 1000.0)
            else:
                take(element.struct_name.decode(), shift + xy[0])

    take(top, np.zeros(2))
    return layers


def gdsii_layers_by_python_gdsii(path: Path, top: str) -> Layers:
    """Read with python-gdsii."""
    with path.open("rb") as stream:
        cells = {cell.name.decode(): list(cell) for cell in Library.load(stream)}
    layers: Layers = defaultdict(list)

    def take(name: str, shift: np.ndarray) -> None:
        for element in cells[name]:
            xy = np.asarray(element.xy, float)
            if isinstance(element, Boundary):
                layers[NUMBERS[element.layer]].append((xy[:-1] + shift) / 1000.0)
            else:
                take(element.struct_name.decode(), shift + xy[0])

    take(top, np.zeros(2))
    return layers


def gdsii_layers_by_gdstk(path: Path, top: str) -> Layers:
    """Read with gdstk, which flattens by itself."""
    library = gdstk.read_gds(path)
    (cell,) = library.top_level()
    assert cell.name == top
    layers: Layers = defaultdict(list)
    for polygon in cell.get_polygons():  # its micrometres are a last digit off whole nanometres
        layers[NUMBERS[polygon.layer]].append(np.round(polygon.points, 3))
    return layers


def dxf_layers_by_gdal(path: Path) -> Layers:
    """Read with GDAL, which puts inserts in place by itself."""
    pyogrio.set_gdal_config_options({"OGR_ARC_STEPSIZE": "0.5"})
    options = {"CLOSED_LINE_AS_POLYGON": "YES", "MERGE_BLOCK_GEOMETRIES": "NO"}
    meta, _, shapes, fields = pyogrio.raw.read(str(path), **options)
    names = fields[list(meta["fields"]).index("Layer")]
    layers: Layers = defaultdict(list)
    for name, shape in zip(names, shapely.from_wkb(shapes), strict=True):
        assert shape.geom_type == "Polygon"
        layers[name].append(np.asarray(shape.exterior.coords)[:-1, :2] * 1000.0)
    return layers


def dxf_layers_by_dxfgrabber(path: Path) -> Layers:
    """Read with dxfgrabber; inserts are put in place here."""
    drawing = dxfgrabber.readfile(str(path))
    blocks = {block.name: list(block) for block in drawing.blocks}
    layers: Layers = defaultdict(list)

    def take(entities: Iterable, shift: np.ndarray) -> None:
        for entity in entities:
            if entity.dxftype == "INSERT":
                assert tuple(entity.scale) == (1.0, 1.0, 1.0)
                assert entity.rotation == 0.0
                take(blocks[entity.name], shift + np.array(entity.insert[:2]) * 1000.0)
            else:
                assert entity.is_closed
                corners = [(p[0] * 1e3, p[1] * 1e3, b) for p, b in zip(entity.points, entity.bulge, strict=True)]
                layers[entity.layer].append(chorded(corners) + shift)

    take(drawing.entities, np.zeros(2))
    return layers


def dxf_layers_by_tags(path: Path) -> Layers:
    """Read the tags."""
    drawing = tags.tagged(path)
    layers: Layers = defaultdict(list)

    def take(entities: list[tags.Tags], shift: np.ndarray) -> None:
        for place, entity in enumerate(entities):
            if entity[0][1] == "INSERT":
                at = np.array([float(tags.first(entity, code)) * 1000.0 for code in (10, 20)])
                take(drawing.blocks[tags.first(entity, 2)], shift + at)
            elif entity[0][1].endswith("POLYLINE"):
                corners = [(x * 1e3, y * 1e3, b) for x, y, b in tags.corners_of(entities, place)]
                layers[tags.first(entity, 8)].append(chorded(corners) + shift)

    take(drawing.entities, np.zeros(2))
    return layers


def exact_dxf_area_um2(path: Path) -> float:
    """Return the area of the channels in a file without blocks: dxfgrabber's corners, the formula of the segment."""
    area = 0.0
    for entity in dxfgrabber.readfile(str(path)).entities:
        corners = [(p[0] * 1e3, p[1] * 1e3) for p in entity.points]
        area += (1.0 if entity.layer == "L1_CHAN" else -1.0) * abs(area_with_bulges(corners, list(entity.bulge)))
    return area


def chorded(corners: list[tuple[float, float, float]]) -> np.ndarray:
    """Return a ring with arcs as chords, by turning one small chord step by step."""
    parts = []
    for (x0, y0, bulge), (x1, y1, _) in zip(corners, corners[1:] + corners[:1], strict=True):
        start, end = complex(x0, y0), complex(x1, y1)
        theta = 4.0 * atan(bulge)
        count = max(1, int(abs(theta) / TURN_RAD))
        turn = np.exp(1j * theta / count * np.arange(count))
        steps = (end - start) * turn / turn.sum()
        points = start + np.concatenate(([0.0], np.cumsum(steps)[:-1]))
        parts.append(np.column_stack((points.real, points.imag)))
    return np.concatenate(parts)


GDSII_READERS = (gdsii_layers_by_klamath, gdsii_layers_by_python_gdsii, gdsii_layers_by_gdstk)
DXF_READERS = (dxf_layers_by_gdal, dxf_layers_by_dxfgrabber, dxf_layers_by_tags)
