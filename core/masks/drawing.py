"""One mask drawing: a scene whose blocks have names that every reader takes, and what stands where in it."""

from __future__ import annotations

from collections import Counter
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

from core.chip.scene import Layer
from core.errors import ExportError, GeometryError, shown
from core.geometry.pieces import LONGEST_PIECE_NAME
from core.masks.grid import on_grid_nm
from core.masks.layers import LAYER_NAMES
from core.masks.names import LONGEST_CELL_NAME, PIECE_MARK, safe_name, unique_safe_names
from core.units import NM_PER_UM, UM_PER_MM

if TYPE_CHECKING:
    from collections.abc import Iterator

    from core.chip.scene import Block, PlacedBlock, Scene
    from core.geometry.contour import Outline
    from core.geometry.pieces import ChannelPieces

    Bounds = tuple[float, float, float, float]

LONGEST_CHANNEL_NAME = LONGEST_CELL_NAME - len(PIECE_MARK) - LONGEST_PIECE_NAME
LONGEST_STEM = 24
LARGEST_COORDINATE_UM = 2e6  # 2 m either way: what mask writers take, and nearly what 32-bit nanometres reach


class MaskDrawing:
    """A scene that is about to be written.

    Parameters
    ----------
    scene : Scene
        What stands on the mask.
    stem : str
        Name of the files without ending, also of the top cell; made safe.
    grid_nm : int
        Shifts are rounded to multiples of this [nm].

    Raises
    ------
    ExportError
        If nothing is drawn, it is larger than a mask can be, or a figure that may not has islands.
    """

    def __init__(self, scene: Scene, *, stem: str, grid_nm: int = 1) -> None:
        self.scene = scene
        self.stem = safe_name(stem, longest=LONGEST_STEM, fallback="CHIP")
        self.grid_nm = grid_nm
        self.blocks = scene.blocks()
        self._names = self._safe_names()
        self._check()

    def _safe_names(self) -> dict[int, str]:
        names = {id(self.scene.top): self.stem}
        taken = [self.stem, *LAYER_NAMES]
        for block in self.blocks[:-1]:
            longest = LONGEST_CELL_NAME if block.body is None else LONGEST_CHANNEL_NAME
            (name,) = unique_safe_names([block.name], longest=longest, taken=taken)
            names[id(block)] = name
            taken.append(name)
        return names

    def _check(self) -> None:
        for block in self.blocks:
            if any(figure.outline.islands for figure in block.figures):
                raise ExportError(f"block {shown(block.name)} has a figure with a hole; only channels may have islands")
        if not self.layers:
            raise ExportError(f"nothing is drawn on mask {self.stem}; place a channel first")
        for block in self.blocks:
            if not self.extents_of(block):
                raise ExportError(f"block {shown(block.name)} draws nothing; take it out of the drawing")
        reach = max(abs(value) for value in self.bounds_um)
        if reach > LARGEST_COORDINATE_UM:
            raise ExportError(
                f"mask {self.stem} would reach {reach / UM_PER_MM:.0f} mm from its origin; "
                f"allowed: {LARGEST_COORDINATE_UM / UM_PER_MM:.0f} mm; use fewer stages or shorter leads"
            )

    def name_of(self, block: Block) -> str:
        """Return the safe name of a block, unique and unlike any layer; the top has the name of the files."""
        return self._names[id(block)]

    def shift_nm(self, placed: PlacedBlock) -> tuple[int, int]:
        """Return where a block is placed, on the grid [nm]."""
        dx, dy = on_grid_nm(np.array([placed.dx_um, placed.dy_um]), grid_nm=self.grid_nm)
        return int(dx), int(dy)

    def placings(self) -> Iterator[tuple[Block, int, int]]:
        """Yield every block as often as it stands on the mask, with its place [nm]; the top first."""
        pending = [(self.scene.top, 0, 0)]
        while pending:
            block, x, y = pending.pop()
            yield block, x, y
            for placed in reversed(block.placed):
                dx, dy = self.shift_nm(placed)
                pending.append((placed.block, x + dx, y + dy))

    @cached_property
    def _extents(self) -> dict[int, dict[Layer, Bounds]]:
        """Bounds on each layer of everything in each block [um]."""
        found: dict[int, dict[Layer, Bounds]] = {}
        for block in self.blocks:
            boxes: list[tuple[Layer, Bounds]] = [
                (layer, outline.bounds_um) for layer in Layer for outline in own_outlines(block, layer)
            ]
            for placed in block.placed:
                dx, dy = (value / NM_PER_UM for value in self.shift_nm(placed))
                for layer, (x0, y0, x1, y1) in found[id(placed.block)].items():
                    boxes.append((layer, (x0 + dx, y0 + dy, x1 + dx, y1 + dy)))
            found[id(block)] = {
                layer: around([box for other, box in boxes if other is layer])
                for layer in dict.fromkeys(layer for layer, _ in boxes)
            }
        return found

    def extents_of(self, block: Block) -> dict[Layer, Bounds]:
        """Return the bounds of a block and all that stands in it, layer by layer [um]."""
        return self._extents[id(block)]

    @property
    def layers(self) -> tuple[Layer, ...]:
        """What is drawn on, in the order of ``Layer``."""
        return tuple(layer for layer in Layer if layer in self.extents_of(self.scene.top))

    @property
    def bounds_um(self) -> Bounds:
        """(x_min, y_min, x_max, y_max) of everything [um]."""
        return around(list(self.extents_of(self.scene.top).values()))

    @cached_property
    def copies(self) -> dict[int, int]:
        """How often each block stands on the mask, by its identity."""
        counts: Counter[int] = Counter({id(self.scene.top): 1})
        for block in reversed(self.blocks):
            for placed in block.placed:
                counts[id(placed.block)] += counts[id(block)]
        return dict(counts)

    def copies_of(self, block: Block) -> int:
        """Return how often a block stands on the mask."""
        return self.copies[id(block)]

    @property
    def channel_count(self) -> int:
        """Number of channels on the mask, copies counted."""
        return sum(self.copies_of(block) for block in self.blocks if block.body is not None)

    @property
    def island_count(self) -> int:
        """Number of islands of all channels."""
        return sum(self.copies_of(b) * len(b.body.outline.islands) for b in self.blocks if b.body is not None)

    @property
    def area_um2(self) -> float:
        """Exact area of everything on the channels' layer [um^2]."""
        return sum(
            self.copies_of(block) * outline.area_um2
            for block in self.blocks
            for outline in own_outlines(block, Layer.CHANNELS)
        )


def own_outlines(block: Block, layer: Layer) -> tuple[Outline, ...]:
    """Return what a block itself draws on a layer, without the blocks that stand in it."""
    drawn = tuple(figure.outline for figure in block.figures if figure.layer is layer)
    return (block.body.outline, *drawn) if block.body is not None and layer is Layer.CHANNELS else drawn


def around(boxes: list[Bounds]) -> Bounds:
    """Return the bounds of several bounds, (x_min, y_min, x_max, y_max)."""
    x0, y0, x1, y1 = zip(*boxes, strict=True)
    return min(x0), min(y0), max(x1), max(y1)


def pieces_of(block: Block, *, link_um: float) -> ChannelPieces:
    """Return the channel of a block cut into pieces without holes.

    Parameters
    ----------
    block : Block
        A block with a body.
    link_um : float
        Length left free along the path at every cut [um].

    Raises
    ------
    ExportError
        If there is no place to cut.
    """
    assert block.body is not None
    try:
        return block.body.pieces(link_um=link_um)
    except GeometryError as error:
        raise ExportError(
            f"channel {shown(block.title or block.name)} cannot be cut into pieces: {error}; "
            "raise loop_radius_um, or write DXF with islands as loops"
        ) from error
