"""Where things are in a channel: its region of liquid, places for streamlines, flows for a curve."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from core.errors import SolveError
from core.findings import Severity
from core.flow.domain import FlowDomain

if TYPE_CHECKING:
    from core.geometry.shape import ChannelShape

_SAGITTA_SHARE = 5e-4  # of the channel width; far below what any mesh of the solve resolves


def channel_domain(shape: ChannelShape, *, sagitta_um: float | None = None) -> FlowDomain:
    """Return the region of liquid of a channel, ready to be solved.

    Parameters
    ----------
    shape : ChannelShape
        With an outline.
    sagitta_um : float or None
        Largest distance between an arc and its chords [um]; None for one that no mesh resolves.

    Returns
    -------
    FlowDomain
        The very outline that is drawn and written to masks, with its open ends and one pair of
        measuring sections per stage.

    Raises
    ------
    SolveError
        If the shape has no outline; names the finding.
    """
    if shape.outline is None:
        errors = [finding.message for finding in shape.findings if finding.severity is Severity.ERROR]
        raise SolveError(f"there is no outline to solve: {errors[0] if errors else 'see the findings of the shape'}")
    p, line = shape.parameters, shape.centreline
    sagitta = _SAGITTA_SHARE * p.channel_width_um if sagitta_um is None else sagitta_um
    return FlowDomain(
        outer_um=shape.outline.outer.chords(sagitta_um=sagitta),
        islands_um=tuple(island.chords(sagitta_um=sagitta) for island in shape.outline.islands),
        depth_um=p.depth_um,
        channel_width_um=p.channel_width_um,
        forward_inlet_um=line.forward_inlet.section_um,
        forward_outlet_um=line.forward_outlet.section_um,
        sections=tuple((place.bypass_section_um, place.loop_section_um) for place in line.stages),
    )


def streamline_seeds_um(shape: ChannelShape, *, is_forward: bool, lines: int = 11, per_path: int = 2) -> np.ndarray:
    """Return places through which streamlines show a flow well, shape (s, 2) [um].

    Parameters
    ----------
    shape : ChannelShape
        Whose flow is drawn.
    is_forward : bool
        Whether the flow enters at the far end of the lead in.
    lines : int
        Streamlines that start where the flow enters.
    per_path : int
        Streamlines through the middle of each loop and each bypass.
    """
    end = shape.centreline.forward_inlet if is_forward else shape.centreline.forward_outlet
    inward = -np.array([np.cos(end.outward_heading_rad), np.sin(end.outward_heading_rad)])
    seeds = [_along(end.section_um, lines) + 0.1 * end.width_um * inward]
    for place in shape.centreline.stages:
        seeds += [_along(place.loop_section_um, per_path), _along(place.bypass_section_um, per_path)]
    return np.concatenate(seeds)


def _along(chord_um: np.ndarray, count: int) -> np.ndarray:
    """Return places along a chord, the outer ones half a space from its ends."""
    share = (np.arange(count)[:, None] + 0.5) / count
    return chord_um[0] + share * (chord_um[1] - chord_um[0])


def curve_flows_ul_min(top_ul_min: float, *, through_ul_min: float, count: int = 8) -> tuple[float, ...]:
    """Return flows for a curve from near zero to a top, rising, one of them a given flow [uL/min]."""
    even = top_ul_min * np.arange(1, count + 1) / count
    nearest = int(np.argmin(np.abs(even - through_ul_min)))
    even[nearest] = through_ul_min
    return tuple(sorted(set(even.tolist())))
