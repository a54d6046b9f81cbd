"""How many random cases slow tests take: a share in every run, all of them when ``SIDELOOP_THOROUGH`` is set."""

from __future__ import annotations

import os


def cases(whole: int, *, share: int) -> int:
    """Return the whole number of cases in a thorough run, else a share of them."""
    return whole if os.environ.get("SIDELOOP_THOROUGH") else share
