"""Steady laminar flow in the real outline with the real depth.

``solve`` takes a FlowDomain and a flow and returns pressure drops of both directions, diodicity, flow
shares and fields with an error band, ``solve_curve`` the same at several flows, ``extend_settled`` the
drop of a long chain. Heavy libraries are imported when a solve starts.
"""

from core.flow.chains import ExtendedDrop, extend_settled
from core.flow.domain import FlowDomain
from core.flow.newton import FlowStopped
from core.flow.result import DirectionResult, FlowField, FlowResult
from core.flow.solve import solve, solve_curve

__all__ = [
    "DirectionResult",
    "ExtendedDrop",
    "FlowDomain",
    "FlowField",
    "FlowResult",
    "FlowStopped",
    "extend_settled",
    "solve",
    "solve_curve",
]
