"""The project value: its words, its list of sets, its changed copies."""

from __future__ import annotations

from dataclasses import FrozenInstanceError, replace

import pytest

from core.chip.plan import ChipChannel, ChipPlan
from core.errors import DesignValueError
from core.fabrication.process import ProcessKind
from core.fabrication.shipped import shipped_process
from core.operating import OperatingPoint
from core.project import ChipProject, ParameterSet, new_project


def project_of(*names: str) -> ChipProject:
    return ChipProject(name="chip", sets=tuple(ParameterSet(name=name) for name in names))


def names_of(project: ChipProject) -> list[str]:
    return [each.name for each in project.sets]


def test_new_project_has_one_set_at_defaults():
    project = new_project()
    assert names_of(project) == ["Set 1"]
    assert project.operating == OperatingPoint()


def test_a_project_cannot_be_changed_in_place():
    with pytest.raises(FrozenInstanceError):
        new_project().name = "other"  # type: ignore[misc]


def test_changed_copies():
    project = project_of("a", "b", "c")
    assert names_of(project.with_set_added(ParameterSet(name="d"))) == ["a", "b", "c", "d"]
    assert names_of(project.with_set_added(ParameterSet(name="d"), position=1)) == ["a", "d", "b", "c"]
    assert names_of(project.with_set_removed("b")) == ["a", "c"]
    assert names_of(project.with_set_renamed("b", " bee ")) == ["a", "bee", "c"]
    assert names_of(project.with_set_replaced("b", ParameterSet(name="x"))) == ["a", "x", "c"]
    assert project.with_operating(OperatingPoint(fluid="air")).operating.fluid == "air"
    assert names_of(project) == ["a", "b", "c"]


@pytest.mark.parametrize(
    ("name", "position", "expected"),
    [("a", 2, "bca"), ("c", 0, "cab"), ("b", 1, "abc"), ("a", 99, "bca"), ("c", -5, "cab"), ("a", 1, "bac")],
)
def test_moving_a_set(name, position, expected):
    assert "".join(names_of(project_of("a", "b", "c").with_set_moved(name, position))) == expected


def test_a_renamed_set_keeps_its_design_and_place():
    project = project_of("a", "b")
    channel = project.sets[0].channel.with_values({"stages": 7})
    project = project.with_set_replaced("a", replace(project.sets[0], channel=channel, notes="n"))
    assert project.with_set_renamed("a", "z").sets[0] == ParameterSet(name="z", channel=channel, notes="n")


def test_a_set_may_change_the_case_of_its_own_name():
    assert names_of(project_of("wide", "b").with_set_renamed("wide", "Wide")) == ["Wide", "b"]


def placed_on(project: ChipProject) -> list[str]:
    return [each.set_name for each in project.plan.channels]


def test_the_chip_follows_what_happens_to_its_sets():
    channels = tuple(ChipChannel(set_name=name, x_um=float(n)) for n, name in enumerate("abab"))
    project = project_of("a", "b", "c").with_plan(ChipPlan(channels=channels))
    assert placed_on(project.with_set_renamed("a", "z")) == ["z", "b", "z", "b"]
    assert project.with_set_renamed("a", "z").plan.channels[2].x_um == 2.0
    assert placed_on(project.with_set_replaced("b", ParameterSet(name="q"))) == ["a", "q", "a", "q"]
    assert placed_on(project.with_set_removed("a")) == ["b", "b"]
    assert placed_on(project.with_set_removed("c")) == ["a", "b", "a", "b"]
    assert placed_on(project.with_set_moved("a", 2)) == ["a", "b", "a", "b"]


def test_another_process():
    glass = shipped_process(ProcessKind.WET_GLASS)
    assert new_project().process == shipped_process(ProcessKind.CAST_FILM)
    assert new_project().with_process(glass).process == glass


@pytest.mark.parametrize("other", ["Wide", "wide", "WIDE", " Wide "])
def test_names_that_differ_in_case_only_are_doubles(other):
    with pytest.raises(DesignValueError, match="give this set another name"):
        project_of("Wide", other)


def test_two_spellings_of_one_accented_letter_are_doubles():
    with pytest.raises(DesignValueError):
        project_of("b\u00e4d", "ba\u0308d")


def test_the_last_set_stays():
    with pytest.raises(DesignValueError, match="keep at least one"):
        project_of("a").with_set_removed("a")


def test_there_is_a_largest_number_of_sets():
    project = project_of(*(f"s{number}" for number in range(100)))
    with pytest.raises(DesignValueError, match="1 to 100 parameter sets"):
        project.with_set_added(ParameterSet(name="one more"))


def test_an_unknown_set_is_answered_with_the_nearest():
    with pytest.raises(DesignValueError, match="did you mean 'Four loops'") as caught:
        project_of("Four loops", "Control").set_named("Four lops")
    assert caught.value.field == "set"


@pytest.mark.parametrize(
    "name", ["", "   ", "x" * 61, "two\nlines", "bell\a", "half \ud800", "over\u202eride", 7, None]
)
def test_unusable_names(name):
    for make in (lambda: ParameterSet(name=name), lambda: replace(new_project(), name=name)):
        with pytest.raises(DesignValueError, match="1 to 60 printable characters"):
            make()


@pytest.mark.parametrize("notes", ["bell\a", "half \ud800", "x" * 10_001, "nul\0", 3, None])
def test_unusable_notes(notes):
    with pytest.raises(DesignValueError, match="notes"):
        ParameterSet(name="a", notes=notes)
    with pytest.raises(DesignValueError, match="notes"):
        replace(new_project(), notes=notes)


def test_lab_and_author_may_be_empty_but_are_one_line():
    assert replace(new_project(), lab="", author=" ").author == ""
    with pytest.raises(DesignValueError, match="lab"):
        replace(new_project(), lab="a\nb")


@pytest.mark.parametrize(
    ("wish", "expected"),
    [("free", "free"), ("a", "a 2"), ("A", "A 3"), ("x" * 60, "x" * 58 + " 2")],
)
def test_a_free_name_is_found(wish, expected):
    project = project_of("a", "x" * 60)
    if wish == "A":
        project = project.with_set_added(ParameterSet(name="a 2"))
    assert project.unused_name(wish) == expected
