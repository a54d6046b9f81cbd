"""What the drawing of a chip shows, as one value: the scene, its plan, and where each channel stands."""

from __future__ import annotations

from dataclasses import dataclass, field
from math import hypot
from typing import TYPE_CHECKING

from PySide6.QtCore import QRectF

from app.drawing.chip_ground import Ground, ground_of
from app.drawing.chip_paths import BlockStore, areas_path
from core.chip.bodies import title_of
from core.chip.scene import Layer

if TYPE_CHECKING:
    from collections.abc import Sequence

    from PySide6.QtGui import QPainterPath

    from core.chip.plan import ChipPlan
    from core.chip.scene import Block, Scene

NONE = -1  # no channel, no finding, no copy


@dataclass(frozen=True, slots=True, kw_only=True)
class PlacedChannel:
    """A channel where it stands on the chip.

    Attributes
    ----------
    index : int
        Its place in the plan's list.
    name : str
        What it is called on the screen.
    box_um : QRectF
        Its bounds from the middle of the chip, the top being the smaller y [um].
    path : QPainterPath
        Its area from the middle of the chip [um].
    """

    index: int
    name: str
    box_um: QRectF
    path: QPainterPath


@dataclass(frozen=True, slots=True, kw_only=True)
class ShownChip:
    """A scene with all that the view must know about it.

    Attributes
    ----------
    scene : Scene
        What is painted.
    plan : ChipPlan
        The plan it was made from, every channel with its place.
    ground : Ground
        Plate and chips.
    copies : tuple of (Block, float, float)
        Every chip and its shift [um].
    store : BlockStore
        The paths of all blocks.
    layers : tuple of Layer
        Layers on which something is drawn, in their order.
    bounds_um : tuple of four floats
        Extent of plate, chips and all that is drawn [um].
    """

    scene: Scene
    plan: ChipPlan
    ground: Ground
    copies: tuple[tuple[Block, float, float], ...]
    store: BlockStore
    layers: tuple[Layer, ...]
    bounds_um: tuple[float, float, float, float]
    _channels: dict[int, tuple[PlacedChannel, ...]] = field(default_factory=dict)

    @classmethod
    def of(
        cls,
        scene: Scene,
        plan: ChipPlan,
        chips: Sequence[tuple[Block, float, float]],
        *,
        older: BlockStore | None = None,
    ) -> ShownChip:
        """Return what is shown of a scene whose chips are known.

        All paths are made here, which takes a while for many different chips.

        Parameters
        ----------
        scene : Scene
            What is painted.
        plan : ChipPlan
            The plan it was made from, every channel with its place.
        chips : sequence of (Block, float, float)
            Every chip and its shift [um].
        older : BlockStore, optional
            Paths of what was shown before.
        """
        ground = ground_of(plan, [(dx, dy) for _, dx, dy in chips])
        blocks = scene.blocks()
        store = BlockStore(blocks, older)
        used = {layer for block in blocks for layer in store.of(block).layers}
        layers = tuple(layer for layer in Layer if layer in used)
        box = ground.box_um.united(store.of(scene.top).bounds_um or QRectF())
        bounds_um = (box.left(), box.top(), box.right(), box.bottom())
        return cls(
            scene=scene, plan=plan, ground=ground, copies=tuple(chips), store=store, layers=layers, bounds_um=bounds_um
        )

    def channels(self, copy: int) -> tuple[PlacedChannel, ...]:
        """Return the channels of one of the chips, from the middle of that chip."""
        if not 0 <= copy < len(self.copies):
            return ()
        block = self.copies[copy][0]
        if id(block) not in self._channels:
            self._channels[id(block)] = tuple(_placed_channels(block, self.plan))
        return self._channels[id(block)]

    @property
    def middle_copy(self) -> int:
        """The chip nearest to the middle of the plate."""
        return min(range(len(self.copies)), key=lambda n: hypot(*self.copies[n][1:]), default=0)

    def copy_at(self, x_um: float, y_um: float) -> int:
        """Return the chip at a place of the plate, ``NONE`` beside all of them."""
        for number, (_, dx, dy) in enumerate(self.copies):
            if abs(x_um - dx) <= self.plan.chip_width_um / 2.0 and abs(y_um - dy) <= self.plan.chip_height_um / 2.0:
                return number
        return NONE


def _placed_channels(block: Block, plan: ChipPlan) -> list[PlacedChannel]:
    found = []
    for placed in block.placed:
        if placed.channel is None or placed.block.body is None:
            continue
        outline = placed.block.body.outline
        x0, y0, x1, y1 = outline.bounds_um
        box = QRectF(x0, y0, x1 - x0, y1 - y0).translated(placed.dx_um, placed.dy_um)
        words = title_of(plan.channels[placed.channel])
        path = areas_path([outline]).translated(placed.dx_um, placed.dy_um)
        found.append(PlacedChannel(index=placed.channel, name=words, box_um=box, path=path))
    return found
