"""One channel more on a chip: at a free place, level, the others where they were.

Truth: bounds of the bodies compared pair by pair, and the chip's own findings, which measure true outlines.
"""

from __future__ import annotations

import pytest

from core.chip.adding import added
from core.chip.bodies import channel_of, wanted_body
from core.chip.chip_findings import chip_findings
from core.chip.fitting import packed
from core.chip.plan import MOST_CHANNELS, ChipChannel, ChipPlan
from core.errors import DesignValueError, GeometryError
from core.fabrication.shipped import shipped_process
from core.findings import Severity
from core.parameters import ChannelParameters

PROCESS = shipped_process("cast, film mask")
CHANNELS = {"Alpha": ChannelParameters(stages=4), "Beta": ChannelParameters(stages=8, loop_radius_um=260.0)}


def boxes(plan):
    found = []
    for each in plan.channels:
        x0, y0, x1, y1 = wanted_body(plan, each, channel_of(each, CHANNELS), PROCESS).bounds_um
        found.append((x0 + each.x_um, y0 + each.y_um, x1 + each.x_um, y1 + each.y_um))
    return found


def gap_um(one, other):
    """Return the distance of two boxes along the axis on which they are further apart."""
    return max(one[0] - other[2], other[0] - one[2], one[1] - other[3], other[1] - one[3])


@pytest.fixture
def begun():
    return packed(ChipPlan(), CHANNELS, PROCESS)


def test_added_ones_keep_clear_and_move_nothing(begun):
    plan = begun
    for name in ("Alpha", "Beta", "Alpha", "Beta"):
        before, plan = plan, added(plan, CHANNELS, PROCESS, set_name=name)
        assert plan.channels[:-1] == before.channels
        assert plan.channels[-1].set_name == name
    found = boxes(plan)
    for number, one in enumerate(found):
        assert abs(one[0]) <= 19_000.0
        assert abs(one[3]) <= 9_000.0
        assert all(gap_um(one, other) >= plan.spacing_um for other in found[:number])
    assert not [f for f in chip_findings(plan, CHANNELS, process=PROCESS) if f.severity is Severity.ERROR]


def test_a_control_goes_next_to_its_rectifier(begun):
    plan = added(begun, CHANNELS, PROCESS, set_name="Beta", is_control=True)
    control = plan.channels[-1]
    assert control.is_control
    found = boxes(plan)
    owner = next(number for number, each in enumerate(begun.channels) if each.set_name == "Beta")
    assert gap_um(found[-1], found[owner]) == pytest.approx(begun.spacing_um, abs=0.1)


def test_it_is_level():
    plan = added(ChipPlan(channels=(ChipChannel(set_name="Beta"),)), CHANNELS, PROCESS, set_name="Alpha")
    body = wanted_body(plan, plan.channels[-1], CHANNELS["Alpha"], PROCESS)
    first, second = body.ends_um
    assert first[1] == pytest.approx(second[1], abs=1e-6)


def test_where_there_is_no_room_it_stands_in_the_middle_and_is_a_finding():
    plan = packed(ChipPlan(chip_width_um=12_000.0, chip_height_um=4_000.0, channels=(ChipChannel(set_name="Alpha"),)),
                  CHANNELS, PROCESS)  # fmt: skip
    full = added(plan, CHANNELS, PROCESS, set_name="Alpha")
    assert (full.channels[-1].x_um, full.channels[-1].y_um) == (0.0, 0.0)
    assert "channels_overlap" in {finding.code for finding in chip_findings(full, CHANNELS, process=PROCESS)}


def test_what_cannot_be_added_is_told(begun):
    with pytest.raises(DesignValueError, match="did you mean 'Alpha'"):
        added(begun, CHANNELS, PROCESS, set_name="Alfa")
    with pytest.raises(GeometryError, match="Blocked"):
        added(begun, {"Blocked": ChannelParameters(loop_radius_um=20.0)}, PROCESS, set_name="Blocked")
    full = ChipPlan(channels=(ChipChannel(set_name="Alpha"),) * MOST_CHANNELS)
    with pytest.raises(DesignValueError, match="at most 200"):
        added(full, CHANNELS, PROCESS, set_name="Alpha")
