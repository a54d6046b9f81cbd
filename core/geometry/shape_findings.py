"""Findings of shape in words: what is wrong, the field to change, and the nearest value that cures it."""

from __future__ import annotations

from dataclasses import replace
from math import ceil, cos, floor, inf, radians, sin
from typing import TYPE_CHECKING

from core.errors import GeometryError
from core.findings import Finding, Severity
from core.geometry.chain import Chain, draw_chain, drawn_stages
from core.geometry.collisions import Collision, collision_in
from core.geometry.measures import stage_measures
from core.parameters import CHANNEL_FIELDS

if TYPE_CHECKING:
    from collections.abc import Iterable

    from core.parameters import ChannelParameters

# Loops that arrive more slantwise than this merge with the bypass over a great length.
SMALLEST_MOUTH_DEG = 10.0
LARGEST_MOUTH_DEG = 170.0

_LARGER = (1.1, 1.25, 1.5, 2.0, 3.0, 5.0)
_SMALLER = (0.75, 0.5, 0.25, 0.0)


def early_finding(parameters: ChannelParameters) -> Finding | None:
    """Return what is wrong with a parameter set before anything is drawn.

    Parameters
    ----------
    parameters : ChannelParameters
        Any set.

    Returns
    -------
    Finding or None
        None when a stage can be drawn.
    """
    if parameters.stages == 0:
        return None
    # in this order: each check may rely on those before it
    checks = (_bend, _mouth, _leg, _bypass, _turn)
    return next((finding for check in checks if (finding := check(parameters)) is not None), None)


def collision_finding(chain: Chain, collision: Collision) -> Finding:
    """Return a collision in words, with a value that cures it where one was found.

    Parameters
    ----------
    chain : Chain
        The chain that was drawn.
    collision : Collision
        What is wrong with it.

    Returns
    -------
    Finding
        Of severity error.
    """
    tell = {
        "lead_too_short": _lead,
        "loop_meets_lead": _meets_lead,
        "loop_meets_next_stage": _meets_next,
        "island_disappears": _island,
        "island_splits": _island,
    }[collision.code]
    return replace(tell(chain.parameters, collision), x_um=collision.x_um, y_um=collision.y_um)


def is_drawable(parameters: ChannelParameters) -> bool:
    """Return whether a parameter set gives a good outline."""
    if early_finding(parameters) is not None:
        return False
    try:
        return collision_in(draw_chain(replace(parameters, stages=drawn_stages(parameters)))) is None
    except GeometryError:
        return False


def _error(code: str, field: str, message: str, *, value: float | None = None, limit: float | None = None) -> Finding:
    return Finding(code=code, severity=Severity.ERROR, message=message, field=field, value_um=value, limit_um=limit)


def _cure(parameters: ChannelParameters, field: str, values: Iterable[float]) -> str:
    """Return " (to 250, say)" for the first value that gives a good outline, or nothing."""
    spec = CHANNEL_FIELDS[field]
    for value in values:
        rounded = float(f"{value:.3g}")
        is_allowed = spec.minimum <= rounded <= spec.maximum
        if is_allowed and is_drawable(parameters.with_values({field: rounded})):
            return f" (to {rounded:g}, say)"
    return ""


def _up(value: float) -> float:
    return ceil(value * 100.0) / 100.0


def _down(value: float) -> float:
    return floor(value * 100.0) / 100.0


def _bend(p: ChannelParameters) -> Finding | None:
    if p.run_bend_deg <= p.loop_angle_deg:
        return None
    return _error(
        "bend_exceeds_angle",
        "run_bend_deg",
        f"run_bend_deg is {p.run_bend_deg:g}, more than loop_angle_deg ({p.loop_angle_deg:g}): the leg would bend "
        f"away from the loop's side; lower run_bend_deg to at most {_down(p.loop_angle_deg):.8g} or raise "
        "loop_angle_deg",
    )


def _mouth(p: ChannelParameters) -> Finding | None:
    mouth = stage_measures(p).mouth_angle_deg
    if SMALLEST_MOUTH_DEG <= mouth <= LARGEST_MOUTH_DEG:
        return None
    low, high = _up(p.loop_angle_deg + SMALLEST_MOUTH_DEG), _down(p.loop_angle_deg + LARGEST_MOUTH_DEG)
    change = f"raise it to at least {low:.8g}" if mouth < SMALLEST_MOUTH_DEG else f"lower it to at most {high:.8g}"
    return _error(
        "loop_misses_bypass",
        "loop_turn_deg",
        f"loop_turn_deg is {p.loop_turn_deg:g}: with loop_angle_deg {p.loop_angle_deg:g} the loop does not come "
        f"back to the bypass; {change}",
    )


