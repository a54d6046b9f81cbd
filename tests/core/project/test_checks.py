"""What speaks against ordering a chip: which findings there are, of what, and which of them forbid it.

Truths: pressures against a second way through the same estimate; depths, names and places by hand.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from core.chip.plan import ChipChannel, ChipPlan, SteppedField
from core.fabrication.making import making_of
from core.fabrication.process import ProcessKind
from core.fabrication.shipped import shipped_process
from core.findings import Severity
from core.hydraulics.estimate import estimate
from core.operating import OperatingPoint
from core.parameters import ChannelParameters
from core.project import ChipProject, ParameterSet, SolvedResult
from core.project.checks import errors_in, held_name, highest_pressure, order_findings, placed_sets
from core.project.folds import added_length_um, fold_notes, score_of_made

WIDE = ChannelParameters(stages=2)
IMPOSSIBLE = ChannelParameters(loop_radius_um=10.0)


def project_of(*channels: ChannelParameters, **values: object) -> ChipProject:
    sets = tuple(ParameterSet(name=name, channel=channel) for name, channel in zip("abc", channels, strict=False))
    return ChipProject(name="Bench chip", sets=sets, **values)


def codes(project: ChipProject, name: str = "") -> set[str]:
    return {finding.code for where, finding in order_findings(project) if where == name}


def test_a_good_chip_has_no_findings():
    assert order_findings(project_of(WIDE)) == ()


def test_findings_of_shape_process_and_chip_stand_together():
    narrow = WIDE.with_values({"channel_width_um": 30.0, "loop_width_um": 30.0, "depth_um": 40.0})
    channels = (ChipChannel(set_name="a"), ChipChannel(set_name="b", x_um=19_000.0))
    project = project_of(WIDE, narrow, IMPOSSIBLE, plan=ChipPlan(channels=channels))
    found = order_findings(project)
    assert {name for name, _ in found} == {"", "b", "c"}
    assert [name for name, _ in found] == sorted((name for name, _ in found), key=["b", "c", ""].index)
    assert all(finding.severity is Severity.ERROR for name, finding in found if name == "c")


def test_errors_of_sets_that_are_not_placed_do_not_forbid_the_order():
    project = project_of(WIDE, IMPOSSIBLE, plan=ChipPlan(channels=(ChipChannel(set_name="a"),)))
    assert codes(project, "b")
    assert errors_in(order_findings(project), project) == ()
    everything = project.with_plan(ChipPlan())
    assert {name for name, _ in errors_in(order_findings(everything), everything)} >= {"b"}


def test_without_places_all_sets_are_on_the_chip():
    project = project_of(WIDE, WIDE)
    assert [each.name for each in placed_sets(project)] == ["a", "b"]
    project = project.with_plan(ChipPlan(channels=(ChipChannel(set_name="b"), ChipChannel(set_name="b", y_um=5e3))))
    assert [each.name for each in placed_sets(project)] == ["b"]


def test_one_mask_makes_one_depth():
    deep, shallow = WIDE, WIDE.with_values({"depth_um": 150.0})
    project = project_of(deep, shallow)
    (finding,) = [finding for _, finding in order_findings(project) if finding.code == "depths_differ"]
    assert (finding.value_um, finding.limit_um, finding.severity) == (200.0, 150.0, Severity.ERROR)
    assert "150, 200 um deep" in finding.message
    assert "depths_differ" not in codes(project.with_plan(ChipPlan(channels=(ChipChannel(set_name="a"),))))
    stepped = ChipPlan(plate="wafer", series=(SteppedField(name="depth_um", first=50.0, last=100.0, steps=3),))
    assert "depths_differ" in codes(project_of(deep, plan=stepped))


def test_chips_at_the_ends_of_a_series_are_checked_too():
    # by hand: 40 um is below the 50 um that a film mask holds, the 100 um of the set and all others are not
    narrow = WIDE.with_values({"channel_width_um": 100.0, "loop_width_um": 100.0, "depth_um": 60.0})
    series = (SteppedField(name="channel_width_um", first=100.0, last=40.0, steps=4),)
    plan = ChipPlan(plate="wafer", chip_width_um=15_000.0, chip_height_um=10_000.0, series=series)
    found = [each for _, each in order_findings(project_of(narrow, plan=plan)) if each.severity is Severity.ERROR]
    assert {each.code for each in found} >= {"width_below_min"}
    assert all(each.message.startswith("on the chip with channel_width_um 40: ") for each in found)
    assert all((each.x_um, each.cure) == (None, None) for each in found)
    single = replace(plan, plate="single chip")
    assert all(each.severity is not Severity.ERROR for _, each in order_findings(project_of(narrow, plan=single)))


# --- pressure -------------------------------------------------------------------------------


def test_the_pressure_is_that_of_what_is_made_in_the_worse_direction_with_its_band():
    process = shipped_process(ProcessKind.WET_GLASS)
    channel = ChannelParameters(channel_width_um=300.0, loop_width_um=300.0, loop_radius_um=500.0, depth_um=80.0)
    project = project_of(channel, process=process)
    made = making_of(channel, process).flow
    flows = np.array([project.operating.flow_ul_min])
    score = estimate(made, fluid=project.operating.fluid_state(), flows_ul_min=flows).score(0)
    worst_pa = max(score.forward_pressure_pa, score.reverse_pressure_pa)
    pressure_pa, words = highest_pressure(project, project.sets[0])
    assert made != channel
    assert pressure_pa == pytest.approx(worst_pa * (1 + score.error_band_percent / 100), rel=1e-12)
    assert words == "at 1200 uL/min, estimate with its band"


def solved(channel: ChannelParameters, **values: object) -> SolvedResult:
    numbers = {"forward_pressure_pa": 9e4, "reverse_pressure_pa": 1e5, "error_band_percent": 3.0, "valid": True}
    return SolvedResult(set_name="a", channel=channel, operating=OperatingPoint(), reynolds=99.0, **numbers | values)


def test_a_fresh_flow_solve_comes_before_the_estimate():
    project = replace(project_of(WIDE), solved=(solved(making_of(WIDE, project_of(WIDE).process).flow),))
    assert highest_pressure(project, project.sets[0]) == (
        pytest.approx(1.03e5),
        "at 1200 uL/min, flow solve with its band",
    )
    assert codes(project, "a")  # 103 kPa is above the half of 200 kPa


@pytest.mark.parametrize(
    ("values", "operating"),
    [
        ({"valid": False}, OperatingPoint()),
        ({"forward_pressure_pa": None}, OperatingPoint()),
        ({}, OperatingPoint(flow_ul_min=900.0)),
        ({"channel": WIDE.with_values({"stages": 3})}, OperatingPoint()),
    ],
)
def test_a_stale_or_doubtful_solve_does_not_count(values, operating):
    result = replace(solved(WIDE), **values)
    project = replace(project_of(WIDE), solved=(result,), operating=operating)
    assert highest_pressure(project, project.sets[0])[1].endswith("estimate with its band")


def test_without_a_fluid_there_is_no_pressure():
    project = project_of(WIDE, operating=OperatingPoint(fluid="ethanol", temperature_c=95.0))
    assert highest_pressure(project, project.sets[0]) == (None, "")
    assert order_findings(project) == ()


def test_folding_adds_its_plain_channel_to_the_pressure_and_tells_so():
    """Truth: the duct resistance of the added length, by hand, which a longer lead must add to either direction."""
    channel = ChannelParameters(stages=12)
    plan = ChipPlan(channels=(ChipChannel(set_name="a", rows=3),), chip_width_um=60000.0, chip_height_um=60000.0)
    straight, folded = project_of(channel), project_of(channel, plan=plan)
    added_um = added_length_um(folded, "a")
    assert added_um > 0.0
    assert added_length_um(straight, "a") == 0.0
    width_m = depth_m = 200e-6
    fluid, flow_m3_s = folded.operating.fluid_state(), folded.operating.flow_ul_min * 1e-9 / 60.0
    duct_pa = 28.454 * fluid.viscosity_pa_s * added_um * 1e-6 * flow_m3_s / (width_m * depth_m**3)
    plain, longer = (score_of_made(folded, channel, added_um=length) for length in (0.0, added_um))
    assert longer.forward_pressure_pa - plain.forward_pressure_pa == pytest.approx(duct_pa, rel=2e-3)
    assert longer.reverse_pressure_pa - plain.reverse_pressure_pa == pytest.approx(duct_pa, rel=2e-3)
    pressure_pa, words = highest_pressure(folded, folded.sets[0])
    assert pressure_pa > highest_pressure(straight, straight.sets[0])[0] + duct_pa
    assert words.endswith("with the bends of its rows")
    assert "is folded" in fold_notes(folded)[0]
    assert fold_notes(straight) == ()


# --- names ----------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("name", "held"),
    [
        ("Four loops, 2nd try", None),
        ("Spülchip", None),
        ("Maß", None),
        ("Ω chip", "CHIP"),
        ("水", "CHANNEL"),
        ("☂", "CHANNEL"),
    ],
)
def test_names_of_which_files_lose_letters(name, held):
    assert held_name(name) == held


def test_a_name_that_files_cannot_hold_is_a_warning_and_what_they_say_is_told():
    project = replace(project_of(WIDE), name="Ω chip")
    ((where, finding),) = [found for found in order_findings(project) if found[1].code == "name_changed"]
    assert (where, finding.severity) == ("", Severity.WARNING)
    assert "chip name 'Ω chip', they will say CHIP" in finding.message
