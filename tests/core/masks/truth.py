"""What a scene means, straight from its outlines with shapely; and a file against it, reader by reader."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import shapely

from core.chip.scene import Layer
from tests.core.masks.judges import dxf_objections, gdsii_objections
from tests.core.masks.readers import DXF_READERS, GDSII_READERS

if TYPE_CHECKING:
    from core.chip.scene import Block, Scene
    from core.masks.options import MaskOptions
    from core.masks.report import MaskSetReport
    from tests.core.masks.readers import Layers

# as ordered; said here a second time
NAMES = {"channels": "L1_CHAN", "ports": "PORTS", "marks": "MARKS", "text": "TEXT", "cut": "CUT"}
NUMBERS = {"channels": 1, "ports": 3, "marks": 4, "text": 5, "cut": 6}
WORKING = ("TEXT", "MARKS", "PORTS", "L1_CHAN", "CUT")
SAGITTA_UM = 0.02
LARGEST_RADIUS_UM = 5000.0


def meant(scene: Scene) -> dict[str, shapely.Geometry]:
    """Return the area of each layer, by the name of the layer in files [um]."""
    parts: dict[str, list[shapely.Geometry]] = {}

    def take(block: Block, dx: float, dy: float) -> None:
        outlines = [(figure.layer, figure.outline) for figure in block.figures]
        if block.body is not None:
            outlines.append((Layer.CHANNELS, block.body.outline))
        for layer, outline in outlines:
            rings = [contour.chords(sagitta_um=SAGITTA_UM) + np.array([dx, dy]) for contour in outline.contours]
            parts.setdefault(NAMES[layer], []).append(shapely.Polygon(rings[0], rings[1:]))
        for placed in block.placed:
            take(placed.block, dx + placed.dx_um, dy + placed.dy_um)

    take(scene.top, 0.0, 0.0)
    return {name: shapely.union_all(areas) for name, areas in parts.items()}


def covered(layers: Layers, *, is_nested: bool = False) -> dict[str, shapely.Geometry]:
    """Return the area of each layer as a reader saw it, islands taken out."""
    areas = {}
    for name, rings in layers.items():
        polygons = np.array([shapely.Polygon(ring) for ring in rings])
        if is_nested:
            _, inner = shapely.STRtree(polygons).query(polygons, predicate="contains_properly")
            holes = np.isin(np.arange(len(polygons)), inner)
            areas[name] = shapely.union_all(polygons[~holes]).difference(shapely.union_all(polygons[holes]))
        else:
            areas[name] = shapely.union_all(polygons)
    islands = areas.pop("L1_ISLE", None)
    if islands is not None:
        areas["L1_CHAN"] = areas["L1_CHAN"].difference(islands)
    return areas


def check_files(report: MaskSetReport, scene: Scene, options: MaskOptions, *, most_readers: int = 3) -> int:
    """Check every mask file of a report with independent judges and readers; return how many there were.

    Whole plates take long to compare; one reader of each format will do there.
    """
    truth = meant(scene)
    checked = 0
    for file in report.files:
        path = report.folder / file.name
        if path.suffix == ".gds":
            numbers = [NUMBERS[layer] for layer, name in NAMES.items() if name in truth]
            assert gdsii_objections(path, top=path.stem, layers=numbers, grid_nm=options.grid_nm) == []
            # a corner is rounded in its cell and at each of the places of piece, block and chip
            edge_um = SAGITTA_UM + options.chord_tolerance_um + 3.0e-3 * options.grid_nm
            for reader in GDSII_READERS[:most_readers]:
                check_areas(covered(reader(path, path.stem)), truth, edge_um=edge_um)
        elif path.suffix == ".dxf":
            is_nested = options.islands == "nested"
            has_islands = options.islands == "loops" and any(p.interiors for p in shapely.get_parts(truth["L1_CHAN"]))
            layers = (*truth, "L1_ISLE") if has_islands else tuple(truth)
            assert (
                dxf_objections(
                    path,
                    version=options.dxf_version,
                    layers=layers,
                    is_flat=is_nested or options.copies == "flat",
                    is_nested=is_nested,
                    order=WORKING,
                )
                == []
            )
            # the readers' chords stray from their arcs by up to 1e-5 of the radius; places lie on the grid
            edge_um = SAGITTA_UM + 1e-5 * LARGEST_RADIUS_UM + 0.71e-3 * 2.0 * options.grid_nm
            for reader in DXF_READERS[:most_readers]:
                check_areas(covered(reader(path), is_nested=is_nested), truth, edge_um=edge_um)
        else:
            continue
        checked += 1
    return checked


def check_areas(found: dict[str, shapely.Geometry], truth: dict[str, shapely.Geometry], *, edge_um: float) -> None:
    """Check that areas are the same up to a distance of their edges."""
    assert set(found) == set(truth)
    for name, area in truth.items():
        parts, others = shapely.get_parts(area), shapely.get_parts(found[name])
        assert len(parts) == len(others)
        assert sum(len(p.interiors) for p in parts) == sum(len(p.interiors) for p in others)
        assert np.allclose(area.bounds, found[name].bounds, rtol=0.0, atol=2.0 * edge_um)
        assert area.symmetric_difference(found[name]).area <= edge_um * area.length
