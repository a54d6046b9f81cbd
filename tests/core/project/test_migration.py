"""Older files are brought up to date step by step; newer ones are refused."""

from __future__ import annotations

import json

import pytest

from core.chip.plan import ChipPlan
from core.errors import ProjectFileError
from core.fabrication.process import ProcessKind
from core.fabrication.shipped import shipped_process
from core.project import migration, new_project, read_project
from core.project.files import project_from_bytes
from core.project.migration import migrated


def older(data):
    """Take a made-up step: schema 1 had called the chip's name its title."""
    return {("name" if key == "title" else key): value for key, value in data.items()}


def newest(data):
    return {**data, "notes": f"{data['name']} went through schema {data['schema']}"}


@pytest.fixture
def two_steps(monkeypatch):
    monkeypatch.setattr(migration, "SCHEMA", 3)
    monkeypatch.setattr(migration, "STEPS", {1: older, 2: newest})


@pytest.mark.usefixtures("two_steps")
def test_steps_are_applied_one_after_another(tmp_path):
    file = tmp_path / "old.sideloop"
    file.write_text(
        json.dumps({"format": "sideloop chip project", "schema": 1, "title": "Old chip", "sets": [{"name": "a"}]})
    )
    project = read_project(file)
    assert project.name == "Old chip"
    assert project.notes == "Old chip went through schema 2"


@pytest.mark.usefixtures("two_steps")
def test_only_the_missing_steps_are_applied():
    assert migrated({"schema": 3, "title": "t"}) == {"schema": 3, "title": "t"}
    assert migrated({"schema": 2, "name": "n"})["notes"] == "n went through schema 2"


def test_every_older_schema_has_a_step():
    assert sorted(migration.STEPS) == list(range(1, migration.SCHEMA))


@pytest.mark.parametrize("schema", [1, 2])
def test_files_from_before_processes_get_those_of_a_new_chip(schema):
    data = {"format": "sideloop chip project", "schema": schema, "sets": [{"name": "a"}]}
    project = project_from_bytes(json.dumps(data).encode())
    assert project.process == shipped_process(ProcessKind.CAST_FILM) == new_project().process
    assert project.plan == ChipPlan()


def test_a_newer_schema_is_refused_in_words():
    with pytest.raises(ProjectFileError, match=r"saved by a newer Sideloop .*; update Sideloop to open it"):
        migrated({"schema": migration.SCHEMA + 1})
