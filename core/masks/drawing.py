"""What goes on each mask: channels by name, each with its place."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from core.errors import ExportError, GeometryError, shown
from core.findings import Severity
from core.geometry.pieces import cut_pieces
from core.masks.names import safe_name, unique_safe_names

if TYPE_CHECKING:
    from collections.abc import Sequence

    from core.geometry.contour import Outline
    from core.geometry.pieces import ChannelPieces
    from core.geometry.shape import ChannelShape
    from core.masks.options import MaskOptions

LONGEST_CHANNEL_NAME = 19  # leaves room for "__STEP_A" within a cell name
LONGEST_CHIP_NAME = 24
LARGEST_COORDINATE_UM = 2e6  # 2 m either way: what mask writers take, and nearly what 32-bit nanometres reach


@dataclass(frozen=True, slots=True, kw_only=True)
class PlacedChannel:
    """One channel on a mask.

    Attributes
    ----------
    title : str
        Name as the user typed it.
    name : str
        Safe name, unique on the mask.
    shape : ChannelShape
        A usable shape.
    dx_um, dy_um : float
        Shift on the mask, a whole number of nanometres [um].
    """

    title: str
    name: str
    shape: ChannelShape
    dx_um: float = 0.0
    dy_um: float = 0.0

    @property
    def outline(self) -> Outline:
        """Outline before the shift."""
        assert self.shape.outline is not None  # arranged() lets no other shape through
        return self.shape.outline

    def pieces(self, *, link_um: float) -> ChannelPieces:
        """Return the channel cut into pieces without holes, before the shift.

        Parameters
        ----------
        link_um : float
            Length left free along the path at every cut [um].

        Raises
        ------
        ExportError
            If there is no place to cut.
        """
        try:
            return cut_pieces(self.shape, link_um=link_um)
        except GeometryError as error:
            raise ExportError(
                f"parameter set {shown(self.title)} cannot be cut into pieces: {error}; "
                "raise loop_radius_um, or write DXF with islands as loops"
            ) from error

    @property
    def bounds_um(self) -> tuple[float, float, float, float]:
        """(x_min, y_min, x_max, y_max) on the mask [um]."""
        x0, y0, x1, y1 = self.outline.bounds_um
        return x0 + self.dx_um, y0 + self.dy_um, x1 + self.dx_um, y1 + self.dy_um


@dataclass(frozen=True, slots=True, kw_only=True)
class MaskDrawing:
    """Everything on one mask.

    Attributes
    ----------
    stem : str
        Name of its files without ending, also of the top cell.
    channels : tuple of PlacedChannel
        From the top of the mask downwards.
    """

    stem: str
    channels: tuple[PlacedChannel, ...]

    @property
    def bounds_um(self) -> tuple[float, float, float, float]:
        """(x_min, y_min, x_max, y_max) of all channels [um]."""
        x0, y0, x1, y1 = zip(*(channel.bounds_um for channel in self.channels), strict=True)
        return min(x0), min(y0), max(x1), max(y1)

    @property
    def area_um2(self) -> float:
        """Exact area of all channels [um^2]."""
        return sum(channel.outline.area_um2 for channel in self.channels)

    @property
    def island_count(self) -> int:
        """Number of islands of all channels."""
        return sum(len(channel.outline.islands) for channel in self.channels)


def arranged(
    named_shapes: Sequence[tuple[str, ChannelShape]], *, chip_name: str, options: MaskOptions
) -> tuple[MaskDrawing, ...]:
    """Return the masks of a chip: one for each set, or one for all.

    Parameters
    ----------
    named_shapes : sequence of (str, ChannelShape)
        Name of each parameter set, and its shape.
    chip_name : str
        Name of the chip as the user typed it.
    options : MaskOptions
        Whether sets share a mask, and their clearance.

    Returns
    -------
    tuple of MaskDrawing
        In the order given; channels of one mask lie below one another.

    Raises
    ------
    ExportError
        If there is no shape, one cannot be used, or the drawing is larger than a mask can be.
    """
    if not named_shapes:
        raise ExportError("no parameter set was chosen for the masks; choose at least one")
    for title, shape in named_shapes:
        _check_usable(title, shape)
    chip = safe_name(chip_name, longest=LONGEST_CHIP_NAME, fallback="CHIP")
    titles = [title for title, _ in named_shapes]
    shapes = [shape for _, shape in named_shapes]
    names = unique_safe_names(titles, longest=LONGEST_CHANNEL_NAME, taken=(chip,))
    if options.one_file_per_set:
        stems = unique_safe_names([f"{chip}_{name}" for name in names], longest=LONGEST_CHIP_NAME, taken=names)
        drawings = tuple(
            MaskDrawing(stem=stem, channels=(PlacedChannel(title=title, name=name, shape=shape),))
            for stem, title, name, shape in zip(stems, titles, names, shapes, strict=True)
        )
    else:
        drawings = (MaskDrawing(stem=chip, channels=_stacked(titles, names, shapes, options.clearance_um)),)
    for drawing in drawings:
        _check_size(drawing)
    return drawings


def _stacked(
    titles: Sequence[str], names: Sequence[str], shapes: Sequence[ChannelShape], clearance_um: float
) -> tuple[PlacedChannel, ...]:
    channels: list[PlacedChannel] = []
    for title, name, shape in zip(titles, names, shapes, strict=True):
        channel = PlacedChannel(title=title, name=name, shape=shape)
        if channels:
            room = channels[-1].bounds_um[1] - clearance_um - channel.bounds_um[3]
            channel = PlacedChannel(title=title, name=name, shape=shape, dy_um=float(room // 1.0))
        channels.append(channel)
    return tuple(channels)


def _check_usable(title: str, shape: ChannelShape) -> None:
    if shape.outline is not None:
        return
    errors = [finding.message for finding in shape.findings if finding.severity is Severity.ERROR]
    reason = errors[0] if errors else "its shape cannot be built; change its parameters"
    raise ExportError(f"parameter set {shown(title)} cannot be put on a mask: {reason}")


def _check_size(drawing: MaskDrawing) -> None:
    reach = max(abs(value) for value in drawing.bounds_um)
    if reach > LARGEST_COORDINATE_UM:
        raise ExportError(
            f"mask {drawing.stem} would reach {reach / 1000.0:.0f} mm from its origin; "
            f"allowed: {LARGEST_COORDINATE_UM / 1000.0:.0f} mm; use fewer stages or shorter leads"
        )
