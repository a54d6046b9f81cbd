"""The document: undo as value swaps, one step for one drag, nothing lost, nothing half done.

Truth: the rules said in the document's own words; no figures of the engine are checked here.
"""

from __future__ import annotations

import pytest

from app.document import Document
from core.errors import DesignValueError, ProjectFileError
from core.fabrication.shipped import shipped_process
from core.parameters import ChannelParameters
from core.project import ChipProject, ParameterSet, read_project


@pytest.fixture
def document(qapp):
    return Document(
        ChipProject(
            name="Bench chip",
            sets=(
                ParameterSet(name="Alpha", channel=ChannelParameters(stages=1)),
                ParameterSet(name="Beta", channel=ChannelParameters(stages=2)),
                ParameterSet(name="Gamma", channel=ChannelParameters(stages=3)),
            ),
        )
    )


def names(document):
    return [each.name for each in document.project.sets]


def test_push_undo_redo(document):
    before = document.project
    document.change_channel({"loop_radius_um": 340})
    after = document.project
    assert document.channel.loop_radius_um == 340.0
    document.undo_stack.undo()
    assert document.project is before
    document.undo_stack.redo()
    assert document.project is after


def test_undo_text_is_plain_words(document):
    document.change_channel({"loop_radius_um": 340})
    assert document.undo_stack.undo_text == "Loop radius 320 to 340 µm"
    document.change_operating({"fluid": "ethanol"})
    assert document.undo_stack.undo_text == "Fluid water to ethanol"


def test_modified_follows_save_and_undo(document, tmp_path):
    path = tmp_path / "chip.sideloop"
    assert not document.is_modified
    document.change_channel({"stages": 5})
    assert document.is_modified
    document.save(path)
    assert not document.is_modified
    assert read_project(path) == document.project
    document.undo_stack.undo()
    assert document.is_modified, "the file holds the later design"
    document.undo_stack.redo()
    assert not document.is_modified


def test_one_drag_is_one_step(document):
    gesture = document.new_gesture()
    for radius in (325, 330, 350, 360):
        document.change_channel({"loop_radius_um": radius}, gesture=gesture)
    assert document.undo_stack.count() == 1
    assert document.undo_stack.undo_text == "Loop radius 320 to 360 µm"
    document.undo_stack.undo()
    assert document.channel.loop_radius_um == 320.0


def test_two_drags_are_two_steps(document):
    for radius in (330, 350):
        document.change_channel({"loop_radius_um": radius}, gesture=document.new_gesture())
    assert document.undo_stack.count() == 2


def test_a_drag_back_to_the_start_leaves_no_step(document):
    gesture = document.new_gesture()
    for radius in (330, 320):
        document.change_channel({"loop_radius_um": radius}, gesture=gesture)
    assert document.undo_stack.count() == 0
    assert not document.is_modified


def test_a_drag_does_not_merge_over_a_save(document, tmp_path):
    gesture = document.new_gesture()
    document.change_channel({"loop_radius_um": 330}, gesture=gesture)
    document.save(tmp_path / "chip.sideloop")
    document.change_channel({"loop_radius_um": 340}, gesture=gesture)
    assert document.is_modified
    document.undo_stack.undo()
    assert not document.is_modified


def test_same_value_is_no_step(document):
    document.change_channel({"loop_radius_um": 320.0})
    assert document.undo_stack.count() == 0


@pytest.mark.parametrize("value", ["wide", float("nan"), float("inf"), -1.0, 1e9, None, True])
def test_bad_values_change_nothing(document, value):
    before = document.project
    with pytest.raises(DesignValueError) as refused:
        document.change_channel({"loop_radius_um": value})
    assert refused.value.field == "loop_radius_um"
    assert document.project is before
    assert document.undo_stack.count() == 0


def test_a_fluid_outside_its_temperatures_changes_nothing(document):
    document.change_operating({"temperature_c": 90})
    before = document.project
    with pytest.raises(DesignValueError) as refused:
        document.change_operating({"fluid": "ethanol"})  # boils at 78 degC
    assert refused.value.field == "temperature_c"
    assert document.project is before


def test_many_changes_are_worked_out_once(document, qtbot):
    document.settle()
    told = []
    document.channel_changed.connect(told.append)
    with qtbot.waitSignal(document.channel_changed):
        for radius in range(321, 341):
            document.change_channel({"loop_radius_um": radius})
    assert [shape.parameters.loop_radius_um for shape in told] == [340.0]


def test_reading_the_shape_never_waits(document):
    document.change_channel({"loop_radius_um": 333})
    assert document.shape.parameters.loop_radius_um == 333.0
    assert document.assessment.score is not None


def test_last_good_shape_is_kept_while_a_finding_blocks(document):
    document.select_set(1)
    good = document.shape
    document.change_channel({"loop_radius_um": 5.0})  # the loop is narrower than its own channel
    assert not document.shape.is_usable
    assert document.shape.findings
    assert document.last_good_shape is good
    assert document.assessment.score is None
    assert document.assessment.obstacle
    document.select_set(0)
    assert document.last_good_shape is document.shape


def test_sets_are_added_copied_renamed_moved_removed(document):
    document.select_set(1)
    document.copy_set()
    assert names(document) == ["Alpha", "Beta", "Beta 2", "Gamma"]
    assert document.current_set.name == "Beta 2"
    assert document.channel.stages == 2
    document.rename_set(2, "Delta")
    document.move_set(2, 0)
    assert names(document) == ["Delta", "Alpha", "Beta", "Gamma"]
    assert document.current_set.name == "Delta", "the set in hand stays in hand"
    document.remove_set(0)
    assert document.current_set.name == "Alpha"
    document.add_set()
    assert document.channel == ChannelParameters()
    for _ in range(document.undo_stack.count()):
        document.undo_stack.undo()
    assert names(document) == ["Alpha", "Beta", "Gamma"]
    assert document.current_set.name == "Beta"


