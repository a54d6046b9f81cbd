"""Small chips put together by hand, for the tests of mask files."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from core.chip.scene import Block, BlockKind, Figure, Layer, PlacedBlock, Scene
from core.geometry.body import channel_body
from core.geometry.contour import Contour, Outline
from core.masks.drawing import MaskDrawing
from core.parameters import ChannelParameters

if TYPE_CHECKING:
    from core.geometry.body import ChannelBody

CHIP = (-4000.0, -2500.0, 4000.0, 2500.0)
PITCH_UM = (8200.0, 5200.0)


def disc(x: float, y: float, radius: float) -> Outline:
    """Return a circle of four quarter arcs [um]."""
    corners = np.array([[x + radius, y], [x, y + radius], [x - radius, y], [x, y - radius]])
    return Outline(Contour(corners, np.full(4, np.tan(np.pi / 8.0))))


def box(x0: float, y0: float, x1: float, y1: float) -> Outline:
    """Return a rectangle [um]."""
    return Outline(Contour(np.array([[x0, y0], [x1, y0], [x1, y1], [x0, y1]]), np.zeros(4)))


def figures(layer: Layer, *outlines: Outline) -> tuple[Figure, ...]:
    """Return figures of one layer."""
    return tuple(Figure(layer=layer, outline=outline) for outline in outlines)


def channel_block(body: ChannelBody, name: str = "Main") -> Block:
    """Return the block of a channel with a port in each pad."""
    ports = figures(Layer.PORTS, *(disc(*pad.centre_um, 0.6 * pad.radius_um) for pad in body.pads))
    return Block(name=name, title=f"{name} channel", kind=BlockKind.CHANNEL, body=body, figures=ports)


def chip_block(channels: list[tuple[Block, float, float]], *, corners: tuple[float, ...] = CHIP) -> Block:
    """Return a chip with channels at their places, two marks, a word of two signs and its outline."""
    x0, y0, x1, y1 = corners
    squares = figures(Layer.MARKS, box(0.0, 0.0, 40.0, 40.0), box(60.0, 60.0, 100.0, 100.0))
    mark = Block(name="Mark", kind=BlockKind.MARKS, figures=squares)
    bars = figures(Layer.TEXT, box(0.0, 0.0, 30.0, 200.0), box(60.0, 0.0, 90.0, 200.0))
    sign = Block(name="sign H", kind=BlockKind.SIGN, figures=bars)
    placed = [PlacedBlock(block=block, dx_um=x, dy_um=y) for block, x, y in channels]
    placed += [PlacedBlock(block=mark, dx_um=x, dy_um=y0 + 300.0) for x in (x0 + 300.0, x1 - 400.0)]
    placed += [PlacedBlock(block=sign, dx_um=x0 + 600.0 + 150.0 * k, dy_um=y1 - 400.0) for k in range(2)]
    return Block(name="Chip", kind=BlockKind.CHIP, figures=figures(Layer.CUT, box(*corners)), placed=tuple(placed))


def two_channel_chip() -> Block:
    """Return a chip with a chain of three stages, turned, and a plain channel twice."""
    chain = channel_body(ChannelParameters(stages=3), turn_deg=7.0, centre_um=(0.0, 0.0), pad_radius_um=400.0)
    plain = channel_body(ChannelParameters(stages=0), centre_um=(0.0, 0.0), pad_radius_um=300.0)
    control = channel_block(plain, "Control")
    return chip_block(
        [(channel_block(chain), 0.0, 900.0), (control, -1800.0, -1200.0), (control, 1800.0, -1200.0)],
    )


def plate(chip: Block, *, columns: int = 2, rows: int = 2, pitch_um: tuple[float, float] = PITCH_UM) -> Scene:
    """Return a plate of equal chips around the origin."""
    dx, dy = pitch_um
    placed = tuple(
        PlacedBlock(block=chip, dx_um=(i - 0.5 * (columns - 1)) * dx, dy_um=(k - 0.5 * (rows - 1)) * dy)
        for k in range(rows)
        for i in range(columns)
    )
    return Scene(top=Block(name="Plate", kind=BlockKind.PLATE, placed=placed))


def plate_drawing(grid_nm: int = 1) -> MaskDrawing:
    """Return a plate of four chips as a mask drawing."""
    return MaskDrawing(plate(two_channel_chip()), stem="Plate", grid_nm=grid_nm)
