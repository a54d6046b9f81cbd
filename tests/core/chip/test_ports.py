"""Ports: what is drawn for a hole so that it comes out at its size, for each way of making it."""

from __future__ import annotations

from math import pi

import numpy as np
import pytest

from core.chip.plan import ChipPlan
from core.chip.ports import PortWay, cut_shift_um, pad_radius_um, port_figures, port_way
from core.chip.scene import Layer
from core.fabrication.process import ProcessKind
from core.fabrication.shipped import shipped_process
from core.geometry.pads import Pad
from core.parameters import ChannelParameters

PADS = (
    Pad(centre_um=np.array([100.0, -50.0]), radius_um=800.0),
    Pad(centre_um=np.array([9000.0, 0.0]), radius_um=800.0),
)


def test_every_kind_of_process_has_a_way():
    ways = {kind: port_way(shipped_process(kind)) for kind in ProcessKind}
    assert ways[ProcessKind.CAST_FILM] is ways[ProcessKind.MILLED_MOULD] is PortWay.PUNCHED
    assert ways[ProcessKind.WET_GLASS] is PortWay.DRILLED
    assert ways[ProcessKind.LASER_ACRYLIC] is PortWay.CUT


@pytest.mark.parametrize("kind", ProcessKind)
def test_the_hole_as_made_has_the_wanted_diameter(kind):
    figures = port_figures(PADS, port_diameter_um=1000.0, process=shipped_process(kind), drawn=False)
    for figure, pad in zip(figures, PADS, strict=True):
        assert figure.layer is Layer.PORTS
        assert figure.outline.area_um2 == pytest.approx(pi * 500.0**2)
        x0, y0, x1, y1 = figure.outline.bounds_um
        assert [0.5 * (x0 + x1), 0.5 * (y0 + y1)] == pytest.approx(pad.centre_um.tolist())


@pytest.mark.parametrize("kind", [kind for kind in ProcessKind if port_way(shipped_process(kind)) is PortWay.CUT])
def test_a_hole_that_is_cut_is_drawn_smaller_by_what_cutting_takes(kind):
    process = shipped_process(kind)
    figure = port_figures(PADS, port_diameter_um=1000.0, process=process, drawn=True)[0]
    x0, _, x1, _ = figure.outline.bounds_um
    widens = 0.5 * process.kerf_um + process.bias_um if process.allowance == "in the drawing" else 0.0
    assert 0.5 * (x1 - x0) + widens == pytest.approx(500.0)


def test_the_beam_takes_half_its_kerf_on_each_side():
    process = shipped_process(ProcessKind.LASER_ACRYLIC).with_values({"kerf_um": 200.0, "bias_um": 3.0})
    assert cut_shift_um(process) == 103.0
    assert cut_shift_um(process.with_values({"allowance": "by the shop"})) == 0.0
    assert cut_shift_um(shipped_process(ProcessKind.CAST_FILM).with_values({"bias_um": 3.0})) == 0.0


def test_etched_glass_is_drilled_so_undercut_does_not_change_its_holes():
    process = shipped_process(ProcessKind.WET_GLASS)
    assert process.undercut_ratio > 0.0
    figure = port_figures(PADS, port_diameter_um=1000.0, process=process, drawn=True)[0]
    assert figure.outline.area_um2 == pytest.approx(pi * 500.0**2)


@pytest.mark.parametrize("diameter", [100.0, 750.0, 6000.0])
def test_a_punched_port_is_marked_by_a_cross_well_inside_the_punch(diameter):
    process = shipped_process(ProcessKind.CAST_FILM)
    figure = port_figures(PADS, port_diameter_um=diameter, process=process, drawn=True)[0]
    away = np.hypot(*(figure.outline.outer.vertices_um - PADS[0].centre_um).T)
    assert away.max() < 0.5 * diameter
    assert len(away) == 12
    if diameter >= 5.0 * process.min_drawn_um:
        assert np.hypot(*np.diff(figure.outline.outer.vertices_um, axis=0).T).min() >= process.min_drawn_um - 1e-9


def test_pads_hold_port_and_margin_and_are_wider_than_the_channel():
    plan = ChipPlan(port_diameter_um=1000.0, pad_margin_um=250.0)
    assert pad_radius_um(plan, ChannelParameters(channel_width_um=200.0)) == 750.0
    assert pad_radius_um(plan, ChannelParameters(channel_width_um=2000.0)) == pytest.approx(1100.0)
