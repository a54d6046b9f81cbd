"""Processes as values: what contradicts itself is refused in one clear line."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.errors import DesignValueError
from core.fabrication.process import PROCESS_FIELDS, Process, ProcessKind
from core.fabrication.shipped import shipped_process
from tests.core.fabrication.processes import KINDS

FILM, GLASS, ACRYLIC = ProcessKind.CAST_FILM, ProcessKind.WET_GLASS, ProcessKind.LASER_ACRYLIC
CONTRADICTIONS = [
    (FILM, {"min_depth_um": 300}, "min_depth_um", "raise max_depth_um"),
    (FILM, {"max_width_to_depth": 30}, "max_width_to_depth", "raise collapse_width_to_depth"),
    (FILM, {"max_depth_to_width": 0.05}, "max_depth_to_width", "no section at all"),
    (FILM, {"kerf_um": 20}, "kerf_um", "set it to 0"),
    (FILM, {"undercut_ratio": 0.1}, "undercut_ratio", "set it to 0"),
    (GLASS, {"tool_diameter_um": 100}, "tool_diameter_um", "set it to 0"),
    (GLASS, {"wall_lean_deg": 5}, "wall_lean_deg", "undercut_ratio to 0"),
    (ACRYLIC, {"undercut_ratio": 1}, "undercut_ratio", "wet-etched glass"),
    (ProcessKind.MILLED_MOULD, {"tool_runs": "in the channel"}, "tool_runs", "outside the channel"),
    (ProcessKind.MILLED_CHANNEL, {"tool_runs": "outside the channel"}, "tool_runs", "in the channel"),
    (FILM, {"tone": "drawn lines are CUT"}, "tone", "drawn shapes are CLEAR"),
    (FILM, {"reading": "as seen from the side where the tool enters"}, "reading", "right-reading"),
    (FILM, {"islands": "nested"}, "islands", "pieces"),
    (ACRYLIC, {"tone": "drawn shapes are DARK"}, "tone", "drawn lines are CUT"),
    (ACRYLIC, {"islands": "pieces"}, "islands", "nested"),
    (ACRYLIC, {"formats": "GDSII"}, "formats", "DXF"),
    (ACRYLIC, {"reading": "right-reading, chrome or emulsion side UP"}, "reading", "tool enters"),
    (FILM, {"kind": "laser-cut film"}, "tone", "another kind"),
]


@pytest.mark.parametrize(("kind", "values", "field", "words"), CONTRADICTIONS)
def test_contradictions_are_refused(kind: ProcessKind, values: dict[str, object], field: str, words: str) -> None:
    with pytest.raises(DesignValueError) as caught:
        shipped_process(kind).with_values(values)
    assert caught.value.field == field
    assert words in str(caught.value)
    assert "\n" not in str(caught.value)


@pytest.mark.parametrize("kind", ProcessKind)
def test_an_undercut_that_leaves_no_opening_is_no_contradiction(kind: ProcessKind) -> None:
    if kind in {ProcessKind.WET_GLASS, ProcessKind.DRY_SILICON}:
        assert shipped_process(kind).with_values({"undercut_ratio": 3.0}).undercut_ratio == 3.0


@given(KINDS, st.sampled_from(sorted(PROCESS_FIELDS)), st.data())
def test_any_value_is_taken_or_refused_by_name(kind: ProcessKind, name: str, data: st.DataObject) -> None:
    field = PROCESS_FIELDS[name]
    numbers = st.floats(allow_nan=True) | st.floats(field.minimum, field.maximum)
    value = data.draw(st.sampled_from(field.choices) if field.choices else numbers | st.none() | st.text(max_size=5))
    try:
        process = shipped_process(kind).with_values({name: value})
    except DesignValueError:
        return
    assert Process(**process.as_dict()) == process


def test_defaults_are_those_of_the_shipped_film_process() -> None:
    assert Process() == shipped_process("cast, film mask")
    assert {name: field.default for name, field in PROCESS_FIELDS.items()} == Process().as_dict()
