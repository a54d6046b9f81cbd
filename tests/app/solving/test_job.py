"""The child's side: lines in order, one closing line, and no life without the window."""

from __future__ import annotations

import io
import json
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from app.solving import job
from app.solving.fields import read_fields, save_fields
from app.solving.job import Child
from app.solving.protocol import SolveRequest
from core.errors import SolveError
from core.flow.newton import FlowStopped
from core.flow.result import FlowField
from core.operating import OperatingPoint
from core.parameters import ChannelParameters

ROOT = Path(__file__).parents[3]
REQUEST = SolveRequest(
    set_name="Alpha",
    channel=ChannelParameters(stages=1, lead_in_um=400.0, lead_out_um=400.0),
    operating=OperatingPoint(flow_ul_min=500.0),
    flows_ul_min=(500.0,),
    qualities=("coarse",),
)


def said(child_out: io.StringIO) -> list[dict]:
    return [json.loads(line) for line in child_out.getvalue().splitlines()]


def closing(monkeypatch, error) -> dict:
    def fail(*_arguments, **_settings):
        raise error

    monkeypatch.setattr(job, "channel_answers", fail)
    out = io.StringIO()
    Child(REQUEST, out).run()
    (line,) = said(out)
    return line


def test_a_request_survives_the_way():
    assert SolveRequest.from_line(REQUEST.as_line()) == REQUEST


@pytest.mark.parametrize(
    ("error", "kind", "words"),
    [
        (FlowStopped("stopped"), "stopped", ""),
        (SolveError("stages is 90; use fewer"), "failed", "stages is 90; use fewer"),
        (MemoryError(), "failed", "memory does not suffice"),
        (ZeroDivisionError("x"), "failed", "an error of its own (ZeroDivisionError: x)"),
    ],
)
def test_every_end_has_one_closing_line(monkeypatch, error, kind, words):
    line = closing(monkeypatch, error)
    assert line["kind"] == kind
    assert words in line.get("text", "")


def test_fields_survive_the_way(tmp_path):
    field = FlowField(
        points_um=np.random.default_rng(1).random((5, 2)),
        triangles=np.array([[0, 1, 2], [2, 3, 4]]),
        in_plane_m_s=np.ones((2, 2, 5)),
        vertical_m_s=np.full((1, 5), 0.5),
        pressure_modes_pa=np.arange(10.0).reshape(2, 5),
    )
    save_fields(tmp_path / "coarse.npz", {"forward": field, "reverse": None})
    back = read_fields(tmp_path / "coarse.npz")
    assert set(back) == {"forward"}
    np.testing.assert_allclose(back["forward"].points_um, field.points_um, rtol=1e-6)
    np.testing.assert_allclose(back["forward"].velocity_m_s(0.3), field.velocity_m_s(0.3), rtol=1e-6)
    np.testing.assert_array_equal(back["forward"].triangles, field.triangles)


def test_a_field_that_cannot_be_written_leaves_no_file(tmp_path, monkeypatch):
    def full(path, **_arrays):
        Path(path).write_bytes(b"half")
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(np, "savez", full)
    with pytest.raises(OSError, match="No space"):
        save_fields(tmp_path / "coarse.npz", {"forward": None})
    assert not list(tmp_path.iterdir())


@pytest.mark.slow
def test_a_real_solve_by_its_own_process(tmp_path):
    request = replace(REQUEST, folder=str(tmp_path))
    done = subprocess.run(
        [sys.executable, "-m", "app.solving.job"], input=f"{request.as_line()}\n", cwd=ROOT, capture_output=True,
        text=True, timeout=300, check=False,
    )  # fmt: skip
    # standard input ended with the request, as when the window dies: the child must not go on
    assert done.returncode == 3
    assert not tmp_path.exists()
    with subprocess.Popen(
        [sys.executable, "-m", "app.solving.job"], cwd=ROOT, stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True
    ) as child:
        tmp_path.mkdir()
        child.stdin.write(f"{request.as_line()}\n")
        child.stdin.flush()
        lines = [json.loads(line) for line in child.stdout]
    assert [line["kind"] for line in lines if line["kind"] != "progress"] == ["answer", "done"]
    (answer,) = (line for line in lines if line["kind"] == "answer")
    assert request.result(answer["points"][0]).valid
    assert set(read_fields(Path(answer["fields"]))) == {"forward", "reverse"}
