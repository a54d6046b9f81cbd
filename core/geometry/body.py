"""One channel as it stands on a chip: turned, shifted, folded into rows if wanted, with a pad at each open end."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cached_property
from math import hypot, radians
from typing import TYPE_CHECKING

import numpy as np

from core.errors import GeometryError
from core.geometry.body_pieces import body_pieces
from core.geometry.contour import Outline, Placement
from core.geometry.edges import Edges
from core.geometry.folding import folded, usable_shape
from core.geometry.pads import Pad, pad_reach_um

if TYPE_CHECKING:
    from core.geometry.contour import Floats
    from core.geometry.pieces import ChannelPieces
    from core.geometry.rows import Folding
    from core.geometry.shape import ChannelShape
    from core.parameters import ChannelParameters

_SAME_UM = 1e-6  # centre lines that end this near to one another are the same


@dataclass(frozen=True, kw_only=True, eq=False)
class ChannelBody:
    """A channel at its place.

    Attributes
    ----------
    channel : ChannelParameters
        The whole channel; before any enlargement.
    folding : Folding
        Its rows and bends, before any enlargement.
    scale : float
        By how much everything that the properties tell is larger than ``channel`` says.
    """

    channel: ChannelParameters
    folding: Folding
    scale: float = 1.0

    @cached_property
    def outline(self) -> Outline:
        """The area: one outer ring with bends and pads in it, and all islands in the order of the reverse flow."""
        islands = tuple(island for row in self.folding.rows for island in row.islands())
        outline = Outline(self.folding.outer(), islands)
        return outline if self.scale == 1.0 else outline.scaled(self.scale)

    @property
    def bounds_um(self) -> tuple[float, float, float, float]:
        """(x_min, y_min, x_max, y_max) [um]."""
        return self.outline.bounds_um

    @cached_property
    def pads(self) -> tuple[Pad, ...]:
        """Pad at the forward outlet, then at the forward inlet; empty where ends are open."""
        found = [end.pad for end in self.folding.ends]
        return tuple(
            Pad(centre_um=self.scale * pad.centre_um, radius_um=self.scale * pad.radius_um) for pad in found if pad
        )

    @property
    def ends_um(self) -> Floats:
        """Middle of the forward outlet and of the forward inlet: of the pads, or of open ends; shape (2, 2) [um]."""
        if self.pads:
            return np.array([pad.centre_um for pad in self.pads])
        return self.scale * np.array([end.middle_um for end in self.folding.ends])

    @property
    def shapes(self) -> tuple[ChannelShape, ...]:
        """The shape of each row in its own frame, without pads, bends and enlargement."""
        return tuple(row.shape for row in self.folding.rows)

    @property
    def extra_length_um(self) -> float:
        """How much longer the channel is on its centre line than unfolded: bends and leads, less the gaps they replace.

        Negative where the leads between rows are shorter than the stage gap [um].
        """
        bends = self.folding.bends
        if not bends:
            return 0.0
        extra = sum(bend.length_um for bend in bends)
        if self.channel.stages:
            extra += self.folding.inner_leads_um - len(bends) * self.channel.stage_gap_um
        return self.scale * extra

    def pieces(self, *, link_um: float = 0.0) -> ChannelPieces:
        """Return the body cut into pieces without holes, placed by shifts alone, each distinct shape once.

        Parameters
        ----------
        link_um : float
            As for ``core.geometry.pieces.cut_pieces`` [um].

        Raises
        ------
        GeometryError
            If there is no place to cut.
        """
        return body_pieces(self.folding, link_um=link_um / self.scale, scale=self.scale)

    def scaled(self, factor: float) -> ChannelBody:
        """Return the body enlarged about the origin."""
        return replace(self, scale=self.scale * factor)


def channel_body(
    channel: ChannelParameters,
    *,
    turn_deg: float = 0.0,
    centre_um: Floats | tuple[float, float] | None = None,
    rows: int = 1,
    pad_radius_um: float = 0.0,
    wall_um: float | None = None,
    like: ChannelBody | None = None,
) -> ChannelBody:
    """Return a channel as it stands on a chip.

    Parameters
    ----------
    channel : ChannelParameters
        Any set; 0 stages give a plain straight channel.
    turn_deg : float
        Turn from the drawing of the set, counter-clockwise [deg].
    centre_um : (x, y), optional
        Where the middle of the bounds shall be [um]; left out, the first open end stays where the drawing
        of the set has it, at (0, 0).
    rows : int
        Number of rows into which the chain is folded.
    pad_radius_um : float
        Radius of the pads at both open ends [um]; 0 leaves the ends open and square.
    wall_um : float, optional
        Least solid between rows, bends and pads of the folded channel [um]; left out, the channel's width.
    like : ChannelBody, optional
        A body whose centre lines, bends, place and middles of pads are taken over, and the radius of whose
        pads is changed by as much as the walls of the channel; all else but ``channel`` is then ignored.

    Returns
    -------
    ChannelBody
        Its outline is exact lines and arcs.

    Raises
    ------
    GeometryError
        In one line: no shape, rows that do not fit, pads that are too small or meet something.
    """
    if like is not None:
        return _checked(ChannelBody(channel=channel, folding=_alike(channel, like), scale=like.scale))
    wall = channel.channel_width_um if wall_um is None else wall_um
    flat = folded(channel, rows=rows, wall_um=wall, pad_radius_um=pad_radius_um)
    folding = flat.moved(Placement(angle=radians(turn_deg))) if turn_deg else flat
    if centre_um is not None:
        x0, y0, x1, y1 = folding.outer().bounds_um
        dx, dy = centre_um[0] - 0.5 * (x0 + x1), centre_um[1] - 0.5 * (y0 + y1)
        folding = folding.moved(Placement(dx_um=float(dx), dy_um=float(dy)))
    return _checked(ChannelBody(channel=channel, folding=folding))


def _alike(channel: ChannelParameters, like: ChannelBody) -> Folding:
    """Return the folding of another body with the shapes of a channel that has the same centre lines."""
    narrower = 0.5 * (like.channel.channel_width_um - channel.channel_width_um)
    built: dict[ChannelParameters, ChannelShape] = {}
    rows = []
    for row in like.folding.rows:
        old = row.shape.parameters
        wanted = replace(channel, stages=old.stages, lead_in_um=old.lead_in_um, lead_out_um=old.lead_out_um)
        if wanted not in built:
            built[wanted] = usable_shape(wanted)
        pads = tuple(radius - narrower if radius else 0.0 for radius in row.pad_radius_um)
        longer = tuple(
            length + (_reach(radius, old) - _reach(smaller, wanted) if radius else 0.0)
            for length, radius, smaller in zip(row.longer_um, row.pad_radius_um, pads, strict=True)
        )
        rows.append(
            replace(row, shape=built[wanted], longer_um=(longer[0], longer[1]), pad_radius_um=(pads[0], pads[1]))
        )
        ends = [r.shape.centreline.forward_inlet.point_um for r in (row, rows[-1])]
        if hypot(*(ends[1] - ends[0])) > _SAME_UM:
            raise GeometryError("the two channels have other centre lines; they may differ in widths and radii alone")
    return replace(like.folding, rows=tuple(rows))


def _reach(radius_um: float, channel: ChannelParameters) -> float:
    return pad_reach_um(radius_um, width_um=channel.channel_width_um)


def _checked(body: ChannelBody) -> ChannelBody:
    """Return a body whose pads meet nothing but their own leads."""
    pads = [end.pad for end in body.folding.ends]
    edges = Edges.of([body.folding.outer()]) if pads[0] else None
    for pad in pads:
        if pad is None or edges is None:
            continue
        if edges.distance(pad.centre_um).min() < pad.radius_um - _SAME_UM:
            raise GeometryError(
                f"a pad of radius {pad.radius_um:g} um runs into the channel itself; "
                "raise lead_in_um and lead_out_um, or make the ports or pad_margin_um smaller"
            )
    return body
