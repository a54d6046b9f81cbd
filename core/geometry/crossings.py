"""Where lines and arcs cross one another, all pairs at once."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Sequence

    from core.geometry.contour import Flags, Floats, Indices
    from core.geometry.curves import Curve

# a crossing: index of the first curve, of the second, length along each [um]
Crossings = tuple["Indices", "Indices", "Floats", "Floats"]


def cut_lengths(curves: Sequence[Curve], *, tolerance: float) -> list[Floats]:
    """Return, for every curve, the lengths at which others cross it, with 0 and its own length.

    Parameters
    ----------
    curves : sequence of Curve
        Lines and arcs.
    tolerance : float
        Crossings closer than this to one another, or to an end of the curve, count as one [um].

    Returns
    -------
    list of array
        Sorted lengths from the start of each curve [um]; too short curves give an empty array.
    """
    lines = [i for i, curve in enumerate(curves) if curve.radius == 0.0]
    arcs = [i for i, curve in enumerate(curves) if curve.radius != 0.0]
    found = [
        *_line_line(curves, np.array(lines, dtype=int)),
        *_line_arc(curves, np.array(lines, dtype=int), np.array(arcs, dtype=int)),
        *_arc_arc(curves, np.array(arcs, dtype=int)),
    ]
    owner = np.concatenate([np.concatenate((i, j)) for i, j, _, _ in found]).astype(int)
    where = np.concatenate([np.concatenate((s, t)) for _, _, s, t in found])
    order = np.lexsort((where, owner))
    owner, where = owner[order], where[order]
    bounds = np.searchsorted(owner, np.arange(len(curves) + 1))
    return [_merged(where[bounds[i] : bounds[i + 1]], curve.length, tolerance) for i, curve in enumerate(curves)]


def _merged(lengths: Floats, whole: float, tolerance: float) -> Floats:
    if whole < tolerance:
        return np.empty(0)
    inner = lengths[(lengths > tolerance) & (lengths < whole - tolerance)]
    if len(inner) > 1:
        inner = inner[np.concatenate(([True], np.diff(inner) > tolerance))]
    return np.concatenate(([0.0], inner, [whole]))


def _line_line(curves: Sequence[Curve], which: Indices) -> list[Crossings]:
    p, d, length = _lines(curves, which)
    i, j = np.triu_indices(len(which), k=1)
    cross = d[i, 0] * d[j, 1] - d[i, 1] * d[j, 0]
    skew = np.abs(cross) > 1e-12
    i, j, cross = i[skew], j[skew], cross[skew]
    r = p[j] - p[i]
    s = (r[:, 0] * d[j, 1] - r[:, 1] * d[j, 0]) / cross
    t = (r[:, 0] * d[i, 1] - r[:, 1] * d[i, 0]) / cross
    hit = _within(s, length[i]) & _within(t, length[j])
    return [(which[i[hit]], which[j[hit]], s[hit], t[hit])]


def _line_arc(curves: Sequence[Curve], lines: Indices, arcs: Indices) -> list[Crossings]:
    p, d, length = _lines(curves, lines)
    centre, radius, angle, sweep = _arcs(curves, arcs)
    rel = centre[None] - p[:, None]
    along = rel[..., 0] * d[:, 0, None] + rel[..., 1] * d[:, 1, None]
    across = rel[..., 0] * d[:, 1, None] - rel[..., 1] * d[:, 0, None]
    with np.errstate(invalid="ignore"):
        half = np.sqrt(radius[None] ** 2 - across**2)
    found: list[Crossings] = []
    for sign in (-1.0, 1.0):
        s = along + sign * half
        x = p[:, None] + s[..., None] * d[:, None]
        t = _arc_length(x - centre[None], radius, angle, sweep)
        i, j = np.nonzero(_within(s, length[:, None]) & _within(t, radius * np.abs(sweep)))
        found.append((lines[i], arcs[j], s[i, j], t[i, j]))
    return found


def _arc_arc(curves: Sequence[Curve], arcs: Indices) -> list[Crossings]:
    centre, radius, angle, sweep = _arcs(curves, arcs)
    i, j = np.triu_indices(len(arcs), k=1)
    rel = centre[j] - centre[i]
    away = np.hypot(rel[:, 0], rel[:, 1])
    apart = away > 1e-9
    i, j, rel, away = i[apart], j[apart], rel[apart], away[apart]
    along = (away**2 + radius[i] ** 2 - radius[j] ** 2) / (2.0 * away)
    with np.errstate(invalid="ignore"):
        half = np.sqrt(radius[i] ** 2 - along**2)
    unit = rel / away[:, None]
    normal = np.stack((-unit[:, 1], unit[:, 0]), axis=1)
    found: list[Crossings] = []
    for sign in (-1.0, 1.0):
        x = centre[i] + along[:, None] * unit + sign * half[:, None] * normal
        s = _arc_length(x - centre[i], radius[i], angle[i], sweep[i])
        t = _arc_length(x - centre[j], radius[j], angle[j], sweep[j])
        hit = _within(s, radius[i] * np.abs(sweep[i])) & _within(t, radius[j] * np.abs(sweep[j]))
        found.append((arcs[i[hit]], arcs[j[hit]], s[hit], t[hit]))
    return found


def _lines(curves: Sequence[Curve], which: Indices) -> tuple[Floats, Floats, Floats]:
    p = np.array([curves[i].start for i in which]).reshape(-1, 2)
    d = np.array([curves[i].end for i in which]).reshape(-1, 2) - p
    length = np.hypot(d[:, 0], d[:, 1])
    return p, d / np.where(length > 0.0, length, 1.0)[:, None], length


def _arcs(curves: Sequence[Curve], which: Indices) -> tuple[Floats, Floats, Floats, Floats]:
    data = np.array([(*curves[i].centre, curves[i].radius, curves[i].angle, curves[i].sweep) for i in which])
    data = data.reshape(-1, 5)
    return data[:, :2], data[:, 2], data[:, 3], data[:, 4]


def _arc_length(spoke: Floats, radius: Floats, angle: Floats, sweep: Floats) -> Floats:
    """Return the length from the arc's start to a point on its circle (NaN stays NaN)."""
    turn = (np.arctan2(spoke[..., 1], spoke[..., 0]) - angle) * np.sign(sweep)
    # a point a hair before the start must not count as nearly a full turn
    turn = np.mod(turn + 1e-9, 2.0 * np.pi) - 1e-9
    return radius * turn


def _within(length: Floats, whole: Floats) -> Flags:
    hit: Flags = (length > -1e-6) & (length < whole + 1e-6)
    return hit
