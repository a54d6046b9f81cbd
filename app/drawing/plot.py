"""One plot of the curves panel: curves with bands and names, a hatched stretch, a handle.

The only module that knows the plotting library.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np
import pyqtgraph as pg  # type: ignore[import-untyped]  # the library has no types
from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QBrush, QColor, QPen
from PySide6.QtWidgets import (
    QAbstractGraphicsShapeItem,
    QGraphicsEllipseItem,
    QGraphicsItem,
    QGraphicsRectItem,
    QSizePolicy,
)

from app.look import font

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray
    from PySide6.QtGui import QKeyEvent, QPainter

    from app.look import Palette

    Floats = NDArray[np.float64]

_DASHES = [6.0, 3.0]
_COMPARISON_DASHES = ([1.5, 3.0], [9.0, 3.0, 1.5, 3.0], [4.0, 2.0], [12.0, 4.0])
_BAND_ALPHA = 55
_GRID_ALPHA = 60
_STEP_KEYS: dict[int, float] = {Qt.Key.Key_Left: -1.0, Qt.Key.Key_Right: 1.0}


class Outside(pg.LinearRegionItem):  # type: ignore[misc]
    """A hatched stretch of the axis where the estimate does not hold."""

    def __init__(self) -> None:
        super().__init__(movable=False, pen=pg.mkPen(None))
        self.setZValue(-20)
        self.hatch = QBrush(Qt.BrushStyle.BDiagPattern)

    def paint(self, painter: QPainter, *_: object) -> None:
        """Hatch in pixels, whatever the scale of the axes."""
        box = painter.transform().mapRect(self.boundingRect())
        painter.save()
        painter.resetTransform()
        painter.fillRect(box, self.hatch)
        painter.restore()


def _spot(name: str) -> QAbstractGraphicsShapeItem:
    """Return the mark of the operating point on a curve: a square round the dot where both ways meet."""
    spot = (
        QGraphicsRectItem(-6.5, -6.5, 13.0, 13.0) if name == "reverse" else QGraphicsEllipseItem(-4.0, -4.0, 8.0, 8.0)
    )
    spot.setFlag(QGraphicsItem.GraphicsItemFlag.ItemIgnoresTransformations)
    spot.setZValue(10)
    spot.hide()
    return spot


class Plot(pg.GraphicsLayoutWidget):  # type: ignore[misc]
    """One plot with a handle for the operating point; x and y are in the units shown.

    The handle asks to be moved by its signals; it moves when ``set_operating`` says so.

    Parameters
    ----------
    name : str
        What the plot shows; its title and its name for screen readers.
    curve_names : sequence of str
        One curve each, labelled with its name; ``reverse`` is dashed.
    """

    handle_dragged = Signal(float)
    handle_set = Signal(float)

    def __init__(self, name: str, curve_names: Sequence[str]) -> None:
        super().__init__()
        self.setAccessibleName(name)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Expanding)
        self.setMinimumSize(220, 130)
        self.view_box = pg.ViewBox(enableMenu=False, enableMouse=False)
        self.axes = {side: pg.AxisItem(side) for side in ("left", "bottom")}
        self._title = pg.LabelItem()
        for item, row, column in (
            (self._title, 0, 1), (self.axes["left"], 1, 0), (self.view_box, 1, 1), (self.axes["bottom"], 2, 1),
        ):  # fmt: skip
            self.addItem(item, row=row, col=column)
        for axis in self.axes.values():
            axis.linkToView(self.view_box)
        self.ci.layout.setContentsMargins(4, 2, 18, 2)
        self.ci.layout.setSpacing(0)
        self._name = name
        self.bands = {
            name: self._added(pg.PlotCurveItem(fillLevel="enclosed", pen=pg.mkPen(None))) for name in curve_names
        }
        self.curves = {name: self._added(pg.PlotCurveItem(antialias=True)) for name in curve_names}
        self.labels = {name: self._added(pg.TextItem(name)) for name in curve_names}
        self.spots = {name: self._added(_spot(name)) for name in curve_names}
        self.points = {name: self._added(pg.ScatterPlotItem(size=9, symbol="+")) for name in curve_names}
        self.outside: list[Outside] = []
        self.hatch_colour = QColor()
        self.outside_label = self._added(pg.TextItem("outside the range of the estimate", anchor=(1, 0)))
        self.compared: list[pg.GraphicsObject] = []
        self.handle = self._added(pg.InfiniteLine(angle=90, movable=True))
        self.handle.setZValue(20)
        self.handle.addMarker("<|>", position=0.94, size=14.0)
        self.handle.setCursor(Qt.CursorShape.SizeHorCursor)
        self.handle.sigDragged.connect(lambda line: self.handle_dragged.emit(line.value()))
        self.handle.sigPositionChangeFinished.connect(lambda line: self.handle_set.emit(line.value()))
        self.scene().sigMouseClicked.connect(self._on_scene_mouse_clicked)

    def _added(self, item: Any) -> Any:
        self.view_box.addItem(item, ignoreBounds=True)
        return item

    def set_axes(
        self, *, x_label: str, y_label: str, x_range: tuple[float, float], y_range: tuple[float, float]
    ) -> None:
        """Name the axes and choose what they span."""
        for side, text in (("bottom", x_label), ("left", y_label)):
            if self.axes[side].labelText != text:
                self.axes[side].setLabel(text)
        self.view_box.setRange(xRange=x_range, yRange=y_range, padding=0.0)
        self.handle.setBounds(x_range)

    def set_curve(self, name: str, x: Floats, y: Floats, *, low: Floats, high: Floats) -> None:
        """Show a curve with its error band."""
        self.curves[name].setData(x, y)
        self.bands[name].setData(np.concatenate((x, x[::-1])), np.concatenate((low, high[::-1])))

    def set_label(self, name: str, place: float, *, anchor: tuple[float, float]) -> None:
        """Write a curve's name beside it, at a share of its length."""
        x, y = self.curves[name].getData()
        index = int(place * (len(x) - 1))
        self.labels[name].setAnchor(anchor)
        self.labels[name].setPos(float(x[index]), float(y[index]))

    def set_operating(self, x: float, values: dict[str, float]) -> None:
        """Put the handle and the spots on the curves at the operating point."""
        if not self.handle.moving:
            self.handle.setPos(x)
        for name, y in values.items():
            self.spots[name].setPos(x, y)
            self.spots[name].show()

    def set_outside(self, x: Floats, is_valid: NDArray[np.bool_]) -> None:
        """Hatch the stretches of x where a curve does not hold."""
        padded = np.concatenate(([True], is_valid, [True]))
        edges = np.flatnonzero(padded[1:] != padded[:-1]).reshape(-1, 2)
        while len(self.outside) < len(edges):
            self.outside.append(self._added(Outside()))
        for region, (first, after) in zip(self.outside, edges, strict=False):
            region.hatch.setColor(self.hatch_colour)
            region.setRegion((float(x[max(first - 1, 0)]), float(x[min(after, len(x) - 1)])))
        for number, region in enumerate(self.outside):
            region.setVisible(number < len(edges))
        self.outside_label.setVisible(len(edges) > 0)
        if len(edges):
            self.outside_label.setPos(self.view_box.viewRange()[0][1], self.view_box.viewRange()[1][1])

    def use_palette(self, palette: Palette, colours: dict[str, str]) -> None:
        """Paint with other colours; each curve has its own."""
        self.setBackground(palette.panel)
        self._title.setText(self._name, color=palette.ink, size=f"{font('body').pointSizeF():.1f}pt")
        for axis in self.axes.values():
            axis.enableAutoSIPrefix(False)
            axis.setPen(QPen(QColor(palette.rule), 1.0))
            axis.setTextPen(QPen(QColor(palette.ink_soft)))
            axis.setTickFont(font("small"))
            axis.label.setFont(font("small"))
            axis.setStyle(maxTickLevel=0)
        self.axes["left"].setGrid(_GRID_ALPHA)
        for name, colour in colours.items():
            self._colour_curve(name, colour, palette)
        self.hatch_colour = QColor(palette.rule)
        for region in self.outside:
            region.hatch.setColor(self.hatch_colour)
        self.outside_label.setColor(QColor(palette.ink_soft))
        self.outside_label.fill = pg.mkBrush(palette.panel)
        self.outside_label.setFont(font("small"))
        self.handle.setPen(pg.mkPen(palette.accent, width=2))
        self.handle.setHoverPen(pg.mkPen(palette.accent, width=4))
        self.setStyleSheet(
            f"QGraphicsView {{ border: 1px solid {palette.rule}; }}"
            f"QGraphicsView:focus {{ border: 1px solid {palette.accent}; }}"
        )

    def _colour_curve(self, name: str, colour: str, palette: Palette) -> None:
        band = QColor(colour)
        band.setAlpha(_BAND_ALPHA)
        self.bands[name].setBrush(band)
        pen = pg.mkPen(colour, width=2)
        if name == "reverse":
            pen.setDashPattern(_DASHES)
        self.curves[name].setPen(pen)
        self.labels[name].setColor(QColor(colour))
        self.labels[name].setFont(font("heading"))
        self.spots[name].setPen(pg.mkPen(colour, width=2))
        self.spots[name].setBrush(pg.mkBrush(None if name == "reverse" else colour))
        self.points[name].setPen(pg.mkPen(palette.ink, width=2))

    def clear_compared(self) -> None:
        """Take all compared curves away."""
        for item in self.compared:
            self.view_box.removeItem(item)
        self.compared.clear()

    def add_compared(self, number: int, x: Floats, y: Floats, *, text: str, palette: Palette) -> None:
        """Show one curve of another parameter set, thin; its name, if any, lies on it."""
        pen = pg.mkPen(palette.ink_soft, width=1)
        pen.setDashPattern(_COMPARISON_DASHES[number % len(_COMPARISON_DASHES)])
        self.compared.append(self._added(pg.PlotCurveItem(x, y, pen=pen, antialias=True)))
        if text:
            # above and below in turn, and three places along the curve, so that names keep apart
            anchor = (1.0, 1.3) if number % 2 == 0 else (1.0, -0.3)
            label = pg.TextItem(text, color=palette.ink, anchor=anchor, fill=pg.mkBrush(palette.panel))
            label.setFont(font("small"))
            index = int((0.98 - 0.26 * (number % 3)) * (len(x) - 1))
            label.setPos(float(x[index]), float(y[index]))
            self.compared.append(self._added(label))

    def _on_scene_mouse_clicked(self, event: object) -> None:
        if event.button() == Qt.MouseButton.LeftButton and not event.isAccepted():  # type: ignore[attr-defined]
            x = self.view_box.mapSceneToView(event.scenePos()).x()  # type: ignore[attr-defined]
            self._move_handle(x)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        """Step the operating point."""
        sign = _STEP_KEYS.get(event.key())
        if sign is None:
            super().keyPressEvent(event)
            return
        low, high = self.view_box.viewRange()[0]
        parts = 10.0 if event.modifiers() & Qt.KeyboardModifier.ShiftModifier else 100.0
        self._move_handle(self.handle.value() + sign * (high - low) / parts)

    def _move_handle(self, x: float) -> None:
        low, high = self.view_box.viewRange()[0]
        self.handle_set.emit(min(max(x, low), high))
