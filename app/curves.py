"""The two curves below the drawing: pressure against flow both ways, and Di against Re.

Use::

    curves = CurvesPanel()
    curves.use_palette(look.palette);  look.palette_changed.connect(curves.use_palette)
    curves.show_estimate(estimate, flow_ul_min=operating.flow_ul_min)   # at every change
    curves.set_units(flow="mL/min", pressure="kPa")
    curves.show_comparison([("Wide loop", other_estimate)])             # [] ends the comparison
    curves.show_points(scores)                                          # single results, as markers

Take the flows of the estimate from a range that does not move with the operating point, or the
axes would move under the hand that drags it.

Signals
    ``operating_flow_dragged(flow_ul_min)`` at every step of a drag, ``operating_flow_set(flow_ul_min)``
    once at its end, after a click into a plot and after a key.

Keys, with the focus on a plot
    left and right move the operating point by a hundredth of the axis, with Shift by a tenth.
"""

from __future__ import annotations

from math import floor, log10
from typing import TYPE_CHECKING, TypeVar

import numpy as np
from PySide6.QtCore import Signal
from PySide6.QtWidgets import QHBoxLayout, QWidget

from app.drawing.plot import Plot
from app.look import LIGHT, SPACING, Palette
from core.units import base_unit, convert, unit_symbol

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from core.hydraulics.estimate import Estimate, Score

    Floats = NDArray[np.float64]

Amount = TypeVar("Amount", float, "NDArray[np.float64]")

_LEAST_TOP_OF_DI = 1.1  # so that almost nothing looks like almost nothing
_HEADROOM = 1.04
_ROUND_TOPS = (1.0, 1.2, 1.4, 1.6, 2.0, 2.4, 3.0, 4.0, 5.0, 6.0, 8.0, 10.0)
_FOOT = 0.03  # shown below the axis, for curves that lie on it


def _round_top(highest: float) -> float:
    """Return where an axis ends: a round number, so that it stays still while the curve moves a little."""
    if highest <= 0.0:
        return 1.0
    decade = 10.0 ** floor(log10(highest * _HEADROOM))
    return next(step * decade for step in _ROUND_TOPS if step * decade >= highest * _HEADROOM * (1.0 - 1e-9))


