"""Shapes for the flow tests, drawn independently of the program's own geometry."""

from __future__ import annotations

import math

import numpy as np
from shapely.geometry import LineString, Polygon
from shapely.geometry.polygon import orient
from shapely.ops import unary_union

from core.flow import FlowDomain


def straight(*, width_um=100.0, depth_um=100.0, length_um=300.0) -> FlowDomain:
    """Return a plain straight channel along x; forward flow goes in +x."""
    w, length = width_um, length_um
    ring = np.array([[0, 0], [length, 0], [length, w], [0, w]])
    return FlowDomain(
        outer_um=ring,
        islands_um=(),
        depth_um=depth_um,
        channel_width_um=w,
        forward_inlet_um=ring[[0, 3]],
        forward_outlet_um=ring[[1, 2]],
    )


def chain(
    *,
    stages=1,
    angle_deg=45.0,
    run_bend_deg=45.0,
    radius_um=160.0,
    width_um=100.0,
    loop_width_um=None,
    depth_um=100.0,
    gap_um=100.0,
    lead_um=300.0,
    alternate=True,
    mirrored=False,
    chord_um=0.05,
) -> FlowDomain:
    """Return loops with half-circle turns and no straight return, as a chain.

    Follows the reverse flow from the origin along +x. A round pen draws each path; open ends are
    cut square.
    """
    loop_width_um = width_um if loop_width_um is None else loop_width_um
    a, b, r = math.radians(angle_deg), math.radians(run_bend_deg), radius_um
    heading, at = 0.0, np.array([0.0, 0.0])
    spine, loops, sections = [at], [], []
    at = at + lead_um * _unit(heading)
    for stage in range(stages):
        side = 1 if stage % 2 == 0 or not alternate else -1
        heading -= side * b
        fork, run = at, 2 * r / math.sin(a)
        loops.append(_loop(fork, heading, side, a, r))
        middle = fork + 0.5 * run * _unit(heading)
        top = loops[-1][len(loops[-1]) // 2]
        centre = fork + 2 * r / math.tan(a) * _unit(heading + side * a) + r * _unit(heading + side * (a - math.pi / 2))
        outward = (top - centre) / r
        sections.append(
            (
                np.array(
                    [
                        middle - width_um / 2 * _unit(heading + math.pi / 2),
                        middle + width_um / 2 * _unit(heading + math.pi / 2),
                    ]
                ),
                np.array([top - loop_width_um / 2 * outward, top + loop_width_um / 2 * outward]),
            )
        )
        spine.append(fork)
        mouth = fork + run * _unit(heading)
        spine.append(mouth)
        at = mouth + (gap_um if stage < stages - 1 else lead_um) * _unit(heading)
    spine.append(at)
    return _as_domain(spine, loops, sections, width_um, loop_width_um, depth_um, chord_um, mirrored)


def _loop(fork, heading, side, a, r):
    leg_end = fork + 2 * r / math.tan(a) * _unit(heading + side * a)
    centre = leg_end + r * _unit(heading + side * (a - math.pi / 2))
    start = heading + side * (a + math.pi / 2)
    turn = [centre + r * _unit(start - side * t) for t in np.linspace(0, math.pi, 401)]
    return [fork, *turn]


def _as_domain(spine, loops, sections, width, loop_width, depth, chord, mirrored):
    quads = max(8, math.ceil(math.pi / 2 / (2 * math.acos(1 - chord / (width / 2)))))
    pieces = [LineString(spine).buffer(width / 2, quad_segs=quads, cap_style="flat")]
    pieces += [LineString(loop).buffer(loop_width / 2, quad_segs=quads) for loop in loops]
    area = unary_union(pieces).simplify(chord)
    if not isinstance(area, Polygon):
        raise ValueError("the pieces do not join into one area")
    area = orient(area)
    ends = []
    for end, inner in ((spine[0], spine[1]), (spine[-1], spine[-2])):
        along = (inner - end) / np.hypot(*(inner - end))
        across = np.array([-along[1], along[0]]) * width / 2
        ends.append(np.array([end - across, end + across]))
    flip = np.array([1.0, -1.0 if mirrored else 1.0])
    middle_of = [(np.array(a) * flip, np.array(b) * flip) for a, b in sections]
    return FlowDomain(
        outer_um=np.array(area.exterior.coords)[:-1] * flip,
        islands_um=tuple(np.array(ring.coords)[:-1] * flip for ring in area.interiors),
        depth_um=depth,
        channel_width_um=width,
        forward_inlet_um=ends[1] * flip,
        forward_outlet_um=ends[0] * flip,
        sections=tuple(middle_of),
    )


def _unit(angle):
    return np.array([math.cos(angle), math.sin(angle)])
