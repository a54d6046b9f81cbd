"""Projects for the tests of this folder."""

from __future__ import annotations

from hypothesis import strategies as st

from core.operating import OPERATING_FIELDS, OperatingPoint
from core.parameters import CHANNEL_FIELDS, ChannelParameters
from core.project import ChipProject, ParameterSet
from core.project.text import LONGEST_NAME, name_key


def rinse_project() -> ChipProject:
    """Return a small project with nothing at its default that can be otherwise."""
    return ChipProject(
        name="Rinse chip Ä4",
        lab="Fernhollow Bench Fluidics",
        author="bench two",
        notes='First line,\nsecond with a tab\tand a quote ".',
        operating=OperatingPoint(fluid="ethanol", temperature_c=23.5, flow_ul_min=850.25),
        sets=(
            ParameterSet(name="Four loops", channel=ChannelParameters(stages=4, loop_angle_deg=40.1)),
            ParameterSet(name="Control", notes="plain straight", channel=ChannelParameters(stages=0)),
            ParameterSet(name="Same side", channel=ChannelParameters(sides="same", depth_um=80)),
        ),
    )


def _values(table):
    def one(field):
        if field.choices:
            return st.sampled_from(field.choices)
        if field.whole:
            return st.integers(int(field.minimum), int(field.maximum))
        return st.floats(field.minimum, field.maximum, allow_nan=False)

    return st.fixed_dictionaries({name: one(field) for name, field in table.items()})


_printable = st.characters(codec="utf-8").filter(str.isprintable)
_names = st.text(_printable, min_size=1, max_size=LONGEST_NAME).filter(lambda text: text.strip())
_lines = st.text(_printable, max_size=LONGEST_NAME)
_notes = st.text(st.characters(codec="utf-8", exclude_categories=["Cc"]) | st.sampled_from("\n\t"), max_size=200)
_sets = st.builds(
    ParameterSet, name=_names, notes=_notes, channel=_values(CHANNEL_FIELDS).map(lambda v: ChannelParameters(**v))
)

any_project = st.builds(
    ChipProject,
    name=_names,
    lab=_lines,
    author=_lines,
    notes=_notes,
    operating=_values(OPERATING_FIELDS).map(lambda v: OperatingPoint(**v)),
    sets=st.lists(_sets, min_size=1, max_size=5, unique_by=lambda each: name_key(each.name)).map(tuple),
)
