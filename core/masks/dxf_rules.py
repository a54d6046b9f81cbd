"""What a DXF mask must obey beyond its figures: version, units, extents, layers, blocks, kinds of entity."""

from __future__ import annotations

import re
from itertools import pairwise
from math import pi, tan
from typing import TYPE_CHECKING

from core.fabrication.choices import DxfVersion
from core.masks.layers import DXF_LAYER_PATTERN

if TYPE_CHECKING:
    from collections.abc import Sequence

    from core.masks.read_dxf import ReadDxf, ReadInsert
    from core.masks.read_loop import ReadLoop

MOST_VERTICES = 128_000
LARGEST_BULGE = tan(pi / 8.0)  # a quarter turn; several readers draw arcs beyond a half turn wrongly
_CODES = {DxfVersion.R2000: "AC1015", DxfVersion.R12: "AC1009"}
_ALWAYS_THERE = {"0"}  # the format demands this layer; nothing may be drawn on it
MOST_BLOCKS, DEEPEST_INSERTS = 8192, 16
BLOCK_NAME = re.compile(r"[A-Z0-9_]{1,31}")  # the longest that R12 takes
_SLACK = 1e-9


def dxf_problems(
    read: ReadDxf,
    *,
    version: DxfVersion,
    layers: Sequence[str],
    bounds_mm: tuple[float, float, float, float],
    is_flat: bool = False,
) -> list[str]:
    """Return every broken rule of a DXF mask but those of figures and what they cover.

    Parameters
    ----------
    read : ReadDxf
        The file, taken apart.
    version : DxfVersion
        Version it should have.
    layers : sequence of str
        Layers that must be drawn on, and no others.
    bounds_mm : tuple of float
        (x_min, y_min, x_max, y_max) that the header should give [mm].
    is_flat : bool
        No blocks are allowed.

    Returns
    -------
    list of str
        One sentence for each kind of problem; empty when all rules are kept.
    """
    problems = _header_problems(read, version, bounds_mm)
    problems += [f"entity {kind}; only closed polylines and inserts are allowed" for kind in read.others]
    drawn = {loop.layer for loop in read.loops}
    for name in read.layers:
        if name not in _ALWAYS_THERE and name not in layers:
            problems.append(f"layer {name!r} is not used")
    problems += [f"layer {name}: nothing is drawn on the layer" for name in layers if name not in drawn]
    for loop in read.loops:
        problems += _loop_problems(loop, layers)
    problems += _block_problems(read, layers, is_flat=is_flat)
    return list(dict.fromkeys(problems))


def order_problems(read: ReadDxf, order: Sequence[str]) -> list[str]:
    """Return what is wrong with the order of layers in a flat file for a cutter.

    Parameters
    ----------
    read : ReadDxf
        The file, taken apart.
    order : sequence of str
        Layers in the order of working.
    """
    for first, second in pairwise(loop.layer for loop in read.model.loops):
        if order.index(first) > order.index(second):
            return [f"a figure of layer {first} comes before one of layer {second}"]
    return []


def _block_problems(read: ReadDxf, layers: Sequence[str], *, is_flat: bool) -> list[str]:
    problems = [f"block {name} is defined twice" for name in read.repeated_names]
    problems += [f"block {name} has the name of a layer" for name in read.blocks if name in read.layers]
    problems += [
        f"block name {name!r} is not safe everywhere" for name in read.blocks if not BLOCK_NAME.fullmatch(name)
    ]
    problems += [f"block {name} has a base point of its own" for name, b in read.blocks.items() if b.base != (0.0, 0.0)]
    inserts = [insert for space in read.spaces for insert in space.inserts]
    for insert in inserts:
        problems += _insert_problems(insert, read, layers)
    if is_flat and (read.blocks or inserts):
        problems.append("blocks in a file that should be flat")
    used = {insert.name for insert in inserts}
    problems += [f"block {name} is not used" for name in read.blocks if name not in used]
    if len(read.blocks) > MOST_BLOCKS:
        problems.append(f"{len(read.blocks)} blocks, more than {MOST_BLOCKS}")
    if not problems and _depth(read) > DEEPEST_INSERTS:
        problems.append(f"inserts are more than {DEEPEST_INSERTS} levels deep")
    return problems


def _insert_problems(insert: ReadInsert, read: ReadDxf, layers: Sequence[str]) -> list[str]:
    problems = []
    if insert.name not in read.blocks:
        problems.append(f"insert of block {insert.name}, which is not in the file")
    if not insert.is_plain:
        problems.append(f"insert of {insert.name} that does more than shift")
    if insert.layer not in layers:
        problems.append(f"insert of {insert.name} on layer {insert.layer!r}; should be on {', '.join(layers)}")
    if insert.in_paper_space:
        problems.append("insert in paper space")
    return problems


def _depth(read: ReadDxf) -> int:
    """Return the number of levels of inserts; one that leads back to itself counts as too deep."""
    level, names = 0, {insert.name for insert in read.model.inserts}
    while names and level <= DEEPEST_INSERTS:
        level += 1
        names = {insert.name for name in names for insert in read.blocks[name].inserts}
    return level


def _header_problems(read: ReadDxf, version: DxfVersion, bounds_mm: tuple[float, float, float, float]) -> list[str]:
    problems = []
    if not (read.has_end and read.is_ascii):
        problems.append("the file is cut short or holds other than plain ASCII")
    if read.header.get("$ACADVER") != [_CODES[version]]:
        problems.append(f"version is {read.header.get('$ACADVER')}, should be {_CODES[version]}")
    if version is DxfVersion.R2000 and read.header.get("$INSUNITS") != ["4"]:
        problems.append(f"$INSUNITS is {read.header.get('$INSUNITS')}, should be 4 for millimetres")
    found = [*read.header.get("$EXTMIN", [])[:2], *read.header.get("$EXTMAX", [])[:2]]
    reach = max(map(abs, bounds_mm))
    is_right = len(found) == 4 and all(
        abs(float(value) - wanted) <= _SLACK * reach for value, wanted in zip(found, bounds_mm, strict=True)
    )
    return problems if is_right else [*problems, "the extents in the header are not those of the drawing"]


def _loop_problems(loop: ReadLoop, layers: Sequence[str]) -> list[str]:
    problems = []
    if not loop.is_closed:
        problems.append("open figure")
    if loop.widest > 0.0:
        problems.append(f"polyline with a width of {loop.widest:g}")
    if loop.in_paper_space:
        problems.append("figure in paper space")
    if loop.layer not in layers or not DXF_LAYER_PATTERN.fullmatch(loop.layer):
        problems.append(f"figure on layer {loop.layer!r}; should be on {', '.join(layers)}")
    if len(loop.corners) > MOST_VERTICES:
        problems.append(f"figure with {len(loop.corners)} vertices, more than {MOST_VERTICES}")
    if loop.declared_count not in (-1, len(loop.corners)):
        problems.append(f"figure claims {loop.declared_count} vertices and has {len(loop.corners)}")
    if any(abs(bulge) > LARGEST_BULGE * (1.0 + 1e-6) for _, _, bulge in loop.corners):
        problems.append("arc of more than a quarter turn")
    return problems
