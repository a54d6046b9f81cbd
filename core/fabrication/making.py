"""As drawn and as made: compensation is a change of parameters.

A channel is what a round pen draws along its centre lines, inner corners closed with a radius r. Moving
every wall inwards by d gives the same channel with all widths smaller by 2 d and all radii larger by d.
Moving every wall outwards by d gives widths larger by 2 d and radii max(r - d, 0). Centre lines never
move, and lines stay lines and arcs stay arcs. So what is drawn on the mask, and what the process makes
of it, are parameter sets again, and one way leads from all of them to areas and files.

A mask that exists already is a channel for which nobody allows (``Allowance.NOT_AT_ALL``): ``made`` is then what
becomes of it.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from core.fabrication.choices import Allowance, ToolRuns
from core.fabrication.existence import RADII, SAME_UM, STEPS, WIDTHS, what_cannot_exist
from core.fabrication.section import side_loss_um, stand_in_note

if TYPE_CHECKING:
    from collections.abc import Iterator

    from core.fabrication.process import Process
    from core.findings import Finding
    from core.parameters import ChannelParameters

_NOISE_UM = 1e-9  # of adding and taking away


@dataclass(frozen=True, slots=True, kw_only=True)
class Making:
    """What is wanted, what is drawn for it, and what comes out.

    Attributes
    ----------
    wanted, drawn, made : ChannelParameters
        The design; what goes on the mask or to the tool, before scaling; what the process makes of it.
    flow : ChannelParameters
        As made, with walls where they stand on average over the depth: for the estimate and the flow solve.
    wall_shift_um : float
        How far every wall moves outwards from the drawing to the part [um].
    scale : float
        Factor by which the whole drawing is enlarged once, at export, for the part to shrink to size.
    notes : tuple of str
        What was done, and how far the numbers hold.
    findings : tuple of Finding
        Errors where the drawn or made channel cannot exist; ``drawn``, ``made`` and ``flow`` are then as wanted.
    """

    wanted: ChannelParameters
    drawn: ChannelParameters
    made: ChannelParameters
    flow: ChannelParameters
    wall_shift_um: float
    scale: float
    notes: tuple[str, ...] = ()
    findings: tuple[Finding, ...] = ()


def wall_shift_um(process: Process, *, depth_um: float) -> float:
    """Return how far every wall moves outwards from the drawing to the part.

    Formula: d = bias + undercut * depth + kerf / 2.

    Parameters
    ----------
    process : Process
        Any.
    depth_um : float
        Depth of the channel [um].

    Returns
    -------
    float
        Shift of each wall [um]; negative where channels come out narrower than drawn.
    """
    return process.bias_um + process.undercut_ratio * depth_um + 0.5 * process.kerf_um


def scale_of(process: Process) -> float:
    """Return 1/(1 - s), the factor that makes up for the shrinkage s.

    Examples
    --------
    >>> from core.fabrication.process import Process
    >>> round(scale_of(Process(shrink_percent=1.5)), 5)
    1.01523
    """
    return 1.0 / (1.0 - process.shrink_percent / 100.0)


def smallest_radius_um(process: Process) -> float:
    """Return the sharpest inner corner that the process leaves [um].

    A tool that runs outside the channel, round a raised mould, cannot reach deeper into a corner than its own
    radius. One that runs in the channel goes round such corners and can leave them sharp.
    """
    runs_outside = process.tool_runs == ToolRuns.OUTSIDE_CHANNEL
    return max(process.min_radius_um, 0.5 * process.tool_diameter_um if runs_outside else 0.0)


def making_of(channel: ChannelParameters, process: Process) -> Making:
    """Return what must be drawn to get a channel, and what then comes out.

    Parameters
    ----------
    channel : ChannelParameters
        The design as wanted.
    process : Process
        How it is made, and who allows for bias, undercut and kerf.

    Returns
    -------
    Making
        Never raises: where nothing can be drawn or made, ``findings`` says so and all is as wanted.
    """
    shift = wall_shift_um(process, depth_um=channel.depth_um)
    ways = _ways(channel, process)
    findings = tuple(what_cannot_exist(channel, process, ways))
    drawn = made = flow = channel
    notes: tuple[str, ...] = ()
    if not findings:
        drawn, made, flow = (_with_lengths(channel, {name: way[step] for name, way in ways.items()}) for step in STEPS)
        notes = tuple(_notes(channel, made, process, shift_um=shift))
    return Making(wanted=channel, drawn=drawn, made=made, flow=flow, wall_shift_um=shift,
                  scale=scale_of(process), notes=notes, findings=findings)  # fmt: skip


def _ways(channel: ChannelParameters, process: Process) -> dict[str, dict[str, float]]:
    """Return the lengths that change on the way to the part: field -> step -> value [um]."""
    shift = wall_shift_um(process, depth_um=channel.depth_um)
    half_loss = 0.5 * side_loss_um(process, depth_um=channel.depth_um)
    to_drawn = -shift if process.allowance == Allowance.IN_DRAWING else 0.0
    to_made = to_drawn if process.allowance == Allowance.BY_SHOP else to_drawn + shift
    least = smallest_radius_um(process)
    ways: dict[str, dict[str, float]] = {}
    for name in WIDTHS[: 2 if channel.stages else 1]:
        width = getattr(channel, name)
        made = width + 2.0 * to_made
        ways[name] = {"drawn": width + 2.0 * to_drawn, "made": made, "flow": made - 2.0 * half_loss}
    for name in RADII if channel.stages else ():
        radius = getattr(channel, name)
        drawn = max(radius - to_drawn, 0.0)
        made = max(drawn - (to_made - to_drawn), least)
        made = radius if abs(made - radius) < _NOISE_UM else made
        ways[name] = {"drawn": drawn, "made": made, "flow": made + half_loss}
    return ways


def _with_lengths(channel: ChannelParameters, lengths: dict[str, float]) -> ChannelParameters:
    """Return the channel with some lengths; the same object when none of them changes."""
    if all(getattr(channel, name) == value for name, value in lengths.items()):
        return channel
    return replace(channel, **lengths)  # type: ignore[arg-type]  # all are floats


def _notes(wanted: ChannelParameters, made: ChannelParameters, process: Process, *, shift_um: float) -> Iterator[str]:
    if shift_um:
        yield _shift_note(process, shift_um)
    if process.shrink_percent:
        yield (
            f"the drawing is enlarged once, about its centre, by {scale_of(process):.6g} = 1/(1 - "
            f"{process.shrink_percent:g} %), because the part shrinks"
        )
    for name in RADII if made.stages else ():
        if abs(getattr(made, name) - getattr(wanted, name)) > SAME_UM:
            yield f"{name} is {getattr(wanted, name):g} um as wanted and comes out as {getattr(made, name):.6g} um"
    mean = made.channel_width_um - side_loss_um(process, depth_um=made.depth_um)
    stand_in = stand_in_note(process, mean_width_um=mean, depth_um=made.depth_um)
    if stand_in is not None:
        yield stand_in


def _shift_note(process: Process, shift_um: float) -> str:
    wider = f"{2.0 * abs(shift_um):.6g} um {'wider' if shift_um > 0.0 else 'narrower'}"
    who = {
        Allowance.IN_DRAWING: "the drawing allows for it",
        Allowance.BY_SHOP: "the shop allows for it, and the drawing shows the walls as wanted",
        Allowance.NOT_AT_ALL: f"nobody allows for it: channels come out {wider} than drawn",
    }[Allowance(process.allowance)]
    way = "outwards" if shift_um > 0.0 else "inwards"
    return f"every wall moves {abs(shift_um):.6g} um {way} in making (bias, undercut and half the kerf); {who}"
