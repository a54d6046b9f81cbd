"""What tests of flow solves share: quick children, and whether a process is gone."""

from __future__ import annotations

import os
import sys
import tempfile
from pathlib import Path

QUICK_JOB = Path(__file__).with_name("quick_job.py")


def command(manner: str) -> tuple[str, ...]:
    return (sys.executable, str(QUICK_JOB), manner)


def is_gone(process_id: int) -> bool:
    try:
        os.kill(process_id, 0)
    except ProcessLookupError:
        return True
    return False


def left_folders() -> set[Path]:
    return set(Path(tempfile.gettempdir()).glob("sideloop-solve-*"))
