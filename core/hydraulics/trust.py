"""How far an estimate can be trusted, and what to tell the user about it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from core.geometry.measures import stage_measures

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from core.fluids import FluidState
    from core.parameters import ChannelParameters

    Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class Range:
    """Bounds of a quantity inside which the estimate was compared with flow solves.

    Attributes
    ----------
    label : str
        The quantity in words.
    low, high : float
        Bounds [-] or [deg].
    unit : str
        Unit in words, empty for ratios.
    """

    label: str
    low: float
    high: float
    unit: str = ""

    @property
    def words(self) -> str:
        """The bounds in words."""
        if np.isinf(self.high):
            return f"above {self.low:g}{self.unit}"
        return f"from {self.low:g} to {self.high:g}{self.unit}"


DESIGN_RANGES: dict[str, Range] = {
    "depth": Range(label="depth over channel width", low=0.1, high=2.0),
    "loop_width": Range(label="loop width over channel width", low=0.7, high=1.4),
    "loop_radius": Range(label="loop radius over channel width", low=1.2, high=3.5),
    "loop_angle": Range(label="loop angle", low=25.0, high=90.0, unit=" deg"),
    "loop_turn": Range(label="loop turn", low=150.0, high=210.0, unit=" deg"),
    # a bypass that hardly bends lets forward and reverse flow part in ways the estimate misses
    "run_bend": Range(label="run bend over loop angle", low=0.5, high=1.0),
    # closer stages rectify less than estimated: their streams meet before they have formed
    "stage_gap": Range(label="stage gap over channel width", low=0.9, high=np.inf),
}
HIGHEST_COMPARED_RE = 150.0
STEADY_UP_TO_RE = 200.0
DUCT_LAMINAR_UP_TO_RE = 2000.0

DUCT_PERCENT = 1.0  # straight channel of true size; a judgement, no source
PRESSURE_PERCENT = 4.0  # more than nine in ten flow solves lie inside
RECTIFICATION_PERCENT = 40.0  # together with the floor: nine in ten lie inside ...
RECTIFICATION_FLOOR = 0.006  # ... plus this much of Di, which flow solves found with either sign
INERTIA_RE = 30.0  # above it the floor counts in full; below it falls as Re^2
WIDEST_PERCENT = 1000.0
OUTSIDE_FACTOR = 4.0  # of both bands; nine in ten of the flow solves made out of range lie inside

NOTHING_TO_GAIN = 1e-3
SOFT_WALL_PA = 10e3
GAS_PRESSURE_PA = 5e3
GAS_DEPTH_UM = 7.0  # 100 mean free paths of air


@dataclass(frozen=True, slots=True, kw_only=True)
class Trust:
    """Error bands and validity for an array of flows, each of shape (n,).

    Attributes
    ----------
    pressure_percent, rectification_percent : array
        Error to be expected [%].
    rectification : array
        Error of Di to be expected [-].
    valid : array of bool
        Whether design and flow lie in the compared range.
    """

    pressure_percent: Floats
    rectification_percent: Floats
    rectification: Floats
    valid: NDArray[np.bool_]


def trust_of(parameters: ChannelParameters, *, fluid: FluidState, reynolds: Floats, rectification: Floats) -> Trust:
    """Return error bands and validity of an estimate.

    Parameters
    ----------
    parameters : ChannelParameters
        The design.
    fluid : FluidState
        Its viscosity error adds to that of the pressures.
    reynolds : array, shape (n,)
        Reynolds numbers of the channel section [-].
    rectification : array, shape (n,)
        Estimated Di - 1 [-].

    Returns
    -------
    Trust
        Arrays of shape (n,).
    """
    if parameters.stages == 0:
        percent = np.full_like(reynolds, DUCT_PERCENT + fluid.error_percent)
        return Trust(
            pressure_percent=percent,
            rectification_percent=np.zeros_like(reynolds),
            rectification=np.zeros_like(reynolds),
            valid=reynolds <= DUCT_LAMINAR_UP_TO_RE,
        )
    inside = not _outside(parameters) and stage_measures(parameters).is_possible
    # beyond the compared flows the bands widen in proportion
    factor = np.maximum(1.0, reynolds / HIGHEST_COMPARED_RE) * (1.0 if inside else OUTSIDE_FACTOR)
    size = np.abs(rectification)
    floor = RECTIFICATION_FLOOR * np.minimum(1.0, reynolds / INERTIA_RE) ** 2
    band = factor * (RECTIFICATION_PERCENT / 100.0 * size + floor)
    return Trust(
        pressure_percent=PRESSURE_PERCENT * factor + fluid.error_percent,
        rectification_percent=np.minimum(100.0 * band / np.maximum(size, np.finfo(float).tiny), WIDEST_PERCENT),
        rectification=band,
        valid=inside & (reynolds <= STEADY_UP_TO_RE),
    )


def design_notes(parameters: ChannelParameters, *, fluid: FluidState) -> tuple[str, ...]:
    """Return cautions that hold at every flow.

    Parameters
    ----------
    parameters : ChannelParameters
        The design.
    fluid : FluidState
        What flows; its own notes come last.

    Returns
    -------
    tuple of str
        Plain sentences, each with a way out where there is one.
    """
    notes: list[str] = []
    if parameters.stages:
        notes.append("A passive rectifier always leaks backwards: it resists one direction more but never closes.")
        if not stage_measures(parameters).is_possible:
            notes.append(
                "The loop does not close with these values: the numbers mean nothing until the findings are cured."
            )
        notes += _outside(parameters)
    if parameters.depth_um * 10.0 < parameters.channel_width_um:
        notes.append(
            "The channel is more than 10 times as wide as deep: a soft roof may sag and change the drop; "
            "raise the depth or narrow the channel."
        )
    if fluid.is_gas and parameters.depth_um < GAS_DEPTH_UM:
        notes.append(
            f"Below {GAS_DEPTH_UM:g} um depth gas slips along the walls and flows more easily than estimated; "
            "raise the depth or expect a lower drop."
        )
    return (*notes, *fluid.notes)


def flow_notes(
    parameters: ChannelParameters,
    *,
    fluid: FluidState,
    reynolds: float,
    rectification: float,
    pressure_pa: float,
    has_stiff_walls: bool,
) -> tuple[str, ...]:
    """Return cautions that depend on the flow.

    Parameters
    ----------
    parameters : ChannelParameters
        The design.
    fluid : FluidState
        What flows.
    reynolds : float
        Reynolds number of the channel section [-].
    rectification : float
        Di - 1 [-].
    pressure_pa : float
        The larger of both drops [Pa].
    has_stiff_walls : bool
        Whether walls keep their place at any pressure that the bonds hold, as those of glass or silicon do.

    Returns
    -------
    tuple of str
        Plain sentences, each with a way out where there is one.
    """
    notes: list[str] = []
    limit = STEADY_UP_TO_RE if parameters.stages else DUCT_LAMINAR_UP_TO_RE
    if reynolds > limit:
        notes.append(
            f"Re {_plain(reynolds)}: above {limit:g} the flow may be unsteady; the steady laminar result "
            "is indicative; lower the flow or measure."
        )
    if parameters.stages and abs(rectification) < NOTHING_TO_GAIN:
        notes.append(f"Re {_plain(reynolds)}: rectification below 0.1 %; {_way_to_rectify(reynolds)}.")
    elif parameters.stages and rectification < 0.0:
        notes.append(
            "This shape resists the forward flow more at this flow; raise the run bend towards the loop angle."
        )
    if fluid.is_gas and pressure_pa > GAS_PRESSURE_PA:
        notes.append(
            f"{_plain(pressure_pa / 1e3)} kPa: gas expands noticeably along the channel above "
            f"{GAS_PRESSURE_PA / 1e3:g} kPa; lower the flow or read the numbers as a guide."
        )
    if pressure_pa > SOFT_WALL_PA and not has_stiff_walls:
        notes.append(
            f"{_plain(pressure_pa / 1e3)} kPa: rigid walls are assumed; a soft chip bulges above about "
            f"{SOFT_WALL_PA / 1e3:g} kPa and drops less; use a stiff material or lower the flow."
        )
    return tuple(notes)


def _way_to_rectify(reynolds: float) -> str:
    if reynolds < 20.0:
        return "no geometry helps at this flow; raise the flow or the depth"
    return "raise the depth or the flow, or the run bend towards the loop angle"


def _outside(parameters: ChannelParameters) -> list[str]:
    """Return one sentence for every ratio that lies outside the compared range."""
    width = parameters.channel_width_um
    values = {
        "depth": parameters.depth_um / width,
        "loop_width": parameters.loop_width_um / width,
        "loop_radius": parameters.loop_radius_um / width,
        "loop_angle": parameters.loop_angle_deg,
        "loop_turn": parameters.loop_turn_deg,
        "run_bend": parameters.run_bend_deg / parameters.loop_angle_deg,
        "stage_gap": parameters.stage_gap_um / width if parameters.stages > 1 else 1.0,
    }
    return [
        f"The {span.label} is {_plain(values[name])}{span.unit}; the estimate was compared with flow solves "
        f"{span.words} only: run the flow solve before you trust it."
        for name, span in DESIGN_RANGES.items()
        if not span.low <= values[name] <= span.high
    ]


def _plain(value: float) -> str:
    """Return a number with three figures and never with a power of ten."""
    return f"{value:.3g}" if value < 1000.0 else f"{value:.0f}"
