"""What a project file may hold and how everything wrong with it is told."""

from __future__ import annotations

import json

import pytest

from core.chip.plan import CHIP_FIELDS
from core.errors import ProjectFileError
from core.fabrication.process import ProcessKind
from core.fabrication.shipped import shipped_process
from core.operating import OperatingPoint
from core.parameters import ChannelParameters
from core.project import ChipProject, ParameterSet
from core.project.files import project_bytes, project_from_bytes
from core.project.layout import project_data, project_from_data
from tests.core.project.builders import rinse_project

SMALLEST = {"format": "sideloop chip project", "schema": 1, "sets": [{"name": "Only"}]}


def problems_of(data: object) -> tuple[str, ...]:
    with pytest.raises(ProjectFileError) as caught:
        project_from_data(data)
    assert "\n" not in str(caught.value)
    return caught.value.problems


def test_missing_fields_take_their_defaults():
    expected = ChipProject(name="Untitled chip", sets=(ParameterSet(name="Only"),))
    assert project_from_data(SMALLEST) == expected
    some = {**SMALLEST, "operating": {"fluid": "air"}, "sets": [{"name": "Only", "channel": {"stages": 2}}]}
    project = project_from_data(some)
    assert project.operating == OperatingPoint(fluid="air")
    assert project.sets[0].channel == ChannelParameters(stages=2)


def test_every_field_is_in_the_file_under_its_own_name():
    data = json.loads(project_bytes(rinse_project()))
    assert data["format"] == "sideloop chip project"
    assert data["schema"] == 3
    assert data["operating"] == rinse_project().operating.as_dict()
    assert data["sets"][0]["channel"] == rinse_project().sets[0].channel.as_dict()
    assert data["process"] == rinse_project().process.as_dict()
    assert set(data["chip"]) == {*CHIP_FIELDS, "label", "channels", "series"}
    assert data["chip"]["channels"][0] == {
        "set_name": "Four loops", "x_um": -1500.25, "y_um": 3000.0, "turn_deg": 90.0, "rows": 2, "is_control": False,
    }  # fmt: skip
    assert data["chip"]["series"][1] == {"name": "stages", "first": 2, "last": 6, "steps": 3}


def test_the_file_is_readable_text():
    lines = project_bytes(rinse_project()).decode().splitlines()
    assert '  "name": "Rinse chip Ä4",' in lines
    assert '        "loop_angle_deg": 40.1,' in lines


def test_all_problems_are_told_together():
    data = project_data(rinse_project())
    data["lbo"] = "x"
    data["name"] = ""
    data["operating"] = {"fluid": "watr", "temperature_c": 101, "flow": 3}
    data["sets"][0]["channel"] = {"loop_angel_deg": 45, "stages": 2.5, "depth_um": "80", "loop_radius_um": None}
    data["sets"][1] = {"name": 4, "notes": [], "channel": []}
    data["sets"][2]["extra"] = 1
    problems = problems_of(data)
    for part in (
        "'lbo' is unknown; did you mean 'lab'?",
        "name is ''",
        "operating: 'flow' is unknown; did you mean",
        "operating: fluid is 'watr'",
        "did you mean 'water'?",
        "temperature_c is 101; allowed: 0 to 100 degC; lower it to at most 100",
        "set 1 ('Four loops'): 'loop_angel_deg' is unknown; did you mean 'loop_angle_deg'?",
        "stages is 2.5",
        "depth_um is '80'; allowed: 1 to 3000 um; give a number without quotes",
        "loop_radius_um is None",
        "set 2: name is 4",
        "set 2: notes is []",
        "set 2: [] is no group of fields",
        "set 3 ('Same side'): 'extra' is unknown",
    ):
        assert any(part in problem for problem in problems), part
    assert len(problems) == 13


def test_the_message_counts_what_it_leaves_out():
    data = {**SMALLEST, **{f"key {number}": 0 for number in range(8)}}
    with pytest.raises(ProjectFileError, match=r"^8 problems: .*; and 3 more$"):
        project_from_data(data)


