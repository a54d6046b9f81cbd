"""Channels of parameter sets put on masks as they are: no chip round them, no pads, no marks."""

from __future__ import annotations

from typing import TYPE_CHECKING

from core.chip.scene import Block, BlockKind, PlacedBlock, Scene
from core.errors import ExportError, shown
from core.findings import Severity
from core.geometry.body import channel_body
from core.masks.drawing import LONGEST_CHANNEL_NAME, LONGEST_STEM, MaskDrawing
from core.masks.names import safe_name, unique_safe_names

if TYPE_CHECKING:
    from collections.abc import Sequence

    from core.geometry.shape import ChannelShape
    from core.masks.options import MaskOptions


def bare_drawings(
    named_shapes: Sequence[tuple[str, ChannelShape]], *, chip_name: str, options: MaskOptions
) -> tuple[MaskDrawing, ...]:
    """Return the masks of bare channels: one for each set, or one for all.

    Parameters
    ----------
    named_shapes : sequence of (str, ChannelShape)
        Name of each parameter set, and its shape.
    chip_name : str
        Name of the chip as the user typed it.
    options : MaskOptions
        Whether sets share a mask, and their clearance.

    Returns
    -------
    tuple of MaskDrawing
        In the order given; channels of one mask lie below one another.

    Raises
    ------
    ExportError
        If there is no shape, one cannot be used, or the drawing is larger than a mask can be.
    """
    if not named_shapes:
        raise ExportError("no parameter set was chosen for the masks; choose at least one")
    for title, shape in named_shapes:
        _check_usable(title, shape)
    chip = safe_name(chip_name, longest=LONGEST_STEM, fallback="CHIP")
    names = unique_safe_names([title for title, _ in named_shapes], longest=LONGEST_CHANNEL_NAME, taken=(chip,))
    blocks = [
        Block(name=name, kind=BlockKind.CHANNEL, title=title, body=channel_body(shape.parameters))
        for name, (title, shape) in zip(names, named_shapes, strict=True)
    ]
    if not options.one_file_per_set:
        return (_drawing(chip, _stacked(blocks, options.clearance_um), options),)
    stems = unique_safe_names([f"{chip}_{name}" for name in names], longest=LONGEST_STEM, taken=names)
    return tuple(
        _drawing(stem, (PlacedBlock(block=block),), options) for stem, block in zip(stems, blocks, strict=True)
    )


def _drawing(stem: str, placed: tuple[PlacedBlock, ...], options: MaskOptions) -> MaskDrawing:
    top = Block(name=stem, kind=BlockKind.CHANNEL, placed=placed)
    return MaskDrawing(Scene(top=top), stem=stem, grid_nm=options.grid_nm)


def _stacked(blocks: Sequence[Block], clearance_um: float) -> tuple[PlacedBlock, ...]:
    placed: list[PlacedBlock] = []
    floor = 0.0
    for block in blocks:
        assert block.body is not None
        _, low, _, high = block.body.bounds_um
        dy = (floor - clearance_um - high) // 1.0 if placed else 0.0
        placed.append(PlacedBlock(block=block, dy_um=dy))
        floor = low + dy
    return tuple(placed)


def _check_usable(title: str, shape: ChannelShape) -> None:
    if shape.outline is not None:
        return
    errors = [finding.message for finding in shape.findings if finding.severity is Severity.ERROR]
    reason = errors[0] if errors else "its shape cannot be built; change its parameters"
    raise ExportError(f"parameter set {shown(title)} cannot be put on a mask: {reason}")