def test_names_taken_and_last_set_are_refused(document):
    before = document.project
    with pytest.raises(DesignValueError, match="another name"):
        document.rename_set(0, "beta")
    assert document.project is before
    document.remove_set(0)
    document.remove_set(0)
    with pytest.raises(DesignValueError, match="at least one"):
        document.remove_set(0)
    assert names(document) == ["Gamma"]


def test_undo_takes_the_changed_set_in_hand(document):
    document.change_channel({"stages": 7})
    document.select_set(2)
    document.undo_stack.undo()
    assert document.index == 0


def test_selecting_is_no_step(document):
    document.select_set(2)
    assert document.channel.stages == 3
    assert document.undo_stack.count() == 0
    document.select_set(99)
    assert document.index == 2


def test_loading_forgets_old_steps(document, tmp_path, qtbot):
    document.change_channel({"stages": 7})
    other = ChipProject(name="Other", sets=(ParameterSet(name="One"),))
    with qtbot.waitSignals([document.path_changed, document.project_changed]):
        document.load(other, path=tmp_path / "other.sideloop")
    assert not document.is_modified
    assert not document.undo_stack.can_undo
    assert document.project is other


def test_a_recovered_project_counts_as_modified(document):
    document.load(ChipProject(name="Other", sets=(ParameterSet(name="One"),)), path=None, is_modified=True)
    assert document.is_modified


def test_a_failed_save_changes_nothing(document, tmp_path):
    document.change_channel({"stages": 7})
    with pytest.raises(ProjectFileError):
        document.save(tmp_path / "no such folder" / "chip.sideloop")
    assert document.is_modified
    assert document.path is None


def test_details_are_one_step(document):
    document.change_details(name="Other chip", lab="Fernhollow Bench Fluidics", author="", notes="For trial.")
    assert document.project.lab == "Fernhollow Bench Fluidics"
    document.undo_stack.undo()
    assert document.project.name == "Bench chip"
    with pytest.raises(DesignValueError):
        document.change_details(name="  ", lab="", author="", notes="")


# --- making it


def test_a_process_is_chosen_edited_and_taken_back(document):
    """Truth: the shipped values of the kind, and the values before."""
    before = document.project
    document.choose_process("laser-cut film")
    assert document.process == shipped_process("laser-cut film")
    assert document.undo_stack.undo_text == "Make it as laser-cut film"
    document.change_process({"kerf_um": 60})
    assert document.process.kerf_um == 60.0
    assert document.undo_stack.undo_text == "Kerf 80 to 60 µm"
    document.undo_stack.undo()
    document.undo_stack.undo()
    assert document.project is before


def test_a_drag_along_a_value_of_the_process_is_one_step(document):
    gesture = document.new_gesture()
    for width in (51, 55, 60):
        document.change_process({"min_width_um": width}, gesture=gesture)
    assert document.undo_stack.count() == 1
    assert document.undo_stack.undo_text == "Smallest width 50 to 60 µm"


@pytest.mark.parametrize("values", [{"min_depth_um": 9000}, {"kerf_um": 100}, {"min_width_um": "wide"}])
def test_values_that_contradict_one_another_change_nothing(document, values):
    before = document.project
    with pytest.raises(DesignValueError):
        document.change_process(values)
    assert document.project is before
    assert document.undo_stack.count() == 0


def test_the_plan_is_changed_and_taken_back(document):
    before = document.project
    document.change_plan_values({"chip_width_um": 30000})
    assert document.plan.chip_width_um == 30000.0
    assert document.undo_stack.undo_text == "Chip width 40000 to 30000 µm"
    document.change_plan(document.plan.with_values({"plate": "wafer"}), "Fill a wafer")
    assert document.plan.plate == "wafer"
    assert document.undo_stack.undo_text == "Fill a wafer"
    document.undo_stack.undo()
    document.undo_stack.undo()
    assert document.project is before


@pytest.mark.parametrize(
    ("field", "value", "read"),
    [
        ("loop_radius_um", 350.0, lambda d: d.channel.loop_radius_um),
        ("min_width_um", 30.0, lambda d: d.process.min_width_um),
        ("chip_width_um", 30000.0, lambda d: d.plan.chip_width_um),
        ("flow_ul_min", 10.0, lambda d: d.operating.flow_ul_min),
    ],
)
def test_a_cure_goes_to_whatever_has_the_field(document, field, value, read):
    document.apply_cure(field, value)
    assert read(document) == value
    assert document.undo_stack.count() == 1


def test_a_cure_of_another_set_takes_that_set_in_hand(document):
    document.apply_cure("stages", 7, index=2)
    assert [each.channel.stages for each in document.project.sets] == [1, 2, 7]
    assert document.current_set.name == "Gamma"


def test_another_process_that_makes_another_channel_tells_of_another_score(document, qtbot):
    score = document.assessment.score
    with qtbot.waitSignal(document.estimate_changed):
        document.change_process({"bias_um": 5.0, "allowance": "not at all"})
    assert document.assessment.score.forward_pressure_pa < score.forward_pressure_pa, "wider channels resist less"
    with qtbot.waitSignal(document.estimate_changed):
        document.change_process({"allowance": "in the drawing"})
    assert document.assessment.score == score, "compensated, the same channel comes out"
