"""``solve`` on the command line: the contract of its answer, and one clear line for what is wrong."""

from __future__ import annotations

import io
import json
import re
import subprocess
import sys
from pathlib import Path

import pytest

from app import progress_line
from app.command_line import main
from app.progress_line import progress_text, time_left_text, told_progress
from core.errors import SolveError
from core.flow import channel as channel_module

ROOT = Path(__file__).parents[2]
SAMPLE = ROOT / "sample_designs" / "cell-rinse-return.sideloop"
SMALL = ("--with=stages=1", "--with=lead_in_um=400", "--with=lead_out_um=400", "--quality=coarse")
# the contract that scripts rely on
KEYS = {
    "forward_pressure_pa", "reverse_pressure_pa", "diodicity", "reynolds", "flow_ul_min", "loop_share_forward",
    "loop_share_reverse", "method", "error_band_percent", "valid", "notes", "unknowns", "seconds", "modes",
}  # fmt: skip


@pytest.fixture
def run(capsys):
    def answer(*words: object) -> tuple[int, str, str]:
        status = main([str(word) for word in words])
        captured = capsys.readouterr()
        return status, captured.out, captured.err

    return answer


@pytest.mark.slow
def test_the_answer_has_the_agreed_keys():
    done = subprocess.run(
        [sys.executable, "-m", "app", "solve", str(SAMPLE), *SMALL, "--json"], cwd=ROOT, capture_output=True, text=True,
        check=False,
    )  # fmt: skip
    assert (done.returncode, done.stderr) == (0, "")
    point = json.loads(done.stdout)
    assert set(point) >= KEYS
    assert point["method"] == "flow solve"
    assert point["diodicity"] == pytest.approx(point["reverse_pressure_pa"] / point["forward_pressure_pa"], rel=1e-9)
    assert point["error_band_percent"] > 0.0


@pytest.mark.slow
def test_several_flows_stand_under_points_and_in_a_table(run):
    status, out, err = run("solve", SAMPLE, *SMALL, "--json", "--flow-ul-min", "400,200")
    ((key, points),) = json.loads(out).items()
    assert (status, err, key) == (0, "", "points")
    assert [point["flow_ul_min"] for point in points] == [400.0, 200.0]
    status, out, _ = run("solve", SAMPLE, *SMALL, "--flow-ul-min", "200")
    assert status == 0
    assert "method: flow solve" in out


@pytest.mark.parametrize(
    ("words", "complaint"),
    [
        (("--quality=best",), "quality is 'best'"),
        (("--flow-ul-min=-3",), "flow_ul_min is '-3'"),
        (("--with=depht_um=3",), "did you mean 'depth_um'"),
        (("--set=Nobody",), "Nobody"),
        (("--qualty=fine",), "did you mean '--quality'"),
    ],
)
def test_bad_input_gets_one_clear_line(run, words, complaint):
    status, out, err = run("solve", SAMPLE, *words)
    assert (status, out) == (2, "")
    assert re.fullmatch(r"sideloop: [^\n]+\n", err)
    assert complaint in err
    assert "error of the program" not in err


def test_a_solve_that_cannot_be_done_is_one_line(run, monkeypatch):
    def refuse(*_arguments, **_settings):
        raise SolveError("stages is 100: the flow solve would need 9 GB; use fewer stages")

    monkeypatch.setattr(channel_module, "solve_channel", refuse)
    assert run("solve", SAMPLE) == (
        2, "", "sideloop: stages is 100: the flow solve would need 9 GB; use fewer stages\n",
    )  # fmt: skip


# --- progress -------------------------------------------------------------------------------


class Terminal(io.StringIO):
    def isatty(self):
        return True


def test_nobody_looks_nothing_is_told(monkeypatch):
    monkeypatch.setattr(sys, "stderr", io.StringIO())
    with told_progress() as report:
        assert report is None


def test_a_terminal_gets_one_line_that_goes_away(monkeypatch):
    now = iter([0.0, 5.0, 5.01, 20.0])
    monkeypatch.setattr(progress_line.time, "monotonic", lambda: next(now))
    terminal = Terminal()
    monkeypatch.setattr(sys, "stderr", terminal)
    with told_progress() as report:
        report(250, 1000, "meshing")
        report(260, 1000, "too soon")
        report(500, 1000, "solving")
    told = terminal.getvalue()
    assert " 25 %  about 15 s left, meshing" in told
    assert "too soon" not in told
    assert " 50 %  about 20 s left, solving" in told
    assert "\n" not in told
    assert told.endswith("\r\033[K")


@pytest.mark.parametrize(
    ("step", "elapsed_s", "text"),
    [
        (0, 9.0, ""),
        (500, 0.5, ""),
        (500, 9.0, "about 9 s left"),
        (10, 9.0, "about 15 min left"),
        (1000, 9.0, "about 0 s left"),
    ],
)
def test_time_left(step, elapsed_s, text):
    assert time_left_text(step, 1000, elapsed_s=elapsed_s) == text
    assert progress_text(step, 1000, "meshing", elapsed_s=elapsed_s).endswith("meshing")
