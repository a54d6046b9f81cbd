"""Blocks of a chip as painter paths: each distinct block once, in micrometres with y upwards."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QPainterPath

from app.drawing.paths import ring_paths
from core.chip.scene import Layer

if TYPE_CHECKING:
    from collections.abc import Iterable

    from core.chip.scene import Block
    from core.geometry.contour import Floats, Outline


@dataclass(frozen=True, slots=True, kw_only=True)
class BlockPaths:
    """What is painted for one block.

    Attributes
    ----------
    block : Block
        The block itself; held, so that no other one can take its identity.
    layers : dict of Layer to QPainterPath
        Its own figures, in the order in which they are painted [um].
    bounds_um : QRectF or None
        Extent of the block with all that stands in it, its top being the smaller y; None when empty [um].
    placed_bounds_um : array, shape (n, 4)
        x_min, y_min, x_max, y_max of the blocks that stand in it, an empty one as nan [um].
    weight : int
        Lines and curves in it and in all that stands in it, each copy counted.
    """

    block: Block
    layers: dict[Layer, QPainterPath]
    bounds_um: QRectF | None
    placed_bounds_um: Floats
    weight: int


class BlockStore:
    """Makes the paths of blocks when they are first asked for, and keeps them.

    Parameters
    ----------
    blocks : iterable of Block
        Blocks whose paths are made at once.
    older : BlockStore, optional
        Where the paths of blocks that are not new are taken from.
    """

    def __init__(self, blocks: Iterable[Block] = (), older: BlockStore | None = None) -> None:
        known = older._known if older is not None else {}
        wanted = list(blocks)
        self._known: dict[int, BlockPaths] = {id(block): known[id(block)] for block in wanted if id(block) in known}
        for block in wanted:
            self.of(block)

    def of(self, block: Block) -> BlockPaths:
        """Return the paths of a block."""
        found = self._known.get(id(block))
        if found is None:
            found = self._known[id(block)] = self._made(block)
        return found

    def _made(self, block: Block) -> BlockPaths:
        layers = _layer_paths(block)
        inside = [self.of(placed.block) for placed in block.placed]
        placed_bounds = np.full((len(inside), 4), np.nan)
        for row, (placed, paths) in enumerate(zip(block.placed, inside, strict=True)):
            if paths.bounds_um is not None:
                moved = paths.bounds_um.translated(placed.dx_um, placed.dy_um)
                placed_bounds[row] = moved.left(), moved.top(), moved.right(), moved.bottom()
        boxes = [path.controlPointRect() for path in layers.values()]
        if not np.isnan(placed_bounds).all():
            x0, y0 = np.nanmin(placed_bounds[:, :2], axis=0).tolist()
            x1, y1 = np.nanmax(placed_bounds[:, 2:], axis=0).tolist()
            boxes.append(QRectF(x0, y0, x1 - x0, y1 - y0))
        own = sum(path.elementCount() for path in layers.values())
        return BlockPaths(
            block=block,
            layers=layers,
            bounds_um=_united(boxes),
            placed_bounds_um=placed_bounds,
            weight=own + sum(paths.weight for paths in inside),
        )


def _united(boxes: list[QRectF]) -> QRectF | None:
    if not boxes:
        return None
    box = boxes[0]
    for other in boxes[1:]:
        box = box.united(other)
    return box


def _layer_paths(block: Block) -> dict[Layer, QPainterPath]:
    outlines: dict[Layer, list[Outline]] = {layer: [] for layer in Layer}
    if block.body is not None:
        outlines[Layer.CHANNELS].append(block.body.outline)
    for figure in block.figures:
        outlines[figure.layer].append(figure.outline)
    return {layer: areas_path(listed) for layer, listed in outlines.items() if listed}


def areas_path(outlines: Iterable[Outline]) -> QPainterPath:
    """Return several areas as one path [um]; where two of them overlap is inside, islands are outside.

    Outer rings run counter-clockwise and islands clockwise, so that counting turns tells them apart.
    """
    path = QPainterPath()
    path.setFillRule(Qt.FillRule.WindingFill)
    for ring in ring_paths([contour for outline in outlines for contour in outline.contours]):
        path.addPath(ring)
    return path