@pytest.mark.parametrize(
    ("change", "part"),
    [
        ({"format": "other"}, "no chip project"),
        ({"schema": 4}, "saved by a newer Sideloop (schema 4; this one knows up to 3)"),
        ({"schema": 0}, "schema is 0"),
        ({"schema": "1"}, "schema is '1'"),
        ({"schema": True}, "schema is True"),
        ({"schema": 1.0}, "schema is 1"),
        ({"sets": []}, "keep at least one"),
        ({"sets": {}}, "sets: {} is no list"),
        ({"sets": [7]}, "set 1: 7 is no parameter set"),
        ({"sets": [{}]}, "set 1: name is missing"),
        ({"sets": [{"name": "a"}, {"name": "A"}]}, "set name is 'A'"),
        ({"sets": [{"name": str(n)} for n in range(101)]}, "sets is 101; allowed: 1 to 100"),
        ({"operating": 5}, "operating: 5 is no group of fields"),
        ({"operating": {"flow_ul_min": True}}, "flow_ul_min is True"),
        ({"operating": {"flow_ul_min": float("nan")}}, "flow_ul_min is nan"),
        ({"operating": {"flow_ul_min": float("inf")}}, "flow_ul_min is inf"),
        ({"operating": {"flow_ul_min": 10**400}}, "flow_ul_min is 1000"),
        ({"name": None}, "name is None"),
    ],
)
def test_one_problem(change, part):
    with pytest.raises(ProjectFileError) as caught:
        project_from_data({**SMALLEST, **change})
    assert part in str(caught.value)


@pytest.mark.parametrize(
    ("change", "part"),
    [
        ({"process": []}, "process: [] is no group of fields"),
        ({"process": {"kind": "etched"}}, "process: kind is 'etched'"),
        ({"process": {"kerf": 3}}, "process: 'kerf' is unknown; did you mean 'kerf_um'?"),
        ({"process": {"bias_um": "3"}}, "process: bias_um is '3'; allowed: -500 to 500 um; give a number without"),
        ({"process": {"min_depth_um": 900}}, "process: min_depth_um is 900; allowed: at most max_depth_um"),
        ({"chip": None}, "chip: None is no group of fields"),
        ({"chip": {"plate": "disc"}}, "chip: plate is 'disc'"),
        ({"chip": {"chip_width": 1}}, "chip: 'chip_width' is unknown; did you mean 'chip_width_um'?"),
        ({"chip": {"label": "two\nlines"}}, "chip: label is 'two?lines'"),
        ({"chip": {"label": 5}}, "chip: label is 5"),
        ({"chip": {"channels": {}}}, "chip: channels: {} is no list"),
        ({"chip": {"channels": ["Only"]}}, "chip: channel 1: 'Only' is no group of fields"),
        ({"chip": {"channels": [{"x_um": 1}]}}, "chip: channel 1: set_name is missing"),
        (
            {"chip": {"channels": [{"set_name": "Only", "x": 1}]}},
            "chip: channel 1: 'x' is unknown; did you mean 'x_um'?",
        ),
        ({"chip": {"channels": [{"set_name": "Only", "x_um": "1"}]}}, "chip: channel 1: x_um is '1'"),
        ({"chip": {"channels": [{"set_name": "Only", "y_um": float("nan")}]}}, "chip: channel 1: y_um is nan"),
        ({"chip": {"channels": [{"set_name": "Only", "rows": 0}]}}, "chip: channel 1: rows is 0"),
        ({"chip": {"channels": [{"set_name": "Only", "is_control": 1}]}}, "chip: channel 1: is_control is 1"),
        ({"chip": {"series": [{"name": "depth", "first": 1, "last": 2, "steps": 2}]}}, "did you mean 'depth_um'?"),
        (
            {"chip": {"series": [{"name": "depth_um", "first": 1, "last": 2}]}},
            "chip: stepped field 1: steps is missing",
        ),
    ],
)
def test_one_problem_of_process_or_chip(change, part):
    problems = problems_of({**SMALLEST, "schema": 3, **change})
    assert len(problems) == 1
    assert part in problems[0]


@pytest.mark.parametrize("kind", ProcessKind)
def test_a_process_that_is_only_named_has_the_values_shipped_with_it(kind):
    assert project_from_data({**SMALLEST, "schema": 3, "process": {"kind": str(kind)}}).process == shipped_process(kind)


def test_missing_schema_and_other_documents():
    with pytest.raises(ProjectFileError, match="schema is missing"):
        project_from_data({"format": SMALLEST["format"]})
    for other in ([], 5, None, "text", {}):
        with pytest.raises(ProjectFileError, match="no chip project"):
            project_from_data(other)


def test_a_name_given_twice_is_a_problem_like_others():
    content = (
        b'{"format": "sideloop chip project", "schema": 1, "lab": "a", "lab": "b", "sets": [{"name": "a"}], "x": 1}'
    )
    with pytest.raises(ProjectFileError) as caught:
        project_from_bytes(content)
    assert len(caught.value.problems) == 2
    assert "'lab' is given more than once" in caught.value.problems[0]
