"""Two processes side by side: the same numbers, and no process left however it ends.

Truth: the solve in one process; the list of processes that the system keeps.
"""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import numpy as np
import pytest

from core.flow import FlowStopped, ladder, solve_curve
from core.flow.side_by_side import Companion
from tests.core.flow.flow_shapes import chain
from tests.core.flow.processes import children, is_solver

FLOWS = [4e-9, 8e-9]  # m^3/s
WATER = {"density_kg_m3": 1000.0, "viscosity_pa_s": 1e-3, "quality": "coarse"}
ROOT = Path(__file__).parents[3]
SOLVER = """
from core.flow import ladder, solve_curve
from tests.core.flow.flow_shapes import chain
ladder._WORTH_A_PROCESS = 0
if __name__ == "__main__":
    print("begun", flush=True)
    solve_curve(chain(stages=4), flows_m3_s=[1e-9 * k for k in range(1, 40)], density_kg_m3=1000.0,
                viscosity_pa_s=1e-3, quality="normal", processes=2)
"""


@pytest.fixture
def always(monkeypatch):
    """Let the second process be worth it for the smallest of solves."""
    monkeypatch.setattr(ladder, "_WORTH_A_PROCESS", 0)


@pytest.fixture
def started(monkeypatch):
    """Collect the pieces of work that a second process is asked for."""
    asked, ask = [], Companion.ask

    def counted(self, direction, work):
        asked.append(direction)
        ask(self, direction, work)

    monkeypatch.setattr(Companion, "ask", counted)
    return asked


@pytest.fixture(scope="module")
def alone():
    return solve_curve(chain(), flows_m3_s=FLOWS, **WATER)


def is_alike(found, alone):
    for two, one in zip(found, alone, strict=True):
        assert two.flow_m3_s == one.flow_m3_s
        for name in ("forward_pressure_pa", "reverse_pressure_pa", "diodicity_band", "loop_share_reverse"):
            assert getattr(two, name) == pytest.approx(getattr(one, name), rel=1e-9)
        np.testing.assert_allclose(two.reverse.field.in_plane_m_s, one.reverse.field.in_plane_m_s, atol=1e-9)


@pytest.mark.slow
def test_two_processes_find_the_same(always, started, alone):
    steps = []
    found = solve_curve(chain(), flows_m3_s=FLOWS, processes=2, report=lambda *step: steps.append(step), **WATER)
    is_alike(found, alone)
    assert started == ["reverse", "reverse"]  # both levels
    assert [step[0] for step in steps] == sorted(step[0] for step in steps)
    assert children() == []


def test_a_small_solve_starts_no_process(started, alone):
    is_alike(solve_curve(chain(), flows_m3_s=FLOWS, processes=2, **WATER), alone)
    assert started == []


def test_without_the_memory_for_two_there_is_one(always, started, alone):
    need = max(each.memory_mb for each in alone)
    found = solve_curve(chain(), flows_m3_s=FLOWS, processes=2, memory_limit_mb=1.5 * need, **WATER)
    is_alike(found, alone)
    assert started == []


@pytest.mark.slow
def test_a_process_that_dies_costs_time_only(always, monkeypatch, alone):
    ask = Companion.ask

    def ask_and_kill(self, direction, work):
        ask(self, direction, work)
        self._process.kill()

    monkeypatch.setattr(Companion, "ask", ask_and_kill)
    is_alike(solve_curve(chain(), flows_m3_s=FLOWS, processes=2, **WATER), alone)
    assert children() == []


@pytest.mark.slow
def test_stopping_leaves_no_process(always):
    begun = []

    def should_stop():
        begun.extend(children())
        return bool(begun)

    with pytest.raises(FlowStopped):
        solve_curve(chain(), flows_m3_s=FLOWS, processes=2, should_stop=should_stop, **WATER)
    assert begun
    assert children() == []


@pytest.mark.slow
@pytest.mark.skipif(not Path("/proc/self/task").exists(), reason="the list of processes is read from /proc")
def test_the_second_process_ends_with_the_first(tmp_path):
    """Killed outright, the first can end nothing by itself."""
    script = tmp_path / "solver.py"
    script.write_text(SOLVER)
    environment = os.environ | {"PYTHONPATH": str(ROOT), "OPENBLAS_NUM_THREADS": "1"}
    first = subprocess.Popen([sys.executable, script], env=environment, stdout=subprocess.PIPE, text=True)
    try:
        assert first.stdout.readline() == "begun\n"
        second = until(lambda: children(first.pid))
        assert second
        first.send_signal(signal.SIGKILL)
        first.wait()
        assert until(lambda: not any(is_solver(each) for each in second))
    finally:
        first.kill()
        first.wait()
        first.stdout.close()


def until(found, *, patience_s=120.0):
    """Return what is found, asked again and again, at last in vain."""
    end = time.monotonic() + patience_s
    while not (value := found()) and time.monotonic() < end:
        time.sleep(0.1)
    return value
