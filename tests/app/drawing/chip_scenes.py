"""Scenes made by hand: what is in them is known without asking those who build real ones."""

from __future__ import annotations

from functools import lru_cache

import numpy as np

from core.chip.scene import Block, BlockKind, Figure, Layer, PlacedBlock, Scene
from core.geometry.body import channel_body
from core.geometry.contour import Contour, Outline
from core.parameters import ChannelParameters


def rectangle(x0: float, y0: float, x1: float, y1: float) -> Outline:
    """Return a rectangle as an area [um]."""
    return Outline(Contour(np.array([[x0, y0], [x1, y0], [x1, y1], [x0, y1]], dtype=float), np.zeros(4)))


@lru_cache(maxsize=256)
def channel_block(stages: int, loop_radius_um: float = 320.0) -> Block:
    """Return a channel's block, the middle of its bounds at (0, 0)."""
    channel = ChannelParameters(stages=stages, loop_radius_um=loop_radius_um)
    body = channel_body(channel, centre_um=(0.0, 0.0), pad_radius_um=750.0)
    return Block(name=f"CHANNEL_{stages}_{loop_radius_um:g}", kind=BlockKind.CHANNEL, body=body)


def chip_block(name: str, channels: tuple[Block, ...], *, width_um: float, height_um: float) -> Block:
    """Return a chip with channels one above the other, a frame of ticks and a mark."""
    half_x, half_y = 0.5 * width_um, 0.5 * height_um
    step = height_um / (len(channels) + 1)
    placed = tuple(
        PlacedBlock(block=channel, dy_um=half_y - (row + 1) * step, channel=row) for row, channel in enumerate(channels)
    )
    figures = tuple(
        Figure(layer=Layer.CUT, outline=rectangle(x - 100.0, y - 10.0, x + 100.0, y + 10.0))
        for x in (-half_x, half_x) for y in (-half_y, half_y)
    )  # fmt: skip
    mark = Figure(layer=Layer.MARKS, outline=rectangle(-half_x + 300.0, -50.0, -half_x + 400.0, 50.0))
    return Block(name=name, kind=BlockKind.CHIP, placed=placed, figures=(*figures, mark))


def plate_scene(*, copies_across: int, stages: int, channels: int, is_stepped: bool) -> Scene:
    """Return a plate with a square number of chips.

    Parameters
    ----------
    copies_across : int
        Chips along x, and as many along y.
    stages : int
        Stages of every channel.
    channels : int
        Channels on a chip.
    is_stepped : bool
        True: the loop's radius differs from chip to chip. False: all chips are one block.
    """
    probe = channel_block(stages).body.outline.bounds_um
    width_um, height_um = probe[2] - probe[0] + 2000.0, channels * (probe[3] - probe[1] + 800.0) + 800.0
    made = {}

    def chip(number: int) -> Block:
        number = number if is_stepped else 0
        if number not in made:
            row = (channel_block(stages, 320.0 + 0.5 * number),) * channels
            made[number] = chip_block(f"CHIP_{number}", row, width_um=width_um, height_um=height_um)
        return made[number]

    middle = 0.5 * (copies_across - 1)
    placed = tuple(
        PlacedBlock(
            block=chip(copies_across * j + i),
            dx_um=(i - middle) * (width_um + 200.0),
            dy_um=(j - middle) * (height_um + 200.0),
        )
        for j in range(copies_across)
        for i in range(copies_across)
    )
    return Scene(top=Block(name="PLATE", kind=BlockKind.PLATE, placed=placed))
