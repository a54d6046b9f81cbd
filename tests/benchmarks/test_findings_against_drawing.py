"""What a process finds fault with must follow a slider: its cost against drawing the channel once."""

from __future__ import annotations

import time
from statistics import median
from typing import TYPE_CHECKING

import pytest

from core.fabrication.channel_findings import channel_findings
from core.fabrication.process import ProcessKind
from core.fabrication.shipped import shipped_process
from core.geometry.shape import build_shape
from core.parameters import ChannelParameters

if TYPE_CHECKING:
    from collections.abc import Callable

PAIRS = 20


def seconds(work: Callable[[], object]) -> float:
    start = time.process_time()
    work()
    return time.process_time() - start


@pytest.mark.benchmark
@pytest.mark.parametrize("stages", [1, 4, 100])
def test_findings_cost_no_more_than_drawing(stages: int) -> None:
    """Named baseline: drawing the same channel, which every move of a slider does anyway."""
    process = shipped_process(ProcessKind.CAST_FILM)
    drawing, checking = [], []
    for number in range(PAIRS):
        channel = ChannelParameters(stages=stages, loop_radius_um=320.0 + number)
        drawing.append(seconds(lambda channel=channel: build_shape(channel)))
        checking.append(seconds(lambda channel=channel: channel_findings(channel, process, with_cures=False)))
    ratio = median(checking) / median(drawing)
    print(f"findings of {stages} stages: {1e3 * median(checking):.1f} ms, {ratio:.2f} of drawing")
    assert ratio < 2.0
