"""What a GDSII mask must obey beyond its figures: units, names, layers, references, sizes."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

import numpy as np

from core.masks.read_gdsii import OPENING

if TYPE_CHECKING:
    from collections.abc import Collection

    from core.masks.read_gdsii import ReadElement, ReadGdsii

CELL_NAME = re.compile(r"[A-Z0-9_]{1,27}")
MOST_PAIRS = 200  # of the first definition of the format, the closing pair included
DEEPEST_HIERARCHY = 16
MOST_CELLS = 8192
FURTHEST_NM = 2_000_000_000
_EXACT = 1e-12


def gdsii_problems(read: ReadGdsii, *, top: str, layers: Collection[int], grid_nm: int = 1) -> list[str]:
    """Return every broken rule of a GDSII mask but those of figures and what they cover.

    Parameters
    ----------
    read : ReadGdsii
        The file, taken apart.
    top : str
        Name that the one top cell should have.
    layers : collection of int
        Layers that may be drawn on.
    grid_nm : int
        Every corner and place should be a multiple of it [nm].

    Returns
    -------
    list of str
        One sentence for each kind of problem; empty when all rules are kept.
    """
    problems = _library_problems(read) + _hierarchy_problems(read, top)
    for name, elements in read.cells.items():
        for element in elements:
            problems += [f"cell {name}: {text}" for text in _element_problems(element, layers, grid_nm)]
    if not problems and _reach_nm(read, top, {}) > FURTHEST_NM:
        problems.append("figures further than 2 m from the origin")
    return list(dict.fromkeys(problems))


def _reach_nm(read: ReadGdsii, name: str, known: dict[str, int]) -> int:
    """Return a bound on how far from its origin anything in a cell lies [nm]."""
    if name not in known:
        known[name] = 0
        for element in read.cells[name]:
            reach = int(np.abs(element.points_nm).max(initial=0))
            if element.target:
                reach += _reach_nm(read, element.target, known)
            known[name] = max(known[name], reach)
    return known[name]


def _library_problems(read: ReadGdsii) -> list[str]:
    problems = []
    if read.opening != OPENING:
        problems.append("the file does not open with version, date, name and units")
    if read.version != 600:
        problems.append(f"version is {read.version}, should be 600")
    if abs(read.database_unit_m / 1e-9 - 1.0) > _EXACT or abs(read.user_unit / 1e-3 - 1.0) > _EXACT:
        problems.append(
            f"units are {read.database_unit_m:g} m and {read.user_unit:g}, should be 1 nm grid and micrometres"
        )
    problems += [f"cell name {name!r} is not safe everywhere" for name in read.cells if not CELL_NAME.fullmatch(name)]
    problems += [f"cell {name} is defined twice" for name in read.repeated_names]
    if len(read.cells) > MOST_CELLS:
        problems.append(f"{len(read.cells)} cells, more than {MOST_CELLS}")
    return problems


def _hierarchy_problems(read: ReadGdsii, top: str) -> list[str]:
    wanted = set().union(*(read.targets(name) for name in read.cells))
    missing = sorted(wanted - set(read.cells))
    problems = [f"reference to cell {name}, which is not in the file" for name in missing]
    tops = read.top_cells()
    if tops != [top]:
        problems.append(f"top cells are {', '.join(tops) or 'none'}; should be {top} alone")
    elif read.depth(top) > DEEPEST_HIERARCHY:
        problems.append(f"references are more than {DEEPEST_HIERARCHY} levels deep")
    return problems


def _element_problems(element: ReadElement, layers: Collection[int], grid_nm: int) -> list[str]:
    problems = _kind_problems(element, layers)
    if (element.points_nm % grid_nm).any():
        problems.append(f"{element.kind} with a corner or place off the grid of {grid_nm} nm")
    return problems


def _kind_problems(element: ReadElement, layers: Collection[int]) -> list[str]:
    if element.kind == "SREF":
        problems = [f"reference with {change}; only shifts are allowed" for change in element.changes]
        return problems if len(element.points_nm) == 1 else [*problems, "reference without one place"]
    if element.kind != "BOUNDARY":
        return [f"element {element.kind}; only polygons and single references are allowed"]
    problems = []
    if element.layer not in layers or element.datatype != 0:
        problems.append(
            f"figure on layer {element.layer}, data type {element.datatype}; "
            f"should be {' or '.join(map(str, sorted(layers)))}, 0"
        )
    pairs = element.points_nm
    if len(pairs) < 4 or (pairs[0] != pairs[-1]).any():
        problems.append("open figure")
    if len(pairs) > MOST_PAIRS:
        problems.append(f"figure with {len(pairs)} vertex pairs, more than {MOST_PAIRS}")
    return problems
