"""Results of flow solves in a project: kept as they are, told apart by what they belong to."""

from __future__ import annotations

import json
from dataclasses import replace

import pytest

from core.errors import DesignValueError, ProjectFileError
from core.operating import OperatingPoint
from core.parameters import ChannelParameters
from core.project import ChipProject, ParameterSet, SolvedResult, kept_results, new_project, read_project, write_project
from core.project.files import project_bytes, project_from_bytes

RESULT = SolvedResult(
    set_name="Set 1",
    channel=ChannelParameters(),
    operating=OperatingPoint(flow_ul_min=900.0),
    reynolds=74.7,
    forward_pressure_pa=1500.25,
    reverse_pressure_pa=1600.5,
    loop_share_forward=0.22,
    loop_share_reverse=0.51,
    loop_shares_forward=(0.2, 0.23, 0.22, 0.23),
    loop_shares_reverse=(0.5, 0.51, 0.51, 0.52),
    stage_drops_forward_pa=(250.0, 251.0, 250.5),
    stage_drops_reverse_pa=(270.0, 271.0, 272.5),
    error_band_percent=0.8,
    diodicity_band=0.004,
    reached_reynolds=74.7,
    valid=True,
    notes=("flow solve, 3 depth modes",),
)
LOST = SolvedResult(set_name="Set 1", channel=ChannelParameters(), operating=OperatingPoint(), reynolds=99.0)


def test_results_come_back_as_they_were(tmp_path):
    project = replace(new_project(), solved=(RESULT, LOST))
    write_project(project, tmp_path / "chip.sideloop")
    assert read_project(tmp_path / "chip.sideloop") == project


def test_files_without_results_are_read():
    data = json.loads(project_bytes(new_project()))
    del data["solved"]
    assert project_from_bytes(json.dumps(data).encode()) == new_project()
    data["schema"] = 1
    assert project_from_bytes(json.dumps(data).encode()) == new_project()


def test_diodicity_is_reverse_over_forward():
    assert RESULT.diodicity == pytest.approx(1600.5 / 1500.25)
    assert LOST.diodicity is None


def test_loop_shares_are_those_of_the_stage_or_else_the_mean():
    assert RESULT.shares_of(1) == (0.23, 0.51)
    assert replace(RESULT, loop_shares_forward=(), loop_shares_reverse=()).shares_of(1) == (0.22, 0.51)
    assert LOST.shares_of(0) is None


def test_a_result_belongs_to_one_design_in_one_condition():
    at_900 = OperatingPoint(flow_ul_min=900.0)
    assert RESULT.belongs_to(ChannelParameters(), at_900)
    assert not RESULT.belongs_to(ChannelParameters(depth_um=199.0), at_900)
    assert not RESULT.belongs_to(ChannelParameters(), OperatingPoint())
    assert RESULT.belongs_to(ChannelParameters(), OperatingPoint(), at_any_flow=True)
    assert not RESULT.belongs_to(ChannelParameters(), OperatingPoint(temperature_c=30.0), at_any_flow=True)


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ({"forward_pressure_pa": "many"}, "forward_pressure_pa is 'many'"),
        ({"reynolds": None}, "reynolds is None"),
        ({"valid": 1}, "valid is 1"),
        ({"channel": {"depth_um": -1}}, "depth_um is -1"),
        ({"operating": []}, "no group of fields"),
        ({"set_name": ""}, "set_name"),
        ({"loop_shares_forward": 0.2}, "loop_shares_forward is 0.2"),
        ({"stage_drops_reverse_pa": [1.0, None]}, "stage_drops_reverse_pa is None"),
        ({"loop_shares_reverse": [0.5] * 101}, "at most 100 numbers"),
        ({"notes": "x"}, "no list of texts"),
        ({"notes": [1]}, "notes is 1"),
        ({"preassure": 1}, "'preassure' is unknown"),
    ],
)
def test_bad_results_are_named(change, words):
    data = json.loads(project_bytes(replace(new_project(), solved=(RESULT,))))
    data["solved"][0].update(change)
    with pytest.raises(ProjectFileError) as caught:
        project_from_bytes(json.dumps(data).encode())
    assert "solved 1: " in str(caught.value)
    assert words in str(caught.value)


@pytest.mark.parametrize("solved", [{}, 3, [3], [None]])
def test_a_list_that_is_none_is_named(solved):
    data = {**json.loads(project_bytes(new_project())), "solved": solved}
    with pytest.raises(ProjectFileError, match="solved"):
        project_from_bytes(json.dumps(data).encode())


def test_infinite_numbers_are_refused():
    with pytest.raises(DesignValueError, match="reynolds"):
        replace(RESULT, reynolds=float("inf"))


def test_the_latest_answer_to_each_question_is_kept():
    better = replace(RESULT, quality="fine")
    other = replace(RESULT, set_name="Set 2")
    assert kept_results((RESULT, other, better)) == (better, other)
    many = tuple(replace(RESULT, operating=OperatingPoint(flow_ul_min=float(n))) for n in range(1, 40))
    assert kept_results(many, most_per_set=10) == many[-10:]


def test_a_project_of_many_results_stays_in_bounds():
    sets = (ParameterSet(name="Set 1"),)
    assert len(ChipProject(name="a", sets=sets, solved=(RESULT,) * 3000).solved) == 500
