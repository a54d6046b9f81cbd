"""Small pictures of blocks that are painted again and again, kept until they have not been used for long.

A picture serves at the scale at which it was made. At another scale it may stand in, shrunk or
stretched to the right size, until there is time to make a new one.
"""

from __future__ import annotations

from collections import OrderedDict
from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from PySide6.QtCore import QPointF
    from PySide6.QtGui import QImage

    from core.chip.scene import Block

_MOST_BYTES = 160_000_000
_MOST_STRETCH = 3.0  # beyond this a picture of another scale is too coarse, or costs too much, to stand in


@dataclass(frozen=True, slots=True, kw_only=True)
class BlockImage:
    """A picture of a block.

    Attributes
    ----------
    block : Block
        What it shows; held, so that no other block can take its identity.
    image : QImage
        The picture, transparent where nothing is drawn.
    corner_um : QPointF
        Place in the block's own coordinates that is shown at the upper left corner [um].
    um_per_px : float
        Length shown by one device-independent pixel [um].
    """

    block: Block
    image: QImage
    corner_um: QPointF
    um_per_px: float


class BlockImages:
    """The kept pictures, those used last at the end."""

    def __init__(self) -> None:
        self._kept: OrderedDict[tuple[int, float], BlockImage] = OrderedDict()
        self._scales: dict[int, list[float]] = {}
        self._bytes = 0

    def clear(self) -> None:
        """Forget all."""
        self._kept.clear()
        self._scales.clear()
        self._bytes = 0

    def at(self, block: Block, um_per_px: float) -> BlockImage | None:
        """Return the picture made at exactly this scale, if there is one."""
        key = (id(block), um_per_px)
        if key in self._kept:
            self._kept.move_to_end(key)
        return self._kept.get(key)

    def near(self, block: Block, um_per_px: float) -> BlockImage | None:
        """Return the picture made at the nearest scale, if one is near enough to stand in."""
        scales = self._scales.get(id(block), ())
        fit = [scale for scale in scales if um_per_px / _MOST_STRETCH <= scale <= um_per_px * _MOST_STRETCH]
        if not fit:
            return None
        return self.at(block, min(fit, key=lambda scale: max(scale / um_per_px, um_per_px / scale)))

    def keep(self, made: BlockImage) -> None:
        """Keep a picture, and forget the oldest ones when there are too many."""
        key = (id(made.block), made.um_per_px)
        self._kept[key] = made
        self._scales.setdefault(id(made.block), []).append(made.um_per_px)
        self._bytes += made.image.sizeInBytes()
        while self._bytes > _MOST_BYTES and len(self._kept) > 1:
            self._forget(next(iter(self._kept)))

    def _forget(self, key: tuple[int, float]) -> None:
        self._bytes -= self._kept.pop(key).image.sizeInBytes()
        self._scales[key[0]].remove(key[1])
        if not self._scales[key[0]]:
            del self._scales[key[0]]
