"""Projects for the tests of this folder."""

from __future__ import annotations

from hypothesis import strategies as st

from core.chip.plan import CHIP_FIELDS, ChipChannel, ChipPlan, SteppedField
from core.fabrication.process import ProcessKind
from core.fabrication.shipped import shipped_process
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
        process=shipped_process(ProcessKind.WET_GLASS).with_values(
            {"bias_um": -1.25, "undercut_ratio": 0.95, "grid_nm": 5, "allowance": "by the shop"}
        ),
        plan=ChipPlan(
            chip_width_um=30000.5,
            plate="wafer",
            label="RINSE A4",
            channels=(
                ChipChannel(set_name="Four loops", x_um=-1500.25, y_um=3000.0, turn_deg=90.0, rows=2),
                ChipChannel(set_name="Four loops", y_um=-3000.0, is_control=True),
                ChipChannel(set_name="Control"),
            ),
            series=(
                SteppedField(name="loop_angle_deg", first=30.0, last=60.0, steps=4),
                SteppedField(name="stages", first=2, last=6, steps=3),
            ),
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


_printable = st.characters(codec="utf-8", categories=["L", "M", "N", "P", "S"]) | st.just(" ")
_names = st.text(_printable, min_size=1, max_size=LONGEST_NAME).filter(lambda text: text.strip())
_lines = st.text(_printable, max_size=LONGEST_NAME)
_notes = st.text(st.characters(codec="utf-8", exclude_categories=["Cc"]) | st.sampled_from("\n\t"), max_size=200)
_sets = st.builds(
    ParameterSet, name=_names, notes=_notes, channel=_values(CHANNEL_FIELDS).map(lambda v: ChannelParameters(**v))
)

_processes = st.builds(
    lambda kind, **values: shipped_process(kind).with_values(values),
    st.sampled_from(ProcessKind),
    bias_um=st.floats(-500.0, 500.0),
    shrink_percent=st.floats(0.0, 20.0),
    grid_nm=st.integers(1, 10000),
)
_places = st.builds(
    ChipChannel,
    set_name=st.sampled_from(["Four loops", "Ä 4", "gone"]),
    x_um=st.floats(-1e5, 1e5),
    y_um=st.floats(-1e5, 1e5),
    turn_deg=st.floats(-180.0, 180.0),
    rows=st.integers(1, 9),
    is_control=st.booleans(),
)
_plans = st.builds(
    lambda values, label, channels: ChipPlan(**values, label=label, channels=tuple(channels)),
    values=_values({name: CHIP_FIELDS[name] for name in ("chip_width_um", "alignment_pairs", "plate")}),
    label=_lines,
    channels=st.lists(_places, max_size=2),
)

any_project = st.builds(
    ChipProject,
    name=_names,
    lab=_lines,
    author=_lines,
    notes=_notes,
    operating=_values(OPERATING_FIELDS).map(lambda v: OperatingPoint(**v)),
    process=_processes,
    plan=_plans,
    sets=st.lists(_sets, min_size=1, max_size=5, unique_by=lambda each: name_key(each.name)).map(tuple),
)
