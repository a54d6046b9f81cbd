"""Blocks that were found in a file against the blocks of the scene."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING

from core.chip.scene import Layer
from core.masks.comparison import Agreement, compared
from core.masks.drawing import own_outlines
from core.masks.layers import ISLAND_LAYER, LAYERS

if TYPE_CHECKING:
    from collections.abc import Mapping

    from core.chip.scene import Block
    from core.geometry.contour import Outline
    from core.masks.drawing import MaskDrawing
    from core.masks.found import FoundBlock
    from core.masks.found_areas import FoundAreas


@dataclass(frozen=True, slots=True, kw_only=True)
class Allowed:
    """Largest differences that are no mistake.

    Attributes
    ----------
    corner_um : float
        Of a corner in the file from the drawing [um].
    edge_um : float
        Of the drawing from the edges in the file [um].
    place_nm : float
        Of where a block is placed [nm].
    bounds_um : float
        Of the bounds [um].
    area_of_edge_um : float
        Of an area, for each length of edge [um].
    area_share : float
        Of an area, as a share of it.
    """

    corner_um: float
    edge_um: float
    place_nm: float
    bounds_um: float
    area_of_edge_um: float = 0.0
    area_share: float = 0.0


@dataclass(slots=True)
class Sameness:
    """What comparing the figures of all blocks has shown.

    Attributes
    ----------
    problems : list of str
        Every difference.
    area_um2 : float
        Area of the channels in the file, islands taken out, copies counted [um^2].
    island_count : int
        Islands, copies counted.
    corner_error_um : float
        Largest distance of a corner in a block of the file from what was drawn [um].
    """

    problems: list[str] = field(default_factory=list)
    area_um2: float = 0.0
    island_count: int = 0
    corner_error_um: float = 0.0


def place_problems(tree: Mapping[str, FoundBlock], drawing: MaskDrawing, *, place_nm: float) -> list[str]:
    """Return how blocks and their places differ from the plan.

    Parameters
    ----------
    tree : mapping of str to FoundBlock
        What was found.
    drawing : MaskDrawing
        What was meant.
    place_nm : float
        How far a block may stand from its place [nm].
    """
    wanted = {drawing.name_of(block) for block in drawing.blocks}
    if strange := sorted(set(tree) ^ wanted):
        return [f"blocks {', '.join(strange[:5])} are in the file or in the drawing alone"]
    return [
        f"block {drawing.name_of(block)}: {text}"
        for block in drawing.blocks
        for text in _place_problems(tree[drawing.name_of(block)], drawing, block, place_nm)
    ]


def compared_blocks(areas: FoundAreas, drawing: MaskDrawing, *, allowed: Allowed, sagitta_um: float) -> Sameness:
    """Compare what every distinct block itself holds with its own outlines.

    Parameters
    ----------
    areas : FoundAreas
        What was found, its blocks and places those of the drawing.
    drawing : MaskDrawing
        What was meant.
    allowed : Allowed
        Differences that are no mistake.
    sagitta_um : float
        How closely the drawn arcs are followed [um].
    """
    same = Sameness()
    for block in drawing.blocks:
        for layer in Layer:
            _compare_layer(same, areas, drawing, block, layer, allowed, sagitta_um)
    return same


def _compare_layer(
    same: Sameness,
    areas: FoundAreas,
    drawing: MaskDrawing,
    block: Block,
    layer: Layer,
    allowed: Allowed,
    sagitta_um: float,
) -> None:
    name, layer_name, outlines = drawing.name_of(block), LAYERS[layer].dxf_name, own_outlines(block, layer)
    if (layer_name in areas.tree[name].layers) != bool(outlines):
        same.problems.append(f"block {name}: layer {layer_name} is {'not ' * bool(outlines)}drawn on")
    elif outlines:
        agreement = _agreement(areas, name, layer, outlines, sagitta_um)
        told = _differences(agreement, outlines, allowed)
        same.problems += [f"block {name}, layer {layer_name}: {text}" for text in told]
        same.corner_error_um = max(same.corner_error_um, agreement.corner_error_um)
        if layer is Layer.CHANNELS:
            same.area_um2 += drawing.copies_of(block) * agreement.area_um2
            same.island_count += drawing.copies_of(block) * agreement.island_count


def _place_problems(found_block: FoundBlock, drawing: MaskDrawing, block: Block, place_nm: float) -> list[str]:
    """Return what is wrong with the places of the blocks that stand in a block; their order is free."""
    found = sorted(found_block.placed)
    wanted = sorted((drawing.name_of(placed.block), *drawing.shift_nm(placed)) for placed in block.placed)
    found_counts, wanted_counts = (Counter(name for name, _, _ in places) for places in (found, wanted))
    if found_counts != wanted_counts:
        names = sorted(name for name in found_counts | wanted_counts if found_counts[name] != wanted_counts[name])
        return [f"{found_counts[name]} copies of {name}, should be {wanted_counts[name]}" for name in names]
    return [
        f"{name} stands at ({x:g}, {y:g}) nm, should be ({other_x}, {other_y})"
        for (name, x, y), (_, other_x, other_y) in zip(found, wanted, strict=True)
        if abs(x - other_x) > place_nm or abs(y - other_y) > place_nm
    ]


def _agreement(
    areas: FoundAreas, name: str, layer: Layer, outlines: tuple[Outline, ...], sagitta_um: float
) -> Agreement:
    """Return the measures of one layer of a block; its area is exact where the file holds arcs."""
    layer_name, island_name = LAYERS[layer].dxf_name, ISLAND_LAYER.dxf_name
    area, area_um2 = areas.own(name, layer_name), areas.exact_area_um2(name, layer_name)
    if layer is Layer.CHANNELS and island_name in areas.tree[name].layers:
        area = area.difference(areas.own(name, island_name))
        area_um2 -= areas.exact_area_um2(name, island_name)
    return replace(compared(area, outlines, sagitta_um=sagitta_um), area_um2=area_um2)


def _differences(agreement: Agreement, outlines: tuple[Outline, ...], allowed: Allowed) -> list[str]:
    problems = []
    islands, area_um2 = sum(len(each.islands) for each in outlines), sum(abs(each.area_um2) for each in outlines)
    if agreement.part_count != len(outlines):
        problems.append(f"{agreement.part_count} separate areas, should be {len(outlines)}")
    if agreement.island_count != islands:
        problems.append(f"{agreement.island_count} islands, should be {islands}")
    area_limit = allowed.area_of_edge_um * agreement.edge_length_um + allowed.area_share * area_um2
    for what, value, limit, unit in (
        ("the area differs by", abs(agreement.area_um2 - area_um2), area_limit, "um2"),
        ("a corner is off the drawing by", agreement.corner_error_um, allowed.corner_um, "um"),
        ("an edge is off the drawing by", agreement.gap_um, allowed.edge_um, "um"),
    ):
        if not value <= limit:
            problems.append(f"{what} {value:.6g} {unit}, allowed {limit:.6g}")
    return problems
