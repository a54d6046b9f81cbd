"""What folding adds to a channel on the chip: the plain bends and leads between its rows."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np

from core.chip.bodies import channel_of, wanted_body
from core.errors import CoreError, shown
from core.fabrication.making import making_of
from core.hydraulics.estimate import estimate
from core.parameters import CHANNEL_FIELDS
from core.units import convert

if TYPE_CHECKING:
    from core.hydraulics.estimate import Score
    from core.parameters import ChannelParameters
    from core.project.chip import ChipProject


def added_length_um(project: ChipProject, set_name: str) -> float:
    """Return the most plain channel that folding adds to a set where it stands on the chip [um]; 0 if never folded."""
    channels = {each.name: each.channel for each in project.sets}
    lengths = [0.0]
    for entry in project.plan.channels:
        if entry.set_name == set_name and entry.rows > 1:
            try:
                channel = channel_of(entry, channels)
                lengths.append(wanted_body(project.plan, entry, channel, project.process).extra_length_um)
            except CoreError:  # no such folding: a finding of the chip
                continue
    return max(lengths)


def score_of_made(project: ChipProject, channel: ChannelParameters, *, added_um: float = 0.0) -> Score:
    """Return the estimate of what is made of a channel, at the operating flow.

    Parameters
    ----------
    project : ChipProject
        Process and operating point.
    channel : ChannelParameters
        As wanted.
    added_um : float
        Plain channel in series with it [um]. It counts as a longer lead: straight and of the same section, so that
        the curvature of bends is left out, which near Re 100 is worth some percent of their own small share.

    Raises
    ------
    CoreError
        If there is no such fluid, or what is made has no shape.
    """
    made = making_of(channel, project.process).flow
    longest = CHANNEL_FIELDS["lead_in_um"].maximum
    longer = replace(made, lead_in_um=min(made.lead_in_um + added_um, longest))
    flows = np.array([project.operating.flow_ul_min])
    fluid, is_stiff = project.operating.fluid_state(), project.process.has_stiff_walls
    return estimate(longer, fluid=fluid, flows_ul_min=flows, has_stiff_walls=is_stiff).score(0)


def fold_notes(project: ChipProject) -> tuple[str, ...]:
    """Return for every folded channel of the chip what folding adds to it, and what that costs, in words."""
    notes = []
    for each in project.sets:
        added = added_length_um(project, each.name)
        if not added:
            continue
        try:
            plain = score_of_made(project, each.channel)
            folded = score_of_made(project, each.channel, added_um=added)
        except CoreError:  # told by the findings
            continue
        length_mm = convert(added, quantity="length", from_unit="um", to_unit="mm")
        notes.append(
            f"set {shown(each.name)} is folded: bends and leads between rows add {length_mm:.2f} mm of plain channel. "
            f"By the estimate at {project.operating.flow_ul_min:g} uL/min it takes {_kpa(folded)} instead of "
            f"{_kpa(plain)}, and Di is {folded.diodicity:.3f} instead of {plain.diodicity:.3f}"
        )
    return tuple(notes)


def _kpa(score: Score) -> str:
    drops = (score.forward_pressure_pa, score.reverse_pressure_pa)
    forward, reverse = (convert(drop, quantity="pressure", from_unit="Pa", to_unit="kPa") for drop in drops)
    return f"{forward:.3g} kPa forward and {reverse:.3g} kPa in reverse"
