"""Folding a long chain into rows: which stages each row holds, and where everything stands."""

from __future__ import annotations

from dataclasses import replace
from functools import lru_cache
from typing import TYPE_CHECKING

from core.errors import GeometryError
from core.geometry.row_spacing import spaced
from core.geometry.shape import build_shape

if TYPE_CHECKING:
    from core.geometry.rows import Folding
    from core.geometry.shape import ChannelShape
    from core.parameters import ChannelParameters


@lru_cache(maxsize=64)
def folded(channel: ChannelParameters, *, rows: int, wall_um: float, pad_radius_um: float) -> Folding:
    """Return a channel in rows, with the smallest bends that keep a wall between all parts.

    Parameters
    ----------
    channel : ChannelParameters
        Any set.
    rows : int
        Number of rows.
    wall_um : float
        Least solid between rows, bends and pads that are not joined [um].
    pad_radius_um : float
        Radius of the pads at the two open ends [um]; 0 for none.

    Returns
    -------
    Folding
        The first row as its shape stands.

    Raises
    ------
    GeometryError
        If the channel has no shape, there are more rows than stages, no radius keeps the rows apart, or
        a pad is no wider than its lead.
    """
    return spaced(row_shapes(channel, rows), wall_um=wall_um, pad_radius_um=pad_radius_um)


def row_shapes(channel: ChannelParameters, rows: int) -> tuple[ChannelShape, ...]:
    """Return the shapes of the rows of a channel, their stages shared out evenly.

    Raises
    ------
    GeometryError
        If there are more rows than stages, or the channel has no shape.
    """
    if rows < 1 or (channel.stages and rows > channel.stages):
        raise GeometryError(
            f"{rows} rows cannot be made of {channel.stages} stages; allowed: 1 to {max(channel.stages, 1)}; "
            "lower rows or raise stages"
        )
    least, more = divmod(channel.stages, rows)
    counts = [least + (number < more) for number in range(rows)]
    built = {count: usable_shape(_row_parameters(channel, count, rows)) for count in dict.fromkeys(counts)}
    return tuple(built[count] for count in counts)


def _row_parameters(channel: ChannelParameters, count: int, rows: int) -> ChannelParameters:
    if channel.stages:
        return replace(channel, stages=count)
    half = 0.5 * (channel.lead_in_um + channel.lead_out_um) / rows
    return channel if rows == 1 else replace(channel, lead_in_um=half, lead_out_um=half)


def usable_shape(channel: ChannelParameters) -> ChannelShape:
    """Return the shape of a channel.

    Raises
    ------
    GeometryError
        With the words of the finding that says why there is none.
    """
    shape = build_shape(channel)
    if shape.outline is None:
        raise GeometryError(shape.findings[0].message if shape.findings else "the channel has no shape")
    return shape
