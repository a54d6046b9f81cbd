"""Accuracy against designs solved in three dimensions with the project's own flow solve.

The table (``solved_designs.csv``) says which designs the coefficients were fitted to and which were
kept aside. It is a comparison of two parts of this program, not an outside truth: the flow solve has
its own tests.
"""

from __future__ import annotations

import csv
from pathlib import Path

import numpy as np
import pytest

from core.fluids import fluid_state
from core.hydraulics.estimate import estimate
from core.parameters import CHANNEL_FIELDS, ChannelParameters

TABLE = Path(__file__).with_name("solved_designs.csv")
FLUID = fluid_state(fluid="own", own_density_kg_m3=1000.0, own_viscosity_mpa_s=1.0)  # nu = 1e-6 m^2/s


def _rows():
    lines = [line for line in TABLE.read_text().splitlines() if not line.startswith("#")]
    return list(csv.DictReader(lines))


def _compared(row):
    """Return relative errors of both drops, solved and estimated Di - 1, and errors of both shares."""
    parameters = ChannelParameters(**{name: row[name] for name in CHANNEL_FIELDS})
    width, depth = parameters.channel_width_um * 1e-6, parameters.depth_um * 1e-6
    speed = float(row["reynolds"]) * 1e-6 * (width + depth) / (2.0 * width * depth)
    result = estimate(parameters, fluid=FLUID, flows_ul_min=speed * width * depth * 60e9)
    forward, reverse = float(row["forward_drop"]), float(row["reverse_drop"])
    head = 1000.0 * speed**2
    return {
        "pressure": [result.forward_pressure_pa[0] / head / forward - 1.0, result.reverse_pressure_pa[0] / head / reverse - 1.0],
        "solved": reverse / forward - 1.0,
        "estimated": result.rectification[0],
        "band": result.rectification_band_percent[0] / 100.0,
        "share": [
            result.loop_share_forward[0] - float(row["share_forward"]),
            result.loop_share_reverse[0] - float(row["share_reverse"]),
        ],
    }


COMPARED = {use: [_compared(row) for row in _rows() if row["use"] == use] for use in ("fit", "check")}