class CurvesPanel(QWidget):
    """Both plots side by side; see the module for use, signals and keys.

    Parameters
    ----------
    parent : QWidget, optional
        As for any widget.
    """

    operating_flow_dragged = Signal(float)
    operating_flow_set = Signal(float)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._palette = LIGHT
        self._units = {"flow": base_unit("flow"), "pressure": base_unit("pressure")}
        self._estimate: Estimate | None = None
        self._flow_ul_min = 0.0
        self._compared: tuple[tuple[str, Estimate], ...] = ()
        self._points: tuple[Score, ...] = ()
        self.pressure_plot = Plot("Pressure drop against flow, with error band", ("forward", "reverse"))
        self.diodicity_plot = Plot("Di against Re, with error band", ("Di",))
        layout = QHBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(SPACING.small)
        for plot in (self.pressure_plot, self.diodicity_plot):
            layout.addWidget(plot)
        self.pressure_plot.handle_dragged.connect(self._on_pressure_plot_handle_dragged)
        self.pressure_plot.handle_set.connect(self._on_pressure_plot_handle_set)
        self.diodicity_plot.handle_dragged.connect(self._on_diodicity_plot_handle_dragged)
        self.diodicity_plot.handle_set.connect(self._on_diodicity_plot_handle_set)
        self.use_palette(LIGHT)

    def use_palette(self, palette: Palette) -> None:
        """Paint with other colours from now on."""
        self._palette = palette
        self.pressure_plot.use_palette(palette, {"forward": palette.forward, "reverse": palette.reverse})
        self.diodicity_plot.use_palette(palette, {"Di": palette.ink})
        self._show_compared()

    def set_units(self, *, flow: str | None = None, pressure: str | None = None) -> None:
        """Choose the units of the axes, as named in ``core.units``; None leaves one as it is."""
        chosen = {"flow": flow, "pressure": pressure}
        self._units |= {quantity: unit for quantity, unit in chosen.items() if unit is not None}
        self._refresh()

    def show_estimate(self, estimate: Estimate, *, flow_ul_min: float) -> None:
        """Show the curves of a design and its operating point.

        Parameters
        ----------
        estimate : Estimate
            For at least two rising flows.
        flow_ul_min : float
            Operating flow, within those flows [uL/min].
        """
        self._estimate, self._flow_ul_min = estimate, flow_ul_min
        self._refresh()

    def show_comparison(self, named: Sequence[tuple[str, Estimate]]) -> None:
        """Lay the curves of other parameter sets under the shown ones; an empty list takes them away."""
        self._compared = tuple(named)
        self._show_compared()

    def show_points(self, scores: Sequence[Score]) -> None:
        """Mark single results in both plots; an empty list takes them away."""
        self._points = tuple(scores)
        self._show_points()

    def _refresh(self) -> None:
        if self._estimate is None:
            return
        self._show_pressures(self._estimate)
        self._show_diodicity(self._estimate)
        self._show_points()
        self._show_compared()
        self._show_operating(self._estimate)

    def _show_pressures(self, estimate: Estimate) -> None:
        plot, flow = self.pressure_plot, self._shown(estimate.flow_ul_min, "flow")
        band = estimate.error_band_percent / 100.0
        drops = {"forward": estimate.forward_pressure_pa, "reverse": estimate.reverse_pressure_pa}
        top = _round_top(max(float(np.max(self._shown(drop * (1.0 + band), "pressure"))) for drop in drops.values()))
        plot.set_axes(
            x_label=f"Flow, {unit_symbol(self._units['flow'])}",
            y_label=f"Pressure drop, {unit_symbol(self._units['pressure'])}",
            x_range=(0.0, float(flow[-1])), y_range=(-_FOOT * top, top),
        )  # fmt: skip
        for name, drop in drops.items():
            low, high = (self._shown(drop * (1.0 + sign * band), "pressure") for sign in (-1.0, 1.0))
            plot.set_curve(name, flow, self._shown(drop, "pressure"), low=low, high=high)
        plot.set_label("reverse", 0.55, anchor=(1.05, 1.1))
        plot.set_label("forward", 0.55, anchor=(-0.05, -0.1))
        plot.set_outside(flow, estimate.valid)

    def _show_diodicity(self, estimate: Estimate) -> None:
        plot, gain = self.diodicity_plot, estimate.rectification
        low, high = (1.0 + gain * (1.0 + sign * estimate.rectification_band_percent / 100.0) for sign in (-1.0, 1.0))
        top = max(_LEAST_TOP_OF_DI, 1.0 + _round_top(float(np.max(high)) - 1.0))
        plot.set_axes(
            x_label="Re", y_label="Di, reverse over forward drop",
            x_range=(0.0, float(estimate.reynolds[-1])), y_range=(1.0 - _FOOT * (top - 1.0), top),
        )  # fmt: skip
        plot.set_curve("Di", estimate.reynolds, estimate.diodicity, low=low, high=high)
        plot.set_label("Di", 0.55, anchor=(1.1, 1.1))
        plot.set_outside(estimate.reynolds, estimate.valid)

    def _show_operating(self, estimate: Estimate) -> None:
        def at_flow(values: Floats) -> float:
            return float(np.interp(self._flow_ul_min, estimate.flow_ul_min, values))

        drops = {"forward": estimate.forward_pressure_pa, "reverse": estimate.reverse_pressure_pa}
        self.pressure_plot.set_operating(
            self._shown(self._flow_ul_min, "flow"),
            {name: self._shown(at_flow(drop), "pressure") for name, drop in drops.items()},
        )
        self.diodicity_plot.set_operating(at_flow(estimate.reynolds), {"Di": at_flow(estimate.diodicity)})

    def _show_points(self) -> None:
        flows = [self._shown(score.flow_ul_min, "flow") for score in self._points]
        for name in ("forward", "reverse"):
            drops = [self._shown(getattr(score, f"{name}_pressure_pa"), "pressure") for score in self._points]
            self.pressure_plot.points[name].setData(flows, drops)
        self.diodicity_plot.points["Di"].setData(
            [score.reynolds for score in self._points], [score.diodicity for score in self._points]
        )

    def _show_compared(self) -> None:
        for plot in (self.pressure_plot, self.diodicity_plot):
            plot.clear_compared()
        for number, (name, estimate) in enumerate(self._compared):
            flow = self._shown(estimate.flow_ul_min, "flow")
            for text, drop in (("", estimate.forward_pressure_pa), (name, estimate.reverse_pressure_pa)):
                self.pressure_plot.add_compared(
                    number, flow, self._shown(drop, "pressure"), text=text, palette=self._palette
                )
            self.diodicity_plot.add_compared(
                number, estimate.reynolds, estimate.diodicity, text=name, palette=self._palette
            )

    def _shown(self, value: Amount, quantity: str) -> Amount:
        return convert(value, quantity=quantity, from_unit=base_unit(quantity), to_unit=self._units[quantity])  # type: ignore[arg-type,return-value]  # works on arrays alike

    def _flow_of_x(self, x: float) -> float:
        return convert(x, quantity="flow", from_unit=self._units["flow"], to_unit=base_unit("flow"))

    def _flow_of_reynolds(self, reynolds: float) -> float:
        assert self._estimate is not None
        return float(np.interp(reynolds, self._estimate.reynolds, self._estimate.flow_ul_min))

    def _on_pressure_plot_handle_dragged(self, x: float) -> None:
        if self._estimate is not None:
            self.operating_flow_dragged.emit(self._flow_of_x(x))

    def _on_pressure_plot_handle_set(self, x: float) -> None:
        if self._estimate is not None:
            self.operating_flow_set.emit(self._flow_of_x(x))

    def _on_diodicity_plot_handle_dragged(self, reynolds: float) -> None:
        if self._estimate is not None:
            self.operating_flow_dragged.emit(self._flow_of_reynolds(reynolds))

    def _on_diodicity_plot_handle_set(self, reynolds: float) -> None:
        if self._estimate is not None:
            self.operating_flow_set.emit(self._flow_of_reynolds(reynolds))