def _leg(p: ChannelParameters) -> Finding | None:
    leg = stage_measures(p).leg_length_um
    if leg >= 0.0:
        return None
    a, t = radians(p.loop_angle_deg), radians(p.loop_turn_deg)
    needed = p.loop_radius_um * (cos(a - t) - cos(a)) / sin(t - a)
    return _error(
        "leg_negative",
        "return_length_um",
        f"the loop's leg would have length {leg:.4g} um; raise return_length_um to at least {ceil(needed):g}, or "
        f"raise loop_turn_deg, or lower loop_angle_deg",
        value=leg,
        limit=0.0,
    )


def _bypass(p: ChannelParameters) -> Finding | None:
    length, least = stage_measures(p).bypass_length_um, p.channel_width_um
    if length > least:
        return None
    # the length is linear in the radius
    shorter = replace(p, loop_radius_um=CHANNEL_FIELDS["loop_radius_um"].minimum)
    reach = p.loop_radius_um - shorter.loop_radius_um
    slope = (length - stage_measures(shorter).bypass_length_um) / reach if reach else 0.0
    needed = p.loop_radius_um + (1.05 * least - length) / slope if slope > 0.0 else inf
    cure = f" (to {ceil(needed):g}, say)" if needed < CHANNEL_FIELDS["loop_radius_um"].maximum else ""
    return _error(
        "bypass_vanishes",
        "loop_radius_um",
        f"the bypass would be {length:.4g} um long, no longer than the channel is wide ({least:g} um); raise "
        f"loop_radius_um{cure}, or lower loop_turn_deg or return_length_um",
        value=length,
        limit=least,
    )


def _turn(p: ChannelParameters) -> Finding | None:
    limit = 0.5 * p.loop_width_um + max(p.nose_radius_um, 0.01)
    if p.loop_radius_um > limit:
        return None
    return _error(
        "turn_too_tight",
        "loop_radius_um",
        f"loop_radius_um is {p.loop_radius_um:g}: with loop_width_um {p.loop_width_um:g} and nose_radius_um "
        f"{p.nose_radius_um:g} nothing of the island is left inside the turn; raise loop_radius_um to at "
        f"least {_up(limit + 0.01):.8g}, or lower loop_width_um or nose_radius_um",
        value=p.loop_radius_um,
        limit=limit,
    )


def _lead(p: ChannelParameters, _: Collision) -> Finding:
    name = "lead_out_um" if p.lead_out_um < p.lead_in_um else "lead_in_um"
    value = float(getattr(p, name))
    step = p.channel_width_um + p.loop_width_um
    cure = _cure(p, name, (value + step * n for n in (0.5, 1, 2, 4, 8, 16)))
    return _error(
        "lead_too_short",
        name,
        f"{name} is {value:g}: a loop or a bend reaches the open end of a lead; raise {name}{cure}",
        value=value,
    )


def _meets_lead(p: ChannelParameters, _: Collision) -> Finding:
    cure = _cure(p, "loop_turn_deg", (p.loop_turn_deg - turn for turn in (5, 10, 20, 40, 60)))
    return _error(
        "loop_meets_lead",
        "loop_turn_deg",
        f"a loop runs into a lead; lower loop_turn_deg (now {p.loop_turn_deg:g}){cure} or raise loop_angle_deg "
        f"(now {p.loop_angle_deg:g})",
    )


def _meets_next(p: ChannelParameters, _: Collision) -> Finding:
    step = p.channel_width_um + p.loop_width_um
    cure = _cure(p, "stage_gap_um", (p.stage_gap_um + step * n for n in (0.25, 0.5, 1, 2, 4, 8)))
    return _error(
        "loop_meets_next_stage",
        "stage_gap_um",
        f"a loop runs into the next stage: stage_gap_um is {p.stage_gap_um:g}; raise stage_gap_um{cure}, or lower "
        f"run_bend_deg or loop_turn_deg",
        value=p.stage_gap_um,
    )


def _island(p: ChannelParameters, collision: Collision) -> Finding:
    what = "falls into two parts" if collision.code == "island_splits" else "disappears"
    if p.nose_radius_um > 0.0:
        cure = _cure(p, "nose_radius_um", (p.nose_radius_um * factor for factor in _SMALLER))
        if cure:
            return _error(
                "nose_too_round",
                "nose_radius_um",
                f"the island {what} when its corners are rounded: nose_radius_um is {p.nose_radius_um:g}; lower "
                f"nose_radius_um{cure} or raise loop_radius_um",
                value=p.nose_radius_um,
            )
    cure = _cure(p, "loop_radius_um", (p.loop_radius_um * factor for factor in _LARGER))
    return _error(
        "island_vanishes",
        "loop_radius_um",
        f"the island between loop and bypass {what}; raise loop_radius_um (now {p.loop_radius_um:g}){cure} or lower "
        f"channel_width_um or loop_width_um",
        value=p.loop_radius_um,
    )
