"""What was found in a mask file, block by block, in the same words for both formats.

Cells of pieces are put in place in their channel; a flat DXF file is sorted back into blocks, and
every further copy must be the first one, shifted.
"""

from __future__ import annotations

from collections import defaultdict
from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from core.masks.dxf_blocks import flat_runs, rings_of
from core.masks.layers import NAME_OF_NUMBER
from core.units import NM_PER_UM, UM_PER_MM

if TYPE_CHECKING:
    from collections.abc import Collection, Sequence

    from core.masks.drawing import Bounds, MaskDrawing
    from core.masks.figure_rules import Floats
    from core.masks.options import MaskOptions
    from core.masks.read_dxf import ReadDxf, ReadSpace
    from core.masks.read_gdsii import ReadGdsii
    from core.masks.read_loop import ReadLoop

NM_PER_MM = NM_PER_UM * UM_PER_MM
SAME_PLACE_NM = 1e-3  # for numbers that were written in full
SAME_MM = 1e-9


@dataclass(slots=True)
class FoundLayer:
    """Figures of one layer that a block itself holds.

    Attributes
    ----------
    rings_um : list of array, shape (n, 2)
        Corners, arcs as chords [um].
    boxes_um : list of tuple
        Bounds of each ring, exact where arcs are known [um].
    areas_um2 : list of float
        Area of each ring, exact where arcs are known [um^2].
    """

    rings_um: list[Floats] = field(default_factory=list)
    boxes_um: list[Bounds] = field(default_factory=list)
    areas_um2: list[float] = field(default_factory=list)

    def add_polygon(self, ring_um: Floats) -> None:
        """Take a ring of straight edges."""
        self.rings_um.append(ring_um)
        (x0, y0), (x1, y1) = ring_um.min(axis=0), ring_um.max(axis=0)
        self.boxes_um.append((float(x0), float(y0), float(x1), float(y1)))
        x, y = (ring_um - ring_um[0]).T
        self.areas_um2.append(0.5 * abs(float(np.sum(x * np.roll(y, -1) - y * np.roll(x, -1)))))

    def add_loop(self, loop: ReadLoop, sagitta_um: float, shift_um: Floats) -> None:
        """Take a ring of lines and arcs."""
        self.rings_um.append(loop.chords(sagitta_um / UM_PER_MM) * UM_PER_MM - shift_um)
        box = np.array(loop.bounds).reshape(2, 2) * UM_PER_MM - shift_um
        (x0, y0), (x1, y1) = box.tolist()
        self.boxes_um.append((x0, y0, x1, y1))
        self.areas_um2.append(abs(loop.area) * UM_PER_MM**2)


@dataclass(slots=True)
class FoundBlock:
    """One block as it was found.

    Attributes
    ----------
    layers : dict of str to FoundLayer
        Its own figures, by the name of their layer.
    placed : list of (str, float, float)
        Blocks that stand in it, and where [nm].
    """

    layers: dict[str, FoundLayer] = field(default_factory=lambda: defaultdict(FoundLayer))
    placed: list[tuple[str, float, float]] = field(default_factory=list)


def found_in_gdsii(read: ReadGdsii, *, blocks: Collection[str]) -> dict[str, FoundBlock]:
    """Return the blocks of a GDSII file.

    Parameters
    ----------
    read : ReadGdsii
        The file, its references known to be sound.
    blocks : collection of str
        Cells that are blocks; what all others hold is put in place where they are referred to.
    """
    tree: dict[str, FoundBlock] = {}
    for name in read.cells:
        if name in blocks:
            tree[name] = FoundBlock()
            _take_cell(tree[name], read, name, np.zeros(2, np.int64), blocks)
    return tree


def _take_cell(block: FoundBlock, read: ReadGdsii, name: str, shift_nm: Floats, blocks: Collection[str]) -> None:
    for element in read.cells[name]:
        if element.kind == "BOUNDARY":
            ring = (element.points_nm[:-1] + shift_nm) / NM_PER_UM
            block.layers[NAME_OF_NUMBER.get(element.layer, str(element.layer))].add_polygon(ring)
        elif element.target in blocks:
            x, y = element.points_nm[0] + shift_nm
            block.placed.append((element.target, float(x), float(y)))
        else:
            _take_cell(block, read, element.target, shift_nm + element.points_nm[0], blocks)


def found_in_dxf(read: ReadDxf, *, top: str, sagitta_um: float) -> dict[str, FoundBlock]:
    """Return the blocks of a DXF file with inserts.

    Parameters
    ----------
    read : ReadDxf
        The file.
    top : str
        Name for the model space.
    sagitta_um : float
        Largest distance between an arc and the chords that stand for it [um].
    """
    tree = {name: _found_space(space, sagitta_um) for name, space in read.blocks.items()}
    tree[top] = _found_space(read.model, sagitta_um)
    return tree


def _found_space(space: ReadSpace, sagitta_um: float) -> FoundBlock:
    block = FoundBlock(placed=[(each.name, each.x * NM_PER_MM, each.y * NM_PER_MM) for each in space.inserts])
    for loop in space.loops:
        block.layers[loop.layer].add_loop(loop, sagitta_um, np.zeros(2))
    return block


def found_in_flat_dxf(
    read: ReadDxf, drawing: MaskDrawing, options: MaskOptions
) -> tuple[dict[str, FoundBlock], list[str]]:
    """Return the blocks of a flat DXF file, and what is wrong with further copies.

    Parameters
    ----------
    read : ReadDxf
        The file.
    drawing : MaskDrawing
        Says which loops should belong to which copy of which block.
    options : MaskOptions
        How the file was written.
    """
    sagitta_um = options.chord_tolerance_um
    tree = {drawing.name_of(block): FoundBlock() for block in drawing.blocks}
    for block in drawing.blocks:
        for placed in block.placed:  # that each copy lies there is checked below
            x, y = drawing.shift_nm(placed)
            tree[drawing.name_of(block)].placed.append((drawing.name_of(placed.block), float(x), float(y)))
    first: dict[tuple[str, str], tuple[list[ReadLoop], Floats]] = {}
    place, problems = 0, []
    for block, layer, x, y in flat_runs(drawing):
        key, shift_mm = (drawing.name_of(block), layer), np.array([x, y]) / NM_PER_MM
        count = len(first[key][0]) if key in first else len(rings_of(block, layer, options.islands))
        loops, place = read.model.loops[place : place + count], place + count
        if key not in first:
            first[key] = (loops, shift_mm)
            for loop in loops:
                tree[key[0]].layers[loop.layer].add_loop(loop, sagitta_um, shift_mm * UM_PER_MM)
        elif not _is_copy(loops, first[key][0], shift_mm - first[key][1]):
            problems.append(f"a copy of {key[0]} near ({shift_mm[0]:g}, {shift_mm[1]:g}) mm is not as drawn")
    if place != len(read.model.loops):
        problems.append(f"{len(read.model.loops)} figures, should be {place}")
    return tree, problems


def _is_copy(loops: Sequence[ReadLoop], first: Sequence[ReadLoop], shift_mm: Floats) -> bool:
    if len(loops) != len(first):
        return False
    by = np.array([*shift_mm, 0.0])
    for loop, old in zip(loops, first, strict=True):
        if loop.layer != old.layer or len(loop.corners) != len(old.corners):
            return False
        if np.abs(np.array(loop.corners) - np.array(old.corners) - by).max() > SAME_MM:
            return False
    return True
