"""A second reader of DXF tags, for the tests alone, and the rules as it sees them.

It shares nothing with the reader that ships: other grouping, other data, straight from the tags.
"""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from math import pi, tan
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from pathlib import Path

Tags = list[tuple[int, str]]
CODES = {"R2000": "AC1015", "R12": "AC1009"}


@dataclass
class Drawing:
    """What the tags say."""

    header: dict[str, Tags] = field(default_factory=dict)
    layers: list[str] = field(default_factory=list)
    blocks: dict[str, list[Tags]] = field(default_factory=dict)
    entities: list[Tags] = field(default_factory=list)
    block_heads: list[Tags] = field(default_factory=list)


def tagged(path: Path) -> Drawing:
    """Return a DXF file as its tags."""
    lines = path.read_text("ascii").split("\n")
    tags = [(int(code), value.strip()) for code, value in zip(lines[0:-1:2], lines[1::2], strict=False)]
    assert tags[-1] == (0, "EOF")
    drawing, section, target = Drawing(), "", None
    starts = [k for k, (code, _) in enumerate(tags) if code == 0]
    for start, end in zip(starts, [*starts[1:], len(tags)], strict=True):
        entity = tags[start:end]
        kind = entity[0][1]
        if kind == "SECTION":
            section = entity[1][1]
            if section == "HEADER":
                names = [k for k, (code, _) in enumerate(entity) if code == 9]
                for a, b in zip(names, [*names[1:], len(entity)], strict=True):
                    drawing.header[entity[a][1]] = entity[a + 1 : b]
        elif kind == "ENDSEC":
            section = ""
        elif section == "TABLES" and kind == "LAYER":
            drawing.layers.append(first(entity, 2))
        elif section == "BLOCKS" and kind == "BLOCK":
            target = drawing.blocks.setdefault(first(entity, 2), [])
            drawing.block_heads.append(entity)
        elif section == "BLOCKS" and kind != "ENDBLK" and target is not None:
            target.append(entity)
        elif section == "ENTITIES":
            drawing.entities.append(entity)
    drawing.blocks = {name: found for name, found in drawing.blocks.items() if not name.startswith(("*", "$"))}
    return drawing


def first(entity: Tags, code: int, default: str = "") -> str:
    """Return the first value of a code."""
    return next((value for found, value in entity if found == code), default)


def corners_of(entities: list[Tags], place: int) -> list[tuple[float, float, float]]:
    """Return (x, y, bulge) of the polyline at a place in a list of entities."""
    entity = entities[place]
    if entity[0][1] == "POLYLINE":
        found = []
        for vertex in entities[place + 1 :]:
            if vertex[0][1] != "VERTEX":
                break
            found.append(tuple(float(first(vertex, code, "0")) for code in (10, 20, 42)))
        return found
    xs = [k for k, (code, _) in enumerate(entity) if code == 10]
    return [
        tuple(float(first(entity[a:b], code, "0")) for code in (10, 20, 42))
        for a, b in zip(xs, [*xs[1:], len(entity)], strict=True)
    ]


def objections(path: Path, *, version: str, layers: tuple[str, ...], is_flat: bool = False) -> list[str]:
    """Return which rules for DXF masks a file breaks, its figures apart."""
    drawing = tagged(path)
    found = []
    if first(drawing.header["$ACADVER"], 1) != CODES[version]:
        found.append("version")
    if version == "R2000" and first(drawing.header.get("$INSUNITS", []), 70) != "4":
        found.append("unit")
    found += [f"layer {name}" for name in drawing.layers if name not in {"0", *layers}]
    spaces = [drawing.entities, *drawing.blocks.values()]
    for entities in spaces:
        for place, entity in enumerate(entities):
            found += _entity_objections(entities, place, entity, drawing, layers)
    names = list(drawing.blocks)
    heads = [first(head, 2) for head in drawing.block_heads]
    found += [f"block {name}" for name in names if name in drawing.layers or heads.count(name) > 1]
    found += [f"block {name}" for name in names if not re.fullmatch("[A-Z0-9_]{1,31}", name)]
    bases = [head for head in drawing.block_heads if any(float(first(head, code, "0")) for code in (10, 20))]
    found += ["base point" for _ in bases]
    used = {first(entity, 2) for entities in spaces for entity in entities if entity[0][1] == "INSERT"}
    found += [f"block {name} unused" for name in names if name not in used]
    if is_flat and names:
        found.append("not flat")
    return found


def _entity_objections(
    entities: list[Tags], place: int, entity: Tags, drawing: Drawing, layers: tuple[str, ...]
) -> list[str]:
    kind, layer = entity[0][1], first(entity, 8, "0")
    found = ["paper"] if first(entity, 67) == "1" else []
    if kind in {"VERTEX", "SEQEND"}:
        return [*found, "width"] if any(code in {40, 41} and float(value) for code, value in entity) else found
    if layer not in layers or not re.fullmatch("[A-Z][A-Z0-9_-]{0,7}", layer):
        found.append(f"layer {layer} of an entity")
    if kind == "INSERT":
        wanted = {41: 1.0, 42: 1.0, 43: 1.0, 50: 0.0, 70: 1.0, 71: 1.0}
        if any(code in wanted and float(value) != wanted[code] for code, value in entity):
            found.append("more than a shift")
        return found if first(entity, 2) in drawing.blocks else [*found, "dangling"]
    if kind not in {"LWPOLYLINE", "POLYLINE"}:
        return [*found, kind]
    if not int(first(entity, 70, "0")) & 1:
        found.append("open")
    if any(code in {40, 41, 43} and float(value) for code, value in entity):
        found.append("width")
    corners = corners_of(entities, place)
    if kind == "LWPOLYLINE" and int(first(entity, 90)) != len(corners):
        found.append("count")
    if len(corners) > 128_000 or any(abs(bulge) > tan(pi / 8.0) * (1.0 + 1e-6) for _, _, bulge in corners):
        found.append("arc or length")
    return found
