"""The parameter set and its field table, said once and agreeing with itself."""

from __future__ import annotations

import dataclasses

import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.errors import DesignValueError
from core.operating import OPERATING_FIELDS, OperatingPoint
from core.parameters import CHANNEL_FIELDS, ChannelParameters

both_tables = pytest.mark.parametrize(
    ("kind", "table"), [(ChannelParameters, CHANNEL_FIELDS), (OperatingPoint, OPERATING_FIELDS)]
)

# the names that files and scripts rely on
CHANNEL_NAMES = [
    "loop_angle_deg", "run_bend_deg", "loop_turn_deg", "loop_radius_um", "return_length_um", "loop_width_um", "stages",
    "sides", "stage_gap_um", "lead_in_um", "lead_out_um", "channel_width_um", "depth_um", "nose_radius_um",
    "corner_radius_um",
]  # fmt: skip
UNIT_ENDINGS = {"um": "_um", "deg": "_deg", "degC": "_c", "uL/min": "_ul_min", "%": "_percent", "kg/m3": "_kg_m3",
                "mPa s": "_mpa_s"}  # fmt: skip


def test_field_names_stay():
    assert list(CHANNEL_FIELDS) == CHANNEL_NAMES


@both_tables
def test_table_and_value_name_the_same_fields_and_defaults(kind, table):
    assert [field.name for field in dataclasses.fields(kind)] == list(table)
    assert kind().as_dict() == {name: field.default for name, field in table.items()}


@both_tables
def test_every_field_is_described_and_accepts_its_own_limits(kind, table):
    for name, field in table.items():
        assert field.name == name
        assert field.label
        assert field.help.endswith(".")
        assert field.group
        assert field.checked(field.default) == field.default
        assert name.endswith(UNIT_ENDINGS.get(field.unit, ""))
        if field.choices:
            assert field.default in field.choices
        else:
            assert field.minimum < field.maximum
            assert 0 < field.step < field.maximum - field.minimum
            for edge in (field.minimum, field.maximum):
                assert getattr(kind(**{name: edge}), name) == edge


def test_no_name_means_two_things():
    assert not set(CHANNEL_FIELDS) & set(OPERATING_FIELDS)


@both_tables
def test_values_are_checked_when_made_and_when_changed(kind, table):
    name = next(name for name, field in table.items() if not field.choices)
    for make in (lambda value: kind(**{name: value}), lambda value: kind().with_values({name: value})):
        with pytest.raises(DesignValueError) as caught:
            make("x")
        assert caught.value.field == name


@both_tables
def test_changed_copies(kind, table):
    original = kind()
    name = next(iter(table))
    changed = original.with_values({name: str(table[name].maximum)})
    assert getattr(changed, name) == table[name].maximum
    assert original == kind()
    assert changed.with_values({name: table[name].default}) == original
    assert original.with_values({}) == original
    assert hash(kind()) == hash(original)
    with pytest.raises(dataclasses.FrozenInstanceError):
        setattr(original, name, 1.0)


@both_tables
def test_unknown_names_are_answered_with_the_nearest(kind, table):
    name = next(iter(table))
    with pytest.raises(DesignValueError, match=f"did you mean '{name}'"):
        kind().with_values({f"{name}s": 1})


@given(st.dictionaries(st.sampled_from(CHANNEL_NAMES), st.integers(-10, 10_000) | st.text(max_size=5) | st.floats()))
def test_anything_is_a_parameter_set_or_refused_in_one_line(values):
    kept, problem = None, ""
    try:
        kept = ChannelParameters().with_values(values)
    except DesignValueError as error:
        problem = str(error)
    assert problem.isprintable()
    assert problem or ChannelParameters(**kept.as_dict()) == kept
