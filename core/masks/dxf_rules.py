"""What a DXF mask must obey beyond its figures: version, units, extents, layers, kinds of entity."""

from __future__ import annotations

from math import pi, tan
from typing import TYPE_CHECKING

from core.masks.figure_rules import figure_problems
from core.masks.layers import DXF_LAYER_PATTERN
from core.masks.options import DxfVersion

if TYPE_CHECKING:
    from collections.abc import Sequence

    from core.masks.read_dxf import ReadDxf, ReadLoop

MOST_VERTICES = 128_000
LARGEST_BULGE = tan(pi / 8.0)  # a quarter turn; several readers draw arcs beyond a half turn wrongly
_CODES = {DxfVersion.R2000: "AC1015", DxfVersion.R12: "AC1009"}
_ALWAYS_THERE = {"0"}  # the format demands this layer; nothing may be drawn on it
_GRAIN_MM = 1e-9
_SLACK = 1e-9


def dxf_problems(
    read: ReadDxf,
    *,
    version: DxfVersion,
    layers: Sequence[str],
    bounds_mm: tuple[float, float, float, float],
    sagitta_mm: float,
) -> list[str]:
    """Return every broken rule of a DXF mask.

    Parameters
    ----------
    read : ReadDxf
        The file, taken apart.
    version : DxfVersion
        Version it should have.
    layers : sequence of str
        Layers that may be drawn on.
    bounds_mm : tuple of float
        (x_min, y_min, x_max, y_max) that the header should give [mm].
    sagitta_mm : float
        Chord tolerance at which crossings are looked for [mm].

    Returns
    -------
    list of str
        One sentence for each kind of problem; empty when all rules are kept.
    """
    problems = _header_problems(read, version, bounds_mm)
    problems += [f"entity {kind}; only closed polylines are allowed" for kind in read.others]
    for name in read.layers:
        if name not in _ALWAYS_THERE and name not in layers:
            problems.append(f"layer {name!r} is not used")
    for loop in read.loops:
        problems += _loop_problems(loop, layers)
    if problems:
        return list(dict.fromkeys(problems))
    for layer in layers:
        rings = [loop.chords(sagitta_mm) for loop in read.loops if loop.layer == layer]
        problems += [f"layer {layer}: {text}" for text in figure_problems(rings, grain=_GRAIN_MM)]
    return problems


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
