"""What collides or vanishes in a chain that was drawn, told by the rings it made."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from core.errors import GeometryError
from core.geometry.centreline import Part

if TYPE_CHECKING:
    from core.geometry.chain import Chain
    from core.geometry.contour import Floats
    from core.geometry.curves import Ring


@dataclass(frozen=True, slots=True, kw_only=True)
class Collision:
    """Something wrong with a drawn chain.

    Attributes
    ----------
    code : str
        ``lead_too_short``, ``loop_meets_lead``, ``loop_meets_next_stage``, ``island_disappears``
        or ``island_splits``.
    x_um, y_um : float
        Where [um].
    """

    code: str
    x_um: float
    y_um: float


def collision_in(chain: Chain) -> Collision | None:
    """Return what is wrong with a chain, if anything.

    Parameters
    ----------
    chain : Chain
        Rings of a short chain.

    Returns
    -------
    Collision or None
        None when there is one outer ring, one regular island per stage, and every loop meets only
        its own bypass and the straight after it.
    """
    if len(chain.outers) != 1 or _ends_cut(chain):
        return _at("lead_too_short", chain.centreline.forward_outlet.point_um)
    if chain.parameters.stages == 0:
        return None
    for ring in chain.holes:
        stages = chain.stages_of(ring)
        if -1 in stages:
            return _at("loop_meets_lead", _middle(ring))
        if len(stages) != 1:
            return _at("loop_meets_next_stage", _middle(ring))
    owners = sorted(min(chain.stages_of(ring)) for ring in chain.holes)
    for stage, place in enumerate(chain.centreline.stages):
        if owners.count(stage) != 1:
            code = "island_splits" if stage in owners else "island_disappears"
            return _at(code, 0.5 * (place.fork_um + place.mouth_um))
    if not _can_be_cut(chain) or not _tips_are_near(chain):
        return _at("loop_meets_next_stage", chain.centreline.stages[0].mouth_um)
    return None


def _at(code: str, point: Floats) -> Collision:
    return Collision(code=code, x_um=float(point[0]), y_um=float(point[1]))


def _middle(ring: Ring) -> Floats:
    return 0.5 * (ring.contour.vertices_um.min(axis=0) + ring.contour.vertices_um.max(axis=0))


def _can_be_cut(chain: Chain) -> bool:
    try:
        return len(chain.cuts) == chain.parameters.stages
    except GeometryError:
        return False


def _ends_cut(chain: Chain) -> bool:
    """Return whether something else covers part of an open end."""
    width = chain.parameters.channel_width_um
    for ring in chain.outers:
        lengths = [curve.length for curve in ring.curves if curve.wall.face == "end"]
        if len(lengths) == 2 and all(abs(length - width) < 0.002 for length in lengths):
            return False
    return True


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
