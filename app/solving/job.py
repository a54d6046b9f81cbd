"""The child process that solves: ``python -m app.solving.job`` (see ``app.solving.protocol``)."""

from __future__ import annotations

import json
import os
import shutil
import sys
import threading
import time
from importlib import import_module
from pathlib import Path
from typing import IO, TYPE_CHECKING, NoReturn

from app.solving.fields import save_fields
from app.solving.protocol import STOP, Kind, SolveRequest, kept_numbers
from core.errors import CoreError
from core.flow.channel import channel_answers
from core.flow.newton import FlowStopped

if TYPE_CHECKING:
    from core.flow.channel_result import ChannelFlow

_LEAST_PAUSE_S = 0.05  # between two lines of progress
_PROCESSES = 2  # forward and reverse side by side along a curve; for one flow starting another takes longer
_KINDER_BY = 5  # of the machine's priority: the window comes first


class Child:
    """Answers one request.

    Parameters
    ----------
    request : SolveRequest
        What is to be solved.
    out : text stream
        Where the lines go.
    """

    def __init__(self, request: SolveRequest, out: IO[str]) -> None:
        self._request, self._out = request, out
        self._stop = threading.Event()
        self._told_at = 0.0

    def ask_to_stop(self) -> None:
        """Let the solve end at its next step."""
        self._stop.set()

    def run(self) -> None:
        """Solve and tell; always ends with one closing line."""
        try:
            self._solve()
            self._tell(Kind.DONE)
        except FlowStopped:
            self._tell(Kind.STOPPED)
        except CoreError as error:
            self._tell(Kind.FAILED, text=str(error))
        except MemoryError:
            self._tell(Kind.FAILED, text="the memory does not suffice; use fewer stages or shorter leads")
        except Exception as error:  # a defect of the program; the window tells it in one sentence
            self._tell(Kind.FAILED, text=f"the flow solve met an error of its own ({type(error).__name__}: {error})")

    def _solve(self) -> None:
        request = self._request
        answers = channel_answers(
            request.channel,
            fluid=request.operating.fluid_state(),
            flows_ul_min=request.flows_ul_min,
            qualities=request.qualities,
            report=self._report,
            should_stop=self._stop.is_set,
            steady_for=request.qualities[1:],
            processes=_PROCESSES if len(request.flows_ul_min) > 1 else 1,
        )
        for quality, found in zip(request.qualities, answers, strict=True):
            self._tell(
                Kind.ANSWER,
                quality=quality,
                points=[kept_numbers(point) for point in found.points],
                fields=self._kept_fields(found, quality),
            )

    def _kept_fields(self, found: ChannelFlow, quality: str) -> str:
        """Return the file that holds the fields at the operating flow; empty when there is none."""
        flow = self._request.operating.flow_ul_min
        chosen = next((point for point in found.points if point.flow_ul_min == flow), None)
        if chosen is None or not self._request.folder:
            return ""
        path = Path(self._request.folder) / f"{quality}.npz"
        try:
            save_fields(path, {"forward": chosen.forward_field, "reverse": chosen.reverse_field})
        except OSError:  # a full disk costs the picture, not the numbers
            return ""
        return str(path)

    def _report(self, step: int, total: int, text: str) -> None:
        now = time.monotonic()
        if now - self._told_at < _LEAST_PAUSE_S:
            return
        self._told_at = now
        self._tell(Kind.PROGRESS, step=step, total=total, text=text)

    def _tell(self, kind: Kind, **content: object) -> None:
        self._out.write(json.dumps({"kind": kind, **content}) + "\n")
        self._out.flush()


def listen(child: Child, lines: IO[str], folder: str) -> None:
    """Wait for the word to stop; when the window is gone, remove what is left and end at once."""
    for line in lines:
        if line.strip() == STOP:
            child.ask_to_stop()
    if folder:
        shutil.rmtree(folder, ignore_errors=True)
    os._exit(3)


def get_ready() -> None:
    """Import what every solve needs, while the request may still be to come."""
    for name in ("chemicals", "netgen.geom2d", "scipy.linalg.lapack", "scipy.sparse.linalg", "scipy.spatial", "skfem"):
        import_module(name)


def main() -> NoReturn:
    """Take one request from standard input and answer it on standard output."""
    out = os.fdopen(os.dup(1), "w", encoding="utf-8")
    os.dup2(2, 1)  # whatever a library prints must not come between the lines
    if hasattr(os, "nice"):
        os.nice(_KINDER_BY)
    get_ready()
    line = sys.stdin.readline()
    if not line:  # woken, and never asked
        os._exit(0)
    request = SolveRequest.from_line(line)
    child = Child(request, out)
    threading.Thread(target=listen, args=(child, sys.stdin, request.folder), daemon=True).start()
    child.run()
    os._exit(0)  # every line is flushed, and the listener still waits for its own


if __name__ == "__main__":
    main()
