"""The shape of one channel: outline, islands, findings.

``build_shape`` is the one way from parameters to areas: what it returns is previewed, scored,
solved, checked and written to masks.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property, lru_cache
from typing import TYPE_CHECKING

import numpy as np

from core.errors import GeometryError
from core.findings import Finding, Severity
from core.geometry.centreline import Centreline, StagePlace, build_centreline
from core.geometry.chain import Chain, draw_chain, drawn_stages, period, walk
from core.geometry.collisions import collision_in
from core.geometry.contour import Contour, Outline
from core.geometry.measures import stage_measures
from core.geometry.shape_findings import collision_finding, early_finding

if TYPE_CHECKING:
    from core.geometry.contour import Floats
    from core.parameters import ChannelParameters


@dataclass(frozen=True)
class ChannelShape:
    """One channel as drawn.

    Attributes
    ----------
    parameters : ChannelParameters
        What was asked for.
    outline : Outline or None
        The area with exactly one hole per stage; None when a finding of severity error is there.
    findings : tuple of Finding
        What is wrong or doubtful with the shape.
    chain : Chain or None
        The short chain that was drawn, for cutting into pieces.
    """

    parameters: ChannelParameters
    outline: Outline | None
    findings: tuple[Finding, ...] = ()
    chain: Chain | None = None

    @property
    def is_usable(self) -> bool:
        """Whether there is an outline to work with."""
        return self.outline is not None

    @cached_property
    def centreline(self) -> Centreline:
        """Centre lines of all stages; for an impossible loop those of a plain channel."""
        p = self.parameters
        if self.chain is not None and p.stages > self.chain.parameters.stages:
            return long_centreline(self.chain, p.stages)
        return build_centreline(p if stage_measures(p).is_possible else replace(p, stages=0))


@lru_cache(maxsize=256)
def build_shape(parameters: ChannelParameters) -> ChannelShape:
    """Return the shape of a channel; the latest are kept, since drawing is what most answers wait for.

    Parameters
    ----------
    parameters : ChannelParameters
        Any parameter set.

    Returns
    -------
    ChannelShape
        With an outline, or with findings that name the field to change; never an exception.
    """
    early = early_finding(parameters)
    if early is not None:
        return ChannelShape(parameters, None, (early,))
    short = replace(parameters, stages=drawn_stages(parameters))
    try:
        chain = draw_chain(short)
        collision = collision_in(chain)
        if collision is not None:
            return ChannelShape(parameters, None, (collision_finding(chain, collision),), chain)
        return ChannelShape(parameters, long_outline(chain, parameters.stages), (), chain)
    except GeometryError as error:
        return ChannelShape(parameters, None, (_unclear(error),))


def _unclear(error: GeometryError) -> Finding:
    return Finding(
        code="walls_touch",
        severity=Severity.ERROR,
        message=f"{error}; raise stage_gap_um, or change loop_radius_um a little",
        field="stage_gap_um",
    )


def repeat_vector(chain: Chain) -> Floats:
    """Return the shift from the second stage of a short chain to the one a period later [um]."""
    step = period(chain.parameters)
    return chain.centreline.stages[1 + step].fork_um - chain.centreline.stages[1].fork_um


def long_outline(chain: Chain, stages: int) -> Outline:
    """Return the outline of a chain of any length from a short one.

    Parameters
    ----------
    chain : Chain
        A regular chain of ``drawn_stages`` stages.
    stages : int
        Number of stages wanted.

    Returns
    -------
    Outline
        The middle of the short chain is placed as often as needed.
    """
    outer = chain.outers[0]
    step = period(chain.parameters)
    extra = (stages - chain.parameters.stages) // step
    islands = tuple(ring.contour for ring in chain.islands)
    if extra == 0:
        return Outline(outer.contour, islands)
    shift = repeat_vector(chain)
    (top, bottom), (far_top, far_bottom) = sides_of_cut(chain, 1), sides_of_cut(chain, 1 + step)
    below, above = walk(outer, bottom, far_bottom), walk(outer, far_top, top)
    runs = [
        _shifted(walk(outer, top, bottom), 0 * shift),
        *(_shifted(below, n * shift) for n in range(extra)),
        _shifted(walk(outer, bottom, top), extra * shift),
        *(_shifted(above, n * shift) for n in reversed(range(extra))),
    ]
    ring = Contour.joined((run.vertices_um[:-1], run.bulges[:-1]) for run in runs)
    placed = [
        _shifted(islands[1 + (stage - 1) % step], (stage - 1) // step * shift) if stage else islands[0]
        for stage in range(stages)
    ]
    return Outline(ring, tuple(placed))


def long_centreline(chain: Chain, stages: int) -> Centreline:
    """Return the centre lines of a chain of any length from those of a short one.

    Parameters
    ----------
    chain : Chain
        A chain of ``drawn_stages`` stages.
    stages : int
        Number of stages wanted.

    Returns
    -------
    Centreline
        As ``build_centreline`` would walk it.
    """
    line, step, drawn = chain.centreline, period(chain.parameters), chain.parameters.stages
    shift = repeat_vector(chain)
    by_stage = {n: [s for s in line.strokes if s.stage == n] for n in range(-1, drawn)}
    strokes, places = list(by_stage[-1]), []
    for stage in range(stages):
        periods = (stages - drawn) // step if stage == stages - 1 else max(stage - 1, 0) // step
        source, by = stage - periods * step, periods * shift
        strokes += [replace(s, stage=stage, start_um=s.start_um + by, end_um=s.end_um + by) for s in by_stage[source]]
        places.append(_place_shifted(line.stages[source], by))
    inlet = replace(line.forward_inlet, point_um=line.forward_inlet.point_um + (stages - drawn) // step * shift)
    return replace(line, strokes=tuple(strokes), stages=tuple(places), forward_inlet=inlet)


def _place_shifted(place: StagePlace, by: Floats) -> StagePlace:
    old = place.placement
    return replace(
        place,
        placement=replace(old, dx_um=old.dx_um + float(by[0]), dy_um=old.dy_um + float(by[1])),
        fork_um=place.fork_um + by,
        mouth_um=place.mouth_um + by,
        bypass_section_um=place.bypass_section_um + by,
        loop_section_um=place.loop_section_um + by,
    )


def sides_of_cut(chain: Chain, stage: int) -> tuple[tuple[int, float], tuple[int, float]]:
    """Return the outer spots of a cut: above (left of the reverse flow) and below."""
    cut = chain.cuts[stage]
    is_left_loop = chain.centreline.stages[stage].side > 0
    return (cut.outer_turn, cut.outer_bypass) if is_left_loop else (cut.outer_bypass, cut.outer_turn)


def _shifted(run: Contour, shift: Floats) -> Contour:
    return Contour(run.vertices_um + np.asarray(shift), run.bulges)
