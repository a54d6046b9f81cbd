"""The child process of a flow solve: whatever it does, one ending comes and nothing is left."""

from __future__ import annotations

import tempfile
import time

import pytest

from app.background import Ending
from app.solving.process import SolveProcess
from app.solving.protocol import SolveRequest
from core.operating import OperatingPoint
from core.parameters import ChannelParameters
from tests.app.solving.children import command, is_gone, left_folders

REQUEST = SolveRequest(
    set_name="Alpha",
    channel=ChannelParameters(stages=1),
    operating=OperatingPoint(flow_ul_min=600.0),
    flows_ul_min=(300.0, 600.0),
)


@pytest.fixture(autouse=True)
def own_temporary_folder(tmp_path, monkeypatch):
    monkeypatch.setattr(tempfile, "tempdir", str(tmp_path))
    yield
    assert not left_folders()


@pytest.fixture
def make(qtbot, qapp):
    """Return a function that makes a process with a child of some manner and records what it says."""
    made = []

    def with_child(manner, **settings):
        process = SolveProcess(command=settings.get("command", command(manner)))
        process.said, process.endings = [], []
        process.answered.connect(process.said.append)
        process.ended.connect(lambda *ending: process.endings.append(ending))
        made.append(process)
        return process

    yield with_child
    for process in made:
        process.end_now()
        assert len(process.endings) == 1, "exactly one ending"


def run(qtbot, process):
    with qtbot.waitSignal(process.ended, timeout=10_000):
        process.start(REQUEST)
    return process.endings[0]


def test_the_coarse_answer_comes_first_then_the_better_one(make, qtbot):
    process = make("polite-not")
    steps = []
    process.progressed.connect(lambda *step: steps.append(step))
    assert run(qtbot, process) == (Ending.DONE, "")
    assert [answer.quality for answer in process.said] == ["coarse", "normal"]
    assert steps == [(100, 1000, "coarse answer: meshing")]
    result = process.said[1].results[1]
    assert (result.flow_ul_min, result.set_name, result.channel) == (600.0, "Alpha", REQUEST.channel)
    assert result.diodicity == pytest.approx(1.2)
    assert set(process.said[0].fields) == {"forward", "reverse"}
    assert not process.is_running


@pytest.mark.parametrize("manner", ["polite", "deaf"])
def test_cancel_ends_within_a_second(make, qtbot, manner):
    process = make(manner)
    with qtbot.waitSignal(process.answered, timeout=10_000):
        process.start(REQUEST)
    child = process.process_id
    began = time.monotonic()
    with qtbot.waitSignal(process.ended, timeout=5_000):
        process.cancel()
    assert time.monotonic() - began < 1.0
    assert process.endings == [(Ending.CANCELLED, "")]
    assert is_gone(child)


@pytest.mark.parametrize("manner", ["crash", "mute"])
def test_a_child_that_dies_is_told_in_one_sentence(make, qtbot, manner):
    ending, text = run(qtbot, make(manner))
    assert ending is Ending.FAILED
    assert "project is unharmed" in text


def test_a_refusal_is_told_as_it_is(make, qtbot):
    assert run(qtbot, make("refuse")) == (Ending.FAILED, "stages is 99: would need 9 GB; use fewer stages")


def test_a_child_that_cannot_start_is_told(make, qtbot):
    ending, text = run(qtbot, make("", command=("/no/such/program",)))
    assert ending is Ending.FAILED
    assert "could not be started" in text


def test_end_now_waits_for_the_end(make, qtbot):
    process = make("deaf")
    with qtbot.waitSignal(process.answered, timeout=10_000):
        process.start(REQUEST)
    child = process.process_id
    process.end_now()
    assert process.endings == [(Ending.CANCELLED, "")]
    assert is_gone(child)


def test_a_full_disk_costs_the_picture_not_the_numbers(make, qtbot, monkeypatch):
    def full(**_settings):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(tempfile, "mkdtemp", full)
    process = make("ok")
    assert run(qtbot, process)[0] is Ending.DONE
    assert [answer.fields for answer in process.said] == [{}, {}]
    assert all(answer.results for answer in process.said)
