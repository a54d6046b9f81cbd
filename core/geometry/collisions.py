"""Findings of shape: parts that collide, vanish or cannot close."""

from __future__ import annotations

from dataclasses import replace
from math import cos, radians, sin
from typing import TYPE_CHECKING

import numpy as np

from core.errors import GeometryError
from core.findings import Finding, Severity
from core.geometry.centreline import Part
from core.geometry.chain import Chain, draw_chain
from core.geometry.measures import stage_measures

if TYPE_CHECKING:
    from core.geometry.contour import Floats
    from core.geometry.curves import Ring
    from core.parameters import ChannelParameters

# Loops that arrive more slantwise than this merge with the bypass over a great length.
SMALLEST_MOUTH_DEG = 10.0
LARGEST_MOUTH_DEG = 170.0


def _error(code: str, field: str, message: str, **place: float | None) -> Finding:
    return Finding(code=code, severity=Severity.ERROR, message=message, field=field, **place)


def early_findings(parameters: ChannelParameters) -> tuple[Finding, ...]:
    """Return what is wrong with a parameter set before anything is drawn.

    Parameters
    ----------
    parameters : ChannelParameters
        Any set.

    Returns
    -------
    tuple of Finding
        Empty when a stage can be drawn.
    """
    if parameters.stages == 0:
        return ()
    # in this order: each check may rely on those before it
    for check in (_bend, _mouth, _leg, _bypass, _turn):
        finding = check(parameters)
        if finding is not None:
            return (finding,)
    return ()


def _bend(p: ChannelParameters) -> Finding | None:
    if p.run_bend_deg <= p.loop_angle_deg:
        return None
    return _error(
        "bend_exceeds_angle",
        "run_bend_deg",
        f"run_bend_deg is {p.run_bend_deg:g}, more than loop_angle_deg ({p.loop_angle_deg:g}): the leg would bend "
        f"away from the loop's side; lower run_bend_deg to at most {p.loop_angle_deg:g} or raise loop_angle_deg",
    )


def _mouth(p: ChannelParameters) -> Finding | None:
    mouth = stage_measures(p).mouth_angle_deg
    if SMALLEST_MOUTH_DEG <= mouth <= LARGEST_MOUTH_DEG:
        return None
    low, high = p.loop_angle_deg + SMALLEST_MOUTH_DEG, p.loop_angle_deg + LARGEST_MOUTH_DEG
    change = f"raise it to at least {low:g}" if mouth < SMALLEST_MOUTH_DEG else f"lower it to at most {high:g}"
    return _error(
        "loop_misses_bypass",
        "loop_turn_deg",
        f"loop_turn_deg is {p.loop_turn_deg:g}: with loop_angle_deg {p.loop_angle_deg:g} the loop does not come "
        f"back to the bypass; {change}",
    )


def _leg(p: ChannelParameters) -> Finding | None:
    measures = stage_measures(p)
    if measures.leg_length_um >= 0.0:
        return None
    a, t = radians(p.loop_angle_deg), radians(p.loop_turn_deg)
    needed = p.loop_radius_um * (cos(a - t) - cos(a)) / sin(t - a)
    return _error(
        "leg_negative",
        "return_length_um",
        f"the loop's leg would have length {measures.leg_length_um:.4g} um; raise return_length_um to at least "
        f"{np.ceil(needed):g}, or raise loop_turn_deg, or lower loop_angle_deg",
        value_um=measures.leg_length_um,
        limit_um=0.0,
    )


def _bypass(p: ChannelParameters) -> Finding | None:
    measures = stage_measures(p)
    least = p.channel_width_um
    if measures.bypass_length_um > least:
        return None
    return _error(
        "bypass_vanishes",
        "loop_radius_um",
        f"the bypass would be {measures.bypass_length_um:.4g} um long, no longer than the channel is wide "
        f"({least:g} um); raise loop_radius_um, or lower loop_turn_deg or return_length_um",
        value_um=measures.bypass_length_um,
        limit_um=least,
    )


def _turn(p: ChannelParameters) -> Finding | None:
    limit = 0.5 * p.loop_width_um + max(p.nose_radius_um, 0.01)
    if p.loop_radius_um > limit:
        return None
    return _error(
        "turn_too_tight",
        "loop_radius_um",
        f"loop_radius_um is {p.loop_radius_um:g}: with loop_width_um {p.loop_width_um:g} and nose_radius_um "
        f"{p.nose_radius_um:g} nothing of the island is left inside the turn; raise loop_radius_um above {limit:g}, "
        f"or lower loop_width_um or nose_radius_um",
        value_um=p.loop_radius_um,
        limit_um=limit,
    )


def collisions(chain: Chain) -> tuple[Finding, ...]:
    """Return what collides or vanishes in a chain that was drawn.

    Parameters
    ----------
    chain : Chain
        Rings of a short chain.

    Returns
    -------
    tuple of Finding
        Empty when there is one outer ring, one regular island per stage, and every loop meets
        only its own bypass and the straight after it.
    """
    stages = chain.parameters.stages
    if len(chain.outers) != 1 or _ends_cut(chain):
        return (_lead(chain),)
    if stages == 0:
        return ()
    strange = [ring for ring in chain.holes if len(chain.stages_of(ring) - {-1}) != 1 or -1 in chain.stages_of(ring)]
    if strange:
        return (_strange_hole(chain, strange[0]),)
    owners = sorted(min(chain.stages_of(ring)) for ring in chain.holes)
    if owners != list(range(stages)):
        return (_wrong_islands(chain, owners),)
    try:
        cuts = chain.cuts
    except GeometryError:
        return (_runs_into_next(chain),)
    return () if len(cuts) == stages and _tips_are_near(chain) else (_runs_into_next(chain),)


