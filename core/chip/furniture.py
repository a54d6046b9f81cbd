"""Marks and words of a chip put where they are free of its channels."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from core.chip.figures import Box, grown_box, rectangle, shifted_box
from core.chip.free_space import Obstacle, free_places
from core.chip.marks import MOST_UNITS, Stamp, corner_mark
from core.chip.plan import CutLines
from core.chip.scene import Figure, Layer, PlacedBlock

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

    from core.chip.plan import ChipPlan
    from core.chip.stamps import Stamps
    from core.geometry.contour import Floats

_CORNERS = ((-1, 1), (1, 1), (1, -1), (-1, -1))
_STEPS = 40  # places tried along an edge
_ROWS = 12  # heights tried across the chip


@dataclass(frozen=True, slots=True, kw_only=True)
class Missing:
    """A mark for which there is no free place.

    Attributes
    ----------
    what : str
        In words.
    field : str
        Field of the plan that asks for it.
    x_um, y_um : float
        Where it should be [um].
    """

    what: str
    field: str
    x_um: float
    y_um: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Furniture:
    """All marks of a chip at their places.

    Attributes
    ----------
    placed : tuple of PlacedBlock
        The marks.
    figures : tuple of Figure
        The closed outline to be cut, where that was asked for.
    label_at_um : tuple of float, or None
        Lower left corner of the label [um]; None when there is no room.
    missing : tuple of Missing
        What was left out.
    """

    placed: tuple[PlacedBlock, ...] = ()
    figures: tuple[Figure, ...] = ()
    label_at_um: tuple[float, float] | None = None
    missing: tuple[Missing, ...] = ()


def chip_box(plan: ChipPlan) -> Box:
    """Return the outline of the chip [um]."""
    return -0.5 * plan.chip_width_um, -0.5 * plan.chip_height_um, 0.5 * plan.chip_width_um, 0.5 * plan.chip_height_um


def furnished(plan: ChipPlan, stamps: Stamps, obstacles: Sequence[Obstacle], *, cut_shift_um: float) -> Furniture:
    """Return the marks of a chip, each at the free place nearest to where it belongs.

    Parameters
    ----------
    plan : ChipPlan
        The chip.
    stamps : Stamps
        Its marks.
    obstacles : sequence of Obstacle
        Everything that may stand on any copy of it: marks are at the same place on all.
    cut_shift_um : float
        How far the cut outline is drawn outside the chip's own, for a beam or blade that takes its share [um].

    Returns
    -------
    Furniture
        Corner marks and ticks stand in the corners or nowhere; alignment marks in pairs at one height, left and
        right, near the centre line; words and bars along the edges, elsewhere if they must.
    """
    search = _Search(plan, stamps, obstacles)
    if plan.cut_lines == CutLines.TICKS:
        search.corners("cutting ticks", "cut_lines", Layer.CUT, inset_um=0.0, arm=MOST_UNITS + 2)
    if plan.corner_marks == "yes":
        search.corners("corner marks", "corner_marks", Layer.MARKS, inset_um=2.0 * stamps.unit_um, arm=MOST_UNITS)
    search.pairs()
    label_at = search.label()
    if stamps.scale_bar is not None:
        search.along_edges(stamps.scale_bar, "scale bar", "scale_bar", is_upper=False, is_right=False)
    if stamps.bars is not None:
        search.along_edges(stamps.bars, "test bars", "test_bars", is_upper=False, is_right=True)
    figures: tuple[Figure, ...] = ()
    if plan.cut_lines == CutLines.OUTLINE:
        figures = (Figure(layer=Layer.CUT, outline=rectangle(grown_box(chip_box(plan), cut_shift_um))),)
    return Furniture(placed=tuple(search.placed), figures=figures, label_at_um=label_at, missing=tuple(search.missing))


class _Search:
    """Puts marks one after the other and remembers what is taken."""

    def __init__(self, plan: ChipPlan, stamps: Stamps, obstacles: Sequence[Obstacle]) -> None:
        self.stamps = stamps
        self.unit = stamps.unit_um
        self.obstacles = obstacles
        self.chip = chip_box(plan)
        self.within = grown_box(self.chip, -2.0 * self.unit)
        self.taken: list[Box] = []
        self.placed: list[PlacedBlock] = []
        self.missing: list[Missing] = []

    def corners(self, what: str, field: str, layer: Layer, *, inset_um: float, arm: float) -> None:
        """Put an L into each corner, whose arms take at most a sixth of an edge."""
        length = min(arm * self.unit, self.chip[2] / 3.0, self.chip[3] / 3.0)
        for across, up in _CORNERS:
            x, y = across * (self.chip[2] - inset_um), up * (self.chip[3] - inset_um)
            stamp = corner_mark(arm_um=length, unit_um=self.unit, across=across, up=up, layer=layer)
            if not self._put(stamp, np.array([[x, y]]), within=self.chip):
                self.missing.append(Missing(what=what, field=field, x_um=x, y_um=y))

    def pairs(self) -> None:
        """Put each pair of alignment marks left and right, stacked about the centre line."""
        for number, stamp in enumerate(self.stamps.pairs):
            low, high = stamp.box_um[1], stamp.box_um[3]
            pitch = high - low
            home = (0.5 * (len(self.stamps.pairs) - 1) - number) * pitch - 0.5 * (low + high)
            x = self.chip[2] - stamp.box_um[2]
            offsets = np.linspace(0.0, self.chip[3], _STEPS)
            heights = home + np.stack((offsets, -offsets), axis=1).ravel()[1:]
            lefts = np.stack((np.full(len(heights), -x), heights), axis=1)
            for left in self._free(stamp, lefts, self.chip):
                right = next(self._free(stamp, np.array([[x, left[1]]]), self.chip), None)
                if right is not None:
                    self._take(stamp, left)
                    self._take(stamp, right)
                    break
            else:
                what = f"pair {number + 1} of the alignment marks"
                self.missing.append(Missing(what=what, field="alignment_pairs", x_um=-x, y_um=home))

    def along_edges(self, stamp: Stamp, what: str, field: str, *, is_upper: bool, is_right: bool) -> None:
        """Put a mark along an edge, beginning in the given corner."""
        places = self._places(stamp.box_um, is_upper=is_upper, is_right=is_right)
        place = next(self._free(stamp, places, self.within), None)
        if place is not None:
            self._take(stamp, place, gap_um=self.stamps.word_gap_um)
        else:
            self.missing.append(Missing(what=what, field=field, x_um=0.0, y_um=self.chip[3 if is_upper else 1]))

    def label(self) -> tuple[float, float] | None:
        """Return where the label may stand: along the upper edge from the left, if it can be."""
        width, height = self.stamps.label_um
        box = (0.0, 0.0, width, height)
        places = self._places(box, is_upper=True, is_right=False)
        place = next(self._free(box, places, self.within), None)
        if place is not None:
            self.taken.append(grown_box(shifted_box(box, *place), self.stamps.word_gap_um))
        else:
            self.missing.append(Missing(what="label", field="text_height_um", x_um=0.0, y_um=self.chip[3]))
        return place

    def _places(self, box: Box, *, is_upper: bool, is_right: bool) -> Floats:
        """Return places for a box: along its own edge, then the other one, then across the chip."""
        x0, y0, x1, y1 = self.within
        if x1 - x0 < box[2] - box[0] or y1 - y0 < box[3] - box[1]:
            return np.empty((0, 2))
        beside = [edge for other in self.taken for edge in (other[2] - box[0], other[0] - box[2])]
        across = np.concatenate((np.linspace(x0 - box[0], x1 - box[2], _STEPS), beside))
        across = np.sort(across[(across >= x0 - box[0]) & (across <= x1 - box[2])])
        up = np.linspace(y0 - box[1], y1 - box[3], _ROWS)
        across = across[::-1] if is_right else across
        up = up[::-1] if is_upper else up
        heights = np.concatenate((up[[0, -1]], up[1:-1]))
        return np.stack((np.tile(across, _ROWS), np.repeat(heights, len(across))), axis=1)

    def _put(self, stamp: Stamp, places: Floats, *, within: Box) -> bool:
        place = next(self._free(stamp, places, within), None)
        if place is not None:
            self._take(stamp, place)
        return place is not None

    def _free(self, stamp: Stamp | Box, places: Floats, within: Box) -> Iterator[tuple[float, float]]:
        box = stamp.box_um if isinstance(stamp, Stamp) else stamp
        return free_places(
            places, box, taken=self.taken, obstacles=self.obstacles, within=within, clearance_um=self.stamps.gap_um
        )

    def _take(self, stamp: Stamp, place: tuple[float, float], *, gap_um: float | None = None) -> None:
        """Place a mark and keep a gap round it: 0.99 units, or another one [um]."""
        at = round(place[0], 3), round(place[1], 3)
        self.placed.append(PlacedBlock(block=stamp.block, dx_um=at[0], dy_um=at[1]))
        for part in stamp.parts_um or (stamp.box_um,):
            self.taken.append(grown_box(shifted_box(part, *at), 0.99 * self.unit if gap_um is None else gap_um))
