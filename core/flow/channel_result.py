"""What the flow solve of one channel says: a point for each flow, with bands, trust and fields."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from core.flow.stages import StageFlow, stage_flows

if TYPE_CHECKING:
    from core.flow.result import FlowField
    from core.fluids import FluidState
    from core.parameters import ChannelParameters

METHOD = "flow solve"


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class FlowPoint:
    """Both directions at one flow.

    Attributes
    ----------
    flow_ul_min : float
        Flow, the same in both directions [uL/min].
    reynolds : float
        rho U D_h / mu of the channel section [-].
    forward_pressure_pa, reverse_pressure_pa : float or None
        Static pressure drop between the open ends [Pa]; None where no steady flow was found.
    loop_shares_forward, loop_shares_reverse : tuple of float
        Part of the flow in each loop, stages in the order of the reverse flow.
    stage_drops_forward_pa, stage_drops_reverse_pa : tuple of float
        From bypass to bypass of the stages solved, in the order of that flow [Pa].
    reached_reynolds_forward, reached_reynolds_reverse : float
        Highest Reynolds number with a steady flow, at most ``reynolds``.
    error_band_percent : float or None
        Error to be expected of either pressure drop [%].
    diodicity_band : float or None
        Error to be expected of the diodicity, absolute.
    valid : bool
        Whether both directions were found and the model holds.
    notes : tuple of str
        Remarks for the user.
    quality : str
        As asked for.
    modes, unknowns, solved_stages : int
        Depth modes, size of the finest system, stages of the chain that was solved.
    seconds : float
        Wall time of this flow.
    forward_field, reverse_field : FlowField or None
        For drawing, in the place where the stages solved lie in the whole channel.
    """

    flow_ul_min: float
    reynolds: float
    forward_pressure_pa: float | None
    reverse_pressure_pa: float | None
    loop_shares_forward: tuple[float, ...]
    loop_shares_reverse: tuple[float, ...]
    stage_drops_forward_pa: tuple[float, ...]
    stage_drops_reverse_pa: tuple[float, ...]
    reached_reynolds_forward: float
    reached_reynolds_reverse: float
    error_band_percent: float | None
    diodicity_band: float | None
    valid: bool
    notes: tuple[str, ...]
    quality: str
    modes: int
    unknowns: int
    solved_stages: int
    seconds: float
    forward_field: FlowField | None = None
    reverse_field: FlowField | None = None

    @property
    def diodicity(self) -> float | None:
        """Reverse over forward pressure drop, or None."""
        if self.forward_pressure_pa is None or self.reverse_pressure_pa is None:
            return None
        return self.reverse_pressure_pa / self.forward_pressure_pa

    @property
    def rectification(self) -> float | None:
        """Di - 1, or None."""
        if self.forward_pressure_pa is None or self.reverse_pressure_pa is None:
            return None
        return (self.reverse_pressure_pa - self.forward_pressure_pa) / self.forward_pressure_pa

    @property
    def rectification_band_percent(self) -> float | None:
        """Error to be expected of Di - 1 [%], or None where Di is too near 1."""
        gain = self.rectification
        if gain is None or self.diodicity_band is None or abs(gain) < 1e-9:
            return None
        return 100.0 * self.diodicity_band / abs(gain)

    @property
    def loop_share_forward(self) -> float | None:
        """Mean part of the forward flow in the loops; 0 without loops, None where not found."""
        return _mean(self.loop_shares_forward) if self.forward_pressure_pa is not None else None

    @property
    def loop_share_reverse(self) -> float | None:
        """Mean part of the reverse flow in the loops; 0 without loops, None where not found."""
        return _mean(self.loop_shares_reverse) if self.reverse_pressure_pa is not None else None

    @property
    def stages(self) -> tuple[StageFlow, ...]:
        """Loop shares and drops stage by stage, in the order of the reverse flow; empty without stages."""
        return stage_flows(
            shares_forward=self.loop_shares_forward,
            shares_reverse=self.loop_shares_reverse,
            drops_forward_pa=self.stage_drops_forward_pa,
            drops_reverse_pa=self.stage_drops_reverse_pa,
        )

    def as_dict(self) -> dict[str, object]:
        """Return the point with the keys used in machine-readable output."""
        return {
            "flow_ul_min": self.flow_ul_min,
            "reynolds": self.reynolds,
            "forward_pressure_pa": self.forward_pressure_pa,
            "reverse_pressure_pa": self.reverse_pressure_pa,
            "diodicity": self.diodicity,
            "diodicity_band": self.diodicity_band,
            "rectification": self.rectification,
            "rectification_band_percent": self.rectification_band_percent,
            "loop_share_forward": self.loop_share_forward,
            "loop_share_reverse": self.loop_share_reverse,
            "loop_shares_forward": list(self.loop_shares_forward),
            "loop_shares_reverse": list(self.loop_shares_reverse),
            "stage_drops_forward_pa": list(self.stage_drops_forward_pa),
            "stage_drops_reverse_pa": list(self.stage_drops_reverse_pa),
            "stages": [stage.as_dict() for stage in self.stages],
            "reached_reynolds_forward": self.reached_reynolds_forward,
            "reached_reynolds_reverse": self.reached_reynolds_reverse,
            "method": METHOD,
            "quality": self.quality,
            "error_band_percent": self.error_band_percent,
            "valid": self.valid,
            "notes": list(self.notes),
            "modes": self.modes,
            "unknowns": self.unknowns,
            "solved_stages": self.solved_stages,
            "seconds": self.seconds,
        }


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ChannelFlow:
    """The flow solve of one channel at one flow or several.

    Attributes
    ----------
    parameters : ChannelParameters
        The design.
    fluid : FluidState
        What flows.
    points : tuple of FlowPoint
        One for each flow, in the order asked for.
    solved_stages : int
        Stages of the chain that was solved.
    """

    parameters: ChannelParameters
    fluid: FluidState
    points: tuple[FlowPoint, ...]
    solved_stages: int

    def as_dict(self) -> dict[str, object]:
        """Return one point, or several under ``points``, with the keys of machine-readable output."""
        points = [point.as_dict() for point in self.points]
        return points[0] if len(points) == 1 else {"points": points}


def _mean(shares: tuple[float, ...]) -> float:
    return sum(shares) / len(shares) if shares else 0.0