def _ends_cut(chain: Chain) -> bool:
    """Return whether something else covers part of an open end."""
    width = chain.parameters.channel_width_um
    for ring in chain.outers:
        lengths = [curve.length for curve in ring.curves if curve.wall.face == "end"]
        if len(lengths) == 2 and all(abs(length - width) < 0.002 for length in lengths):
            return False
    return True


def _lead(chain: Chain) -> Finding:
    p = chain.parameters
    enough = 2.0 * (p.channel_width_um + p.loop_width_um)
    name = "lead_out_um" if p.lead_out_um < p.lead_in_um else "lead_in_um"
    return _error(
        "lead_too_short",
        name,
        f"{name} is {getattr(p, name):g}: a loop reaches the open end of a lead; raise {name} "
        f"(try {max(enough, 2 * getattr(p, name)):g})",
        value_um=getattr(p, name),
    )


def _middle(ring: Ring) -> dict[str, float]:
    x0, y0, x1, y1 = ring.contour.bounds_um
    return {"x_um": 0.5 * (x0 + x1), "y_um": 0.5 * (y0 + y1)}


def _strange_hole(chain: Chain, ring: Ring) -> Finding:
    p = chain.parameters
    if -1 in chain.stages_of(ring) or all(s == p.stages - 1 for s in chain.stages_of(ring)):
        return _error(
            "loop_meets_lead",
            "loop_turn_deg",
            f"a loop runs into a lead; lower loop_turn_deg (now {p.loop_turn_deg:g}) or raise loop_angle_deg "
            f"(now {p.loop_angle_deg:g})",
            **_middle(ring),
        )
    return _runs_into_next(chain, ring)


def _runs_into_next(chain: Chain, ring: Ring | None = None) -> Finding:
    p = chain.parameters
    place = _middle(ring) if ring else _place(chain.centreline.stages[0].mouth_um)
    reach = p.stage_gap_um + p.channel_width_um + p.loop_width_um
    return _error(
        "loop_meets_next_stage",
        "stage_gap_um",
        f"a loop runs into the next stage: stage_gap_um is {p.stage_gap_um:g}; raise it (try {reach:g}), or lower "
        f"run_bend_deg or loop_turn_deg",
        value_um=p.stage_gap_um,
        **place,
    )


def _place(point: Floats) -> dict[str, float]:
    return {"x_um": float(point[0]), "y_um": float(point[1])}


def _wrong_islands(chain: Chain, owners: list[int]) -> Finding:
    p = chain.parameters
    missing = next((k for k in range(p.stages) if k not in owners), None)
    if missing is None:  # some stage has two holes
        twice = next(k for k in owners if owners.count(k) > 1)
        return _island(chain, twice, "falls into two parts")
    return _island(chain, missing, "disappears")


def _island(chain: Chain, stage: int, what: str) -> Finding:
    p = chain.parameters
    place = chain.centreline.stages[stage]
    middle = _place(0.5 * (place.fork_um + place.mouth_um))
    if p.nose_radius_um > 0.0 and not collisions(draw_chain(replace(p, nose_radius_um=0.0))):
        return _error(
            "nose_too_round",
            "nose_radius_um",
            f"the island {what} when its corners are rounded: nose_radius_um is {p.nose_radius_um:g}; lower it or "
            f"raise loop_radius_um",
            value_um=p.nose_radius_um,
            **middle,
        )
    return _error(
        "island_vanishes",
        "loop_radius_um",
        f"the island between loop and bypass {what}; raise loop_radius_um (now {p.loop_radius_um:g}) or lower "
        f"channel_width_um or loop_width_um",
        value_um=p.loop_radius_um,
        **middle,
    )


def _tips_are_near(chain: Chain) -> bool:
    """Return whether each loop's outer wall ends on the straight after its own mouth.

    Just behind the mouth the loop's outer wall meets the wall of the gap, of a lead, or of the
    next bypass where it bends towards the loop. Any other neighbour means that loop and next
    stage have grown into one.
    """
    curves = [c for c in chain.outers[0].curves if c.wall.stroke >= 0 and c.wall.face in ("left", "right")]
    for index, curve in enumerate(curves):
        tag = chain.tags[curve.wall.stroke]
        if tag.part not in (Part.LEG, Part.TURN, Part.RETURN):
            continue
        for neighbour in (curves[index - 1], curves[(index + 1) % len(curves)]):
            other = chain.tags[neighbour.wall.stroke]
            if other.part in (Part.LEG, Part.TURN, Part.RETURN) and other.stage != tag.stage:
                return False
            if other.part in (Part.BYPASS, Part.GAP) and other.stage not in (tag.stage - 1, tag.stage, tag.stage + 1):
                return False
    return True
