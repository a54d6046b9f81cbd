"""The parameter set of one channel: what the sliders edit.

Words follow the reverse flow: at the *fork* the loop's *leg* leaves the *bypass*, the *turn*
bends back, an optional straight *return* meets the bypass at the *mouth*.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from core.fields import CheckedValues, Field, length_field, table_of

if TYPE_CHECKING:
    from collections.abc import Mapping

STAGE, CHAIN, DEPTH, MAKING = "Stage shape", "Chain", "Section", "Making it"


def _angle(name: str, label: str, default: float, bounds: tuple[float, float], text: str) -> Field:
    return Field(
        name=name, label=label, group=STAGE, default=default, unit="deg",
        minimum=bounds[0], maximum=bounds[1], step=1.0, help=text,
    )  # fmt: skip


CHANNEL_FIELDS: dict[str, Field] = table_of(
    _angle("loop_angle_deg", "Loop angle", 45.0, (10.0, 120.0),
           "Angle between the bypass and the loop's leg where they part, seen in the reverse flow."),
    _angle("run_bend_deg", "Run bend", 45.0, (0.0, 120.0),
           "How far the bypass turns away from the incoming run at the fork. Equal to the loop angle: "
           "the leg goes straight on and the bypass bends away. 0: the bypass goes straight on."),
    _angle("loop_turn_deg", "Loop turn", 180.0, (60.0, 280.0),
           "How far the loop's arc bends back towards the bypass."),
    length_field("loop_radius_um", "Loop radius", STAGE, 320.0, (5.0, 10000.0), 5.0,
                 "Radius of the loop's turn, on its centre line."),
    length_field("return_length_um", "Return length", STAGE, 0.0, (0.0, 10000.0), 10.0,
                 "Straight piece between the turn and the mouth."),
    length_field("loop_width_um", "Loop width", STAGE, 200.0, (5.0, 3000.0), 5.0, "Width of the loop path."),
    Field(name="stages", label="Stages", group=CHAIN, default=4, minimum=0, maximum=100, step=1, whole=True,
          help="Number of loops in series. 0 makes a plain straight channel to measure against."),
    Field(name="sides", label="Sides", group=CHAIN, default="alternate", choices=("alternate", "same"),
          help="Loops left and right in turn, or all on one side."),
    length_field("stage_gap_um", "Stage gap", CHAIN, 400.0, (0.0, 20000.0), 10.0,
                 "Centre-line distance from one mouth to the next fork."),
    length_field("lead_in_um", "Lead in", CHAIN, 1000.0, (10.0, 100000.0), 50.0,
                 "Straight from the open end where forward flow enters to the last mouth."),
    length_field("lead_out_um", "Lead out", CHAIN, 1000.0, (10.0, 100000.0), 50.0,
                 "Straight from the first fork to the open end where forward flow leaves."),
    length_field("channel_width_um", "Channel width", DEPTH, 200.0, (5.0, 3000.0), 5.0,
                 "Width of the bypass and the leads."),
    length_field("depth_um", "Depth", DEPTH, 200.0, (1.0, 3000.0), 5.0,
                 "Depth of the whole channel, out of the drawing."),
    length_field("nose_radius_um", "Nose radius", MAKING, 10.0, (0.0, 1000.0), 1.0,
                 "Rounding of the island's corners that the process will cause anyway. 0 is sharp."),
    length_field("corner_radius_um", "Corner radius", MAKING, 10.0, (0.0, 1000.0), 1.0,
                 "Rounding of all other inner corners. 0 is sharp."),
)  # fmt: skip


@dataclass(frozen=True, slots=True, kw_only=True)
class ChannelParameters(CheckedValues):
    """One checked parameter set; lengths in um, angles in degrees.

    Every field is described in ``CHANNEL_FIELDS``. Values that are fine one by one but do not
    go together (an island that vanishes, say) are no error here: building the shape names them
    as findings, so that a slider can pass through such a state.

    Raises
    ------
    DesignValueError
        If a value has the wrong kind, is not finite or lies out of bounds.
    """

    loop_angle_deg: float = 45.0
    run_bend_deg: float = 45.0
    loop_turn_deg: float = 180.0
    loop_radius_um: float = 320.0
    return_length_um: float = 0.0
    loop_width_um: float = 200.0
    stages: int = 4
    sides: str = "alternate"
    stage_gap_um: float = 400.0
    lead_in_um: float = 1000.0
    lead_out_um: float = 1000.0
    channel_width_um: float = 200.0
    depth_um: float = 200.0
    nose_radius_um: float = 10.0
    corner_radius_um: float = 10.0

    @classmethod
    def table(cls) -> Mapping[str, Field]:
        """Return the table that describes the fields."""
        return CHANNEL_FIELDS
