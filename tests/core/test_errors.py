"""The error family and the words in which values and near misses are told."""

from __future__ import annotations

import pickle
import time

import pytest

from core.errors import (
    CoreError,
    DesignValueError,
    ExportError,
    GeometryError,
    ProjectFileError,
    SolveError,
    did_you_mean,
    shown,
)


def value_error() -> DesignValueError:
    return DesignValueError(field="depth_um", value=0.5, limit="1 to 3000 um", way_out="raise it to at least 1")


def test_all_errors_are_one_family():
    for kind in (DesignValueError, ExportError, GeometryError, ProjectFileError, SolveError):
        assert issubclass(kind, CoreError)
    assert issubclass(DesignValueError, ValueError)


def test_a_value_error_names_field_value_limit_and_way_out():
    error = value_error()
    assert str(error) == "depth_um is 0.5; allowed: 1 to 3000 um; raise it to at least 1"
    assert (error.field, error.value, error.limit, error.way_out) == (
        "depth_um", 0.5, "1 to 3000 um", "raise it to at least 1",
    )  # fmt: skip


def test_errors_cross_a_process_border():
    copy = pickle.loads(pickle.dumps(value_error()))
    assert isinstance(copy, DesignValueError)
    assert str(copy) == str(value_error())
    assert copy.field == "depth_um"
    problems = pickle.loads(pickle.dumps(ProjectFileError("two", ["a", "b"])))
    assert str(problems) == "two"
    assert problems.problems == ("a", "b")


@pytest.mark.parametrize(
    ("value", "text"),
    [
        ("word", "'word'"),
        ("two\nlines", "'two?lines'"),
        ("bell\a", "'bell?'"),
        (0.1 + 0.2, "0.3"),
        (float("nan"), "nan"),
        (7, "7"),
        (None, "None"),
        ([1, "a"], "[1, 'a']"),
        ("", "''"),
    ],
)
def test_values_are_shown_on_one_line(value, text):
    assert shown(value) == text


@pytest.mark.parametrize("value", ["x" * 10_000_000, ["x"] * 100_000, 10**400], ids=["text", "list", "number"])
def test_long_values_are_cut_and_fast(value):
    start = time.perf_counter()
    text = shown(value)
    assert time.perf_counter() - start < 0.5
    assert len(text) == 60
    assert text.endswith("...")


def test_the_limit_itself_is_not_cut():
    assert shown("x" * 58) == f"'{'x' * 58}'"
    assert shown("x" * 59) == f"'{'x' * 56}..."


@pytest.mark.parametrize(
    ("name", "hint"),
    [
        ("stagse", "did you mean 'stages'?"),
        ("depth", "did you mean 'depth_um'?"),
        ("flow", "did you mean 'flow_ul_min'?"),
        ("banana", "known names: stages, depth_um, flow_ul_min"),
        ("", "known names: stages, depth_um, flow_ul_min"),
        ("x" * 10_000_000, "known names: stages, depth_um, flow_ul_min"),
    ],
    ids=["typing slip", "unit left out", "long unit left out", "nothing near", "nothing", "endless"],
)
def test_near_misses(name, hint):
    assert did_you_mean(name, ["stages", "depth_um", "flow_ul_min"]) == hint


def test_a_long_list_of_names_is_cut():
    hint = did_you_mean("banana", (f"set {number}" for number in range(100)))
    assert hint.startswith("known names: set 0, ")
    assert hint.endswith("set 19, ...")
