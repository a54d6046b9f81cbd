"""Random channels and processes for tests of making."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from hypothesis import strategies as st

from core.fabrication.process import CUT_KINDS, ETCHED_KINDS, MILLED_KINDS, PROCESS_FIELDS, Process, ProcessKind
from core.fabrication.shipped import shipped_process
from core.parameters import CHANNEL_FIELDS, ChannelParameters
from tests.core.geometry.designs import sensible

if TYPE_CHECKING:
    import numpy as np

ALLOWANCES = PROCESS_FIELDS["allowance"].choices


def fitting_channel(rng: np.random.Generator, process: Process, *, most_stages: int = 3) -> ChannelParameters:
    """Return a channel of sensible proportions and of the size and depth that a process is for."""
    channel = sensible(rng, most_stages=most_stages)
    deep = float(rng.uniform(process.min_depth_um, process.max_depth_um))
    deep = min(deep, 0.4 * channel.channel_width_um / max(process.undercut_ratio, 0.2))
    return replace(channel, depth_um=max(deep, CHANNEL_FIELDS["depth_um"].minimum))


def random_process(rng: np.random.Generator, kind: ProcessKind) -> Process:
    """Return a shipped process with random shifts of the walls, as its kind allows them."""
    values: dict[str, object] = {"bias_um": float(rng.uniform(-4.0, 4.0)), "min_radius_um": float(rng.choice([0, 3]))}
    if kind in ETCHED_KINDS:
        values["undercut_ratio"] = float(rng.uniform(0.0, 1.2))
    if kind in CUT_KINDS:
        values["kerf_um"] = float(rng.uniform(0.0, 20.0))
    if kind in MILLED_KINDS:
        values["tool_diameter_um"] = float(rng.choice([0, 5, 20]))
    return shipped_process(kind).with_values(values)


CHANNELS = st.builds(
    ChannelParameters,
    **{
        field.name: st.sampled_from(field.choices)
        if field.choices
        else st.integers(0, 100)
        if field.whole
        else st.floats(field.minimum, field.maximum)
        for field in CHANNEL_FIELDS.values()
    },
)
KINDS = st.sampled_from(tuple(ProcessKind))
