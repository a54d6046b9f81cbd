"""Every sample design: opens, has a usable shape, scores and exports as it did before.

The numbers beside this file (``sample_expectations.json``) are **regression only**: they come from
this program and show that something moved, not that it was right. After a change that is meant to
move them: ``python -m tests.test_samples`` writes them anew.
"""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest

from core.findings import Severity
from core.geometry.shape import build_shape
from core.hydraulics.estimate import estimate
from core.masks.mask_set import write_mask_set
from core.project import read_project
from core.project.files import project_bytes

FOLDER = Path(__file__).parents[1] / "sample_designs"
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
    """Return the compared numbers of every set of a sample."""
    project = read_project(file)
    flows = np.array([project.operating.flow_ul_min])
    found = {}
    for each in project.sets:
        score = estimate(each.channel, fluid=project.operating.fluid_state(), flows_ul_min=flows).score(0).as_dict()
        score["area_um2"] = build_shape(each.channel).outline.area_um2
        found[each.name] = {key: score[key] for key in RELATIVE_TOLERANCES}
    return found


def test_there_are_samples_of_one_lab_with_a_control_channel():
    projects = [read_project(file) for file in FILES]
    assert len(projects) >= 4
    assert {project.lab for project in projects} == {"Fernhollow Bench Fluidics"}
    assert all(len(project.sets) >= 2 for project in projects)
    stages = [[each.channel.stages for each in project.sets] for project in projects]
    assert any(0 in counts and max(counts) > 0 for counts in stages)


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
        assert not [finding for finding in shape.findings if finding.severity is Severity.ERROR]


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


@sample
def test_masks_hold_the_outlines(file, tmp_path):
    project = read_project(file)
    shapes = [(each.name, build_shape(each.channel)) for each in project.sets]
    report = write_mask_set(shapes, folder=tmp_path / "masks", chip_name=project.name)
    written = sorted(each.name for each in (tmp_path / "masks").iterdir())
    assert written == sorted(each.name for each in report.files)
    for kind, tolerance in (("DXF R2000", 1e-6), ("GDSII", 1e-4)):  # GDSII: arcs became chords
        areas = [each.area_um2 for each in report.files if each.format == kind]
        assert areas == pytest.approx([shape.outline.area_um2 for _, shape in shapes], rel=tolerance)


if __name__ == "__main__":
    EXPECTATIONS.write_text(json.dumps({file.stem: figures(file) for file in FILES}, indent=2) + "\n", encoding="utf-8")
