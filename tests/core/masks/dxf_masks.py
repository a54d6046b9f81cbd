"""A small sound DXF mask, written by ezdxf on its own, to be spoilt in one way or another."""

from __future__ import annotations

from typing import TYPE_CHECKING

import ezdxf

from core.fabrication.choices import DxfVersion
from core.masks.dxf_rules import dxf_problems
from core.masks.found import found_in_dxf
from core.masks.found_areas import FoundAreas
from core.masks.read_dxf import read_dxf
from tests.core.masks.judges import dxf_objections

if TYPE_CHECKING:
    from collections.abc import Callable
    from pathlib import Path

    from ezdxf.layouts import Modelspace

SQUARE = [(0.0, 0.0), (1.0, 0.0), (1.0, 1.0), (0.0, 1.0)]
BOUNDS = (0.0, 0.0, 9.0, 1.0)


class Mask:
    """A sound drawing of two squares, to be spoilt."""

    is_nested = False

    def __init__(self, version: str) -> None:
        self.version = DxfVersion(version)
        self.document = ezdxf.new(version, units=4) if version == "R2000" else ezdxf.document.Drawing.new(version)
        self.document.layers.remove("Defpoints")
        self.document.layers.add("L1_CHAN")
        self.add(SQUARE)
        self.add([(x + 8.0, y) for x, y in SQUARE])

    @property
    def space(self) -> Modelspace:
        return self.document.modelspace()

    def add(
        self, points: list[tuple[float, ...]], *, close: bool = True, layer: str = "L1_CHAN", **more: object
    ) -> None:
        add = self.space.add_lwpolyline if self.version is DxfVersion.R2000 else self.space.add_polyline2d
        add(points, format="xyb"[: len(points[0])], close=close, dxfattribs={"layer": layer, **more})

    def insert(self, *, block: str = "PIECE", base: tuple[float, float] = (0.0, 0.0), **values: object) -> None:
        """Add a block of one square, and an insert of it at (4, 0)."""
        piece = self.document.blocks.new(block, base_point=base)
        add = piece.add_lwpolyline if self.version is DxfVersion.R2000 else piece.add_polyline2d
        add(SQUARE, close=True, dxfattribs={"layer": "L1_CHAN"})
        attributes = {"layer": "L1_CHAN", **values}
        self.space.add_blockref(attributes.pop("name", block), (4.0, 0.0), dxfattribs=attributes)

    def problems(self, folder: Path, patch: Callable[[str], str] = str) -> list[str]:
        path = folder / "mask.dxf"
        # the header takes the extents from here; bounding boxes of arcs are checked elsewhere
        self.space.reset_extents((*BOUNDS[:2], 0.0), (*BOUNDS[2:], 0.0))
        self.document.header["$EXTMIN"], self.document.header["$EXTMAX"] = (*BOUNDS[:2], 0.0), (*BOUNDS[2:], 0.0)
        self.document.saveas(path)
        path.write_text(patch(path.read_text()))
        read = read_dxf(path)
        problems = dxf_problems(read, version=self.version, layers=("L1_CHAN",), bounds_mm=BOUNDS)
        if not problems:
            tree = found_in_dxf(read, top="TOP", sagitta_um=0.02)
            problems = FoundAreas(tree, is_nested=self.is_nested).problems(grain_um=1e-6)
        # a judge that shares nothing with these rules must come to the same verdict
        objections = dxf_objections(
            path, version=str(self.version), layers=("L1_CHAN",), is_nested=self.is_nested, order=["L1_CHAN"]
        )
        assert bool(objections) == bool(problems), objections
        return problems
