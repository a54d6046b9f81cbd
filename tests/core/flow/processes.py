"""Which processes run, as the system lists them."""

from __future__ import annotations

import multiprocessing
import os
from pathlib import Path


def children(parent: int | None = None) -> list[int]:
    """Return the solving processes that a process has started and that still run; this one by default.

    A process that the library of Python keeps to watch over shared memory is not counted: it ends with
    its parent.
    """
    number = os.getpid() if parent is None else parent
    listed = Path(f"/proc/{number}/task/{number}/children")
    if not listed.exists():
        return [child.pid for child in multiprocessing.active_children() if child.pid is not None]
    return [int(each) for each in listed.read_text().split() if is_solver(int(each))]


def is_solver(number: int) -> bool:
    """Return whether a process runs, and is no watcher."""
    try:
        line = Path(f"/proc/{number}/cmdline").read_bytes()
    except OSError:
        return False
    return bool(line) and b"resource_tracker" not in line  # a dead one that nobody asked for has no line
