"""Arcs cut into shorter ones, without moving them."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from core.geometry.contour import LARGEST_SWEEP, Contour, arc_data

if TYPE_CHECKING:
    from collections.abc import Sequence

    from core.geometry.contour import Floats

_QUARTER = np.pi / 2.0
_ROUND_OFF = 1e-9  # shares of an arc this near to its ends are the ends


def with_short_arcs(contour: Contour) -> Contour:
    """Return the same ring with every arc of more than a quarter turn cut into equal parts."""
    sweep = arc_data(contour)[3]
    parts = np.maximum(1, np.ceil(np.abs(sweep) / LARGEST_SWEEP - _ROUND_OFF)).astype(int)
    return _cut(contour, [np.arange(1, count) / count for count in parts])


def with_outermost_points(contour: Contour) -> Contour:
    """Return the same ring with a vertex where an arc turns back along x or y, so that chords keep the bounds."""
    _, _, start, sweep = arc_data(contour)
    return _cut(contour, [_outermost(*arc) for arc in zip(start, sweep, strict=True)])


def _outermost(start: float, sweep: float) -> Floats:
    """Return the shares of a sweep at which an arc points along an axis, in order."""
    if sweep == 0.0:
        return np.empty(0)
    low, high = sorted((start, start + sweep))
    angles = _QUARTER * np.arange(np.ceil(low / _QUARTER), np.floor(high / _QUARTER) + 1.0)
    shares = np.sort((angles - start) / sweep)
    return shares[(shares > _ROUND_OFF) & (shares < 1.0 - _ROUND_OFF)]


def _cut(contour: Contour, shares: Sequence[Floats]) -> Contour:
    """Return the ring with each edge cut at shares of its sweep; edges without any stay to the last bit."""
    centre, radius, start, sweep = arc_data(contour)
    parts = []
    for k, inner in enumerate(shares):
        vertices, bulges = contour.vertices_um[k : k + 1], contour.bulges[k : k + 1]
        if len(inner):
            angle = start[k] + sweep[k] * inner
            on_arc = centre[k] + radius[k] * np.stack((np.cos(angle), np.sin(angle)), axis=1)
            vertices = np.concatenate((vertices, on_arc))
            bulges = np.tan(0.25 * sweep[k] * np.diff(inner, prepend=0.0, append=1.0))
        parts.append((vertices, bulges))
    return Contour.joined(parts)
