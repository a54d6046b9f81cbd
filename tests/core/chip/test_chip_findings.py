"""Findings about a chip: each found where it is, measured exactly, and gone when its cure is applied."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
import shapely
from hypothesis import given
from hypothesis import strategies as st

from core.chip.chip_findings import MOST_PAIRS, chip_findings
from core.chip.fitting import packed
from core.chip.furniture import chip_box
from core.chip.plan import CHIP_FIELDS, ChipChannel, ChipPlan, SteppedField
from core.chip.stands import stands_of
from core.fabrication.process import ProcessKind
from core.fabrication.shipped import shipped_process
from core.findings import Finding, Severity
from tests.core.chip.seen import CAST, SMALL, as_polygon

SETS = {"A": SMALL, "B": replace(SMALL, stages=5), "L": replace(SMALL, stages=40)}
QUIET = {"scale_bar": "no", "test_bars": "no", "alignment_pairs": 0, "corner_marks": "no", "cut_lines": "none"}


def plan_of(*entries: ChipChannel, **values) -> ChipPlan:
    return ChipPlan(channels=entries, **(QUIET | {"text_height_um": 500.0} | values))


def at(name: str, x: float = 0.0, y: float = 0.0, **more) -> ChipChannel:
    return ChipChannel(set_name=name, x_um=x, y_um=y, **more)


def found(plan: ChipPlan, sets=SETS, process=CAST) -> dict[str, Finding]:
    return {each.code: each for each in chip_findings(plan, sets, process=process, chip_name="Rinse 7")}


def assert_cured(plan: ChipPlan, finding: Finding, **options) -> None:
    assert finding.cure is not None
    name, value = finding.cure
    assert name in CHIP_FIELDS
    assert name in finding.message
    assert finding.code not in found(plan.with_values({name: value}), **options)


def polygons(plan: ChipPlan, sets=SETS) -> list[shapely.Polygon]:
    (chip,) = stands_of(plan, sets, CAST)
    return [as_polygon(stand.outline, sagitta_um=1e-3) for stand in chip]


def test_a_chip_with_room_has_no_findings():
    assert chip_findings(ChipPlan(), SETS, process=CAST, chip_name="Rinse 7") == ()
    assert found(plan_of(at("A"))) == {}


def test_a_set_that_is_not_there():
    finding = found(plan_of(at("A"), at("a", 100.0, 7000.0)))["unknown_set"]
    assert finding.severity is Severity.ERROR
    assert (finding.x_um, finding.y_um) == (100.0, 7000.0)
    assert "'a'" in finding.message


def test_a_channel_that_cannot_be_built():
    sets = SETS | {"Bad": replace(SMALL, run_bend_deg=90.0), "Short": replace(SMALL, lead_in_um=100.0)}
    for name in ("Bad", "Short"):
        finding = found(plan_of(at(name, 5.0, 6.0)), sets)["channel_impossible"]
        assert f"'{name}'" in finding.message
        assert (finding.x_um, finding.y_um) == (5.0, 6.0)
    assert "channel_impossible" in found(plan_of(at("A", rows=9)))  # more rows than stages


@pytest.mark.parametrize("axis", [0, 1])
@pytest.mark.parametrize("sign", [-1, 1])
def test_clearance_to_each_edge_is_measured_and_cured(axis, sign):
    shift = [0.0, 0.0]
    shift[axis] = sign * (16000.0, 8800.0)[axis]
    plan = plan_of(at("A", *shift))
    (polygon,) = polygons(plan)
    chip = chip_box(plan)
    side = axis + 2 if sign > 0 else axis
    rest = sign * (chip[side] - polygon.bounds[side])
    codes = found(plan)
    code = "edge_clearance" if rest >= 0.0 else "channel_off_chip"
    if "port_off_chip" in codes:
        code, rest = "port_off_chip", codes["port_off_chip"].value_um
    finding = codes[code]
    assert finding.value_um == pytest.approx(rest, abs=2e-3)
    assert finding.field == ("chip_width_um", "chip_height_um")[axis]
    place = (finding.x_um, finding.y_um)
    assert polygon.distance(shapely.Point(place)) < 0.2
    assert finding.ends_um[:2] == place
    assert finding.ends_um[2 + axis] == chip[side]
    assert_cured(plan, finding)


def test_near_the_edge_is_a_warning_nearer_than_a_wall_an_error():
    (polygon,) = polygons(plan_of(at("A")))
    for rest, severity in ((600.0, Severity.WARNING), (0.5 * CAST.min_wall_um, Severity.ERROR)):
        finding = found(plan_of(at("A", 0.0, 10000.0 - rest - polygon.bounds[3])))["edge_clearance"]
        assert finding.value_um == pytest.approx(rest, abs=2e-3)
        assert finding.severity is severity


def test_a_port_over_the_edge_is_told_before_its_pad():
    finding = found(plan_of(at("A", 18500.0)))["port_off_chip"]
    (stand,) = next(stands_of(plan_of(at("A", 18500.0)), SETS, CAST))
    over = stand.ports_um[:, 0].max() + 500.0 - 20000.0
    assert over > 0.0
    assert finding.value_um == pytest.approx(-over, abs=1e-6)
    assert finding.severity is Severity.ERROR


def test_a_chip_smaller_than_its_channels_is_told_with_the_size_it_needs():
    plan = plan_of(at("L"), chip_width_um=9000.0)
    findings = chip_findings(plan, SETS, process=CAST)
    assert findings[0].code in ("chip_too_small", "port_off_chip")
    assert "fold it into rows" in findings[0].message
    assert_cured(plan, findings[0])
    tall = plan_of(at("A"), chip_height_um=1400.0, edge_clearance_um=0.0)
    finding = found(tall)["chip_too_small"]
    (polygon,) = polygons(tall)
    assert finding.value_um == pytest.approx((1400.0 - (polygon.bounds[3] - polygon.bounds[1])) / 2, abs=2e-3)
    assert_cured(tall, finding)


@given(
    dx=st.floats(-9000, 9000), dy=st.floats(-2500, 2500), turn=st.floats(-180, 180), other=st.floats(-20, 20)
)  # fmt: skip
def test_walls_between_channels_are_those_of_a_brute_force_measurement(dx, dy, turn, other):
    plan = plan_of(at("A", turn_deg=other), at("B", dx, dy, turn_deg=turn), port_clearance_um=0.0)
    first, second = polygons(plan)
    gap = first.distance(second)
    codes = found(plan)
    if gap == 0.0:
        assert "channels_overlap" in codes
        return
    least, wanted = CAST.min_wall_um, plan.spacing_um
    if abs(gap - least) < 0.01 or abs(gap - wanted) < 0.01:
        return
    expected = "wall_between_channels" if gap < least else "spacing" if gap < wanted else None
    assert {"wall_between_channels", "spacing", "channels_overlap"} & set(codes) == ({expected} if expected else set())
    if expected:
        finding = codes[expected]
        assert finding.value_um == pytest.approx(gap, abs=3e-3)
        x1, y1, x2, y2 = finding.ends_um
        assert first.distance(shapely.Point(x1, y1)) < 3e-3
        assert second.distance(shapely.Point(x2, y2)) < 3e-3
        assert (finding.x_um, finding.y_um) == pytest.approx(((x1 + x2) / 2, (y1 + y2) / 2))


@pytest.mark.parametrize(("share", "code"), [(0.95, "wall_between_channels"), (1.05, "spacing")])
def test_a_wall_thinner_than_the_process_keeps_tight_is_an_error(share, code):
    plan = plan_of(at("A"), at("A", is_control=True), port_clearance_um=0.0)
    (stands,) = stands_of(plan, SETS, CAST)
    first, second = (as_polygon(stand.outline, sagitta_um=0.05) for stand in stands)
    low, high = 0.0, 4000.0
    for _ in range(22):  # where the wall has the share wanted, by halving
        middle = 0.5 * (low + high)
        gap = first.distance(shapely.affinity.translate(second, 0.0, middle))
        low, high = (middle, high) if gap < share * CAST.min_wall_um else (low, middle)
    codes = found(replace(plan, channels=(plan.channels[0], at("A", 0.0, high, is_control=True))))
    assert list(codes) == [code]
    assert codes[code].value_um == pytest.approx(share * CAST.min_wall_um, abs=0.1)
    assert codes[code].severity is (Severity.ERROR if share < 1.0 else Severity.WARNING)


def test_a_channel_inside_another_ones_loop_is_no_neighbour_and_one_inside_its_fluid_overlaps():
    big = replace(
        SMALL, loop_radius_um=6000.0, loop_width_um=2500.0, channel_width_um=2500.0, stages=1, lead_in_um=9000.0,
        lead_out_um=9000.0,
    )  # fmt: skip
    sets = {"Big": big, "Tiny": replace(SMALL, stages=0, lead_in_um=100.0, lead_out_um=100.0)}
    plan = plan_of(at("Big"), at("Tiny"), port_diameter_um=100.0, pad_margin_um=20.0, chip_width_um=90000.0,
                   chip_height_um=60000.0)  # fmt: skip
    outer, _ = polygons(plan, sets)
    hole = shapely.Polygon(outer.interiors[0])
    x, y = hole.representative_point().coords[0]
    assert "channels_overlap" not in found(replace(plan, channels=(plan.channels[0], at("Tiny", x, y))), sets)
    x, y = outer.buffer(-400.0).representative_point().coords[0]
    inside = replace(plan, channels=(plan.channels[0], at("Tiny", x, y)))
    assert outer.contains(polygons(inside, sets)[1])
    assert "channels_overlap" in found(inside, sets)


def test_the_move_that_is_advised_parts_two_channels():
    for dy in (0.0, 400.0, 1900.0, 2400.0):
        plan = plan_of(at("A"), at("B", 300.0, dy))
        codes = found(plan)
        near = [
            each for each in codes.values() if each.code in ("channels_overlap", "wall_between_channels", "spacing")
        ]
        for finding in near:
            words = finding.message.split("move 'B' ")[1].split(",")[0].split(" or ")[0].split()
            by = float(words[0]) * {"up": 1.0, "down": -1.0, "right": 1.0, "left": -1.0}[words[-1]]
            axis = 1 if words[-1] in ("up", "down") else 0
            moved = at("B", 300.0 + by * (axis == 0), dy + by * (axis == 1))
            assert finding.code not in found(replace(plan, channels=(plan.channels[0], moved)))


def test_spacing_and_port_clearance_are_cured_by_lower_limits():
    plan = plan_of(at("A"), at("B", 0.0, 2000.0))
    codes = found(plan)
    assert {"spacing", "port_clearance"} <= set(codes) or "spacing" in codes
    assert_cured(plan, codes["spacing"])
    close = plan_of(at("A"), at("B", 0.0, 2000.0), port_clearance_um=3000.0)
    finding = found(close)["port_clearance"]
    first, second = polygons(close)
    (stands,) = stands_of(close, SETS, CAST)
    apart = []
    for own, other in ((stands[0], second), (stands[1], first)):
        apart += [other.distance(shapely.Point(port)) - 750.0 for port in own.ports_um]
    assert finding.value_um == pytest.approx(min(apart), abs=3e-3)
    assert_cured(close, finding)


def test_ports_closer_than_the_pitch():
    plan = plan_of(at("A"), at("B", 0.0, 3000.0), port_pitch_um=4500.0)
    (stands,) = stands_of(plan, SETS, CAST)
    apart = min(np.hypot(*(one - other)) for one in stands[0].ports_um for other in stands[1].ports_um)
    finding = found(plan)["port_pitch"]
    assert finding.value_um == pytest.approx(apart)
    assert finding.severity is Severity.ERROR
    assert_cured(plan, finding)
    own = plan_of(at("A"), port_pitch_um=20000.0)
    assert "both ports of 'A'" in found(own)["port_pitch"].message
    assert_cured(own, found(own)["port_pitch"])


def test_a_chip_larger_than_its_plate_names_the_plate_it_needs():
    for plate, field in (("wafer", "wafer_diameter_um"), ("plate", "plate_width_um")):
        plan = plan_of(at("A"), plate=plate, chip_width_um=130000.0)
        finding = found(plan)["chip_larger_than_plate"]
        assert finding.field == field
        assert_cured(plan, finding)
    tall = plan_of(at("A"), plate="plate", chip_height_um=130000.0)
    assert found(tall)["chip_larger_than_plate"].field == "plate_height_um"
    many = plan_of(plate="wafer", chip_width_um=500.0, chip_height_um=500.0, street_um=0.0, wafer_diameter_um=450000.0)
    many = replace(many, channels=(at("A"),))
    assert "allowed: 20000" in found(many)["too_many_chips"].message


def test_cutting_lines_of_neighbours_must_not_fall_on_one_another():
    plan = plan_of(at("A"), plate="wafer", street_um=0.0, cut_lines="ticks", chip_width_um=20000.0)
    assert found(plan)["cut_lines_doubled"].severity is Severity.ERROR
    assert_cured(plan, found(plan)["cut_lines_doubled"])
    assert "cut_lines_doubled" not in found(replace(plan, cut_lines="none"))
    laser = shipped_process(ProcessKind.LASER_ACRYLIC)
    narrow = replace(plan, cut_lines="outline", street_um=0.9 * laser.kerf_um)
    assert "cut_lines_doubled" in found(narrow, process=laser)
    assert_cured(narrow, found(narrow, process=laser)["cut_lines_doubled"], process=laser)
    assert "cut_lines_doubled" not in found(replace(narrow, street_um=2.0 * laser.kerf_um), process=laser)


def test_series_that_are_not_made():
    series = (SteppedField(name="loop_radius_um", first=150, last=200, steps=40),)
    single = plan_of(at("A"), series=series)
    assert found(single)["series_unused"].cure == ("plate", "wafer")
    assert_cured(single, found(single)["series_unused"])
    wafer = replace(single, plate="wafer", chip_width_um=14000.0, chip_height_um=14000.0)
    assert "40 steps" in found(wafer)["series_cut_short"].message


def test_a_stepped_value_that_cannot_be_built_is_told_with_its_value():
    series = (SteppedField(name="loop_turn_deg", first=180.0, last=280.0, steps=3),)
    plan = plan_of(at("A"), plate="wafer", series=series, chip_width_um=14000.0, chip_height_um=14000.0)
    finding = found(plan)["channel_impossible"]
    assert "(loop_turn_deg" in finding.message


def test_every_chip_of_a_series_is_measured():
    """Loops grow from chip to chip until they meet the neighbour; the first chip alone would be fine."""
    series = (SteppedField(name="loop_radius_um", first=150.0, last=600.0, steps=4),)
    entries = (at("A"), at("A", 0.0, 1150.0, is_control=True))
    plan = plan_of(*entries, chip_width_um=18000.0, chip_height_um=14000.0, port_diameter_um=300.0, pad_margin_um=50.0)
    assert not {"channels_overlap", "wall_between_channels"} & set(found(plan))
    stepped = found(replace(plan, plate="wafer", series=series))
    worst = stepped.get("channels_overlap") or stepped["wall_between_channels"]
    assert "(loop_radius_um" in worst.message


def test_checks_are_reported_and_can_be_stopped():
    series = (SteppedField(name="loop_radius_um", first=150.0, last=200.0, steps=3),)
    plan = plan_of(at("A"), plate="wafer", series=series, chip_width_um=14000.0, chip_height_um=14000.0)
    told = []
    chip_findings(plan, SETS, process=CAST, report=lambda step, total, text: told.append((step, total)))
    assert told == [(0, 3), (1, 3), (2, 3)]


def test_words_that_do_not_come_out():
    plan = plan_of(at("A"), label="Rinse ☃", text_height_um=20.0)
    codes = found(plan)
    assert "☃" in codes["signs_unknown"].message
    assert_cured(plan, codes["lettering_too_fine"])
    assert codes["lettering_too_fine"].limit_um == CAST.min_drawn_um
    glass = shipped_process(ProcessKind.WET_GLASS)
    wide = {"A": replace(SMALL, channel_width_um=400.0, loop_width_um=400.0, loop_radius_um=900.0, depth_um=50.0)}
    finding = found(plan_of(at("A"), text_height_um=300.0), wide, glass)["lettering_too_fine"]
    assert finding.limit_um >= 200.0  # walls move by the depth of 50 um on each side
    impossible = CAST.with_values({"min_drawn_um": 5000.0})
    assert found(plan, process=impossible)["lettering_too_fine"].cure is None


def test_marks_without_a_place_are_told_once_each_and_cured_by_a_larger_chip():
    plan = ChipPlan(
        chip_width_um=7500.0, chip_height_um=1900.0, edge_clearance_um=0.0, channels=(at("A", turn_deg=2.0),)
    )
    missing = [each for each in chip_findings(plan, SETS, process=CAST, chip_name="Rinse 7") if each.code == "no_room"]
    assert {each.field for each in missing} >= {"text_height_um", "scale_bar", "test_bars"}
    assert len({each.message for each in missing}) == len(missing)
    assert any(each.cure for each in missing)
    for each in missing:
        if each.cure:
            name, value = each.cure
            after = chip_findings(plan.with_values({name: value}), SETS, process=CAST, chip_name="Rinse 7")
            assert not [other for other in after if other.code == "no_room" and other.field == each.field]


def test_a_heap_of_channels_is_told_in_bounded_time():
    plan = plan_of(*[at("A")] * 60)
    findings = chip_findings(plan, SETS, process=CAST)
    assert MOST_PAIRS <= len(findings) <= MOST_PAIRS + 60


def test_an_empty_plan_is_checked_as_packed():
    assert chip_findings(ChipPlan(), SETS, process=CAST) == chip_findings(
        packed(ChipPlan(), SETS, CAST), SETS, process=CAST
    )


@given(st.integers(0, 10**6))
def test_no_checked_plan_makes_the_checks_fail(seed):
    rng = np.random.default_rng(seed)
    values = {}
    for field in CHIP_FIELDS.values():
        if field.choices:
            values[field.name] = str(rng.choice(field.choices))
        else:
            low, high = max(field.minimum, 1.0), field.maximum
            values[field.name] = float(np.exp(rng.uniform(np.log(low), np.log(high))))
    values["alignment_pairs"] = int(rng.integers(0, 5))
    entries = tuple(
        ChipChannel(
            set_name=str(rng.choice(["A", "B", "?"])), x_um=float(rng.normal(0, 5000)), y_um=float(rng.normal(0, 5000)),
            turn_deg=float(rng.uniform(-360, 360)), rows=int(rng.integers(1, 3)), is_control=bool(rng.integers(2)),
        )
        for _ in range(int(rng.integers(0, 4)))
    )  # fmt: skip
    plan = ChipPlan(channels=entries, **values)
    for finding in chip_findings(plan, SETS, process=CAST, chip_name="Rinse 7"):
        assert "\n" not in finding.message
        if finding.cure:
            plan.with_values({finding.cure[0]: finding.cure[1]})
