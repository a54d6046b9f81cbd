"""Numbers of the estimate that are fitted, each with its meaning, source and range.

Formulas live elsewhere and read these by name, so that a new fit changes this table alone.
"""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True, kw_only=True)
class Coefficient:
    """One fitted number.

    Attributes
    ----------
    value : float
        The number, free of dimension.
    meaning : str
        What it scales.
    source : str
        How it was obtained.
    valid : str
        Range in which it was found.
    """

    value: float
    meaning: str
    source: str
    valid: str


_FIT = "least squares on the project's own flow solves (tests/core/hydraulics/solved_designs.csv): "
SHAPE = _FIT + "creeping-flow drops and loop shares"
LOSSES = _FIT + "drops and Di - 1, Re 1 to 150"
SHARES = _FIT + "loop shares, drops and Di - 1, Re 1 to 150"
CHAINS = _FIT + "chains of 2 to 4 stages at 45 deg"
ROUND = "set by hand to a round value: the fit hardly depends on it"

SOLVED = "depth 0.17 to 1.8 widths, loop angle 32 to 85 deg, radius 1.2 to 3 widths, rounding 0.05 widths"
CHAIN_RANGE = "gap 1 to 8 widths, depth 0.5 and 1 width"

COEFFICIENTS: dict[str, Coefficient] = {
    # Stokes flow: what a junction saves or adds, see stage.Stage
    "corner_short_cut": Coefficient(
        value=0.3278,
        meaning="path saved in each of two channels that meet, per length that they run merged",
        source=SHAPE,
        valid=SOLVED,
    ),
    "merging": Coefficient(
        value=0.1787,
        meaning="path added to the third channel of that junction, per such length",
        source=SHAPE,
        valid=SOLVED,
    ),
    "gap_overlap": Coefficient(
        value=0.528,
        meaning="path saved between a mouth and the next fork at no gap, in widths",
        source=CHAINS,
        valid=CHAIN_RANGE,
    ),
    "gap_reach": Coefficient(
        value=2.6259,
        meaning="gap over which that fades to 1/e, in widths",
        source=CHAINS,
        valid=CHAIN_RANGE,
    ),
    "gap_relief": Coefficient(
        value=0.3135,
        meaning="part of the junction losses that the next stage saves at no gap",
        source=CHAINS,
        valid=CHAIN_RANGE,
    ),
    # inertia: losses
    "junction_turn": Coefficient(
        value=1.5081,
        meaning="how far streams are turned, over the geometric angle; 0.75 in the asymptotic formula",
        source=LOSSES,
        valid=SOLVED,
    ),
    "loss_scale": Coefficient(
        value=0.9352,
        meaning="inertia number at which junction losses reach half of their final level",
        source=LOSSES,
        valid=SOLVED,
    ),
    "loss_level": Coefficient(
        value=0.8366,
        meaning="final level of the losses over the asymptotic formulas",
        source=LOSSES,
        valid=SOLVED,
    ),
    "difference_scale": Coefficient(
        value=1.2081,
        meaning="inertia number at which the directions stand half apart, at a depth of one width",
        source=LOSSES,
        valid=SOLVED,
    ),
    "difference_level": Coefficient(
        value=0.6636,
        meaning="final difference of the directions over the asymptotic formulas",
        source=LOSSES,
        valid=SOLVED,
    ),
    "difference_depth": Coefficient(
        value=0.5589,
        meaning="power of depth over width by which that scale falls",
        source=LOSSES,
        valid=SOLVED,
    ),
    # inertia: drives between bypass and loop
    "turning_drive": Coefficient(
        value=1.0755,
        meaning="weight of the bypass turning away at the fork",
        source=SHARES,
        valid=SOLVED,
    ),
    "loop_drive": Coefficient(
        value=0.7566,
        meaning="weight of the loop leaving and arriving at an angle",
        source=SHARES,
        valid=SOLVED,
    ),
    "drive_depth": Coefficient(
        value=0.237,
        meaning="depth over width at which floor and roof halve the drive, about",
        source=SHARES,
        valid=SOLVED,
    ),
    "drive_growth": Coefficient(
        value=0.6767,
        meaning="growth of the common drive once streams separate from the walls",
        source=SHARES,
        valid=SOLVED,
    ),
    "drive_scale": Coefficient(
        value=2.2,
        meaning="inertia number at which drives stand at 0.71 of their final strength",
        source=ROUND,
        valid=SOLVED,
    ),
    "meeting_drive": Coefficient(
        value=1.2117,
        meaning="weight of the pressure that the meeting streams share",
        source=SHARES,
        valid=SOLVED,
    ),
    "straight_drive": Coefficient(
        value=1.091,
        meaning="weight of the stream that keeps to the bypass",
        source=SHARES,
        valid=SOLVED,
    ),
    "aligned_drive": Coefficient(
        value=4.3835,
        meaning="weight of the stream that keeps to the loop",
        source=SHARES,
        valid=SOLVED,
    ),
}


def coefficient(name: str) -> float:
    """Return the value of a coefficient.

    Parameters
    ----------
    name : str
        A key of ``COEFFICIENTS``.

    Returns
    -------
    float
        The number, free of dimension.
    """
    return COEFFICIENTS[name].value
