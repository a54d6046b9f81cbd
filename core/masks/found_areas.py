"""Areas of the blocks that were found in a file: what each covers, and that no two cover the same place."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from core.masks.drawing import around
from core.masks.figure_rules import area_of, figure_problems, rings_within
from core.units import NM_PER_UM

if TYPE_CHECKING:
    from collections.abc import Mapping

    from shapely.geometry.base import BaseGeometry

    from core.masks.drawing import Bounds
    from core.masks.found import FoundBlock

_SAME_AREA = 1e-9  # relative; figures that only share edges agree to about 1e-15


class FoundAreas:
    """Areas of blocks, worked out once each.

    Parameters
    ----------
    tree : mapping of str to FoundBlock
        What was found; references lead to blocks of it and never round in circles.
    is_nested : bool
        Whether rings within rings bound holes.
    """

    def __init__(self, tree: Mapping[str, FoundBlock], *, is_nested: bool) -> None:
        self.tree = tree
        self.is_nested = is_nested
        self._own: dict[tuple[str, str], BaseGeometry] = {}
        self._whole: dict[tuple[str, str], BaseGeometry] = {}
        self._boxes: dict[str, dict[str, Bounds]] = {}

    def own(self, name: str, layer: str) -> BaseGeometry:
        """Return what a block itself covers on a layer [um]."""
        key = (name, layer)
        if key not in self._own:
            found = self.tree[name].layers.get(layer)
            self._own[key] = area_of(found.rings_um if found else [], is_nested=self.is_nested)
        return self._own[key]

    def exact_area_um2(self, name: str, layer: str) -> float:
        """Return the area that a block itself covers on a layer, from its lines and arcs [um^2]."""
        found = self.tree[name].layers[layer]
        signs = np.ones(len(found.areas_um2))
        if self.is_nested:
            signs[rings_within(found.rings_um)[0]] = -1.0
        return float(signs @ np.array(found.areas_um2))

    def whole(self, name: str, layer: str) -> BaseGeometry:
        """Return what a block and all that stands in it cover on a layer [um]."""
        import shapely

        key = (name, layer)
        if key not in self._whole:
            parts = [self.own(name, layer)]
            parts += [
                _moved(self.whole(target, layer), x / NM_PER_UM, y / NM_PER_UM)
                for target, x, y in self.tree[name].placed
                if layer in self.boxes(target)
            ]
            self._whole[key] = shapely.union_all(parts)
        return self._whole[key]

    def boxes(self, name: str) -> dict[str, Bounds]:
        """Return the bounds of a block and all that stands in it, by layer [um]."""
        if name not in self._boxes:
            block = self.tree[name]
            found = {layer: list(figures.boxes_um) for layer, figures in block.layers.items()}
            for target, x, y in block.placed:
                for layer, box in self.boxes(target).items():
                    found.setdefault(layer, []).append(_moved_box(box, x / NM_PER_UM, y / NM_PER_UM))
            self._boxes[name] = {layer: around(boxes) for layer, boxes in found.items() if boxes}
        return self._boxes[name]

    def problems(self, *, grain_um: float) -> list[str]:
        """Return what is wrong with figures, and what overlaps.

        Parameters
        ----------
        grain_um : float
            Points no further apart than this are the same point [um].
        """
        problems = []
        for name, block in self.tree.items():
            for layer, found in block.layers.items():
                told = figure_problems(found.rings_um, grain=grain_um, is_nested=self.is_nested)
                problems += [f"block {name}, layer {layer}: {text}" for text in told]
        return problems or [text for name in self.tree for text in self._overlaps(name)]

    def _overlaps(self, name: str) -> list[str]:
        """Return which of the blocks that stand in a block overlap one another or its own figures."""
        return [
            f"block {name}, layer {layer}: {first} and {second} overlap"
            for layer in self.boxes(name)
            for first, second in self._meeting(name, layer)
        ]

    def _meeting(self, name: str, layer: str) -> list[tuple[str, str]]:
        import shapely

        block = self.tree[name]
        placed = [each for each in block.placed if layer in self.boxes(each[0])]
        boxes = [_moved_box(self.boxes(target)[layer], x / NM_PER_UM, y / NM_PER_UM) for target, x, y in placed]
        names = [target for target, _, _ in placed]
        if layer in block.layers:
            boxes.append(around(block.layers[layer].boxes_um))
            names.append(f"its own figures in {name}")
        if len(boxes) < 2:
            return []
        tree = shapely.STRtree(shapely.box(*np.array(boxes).T))
        pairs = tree.query(tree.geometries, predicate="intersects")
        return [
            (names[first], names[second])
            for first, second in pairs[:, pairs[0] < pairs[1]].T
            if self._meet(*(self._area(name, layer, placed, number) for number in (first, second)))
        ]

    def _area(self, name: str, layer: str, placed: list[tuple[str, float, float]], number: int) -> BaseGeometry:
        if number == len(placed):
            return self.own(name, layer)
        target, x, y = placed[number]
        return _moved(self.whole(target, layer), x / NM_PER_UM, y / NM_PER_UM)

    def _meet(self, first: BaseGeometry, second: BaseGeometry) -> bool:
        """Tell whether two areas share ground or, where lines are cut, even a point."""
        if self.is_nested:
            return bool(first.intersects(second))
        return bool(first.intersection(second).area > _SAME_AREA * min(first.area, second.area))


def _moved(area: BaseGeometry, dx_um: float, dy_um: float) -> BaseGeometry:
    import shapely

    return shapely.transform(area, lambda points: points + np.array([dx_um, dy_um]))


def _moved_box(box: Bounds, dx_um: float, dy_um: float) -> Bounds:
    x0, y0, x1, y1 = box
    return x0 + dx_um, y0 + dy_um, x1 + dx_um, y1 + dy_um
