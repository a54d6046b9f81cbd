"""A second process that solves one direction while this one solves the other."""

from __future__ import annotations

import multiprocessing
import os
import threading
from multiprocessing.connection import wait
from typing import TYPE_CHECKING, Any

from core.errors import SolveError

if TYPE_CHECKING:
    from collections.abc import Callable
    from multiprocessing.connection import Connection
    from multiprocessing.context import SpawnProcess

    from core.flow.domain import FlowDomain
    from core.flow.following import Found

_POLL_S = 0.1


class Companion:
    """The other process; started when first asked, gone at the end at the latest, even if this process is killed.

    Parameters
    ----------
    domain : FlowDomain
        What it solves.
    memory_limit_mb : float
        Of both processes together [MB].
    """

    def __init__(self, domain: FlowDomain, memory_limit_mb: float) -> None:
        self._domain, self._memory_limit_mb = domain, memory_limit_mb
        self._process: SpawnProcess | None = None
        self._link: Connection | None = None

    def ask(self, direction: str, work: dict[str, Any]) -> None:
        """Begin a piece of work: the arguments of ``follow_direction``."""
        if self._link is None:
            context = multiprocessing.get_context("spawn")
            self._link, theirs = context.Pipe()
            self._process = context.Process(
                target=_serve, args=(theirs, self._domain, self._memory_limit_mb), daemon=True
            )
            self._process.start()
            theirs.close()
        try:
            self._link.send((direction, work))
        except OSError:  # it died; the answer will say so
            self.end()

    def answer(self, pause: Callable[[], None]) -> list[Found] | None:
        """Return what was found, or None if the process died.

        Parameters
        ----------
        pause : callable
            Called several times a second while waiting; may raise to stop.

        Raises
        ------
        SolveError
            If the work failed for a reason of its own.
        """
        if self._link is None:
            return None
        while not wait([self._link], timeout=_POLL_S):
            pause()
        try:
            found, reason = self._link.recv()
        except (EOFError, OSError):
            self.end()
            return None
        if reason:
            raise SolveError(reason)
        return found

    def end(self) -> None:
        """End the process before this returns."""
        if self._process is not None:
            self._process.kill()
            self._process.join()
            self._process.close()
        if self._link is not None:
            self._link.close()
        self._process = self._link = None


def _serve(link: Connection, domain: FlowDomain, memory_limit_mb: float) -> None:
    """Run in the other process: answer until the link is closed."""
    from core.flow.following import follow_direction
    from core.flow.levels import Levels
    from core.flow.threads import one_thread

    one_thread()
    threading.Thread(target=_end_with_parent, daemon=True).start()
    levels = Levels(domain, memory_limit_mb)
    while True:
        try:
            direction, work = link.recv()
        except EOFError:
            return
        try:
            link.send((follow_direction(levels, direction, tell=_say_nothing, **work), ""))
        except SolveError as error:
            link.send((None, str(error)))


def _say_nothing(text: str, begins: bool) -> None:
    pass


def _end_with_parent() -> None:
    """Wait until the process that started this one is gone, however it went, and go as well."""
    parent = multiprocessing.parent_process()
    if parent is not None:
        wait([parent.sentinel])
        os._exit(1)
