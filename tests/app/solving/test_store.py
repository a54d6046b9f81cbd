"""Results are facts: the latest of each question, found by what they belong to."""

from __future__ import annotations

from dataclasses import replace

from app.solving.store import SolvedStore
from core.operating import OperatingPoint
from core.parameters import ChannelParameters
from core.project import ChipProject, ParameterSet, SolvedResult

ONE = SolvedResult(set_name="Alpha", channel=ChannelParameters(), operating=OperatingPoint(), reynolds=99.0)


def test_the_latest_answer_is_found_by_design_and_condition():
    store = SolvedStore()
    better = replace(ONE, quality="fine")
    other = replace(ONE, operating=OperatingPoint(flow_ul_min=300.0))
    store.add([ONE])
    store.add([other, better])
    assert store.at(ChannelParameters(), OperatingPoint()) is better
    assert store.at(ChannelParameters(stages=9), OperatingPoint()) is None
    assert store.along(ChannelParameters(), OperatingPoint()) == (other, better)
    assert store.along(ChannelParameters(), OperatingPoint(temperature_c=60.0)) == ()
    assert store.stale_of("Alpha") is better
    assert store.stale_of("Beta") is None


def test_it_knows_what_no_file_holds(qtbot):
    store = SolvedStore()
    store.load([ONE])
    assert not store.is_unsaved
    with qtbot.waitSignal(store.changed):
        store.add([ONE])
    assert store.is_unsaved
    store.mark_saved()
    assert not store.is_unsaved


def test_results_of_removed_sets_are_not_kept():
    store = SolvedStore()
    gone = replace(ONE, set_name="Gone", channel=ChannelParameters(stages=7))
    renamed = replace(ONE, set_name="Old name")
    store.add([ONE, gone, renamed])
    project = ChipProject(name="Chip", sets=(ParameterSet(name="Alpha"),))
    assert store.kept_with(project) == (ONE, renamed)
