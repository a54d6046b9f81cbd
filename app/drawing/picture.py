"""What the large drawing shows, and how its layers lie on one another; knows no mouse and no keys."""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPainterPath

from app.drawing import layers, signs
from app.drawing.beside import Beside
from app.drawing.dimensions import Dimension, dimensions_of, length_text, value_text
from app.drawing.finding_marks import NO_FINDING, FindingMarks
from app.drawing.labels import draw_dimensions, free_box, place_dimensions
from app.drawing.paths import merged, ring_paths, strokes_path
from app.look import LIGHT, SPACING, Palette, font
from core.parameters import CHANNEL_FIELDS

if TYPE_CHECKING:
    from collections.abc import Callable

    from app.drawing.camera import Camera
    from app.drawing.flow_overlay import FlowOverlay
    from app.drawing.labels import Line
    from core.geometry.shape import ChannelShape

    Bounds = tuple[float, float, float, float]

_INSET_PX = 6.0  # labels keep this far from the rim


class Picture:
    """A channel as it is to be painted.

    Attributes
    ----------
    palette : Palette
        Colours.
    field : str or None
        Parameter whose dimension is stressed.
    marks : FindingMarks
        The findings, and which of them is picked.
    beside : Beside
        The walls on the mask and those that come out.
    shares : callable or None
        Gives the loop shares of a stage, forward and reverse, 0 to 1, to be written beside loop and bypass.
    has_centrelines, has_dimensions : bool
        What else is drawn.
    overlay : FlowOverlay or None
        The solved flow, over the channel.
    is_kept : bool
        True for a picture that is saved: everything is painted sharp at once.
    """

    def __init__(self) -> None:
        self.palette: Palette = LIGHT
        self.field: str | None = None
        self.marks = FindingMarks()
        self.beside = Beside()
        self.shares: Callable[[int], tuple[float, float] | None] | None = None
        self.has_centrelines = False
        self.has_dimensions = True
        self.overlay: FlowOverlay | None = None
        self.is_kept = False
        self._unit = "um"
        self._shape: ChannelShape | None = None
        self._last_good: ChannelShape | None = None
        self._path = QPainterPath()
        self._rings: list[QPainterPath] = []
        self._centre_path: QPainterPath | None = None
        self._dimensions: tuple[int, tuple[Dimension, ...]] | None = None

    def set_shape(self, shape: ChannelShape | None, last_good: ChannelShape | None) -> None:
        """Show another shape; the last good one is drawn when it has no outline."""
        self._shape, self._last_good = shape, last_good
        self._centre_path = self._dimensions = None
        drawn = shape if shape is None or shape.is_usable else last_good
        self._rings = ring_paths(drawn.outline.contours) if drawn and drawn.outline else []
        self._path = merged(self._rings)

    def set_unit(self, unit: str) -> None:
        """Write lengths in another unit."""
        self._unit, self._dimensions = unit, None

    @property
    def bounds_um(self) -> Bounds | None:
        """Extent of all that is drawn: the area, and centre lines that have none [um]."""
        if self._shape is None:
            return None
        if self._shape.outline is not None:
            return self._shape.outline.bounds_um
        box = self._centrelines().boundingRect()
        if self._last_good is not None and self._last_good.outline is not None:
            x_min, y_min, x_max, y_max = self._last_good.outline.bounds_um
            box = box.united(QRectF(QPointF(x_min, y_min), QPointF(x_max, y_max)))
        return box.left(), box.top(), box.right(), box.bottom()

    def summary(self) -> str:
        """Return the picture in words."""
        if self._shape is None:
            return "No channel."
        stages = self._shape.parameters.stages
        words = [f"{stages} stage{'' if stages == 1 else 's'}" if stages else "Plain straight channel"]
        if self._shape.outline is not None:
            x_min, y_min, x_max, y_max = self._shape.outline.bounds_um
            words.append(f"{length_text(x_max - x_min, self._unit)} by {length_text(y_max - y_min, self._unit)}")
        words += [self.marks.message(index) for index in range(len(self.marks.findings))]
        return "; ".join(words) + "."

    def paint(self, painter: QPainter, area: QRectF, camera: Camera) -> None:
        """Paint all layers, from the paper up.

        Parameters
        ----------
        painter : QPainter
            With antialiasing, in device-independent pixels.
        area : QRectF
            What is to be covered [px].
        camera : Camera
            From micrometres to pixels.
        """
        layers.draw_grid(painter, area, camera, self.palette)
        if self._shape is None:
            painter.setFont(font("body"))
            painter.setPen(QColor(self.palette.ink_soft))
            painter.drawText(area, Qt.AlignmentFlag.AlignCenter, "No channel to draw")
            return
        self._paint_channel(painter, area, camera, self._shape)
        self._paint_signs(painter, area, camera, self._shape)

    def _centrelines(self) -> QPainterPath:
        if self._centre_path is None:
            assert self._shape is not None
            self._centre_path = strokes_path(self._shape.centreline.strokes)
        return self._centre_path

    def _paint_channel(self, painter: QPainter, area: QRectF, camera: Camera, shape: ChannelShape) -> None:
        if shape.is_usable:
            layers.draw_channel(painter, self._path, self._rings, camera, self.palette)
            if self.overlay is not None:
                self.overlay.paint(painter, area, camera, self.palette, at_once=self.is_kept)
            if self.beside.is_shown:
                self.beside.paint(painter, camera, self.palette)
                layers.draw_walls(painter, self._path, camera, self.palette)  # whatever is equal shows one line
        else:
            layers.draw_last_good(painter, self._path, camera, self.palette)
        if self.has_centrelines or not shape.is_usable:
            layers.draw_centrelines(painter, self._centrelines(), camera, self.palette, is_error=not shape.is_usable)

    def _paint_signs(self, painter: QPainter, area: QRectF, camera: Camera, shape: ChannelShape) -> None:
        """Paint what is written on the drawing; ``taken`` keeps the texts off one another."""
        marks = self.marks.boxes(camera)
        taken = list(marks.values())
        told = self.marks.told
        banner = signs.banner_box(self._banner_text(told), area) if told != NO_FINDING else QRectF()
        taken.append(banner)
        self._paint_scale(painter, area, camera, shape, taken)
        if shape.is_usable:
            if self.overlay is not None and self.overlay.is_shown:
                taken.append(self.overlay.paint_legend(painter, area, self.palette))
            self._paint_directions(painter, area, camera, shape, taken)
            if self.beside.is_shown:
                clear = [*taken, *self.marks.rings(camera)]
                channel = camera.transform().mapRect(self._path.boundingRect())
                taken.append(self.beside.paint_legend(painter, area, self.palette, taken=clear, avoided=channel))
            inner = area.adjusted(_INSET_PX, _INSET_PX, -_INSET_PX, -_INSET_PX)
            self._paint_stage_signs(painter, inner, camera, shape, taken)
        self.marks.paint(painter, marks, camera, self.palette, self._unit)
        if told != NO_FINDING:
            severity = self.marks.findings[told].severity
            text = self._banner_text(told)
            signs.draw_banner(painter, banner, text, number=told + 1, severity=severity, palette=self.palette)

    def _banner_text(self, index: int) -> str:
        text = f"{self.marks.message(index)}."
        if self._last_good is None or self._shape is None or self._shape.is_usable:
            return text
        return f"{text} Hatched: the last shape that worked. Dash-dotted: what was asked for."

    def _paint_scale(
        self, painter: QPainter, area: QRectF, camera: Camera, shape: ChannelShape, taken: list[QRectF]
    ) -> None:
        bar = layers.draw_scale(painter, area, camera, self.palette, unit=self._unit)
        depth = value_text(CHANNEL_FIELDS["depth_um"], shape.parameters.depth_um, self._unit)
        text, is_handled = f"depth {depth}, out of the drawing", self.field == "depth_um"
        taken += (bar, layers.draw_depth(painter, bar, text, self.palette, is_handled=is_handled))

    def _paint_directions(
        self, painter: QPainter, area: QRectF, camera: Camera, shape: ChannelShape, taken: list[QRectF]
    ) -> None:
        ends = ((shape.centreline.forward_inlet, True), (shape.centreline.forward_outlet, False))
        boxes = [
            layers.draw_end(painter, end, camera, self.palette, is_forward=is_forward, area=area)
            for end, is_forward in ends
        ]
        taken += [box for box in boxes if box is not None]
        if None in boxes and self.marks.told == NO_FINDING:
            corner = area.topLeft() + QPointF(SPACING.medium, SPACING.medium)
            taken.append(layers.draw_direction_key(painter, corner, self.palette))

    def _paint_stage_signs(
        self, painter: QPainter, area: QRectF, camera: Camera, shape: ChannelShape, taken: list[QRectF]
    ) -> None:
        stage = _first_stage_in_view(shape, area, camera)
        if self._dimensions is None or self._dimensions[0] != stage:
            self._dimensions = (stage, dimensions_of(shape, stage=stage, unit=self._unit))
        wanted = [d for d in self._dimensions[1] if self.has_dimensions or d.field == self.field]
        walls = _lines_around(shape, stage, camera)
        placed = place_dimensions(wanted, camera=camera, area=area, taken=taken, walls=walls, handled=self.field)
        if shape.centreline.stages:
            self._paint_shares(painter, area, camera, shape, stage, taken, walls)
        draw_dimensions(painter, placed, self.palette)

    def _paint_shares(
        self, painter: QPainter, area: QRectF, camera: Camera, shape: ChannelShape, stage: int,
        taken: list[QRectF], walls: list[Line],
    ) -> None:  # fmt: skip
        shares = None if self.shares is None else self.shares(stage)
        if shares is None:
            return
        place = shape.centreline.stages[stage]
        if signs.length_px(camera.to_px(place.fork_um), camera.to_px(place.mouth_um)) < layers.SHARES_ROOM_PX:
            return
        forward, reverse = shares
        for name, section_um, in_forward, in_reverse in (
            ("loop", place.loop_section_um, forward, reverse),
            ("bypass", place.bypass_section_um[::-1], 1.0 - forward, 1.0 - reverse),
        ):
            boxes = layers.share_boxes(section_um, camera, ("forward 100%", "reverse 100%"))
            box = free_box((box for box in boxes if area.contains(box)), taken=taken, avoided=(walls,))
            if box is not None:
                rows = (f"forward {in_forward:.0%}", f"reverse {in_reverse:.0%}")
                layers.draw_shares(painter, box, camera.to_px(section_um[1]), name, rows, self.palette)
                taken.append(box)


def _first_stage_in_view(shape: ChannelShape, area: QRectF, camera: Camera) -> int:
    """Return the first stage that can be seen whole, else the first whose fork can be seen, else 0."""
    partly = 0
    for index, place in enumerate(shape.centreline.stages):
        if area.contains(camera.to_px(place.fork_um)):
            if all(area.contains(camera.to_px(point)) for point in (place.loop_section_um[1], place.mouth_um)):
                return index
            partly = partly or index
    return partly


def _lines_around(shape: ChannelShape, stage: int, camera: Camera) -> list[Line]:
    """Return the centre lines of a stage and of those beside it [px]."""
    near = (stroke for stroke in shape.centreline.strokes if abs(stroke.stage - stage) <= 1)
    runs = ([camera.to_px(point) for point in stroke.points(stroke.width_um / 4.0)] for stroke in near)
    return [(*start.toTuple(), *end.toTuple()) for run in runs for start, end in pairwise(run)]
