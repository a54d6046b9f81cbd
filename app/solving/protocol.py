"""What the window and the child process say to one another: one JSON object a line.

The window writes the request and later, perhaps, ``stop``; it closes its end when it dies. The child
writes ``progress``, an ``answer`` for each quality, and at last ``done``, ``stopped`` or ``failed``.
"""

from __future__ import annotations

import json
from dataclasses import dataclass
from enum import StrEnum
from typing import TYPE_CHECKING

from core.operating import OperatingPoint
from core.parameters import ChannelParameters
from core.project.solved import LISTS, SolvedResult

if TYPE_CHECKING:
    from collections.abc import Mapping

    from core.flow.channel_result import FlowPoint

STOP = "stop"


class Kind(StrEnum):
    """What a line of the child is about."""

    PROGRESS = "progress"
    ANSWER = "answer"
    DONE = "done"
    STOPPED = "stopped"
    FAILED = "failed"


@dataclass(frozen=True, slots=True, kw_only=True)
class SolveRequest:
    """What is to be solved.

    Attributes
    ----------
    set_name : str
        Parameter set, for the record.
    channel : ChannelParameters
        The design.
    operating : OperatingPoint
        Fluid, temperature, and the flow whose picture is wanted.
    flows_ul_min : tuple of float
        Flows to solve [uL/min].
    qualities : tuple of str
        One answer for each, the coarsest first.
    folder : str
        Where the child may put the fields; empty for nowhere.
    """

    set_name: str
    channel: ChannelParameters
    operating: OperatingPoint
    flows_ul_min: tuple[float, ...]
    qualities: tuple[str, ...] = ("coarse", "normal")
    folder: str = ""

    def as_line(self) -> str:
        """Return the request as one line."""
        return json.dumps(
            {
                "set_name": self.set_name,
                "channel": self.channel.as_dict(),
                "operating": self.operating.as_dict(),
                "flows_ul_min": self.flows_ul_min,
                "qualities": self.qualities,
                "folder": self.folder,
            }
        )

    @classmethod
    def from_line(cls, line: str) -> SolveRequest:
        """Return the request that a line holds."""
        data = json.loads(line)
        return cls(
            set_name=data["set_name"],
            channel=ChannelParameters(**data["channel"]),
            operating=OperatingPoint(**data["operating"]),
            flows_ul_min=tuple(data["flows_ul_min"]),
            qualities=tuple(data["qualities"]),
            folder=data["folder"],
        )

    def result(self, point: Mapping[str, object]) -> SolvedResult:
        """Return what is kept of one point of an answer."""
        flow = point["flow_ul_min"]
        return SolvedResult(
            set_name=self.set_name,
            channel=self.channel,
            operating=self.operating.with_values({"flow_ul_min": flow}),
            **{key: value for key, value in point.items() if key != "flow_ul_min"},  # type: ignore[arg-type]
        )


def kept_numbers(point: FlowPoint) -> dict[str, object]:
    """Return what is kept of a point, ready for JSON."""
    return {
        "flow_ul_min": point.flow_ul_min,
        "reynolds": point.reynolds,
        "forward_pressure_pa": point.forward_pressure_pa,
        "reverse_pressure_pa": point.reverse_pressure_pa,
        "loop_share_forward": point.loop_share_forward,
        "loop_share_reverse": point.loop_share_reverse,
        **{name: list(getattr(point, name)) for name in LISTS},
        "error_band_percent": point.error_band_percent,
        "diodicity_band": point.diodicity_band,
        "reached_reynolds": min(point.reached_reynolds_forward, point.reached_reynolds_reverse),
        "valid": point.valid,
        "quality": point.quality,
        "notes": list(point.notes),
    }
