"""The window's side of a flow solve: starts the child process, hears it, ends it."""

from __future__ import annotations

import contextlib
import json
import logging
import shutil
import sys
import tempfile
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, QProcess, QProcessEnvironment, QTimer, Signal

import app
from app.background import Ending
from app.solving.fields import read_fields
from app.solving.protocol import STOP, Kind

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from app.solving.protocol import SolveRequest
    from core.flow.result import FlowField
    from core.project.solved import SolvedResult

COMMAND = (sys.executable, "-m", "app.solving.job")
_LOG = logging.getLogger("sideloop")
_PATIENCE_MS = 500  # from asking the child to stop to ending it
_LAST_WAIT_MS = 2000
_NO_ANSWER = "The flow solve ended without an answer; the memory may have run out. Your project is unharmed."
_NO_START = "The flow solve could not be started. Your project is unharmed."


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class SolveAnswer:
    """One answer of the child.

    Attributes
    ----------
    request : SolveRequest
        What was asked.
    quality : str
        How fine it is.
    results : tuple of SolvedResult
        One for each flow.
    fields : dict
        Flow field by direction, at the operating flow; empty when there is none.
    """

    request: SolveRequest
    quality: str
    results: tuple[SolvedResult, ...]
    fields: dict[str, FlowField] = field(default_factory=dict)


class SolveProcess(QObject):
    """One flow solve in a child process.

    Parameters
    ----------
    command : sequence of str
        What the child runs.

    Signals
    -------
    progressed(int, int, str)
        Step, number of steps, what is being done.
    answered(SolveAnswer)
        Each answer, the coarsest first.
    ended(Ending, str)
        Sent exactly once, whatever happens: how it ended, and a sentence for the user when it failed.
    """

    progressed = Signal(int, int, str)
    answered = Signal(object)
    ended = Signal(object, str)

    def __init__(self, *, command: Sequence[str] = COMMAND, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._folder = _new_folder()
        self._request: SolveRequest | None = None
        self._command = tuple(command)
        self._closing: tuple[Ending, str] | None = None
        self._is_cancelled = self._has_ended = False
        self._process = QProcess(self)
        self._process.setProcessEnvironment(_environment())
        self._process.readyReadStandardOutput.connect(self._on_process_ready_read)
        self._process.finished.connect(self._on_process_finished)
        self._process.errorOccurred.connect(self._on_process_error)
        self._patience = QTimer(self, singleShot=True, interval=_PATIENCE_MS)
        self._patience.timeout.connect(self._process.kill)

    @property
    def is_running(self) -> bool:
        """Whether the end is still to come."""
        return not self._has_ended

    @property
    def process_id(self) -> int:
        """Number of the child process; 0 when there is none."""
        return int(self._process.processId())

    @property
    def command(self) -> tuple[str, ...]:
        """What the child runs."""
        return self._command

    def wake(self) -> None:
        """Start the child, which gets ready and waits for its request."""
        self._process.start(self._command[0], list(self._command[1:]))

    def start(self, request: SolveRequest) -> None:
        """Hand the child its request; it is started if it does not wait already."""
        if self._process.state() == QProcess.ProcessState.NotRunning:
            self.wake()
        self._request = replace(request, folder=self._folder)
        self._process.write(f"{self._request.as_line()}\n".encode())

    def cancel(self) -> None:
        """Ask the child to stop, and end it when it does not within half a second."""
        if self._has_ended or self._is_cancelled:
            return
        self._is_cancelled = True
        self._process.write(f"{STOP}\n".encode())
        self._patience.start()

    def end_now(self) -> None:
        """End the child before this returns; for a window that closes."""
        if self._has_ended:
            return
        self._is_cancelled = True
        self._process.kill()
        self._process.waitForFinished(_LAST_WAIT_MS)
        self._end()

    # --- what the child says --------------------------------------------------------------

    def _on_process_ready_read(self) -> None:
        while self._process.canReadLine():
            with contextlib.suppress(ValueError, KeyError, TypeError):  # no line of ours: of no concern
                self._take(json.loads(bytes(self._process.readLine().data())))

    def _take(self, message: Mapping[str, object]) -> None:
        kind = message["kind"]
        if self._has_ended or self._is_cancelled:
            return
        if kind == Kind.PROGRESS:
            self.progressed.emit(int(message["step"]), int(message["total"]), str(message["text"]))  # type: ignore[call-overload]
        elif kind == Kind.ANSWER:
            self.answered.emit(self._answer(message))
        elif kind == Kind.DONE:
            self._closing = (Ending.DONE, "")
        elif kind == Kind.STOPPED:
            self._closing = (Ending.CANCELLED, "")
        elif kind == Kind.FAILED:
            self._closing = (Ending.FAILED, str(message["text"]))

    def _answer(self, message: Mapping[str, object]) -> SolveAnswer:
        assert self._request is not None  # nothing is answered before it is asked
        fields: dict[str, FlowField] = {}
        if message["fields"]:
            with contextlib.suppress(OSError, ValueError, KeyError):  # a spoilt file costs the picture alone
                fields = read_fields(Path(str(message["fields"])))
        points = message["points"]
        return SolveAnswer(
            request=self._request,
            quality=str(message["quality"]),
            results=tuple(self._request.result(point) for point in points),  # type: ignore[attr-defined]
            fields=fields,
        )

    # --- how it ends ----------------------------------------------------------------------

    def _on_process_finished(self) -> None:
        self._on_process_ready_read()
        self._end()

    def _on_process_error(self, error: QProcess.ProcessError) -> None:
        if error == QProcess.ProcessError.FailedToStart:  # no other signal follows
            self._closing = (Ending.FAILED, _NO_START)
            self._end()

    def _end(self) -> None:
        if self._has_ended:
            return
        self._has_ended = True
        self._patience.stop()
        if self._folder:
            shutil.rmtree(self._folder, ignore_errors=True)
        if self._is_cancelled:
            self._closing = (Ending.CANCELLED, "")
        if self._closing is None:
            said = bytes(self._process.readAllStandardError().data()).decode(errors="replace")
            _LOG.error("the flow solve died: %s", said[-2000:])
        self.ended.emit(*(self._closing or (Ending.FAILED, _NO_ANSWER)))


def _new_folder() -> str:
    try:
        return tempfile.mkdtemp(prefix="sideloop-solve-")
    except OSError:  # a full disk costs the picture, not the numbers
        return ""


def _environment() -> QProcessEnvironment:
    """Return the environment of the child: the project can be imported, one thread for linear algebra."""
    environment = QProcessEnvironment.systemEnvironment()
    root = str(Path(app.__file__).parents[1])
    others = environment.value("PYTHONPATH")
    environment.insert("PYTHONPATH", f"{root}{':' if sys.platform != 'win32' else ';'}{others}" if others else root)
    environment.insert("OPENBLAS_NUM_THREADS", "1")
    environment.insert("PYTHONIOENCODING", "utf-8")
    return environment
