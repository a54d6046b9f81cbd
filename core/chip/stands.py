"""Every channel of every different chip of a plate, at its place, for checks and for finding room."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

from core.chip.bodies import channel_of, title_of, wanted_body
from core.chip.figures import Box, shifted_box
from core.chip.plate import distinct_steps, values_of
from core.errors import CoreError, GeometryError
from core.geometry.contour import Outline, Placement

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping

    from core.chip.plan import ChipPlan
    from core.fabrication.process import Process
    from core.fields import Value
    from core.geometry.body import ChannelBody
    from core.geometry.contour import Floats
    from core.parameters import ChannelParameters


@dataclass(frozen=True, kw_only=True, eq=False)
class Stand:
    """A channel as wanted, at its place on the chip.

    Attributes
    ----------
    number : int
        Its number in the plan.
    title : str
        What it is called.
    values : str
        Values of the stepped series on this chip, in words; empty without one.
    channel : ChannelParameters
        Its parameters on this chip.
    body : ChannelBody
        Its area, the middle of its bounds at the origin.
    at_um : tuple of float
        Where that middle is [um].
    """

    number: int
    title: str
    values: str
    channel: ChannelParameters
    body: ChannelBody
    at_um: tuple[float, float]

    @cached_property
    def outline(self) -> Outline:
        """Its area at its place."""
        return self.body.outline.placed(Placement(dx_um=self.at_um[0], dy_um=self.at_um[1]))

    @cached_property
    def box_um(self) -> Box:
        """Its bounds [um]."""
        return shifted_box(self.body.bounds_um, *self.at_um)

    @cached_property
    def ports_um(self) -> Floats:
        """Middles of its two ports, shape (2, 2) [um]."""
        ports: Floats = self.body.ends_um + self.at_um
        return ports


@dataclass(frozen=True, slots=True, kw_only=True)
class Unbuilt:
    """A channel that cannot be built.

    Attributes
    ----------
    number : int
        Its number in the plan.
    reason : str
        Why, in one line that names it.
    at_um : tuple of float
        Where it should stand [um].
    """

    number: int
    reason: str
    at_um: tuple[float, float]


def stands_of(
    plan: ChipPlan, channels: Mapping[str, ChannelParameters], process: Process
) -> Iterator[list[Stand | Unbuilt]]:
    """Yield for each different chip of the plate its channels in the order of the plan, or why one cannot be built.

    Channels of sets that are not there are left out.

    Parameters
    ----------
    plan : ChipPlan
        With channels.
    channels : mapping
        Parameter sets by name, as wanted.
    process : Process
        How the chip is made.
    """
    titles = _titles(plan)
    for steps in distinct_steps(plan):
        values = values_of(plan, steps)
        chip: list[Stand | Unbuilt] = []
        for number, entry in enumerate(plan.channels):
            try:
                channel = channel_of(entry, channels, values)
                body = wanted_body(plan, entry, channel, process)
            except GeometryError as error:
                reason = f"{error}{values_in_words(values)}"
                chip.append(Unbuilt(number=number, reason=reason, at_um=(entry.x_um, entry.y_um)))
                continue
            except CoreError:
                continue
            stand = Stand(
                number=number, title=titles[number], values=values_in_words(values), channel=channel, body=body,
                at_um=(entry.x_um, entry.y_um),
            )  # fmt: skip
            chip.append(stand)
        yield chip


def _titles(plan: ChipPlan) -> list[str]:
    """Return what the channels are called; those of one set are counted."""
    titles = [title_of(entry) for entry in plan.channels]
    return [
        f"{title} no. {titles[: number + 1].count(title)}" if titles.count(title) > 1 else title
        for number, title in enumerate(titles)
    ]


def values_in_words(values: Mapping[str, Value]) -> str:
    """Return stepped values as " (loop_radius_um 320)", or nothing."""
    return f" ({', '.join(f'{name} {value:g}' for name, value in values.items())})" if values else ""
