"""What stands on a mask: blocks of figures, each distinct block drawn once and placed as often as needed.

Blocks are placed by shifts alone: turns and mirrors would round differently from reader to reader,
and are done on the exact outline before.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterator

    from core.geometry.body import ChannelBody
    from core.geometry.contour import Outline


class Layer(StrEnum):
    """What a figure is for; each goes to a named layer of the files."""

    CHANNELS = "channels"
    PORTS = "ports"
    MARKS = "marks"
    TEXT = "text"
    CUT = "cut"


class BlockKind(StrEnum):
    """What a block draws."""

    PLATE = "plate"
    CHIP = "chip"
    CHANNEL = "channel"
    MARKS = "marks"
    SIGN = "sign"


@dataclass(frozen=True, slots=True, kw_only=True)
class Figure:
    """One closed area on a layer; only channels may have holes."""

    layer: Layer
    outline: Outline


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Block:
    """A drawing unit.

    Attributes
    ----------
    name : str
        Short name, to be made safe and unique by whoever writes files.
    kind : BlockKind
        What it draws.
    title : str
        What it is, in the user's words.
    body : ChannelBody or None
        The one channel that a channel's own block draws, on the layer ``CHANNELS``.
    figures : tuple of Figure
        Everything else that is drawn in it.
    placed : tuple of PlacedBlock
        Blocks that stand in it.
    """

    name: str
    kind: BlockKind
    title: str = ""
    body: ChannelBody | None = None
    figures: tuple[Figure, ...] = ()
    placed: tuple[PlacedBlock, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class PlacedBlock:
    """A block at its place: its origin shifted by whole nanometres [um].

    Attributes
    ----------
    block : Block
        What is placed.
    dx_um, dy_um : float
        Shift [um].
    channel : int or None
        For a channel on a chip: its place in the plan's list of channels.
    """

    block: Block
    dx_um: float = 0.0
    dy_um: float = 0.0
    channel: int | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Scene:
    """Everything on one mask set.

    Attributes
    ----------
    top : Block
        The plate, or the chip when there is but one.
    scale : float
        By how much the whole scene has already been enlarged about (0, 0), which is the centre of the plate.
    """

    top: Block
    scale: float = 1.0

    def blocks(self) -> tuple[Block, ...]:
        """Return every distinct block, each before those it stands in; the top comes last."""
        found: dict[int, Block] = {}
        for block in _deepest_first(self.top, found):
            found[id(block)] = block
        return tuple(found.values())


def _deepest_first(block: Block, found: dict[int, Block]) -> Iterator[Block]:
    for placed in block.placed:
        if id(placed.block) not in found:
            yield from _deepest_first(placed.block, found)
    yield block
