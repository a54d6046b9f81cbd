"""Packing: nothing overlaps, ports stand level and on their pitch, controls beside their rectifiers."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.chip.bodies import channel_of, wanted_body
from core.chip.chip_findings import chip_findings
from core.chip.fitting import folded, packed, rows_that_fit, too_large
from core.chip.plan import ChipChannel, ChipPlan
from core.chip.stands import stands_of
from core.errors import DesignValueError
from core.fabrication.process import ProcessKind
from core.fabrication.shipped import shipped_process
from core.findings import Severity
from core.parameters import ChannelParameters
from tests.core.chip.seen import CAST, SMALL, random_plan, random_sets

PROCESSES = [
    shipped_process(kind) for kind in (ProcessKind.CAST_FILM, ProcessKind.CAST_CHROME, ProcessKind.DRY_SILICON)
]


@given(st.integers(0, 10**6))
def test_packed_chips_have_no_error_findings_and_lose_nothing(seed):
    rng = np.random.default_rng(seed)
    plan, process = random_plan(rng), PROCESSES[int(rng.integers(3))]
    sets = random_sets(rng, plan, process)
    controls = bool(rng.integers(2))
    result = packed(plan, sets, process, controls=controls, chip_name="Rinse")
    findings = chip_findings(result, sets, process=process, chip_name="Rinse")
    assert [each.message for each in findings if each.severity is Severity.ERROR] == []
    kept = {"edge_clearance", "spacing", "port_clearance", "no_room"}
    assert [each.message for each in findings if each.code in kept] == []
    assert [entry.set_name for entry in result.channels if not entry.is_control] == list(sets)
    assert sum(entry.is_control for entry in result.channels) == controls * len(sets)
    assert result.chip_width_um >= plan.chip_width_um
    assert packed(plan, sets, process, controls=controls, chip_name="Rinse") == result


@given(st.integers(0, 10**6), st.sampled_from([1500.0, 2250.0, 4500.0]))
def test_ports_stand_level_and_on_their_pitch(seed, pitch):
    rng = np.random.default_rng(seed)
    plan = replace(random_plan(rng), port_pitch_um=pitch)
    sets = random_sets(rng, plan, CAST)
    (stands,) = stands_of(packed(plan, sets, CAST, controls=True), sets, CAST)
    heights = [stand.ports_um[:, 1] for stand in stands]
    assert np.ptp(np.array(heights), axis=1).max() < 2e-3
    steps = (np.array(heights)[:, 0] - heights[0][0]) / pitch
    assert np.abs(steps - np.round(steps)).max() * pitch < 3e-3  # shifts are whole nanometres


def test_a_control_lies_right_below_its_rectifier():
    sets = {"A": SMALL, "B": replace(SMALL, stages=5), "C": replace(SMALL, stages=2)}
    plan = packed(ChipPlan(), sets, CAST, controls=True)
    (stands,) = stands_of(plan, sets, CAST)
    for name in sets:
        rectifier, control = (stand for stand in stands if stand.title.startswith(name))
        assert control.title == f"{name} control"
        assert control.channel.stages == 0
        gap = rectifier.box_um[1] - control.box_um[3]
        assert plan.spacing_um <= gap <= plan.spacing_um + 1.0
        between = [s for s in stands if s not in (rectifier, control)
                   and control.box_um[3] < s.at_um[1] < rectifier.box_um[1]
                   and abs(s.at_um[0] - control.at_um[0]) < 1000.0]  # fmt: skip
        assert not between
    assert packed(plan, sets, CAST, controls=True).channels == plan.channels  # no second control for anyone


def test_a_chip_of_given_size_keeps_it_and_its_channels_are_placed_anew():
    sets = {"A": SMALL, "B": replace(SMALL, stages=5)}
    heap = ChipPlan(channels=(ChipChannel(set_name="B"), ChipChannel(set_name="A"), ChipChannel(set_name="A")))
    plan = packed(heap, sets, CAST)
    assert (plan.chip_width_um, plan.chip_height_um) == (heap.chip_width_um, heap.chip_height_um)
    assert [entry.set_name for entry in plan.channels] == ["B", "A", "A"]
    assert not [each for each in chip_findings(plan, sets, process=CAST) if each.code != "lettering_too_fine"]
    small = replace(heap, chip_width_um=8000.0, chip_height_um=3000.0)
    assert packed(small, sets, CAST).chip_width_um == 8000.0  # over the edge, which is a finding
    assert {each.code for each in chip_findings(packed(small, sets, CAST), sets, process=CAST)} & {
        "port_off_chip", "channel_off_chip", "chip_too_small",
    }  # fmt: skip


def test_a_chip_grows_to_hold_its_channels_and_words():
    plan = packed(
        ChipPlan(chip_width_um=500.0, chip_height_um=500.0), {"A": SMALL}, CAST, chip_name="A long name indeed"
    )
    assert chip_findings(plan, {"A": SMALL}, process=CAST, chip_name="A long name indeed") == ()
    assert plan.chip_width_um % 100.0 == 0.0


def test_channels_that_cannot_be_built_keep_their_places():
    sets = {"A": SMALL, "Bad": replace(SMALL, run_bend_deg=90.0)}
    plan = ChipPlan(
        channels=(ChipChannel(set_name="Bad", x_um=123.0), ChipChannel(set_name="A"), ChipChannel(set_name="?"))
    )
    result = packed(plan, sets, CAST)
    assert result.channels[0] == plan.channels[0]
    assert result.channels[2] == plan.channels[2]


def test_a_long_chain_is_folded_into_the_fewest_rows_that_fit():
    sets = {"Long": replace(SMALL, stages=60), "Short": SMALL}
    plan = ChipPlan(chip_width_um=20000.0, chip_height_um=20000.0)
    result = folded(plan, sets, CAST)
    long, short = result.channels
    assert short.rows == 1
    assert long.rows > 1
    room = 20000.0 - 2.0 * plan.edge_clearance_um
    x0, _, x1, _ = wanted_body(plan, long, channel_of(long, sets), CAST).bounds_um
    assert x1 - x0 <= room
    fewer = replace(long, rows=long.rows - 1, turn_deg=0.0)
    x0, _, x1, _ = wanted_body(plan, fewer, channel_of(fewer, sets), CAST).bounds_um
    assert x1 - x0 > room
    assert rows_that_fit(replace(plan, chip_width_um=2000.0), long, sets["Long"], CAST) is None
    assert not [each for each in chip_findings(result, sets, process=CAST) if each.severity is Severity.ERROR]


def test_what_fits_the_chip_in_no_number_of_rows_is_named():
    sets = {"Long": replace(SMALL, stages=60), "Short": SMALL, "Bad": replace(SMALL, run_bend_deg=90.0)}
    plan = ChipPlan(
        channels=tuple(ChipChannel(set_name=name) for name in ("Long", "Short", "Bad", "Gone")),
        chip_width_um=20000.0, chip_height_um=20000.0,
    )  # fmt: skip
    assert too_large(plan, sets, CAST) == ("Long",)
    assert too_large(folded(plan, sets, CAST), sets, CAST) == ()
    tiny = replace(plan, chip_width_um=4500.0)
    assert too_large(folded(tiny, sets, CAST), sets, CAST) == ("Long", "Short")
    low = replace(plan, chip_height_um=2.0 * plan.edge_clearance_um + 100.0)
    assert too_large(low, sets, CAST) == ("Long", "Short"), "lower than a pad"


def test_too_many_channels_are_refused_in_one_line():
    sets = {f"S{number}": ChannelParameters() for number in range(100)}
    plan = ChipPlan(channels=tuple(ChipChannel(set_name=f"S{number % 100}") for number in range(150)))
    with pytest.raises(DesignValueError, match="channels is 250; allowed: at most 200"):
        packed(plan, sets, CAST, controls=True)
