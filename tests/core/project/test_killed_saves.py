"""A process killed while it saves leaves the old or the new version, never a broken file."""

from __future__ import annotations

import os
import random
import signal
import subprocess
import sys
import textwrap
import time
from pathlib import Path

import pytest

from core.project import new_project, read_project, write_project

ROOT = Path(__file__).parents[3]
KILLS = 200

# One process that has loaded everything splits off a saving child for every file it is told.
# Notes have two lengths, so that a half-written version could not pass for a whole one.
SPLITTER = """
    import os, sys
    from dataclasses import replace
    from itertools import count
    from core.project import new_project, write_project

    def save_for_ever(path):
        for number in count(1):
            notes = f"{number} " * (1000 if number % 2 else 10)
            write_project(replace(new_project(), name=f"version {number}", notes=notes), path)
            if number == 1:
                print(os.getpid(), flush=True)

    for line in sys.stdin:
        child = os.fork()
        if child == 0:
            save_for_ever(line.rstrip("\\n"))
        print(os.waitstatus_to_exitcode(os.waitpid(child, 0)[1]), flush=True)
"""


@pytest.mark.slow
@pytest.mark.skipif(os.name != "posix", reason="kills as POSIX does")
def test_killed_at_random_moments(tmp_path):
    chance = random.Random(7)
    file = tmp_path / "chip.sideloop"
    versions, left_overs = [], 0
    command = [sys.executable, "-c", textwrap.dedent(SPLITTER)]
    with subprocess.Popen(command, cwd=ROOT, stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True) as splitter:
        for _ in range(KILLS):
            write_project(new_project(), file)
            print(file, file=splitter.stdin, flush=True)
            child = int(splitter.stdout.readline())
            time.sleep(chance.uniform(0.0, 0.03))
            os.kill(child, signal.SIGKILL)
            assert int(splitter.stdout.readline()) == -signal.SIGKILL
            versions.append(version_in(file))
            left_overs = len(list(tmp_path.iterdir())) - 1
    assert len(versions) == KILLS
    assert min(versions) >= 1  # what was saved before the kill is there
    assert max(versions) > 1  # the kills fell among the saves
    assert left_overs > 0  # and some inside one


def version_in(file: Path) -> int:
    """Return the number of the saved version, whose notes must be whole."""
    project = read_project(file)
    number = int(project.name.removeprefix("version "))
    assert project.notes == f"{number} " * (1000 if number % 2 else 10)
    return number
