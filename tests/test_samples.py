"""Every sample design: opens, is checked and scored as before, and is ordered as a mask set that others can read.

The numbers beside this file (``sample_expectations.json``) are **regression only**: they come from
this program and show that something moved, not that it was right. After a change that is meant to
move them: ``python -m tests.test_samples`` writes them anew.
"""

from __future__ import annotations

import json
from dataclasses import replace
from datetime import date
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
import pytest
import shapely

from core.fabrication.making import making_of
from core.fabrication.process import ProcessKind
from core.findings import Severity
from core.geometry.shape import build_shape
from core.hydraulics.estimate import estimate
from core.project import read_project
from core.project.checks import order_findings
from core.project.files import project_bytes
from core.project.order import order_of
from tests.core.masks.truth import check_files, meant

if TYPE_CHECKING:
    from core.project import ChipProject

FOLDER = Path(__file__).parents[1] / "sample_designs"
DAY = date(2031, 5, 17)
EXPECTATIONS = Path(__file__).with_name("sample_expectations.json")
FILES = sorted(FOLDER.glob("*.sideloop"))
RELATIVE_TOLERANCES = {
    "area_um2": 1e-6,
    "reynolds": 1e-6,
    "forward_pressure_pa": 1e-3,
    "reverse_pressure_pa": 1e-3,
    "rectification": 1e-2,
}

sample = pytest.mark.parametrize("file", FILES, ids=lambda file: file.stem)


def figures(file: Path) -> dict[str, dict[str, float]]:
    """Return the compared numbers of what is made of every set of a sample."""
    project = read_project(file)
    flows = np.array([project.operating.flow_ul_min])
    found = {}
    for each in project.sets:
        made = making_of(each.channel, project.process).flow
        score = estimate(made, fluid=project.operating.fluid_state(), flows_ul_min=flows).score(0).as_dict()
        score["area_um2"] = build_shape(made).outline.area_um2
        found[each.name] = {key: score[key] for key in RELATIVE_TOLERANCES}
    return found


def test_there_is_a_complete_chip_of_one_lab_for_every_process():
    projects = [read_project(file) for file in FILES]
    assert {project.lab for project in projects} == {"Fernhollow Bench Fluidics"}
    assert {project.process.kind for project in projects if project.plan.channels} == set(map(str, ProcessKind))
    assert all(len(project.sets) >= 2 for project in projects)


def test_the_samples_show_what_can_be_placed():
    plans = [read_project(file).plan for file in FILES]
    assert any(each.is_control for plan in plans for each in plan.channels)
    assert any(each.rows > 1 for plan in plans for each in plan.channels)
    assert any(plan.plate == "wafer" and len(plan.series) == 2 for plan in plans)


@sample
def test_the_file_is_as_the_program_writes_it(file):
    assert project_bytes(read_project(file)) == file.read_bytes().replace(b"\r\n", b"\n")


@sample
def test_every_set_has_notes_and_a_usable_shape(file):
    project = read_project(file)
    assert project.notes
    for each in project.sets:
        shape = build_shape(each.channel)
        assert each.notes
        assert shape.is_usable, each.name
        assert len(shape.outline.islands) == each.channel.stages


@sample
def test_no_process_objects(file):
    found = order_findings(read_project(file))
    assert [(name, each.message) for name, each in found if each.severity is Severity.ERROR] == []


@sample
def test_scores_and_areas_are_as_before(file):
    expected = json.loads(EXPECTATIONS.read_text(encoding="utf-8"))[file.stem]
    found = figures(file)
    assert list(found) == list(expected)
    for name, numbers in found.items():
        for key, tolerance in RELATIVE_TOLERANCES.items():
            assert numbers[key] == pytest.approx(expected[name][key], rel=tolerance, abs=1e-12), (name, key)


@sample
def test_controls_are_alike_from_both_ends_and_quick_rectifiers_are_not(file):
    # closed truth for the controls; for loops a lower bound that inertia at these Re must exceed
    stages = {each.name: each.channel.stages for each in read_project(file).sets}
    for name, numbers in figures(file).items():
        if stages[name] == 0:
            assert numbers["rectification"] == 0.0
        elif numbers["reynolds"] > 50.0:
            assert numbers["rectification"] > 0.001


def test_the_shallow_sample_says_that_it_hardly_rectifies():
    project = read_project(FOLDER / "shallow-moulded.sideloop")
    flows = np.array([project.operating.flow_ul_min])
    score = estimate(project.sets[0].channel, fluid=project.operating.fluid_state(), flows_ul_min=flows).score(0)
    assert abs(score.rectification) < 0.001
    assert any("rectification below 0.1 %" in note for note in score.notes)


# --- orders ---------------------------------------------------------------------------------


def drawn_areas_um2(project: ChipProject) -> tuple[float, float]:
    """Return the least and the largest area that the channels of one chip may have on the mask [um^2].

    A second way, past placing, hierarchy and files: the bare outline of each channel, and on top two whole pads
    and, for each bend of a folded chain, a strip of a row's length.
    """
    plan, least, extra = project.plan, 0.0, 0.0
    for placed in plan.channels:
        channel = project.set_named(placed.set_name).channel
        drawn = making_of(replace(channel, stages=0) if placed.is_control else channel, project.process).drawn
        outline = build_shape(drawn).outline
        least += outline.area_um2
        extra += 2.0 * np.pi * (0.5 * plan.port_diameter_um + plan.pad_margin_um) ** 2
        extra += (placed.rows - 1) * 0.5 * outline.area_um2
    scale = 1.0 / (1.0 - project.process.shrink_percent / 100.0)
    return 0.99 * least * scale**2, (least + extra) * scale**2


def islands_in(project: ChipProject) -> int:
    """Return the number of islands of one chip."""
    return sum(
        project.set_named(each.set_name).channel.stages * (not each.is_control) for each in project.plan.channels
    )


@sample
def test_the_chip_holds_its_channels(file):
    project = read_project(file)
    project = project.with_plan(replace(project.plan, plate="single chip", series=()))
    channels = meant(order_of(project, date=DAY).scene)["L1_CHAN"]
    pieces = shapely.get_parts(channels)
    assert len(pieces) == len(project.plan.channels)
    assert sum(len(piece.interiors) for piece in pieces) == islands_in(project)
    least, largest = drawn_areas_um2(project)
    assert least < channels.area < largest


@pytest.mark.slow
@sample
def test_the_order_is_read_back_by_others(file, tmp_path):
    # five readers of other authors, and what the scene means, put together by shapely
    project = read_project(file)
    order = order_of(project, date=DAY)
    report = order.write(tmp_path)
    assert sorted(each.name for each in tmp_path.iterdir()) == sorted(each.name for each in report.files)
    most = 3 if project.plan.plate == "single chip" else 1
    assert check_files(report, order.scene, order.options, most_readers=most) == len(order.options.formats)


if __name__ == "__main__":
    EXPECTATIONS.write_text(json.dumps({file.stem: figures(file) for file in FILES}, indent=2) + "\n", encoding="utf-8")
