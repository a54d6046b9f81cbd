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
from core.hydraulics.trust import OUTSIDE_FACTOR, PRESSURE_PERCENT
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
        "reynolds": float(row["reynolds"]),
        "pressure": [
            result.forward_pressure_pa[0] / head / forward - 1.0,
            result.reverse_pressure_pa[0] / head / reverse - 1.0,
        ],
        "solved": reverse / forward - 1.0,
        "estimated": result.rectification[0],
        "band": result.diodicity_band[0],
        "share": [
            result.loop_share_forward[0] - float(row["share_forward"]),
            result.loop_share_reverse[0] - float(row["share_reverse"]),
        ],
    }


USES = ("fit", "check", "fit outside", "check outside")
COMPARED = {use: [_compared(row) for row in _rows() if row["use"] == use] for use in USES}
HIGH_ENOUGH_RE = 9.0  # below, Di - 1 of the solves is mesh error


def _errors(use, *, least=0.005):
    """Return absolute relative errors of the drops, and of Di - 1 where it stands clear of zero."""
    pressure = np.abs([one["pressure"] for one in COMPARED[use]]).ravel()
    clear = [one for one in COMPARED[use] if one["solved"] > least]
    rectification = np.array([abs(one["estimated"] / one["solved"] - 1.0) for one in clear])
    return pressure, rectification


def _inside(use):
    """Return the share of results whose Di lies within the band that the estimate gives itself."""
    judged = [one for one in COMPARED[use] if one["reynolds"] > HIGH_ENOUGH_RE]
    return np.mean([abs(one["estimated"] - one["solved"]) <= one["band"] for one in judged])


def test_designs_the_coefficients_were_fitted_to():
    """18 designs. Drops: median 1.1 %, 90th percentile 2.9 %. Di - 1 above 0.005: median 9 %, 90th percentile 30 %."""
    pressure, rectification = _errors("fit")
    assert np.median(pressure) < 0.015
    assert np.quantile(pressure, 0.9) < 0.04
    assert np.median(rectification) < 0.15
    assert np.quantile(rectification, 0.9) < 0.45
    assert _inside("fit") > 0.85


def test_designs_kept_aside():
    """18 designs. Drops: median 1.1 %, 90th percentile 2.5 %.

    Di - 1 above 0.005 (12 points): median 24 %, 90th percentile 55 %. Designs with the run bend
    between 0.4 and 0.5 of the loop angle were called out of range after these solves; counted
    in, the median was 29 %, the 90th percentile 69 %.
    """
    pressure, rectification = _errors("check")
    assert np.median(pressure) < 0.02
    assert np.quantile(pressure, 0.9) < 0.04
    assert np.median(rectification) < 0.4
    assert np.quantile(rectification, 0.9) < 0.7
    assert _inside("check") > 0.9


@pytest.mark.parametrize("use", ["fit outside", "check outside"])
def test_designs_out_of_range(use):
    """24 designs. Drops: median 1.2 %, 90th percentile 4.6 %, at worst 28 %.

    Di - 1 above 0.005 (21 points) is wrong by its own size at the median. The estimate calls itself not
    valid there; nine in ten lie inside its wider bands.
    """
    pressure, _ = _errors(use)
    assert np.quantile(pressure, 0.9) < PRESSURE_PERCENT * OUTSIDE_FACTOR / 100.0
    assert _inside(use) > 0.9


def test_sixty_designs_cover_the_flows():
    reynolds = [one["reynolds"] for use in USES for one in COMPARED[use]]
    assert len({row["design"] for row in _rows()}) >= 60
    assert min(reynolds) <= 1.0
    assert max(reynolds) >= 150.0


@pytest.mark.parametrize("use", ["fit", "check"])
def test_loop_shares(use):
    """90th percentile 0.02 of the flow."""
    assert np.quantile(np.abs([one["share"] for one in COMPARED[use]]), 0.9) < 0.03


def test_no_solved_design_is_flattered():
    """Where a solve found next to nothing (|Di - 1| below 0.001), the estimate does not promise a percent."""
    nothing = [one for use in ("fit", "check") for one in COMPARED[use] if abs(one["solved"]) < 1e-3]
    assert len(nothing) > 50
    assert max(one["estimated"] for one in nothing) < 0.01
