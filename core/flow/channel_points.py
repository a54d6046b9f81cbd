"""One flow of a channel from what the solve found: extension to all stages, trust, places of the fields."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from core.flow.chains import ExtendedDrop, extend_settled
from core.flow.channel_result import FlowPoint
from core.fluids import ATMOSPHERE_PA
from core.geometry.shape import build_shape

if TYPE_CHECKING:
    from core.flow.result import DirectionResult, FlowField, FlowResult
    from core.fluids import FluidState
    from core.geometry.shape import ChannelShape

_GAS_SHARE = 0.05  # pressure drop against the atmosphere beyond which a gas is not incompressible


@dataclass(frozen=True, slots=True, eq=False)
class PointMaker:
    """Makes the points of one channel.

    Attributes
    ----------
    shape : ChannelShape
        The whole channel.
    fluid : FluidState
        What flows.
    """

    shape: ChannelShape
    fluid: FluidState

    def point(self, flow_ul_min: float, result: FlowResult, solved_stages: int) -> FlowPoint:
        """Return the point of one flow, solved with so many stages."""
        p = self.shape.parameters
        is_extended = p.stages > solved_stages
        forward, reverse = (
            _extended(each, p.stages) if is_extended and each.pressure_pa is not None else None
            for each in (result.forward, result.reverse)
        )
        drops = (_pressure(result.forward, forward), _pressure(result.reverse, reverse))
        notes, is_good = self._trust(result, drops, solved_stages)
        error_percent, diodicity_band = self._bands(result, forward, reverse)
        return FlowPoint(
            flow_ul_min=flow_ul_min,
            reynolds=float(result.reynolds),
            forward_pressure_pa=drops[0],
            reverse_pressure_pa=drops[1],
            loop_shares_forward=_all_shares(result.forward.loop_shares, p.stages, settled_at=1),
            loop_shares_reverse=_all_shares(result.reverse.loop_shares, p.stages, settled_at=solved_stages - 2),
            stage_drops_forward_pa=result.forward.bypass_drops_pa,
            stage_drops_reverse_pa=result.reverse.bypass_drops_pa,
            reached_reynolds_forward=float(result.forward.reached_reynolds),
            reached_reynolds_reverse=float(result.reverse.reached_reynolds),
            error_band_percent=error_percent,
            diodicity_band=diodicity_band,
            valid=bool(result.valid and is_good),
            notes=notes,
            quality=result.quality,
            modes=int(result.modes),
            unknowns=int(result.unknowns),
            solved_stages=solved_stages,
            seconds=result.seconds,
            forward_field=_placed(result.forward, forward, self._forward_shift_um(solved_stages)),
            reverse_field=_placed(result.reverse, reverse, np.zeros(2)),
        )

    def _forward_shift_um(self, solved_stages: int) -> np.ndarray:
        """Return from the inlet of the chain that was solved to that of the whole [um]."""
        short = build_shape(replace(self.shape.parameters, stages=solved_stages)).centreline
        return self.shape.centreline.forward_inlet.point_um - short.forward_inlet.point_um

    def _bands(
        self, result: FlowResult, forward: ExtendedDrop | None, reverse: ExtendedDrop | None
    ) -> tuple[float | None, float | None]:
        """Return the error of the drops [%] and of the diodicity, with what extension and fluid add."""
        if result.error_band_percent is None or result.diodicity_band is None or result.diodicity is None:
            return None, None
        percent, diodicity_band = result.error_band_percent, result.diodicity_band
        if self.shape.parameters.stages == 0:  # a straight channel has no easy direction: what is found of one is error
            diodicity_band = max(diodicity_band, abs(result.diodicity - 1.0))
        if forward is not None and reverse is not None:
            shares = [part.error_pa / part.pressure_pa for part in (forward, reverse)]
            diodicity = reverse.pressure_pa / forward.pressure_pa
            growth = abs(diodicity - 1.0) / max(abs(result.diodicity - 1.0), 1e-9)
            percent += 100.0 * max(shares)
            diodicity_band = diodicity_band * max(growth, 1.0) + diodicity * sum(shares)
        return float(percent + self.fluid.error_percent), float(diodicity_band)

    def _trust(
        self, result: FlowResult, drops: tuple[float | None, float | None], solved_stages: int
    ) -> tuple[tuple[str, ...], bool]:
        """Return the notes, and whether nothing beside the solve itself speaks against the answer."""
        notes, is_good = [*result.notes], True
        if (more := self.shape.parameters.stages - solved_stages) > 0:
            notes.append(
                f"{solved_stages} stages were solved; each of the other {more} is counted with the drop per stage "
                "that had settled, and the error of doing so is in the band"
            )
        highest = max((drop for drop in drops if drop is not None), default=0.0)
        if self.fluid.is_gas and highest > _GAS_SHARE * ATMOSPHERE_PA:
            is_good = False
            notes.append(
                f"a gas is solved as incompressible, which holds up to {_GAS_SHARE * ATMOSPHERE_PA / 1000:.0f} kPa; "
                f"the drop is {highest / 1000:.3g} kPa; lower flow_ul_min"
            )
        return (*notes, *self.fluid.notes), is_good


def _extended(direction: DirectionResult, stages: int) -> ExtendedDrop:
    assert direction.pressure_pa is not None
    return extend_settled(pressure_pa=direction.pressure_pa, bypass_drops_pa=direction.bypass_drops_pa, stages=stages)


def _all_shares(shares: tuple[float, ...], stages: int, *, settled_at: int) -> tuple[float, ...]:
    """Return the loop shares of all stages, those not solved like the one that had settled."""
    more = stages - len(shares)
    return (*shares[:settled_at], *shares[settled_at : settled_at + 1] * more, *shares[settled_at:]) if more else shares


def _pressure(direction: DirectionResult, whole: ExtendedDrop | None) -> float | None:
    return whole.pressure_pa if whole is not None else direction.pressure_pa


def _placed(direction: DirectionResult, whole: ExtendedDrop | None, shift_um: np.ndarray) -> FlowField | None:
    """Return the field where its stages lie in the whole channel, with the pressure there."""
    if direction.field is None or direction.pressure_pa is None:
        return None
    if whole is None:
        return direction.field
    pressure = direction.field.pressure_modes_pa.copy()
    pressure[0] += whole.pressure_pa - direction.pressure_pa
    return replace(direction.field, points_um=direction.field.points_um + shift_um, pressure_modes_pa=pressure)
