"""The curves under the hand: drag, click, keys, units, comparison."""

from __future__ import annotations

from types import SimpleNamespace

import numpy as np
import pyqtgraph as pg
import pytest
from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtGui import QMouseEvent
from PySide6.QtWidgets import QApplication

from app.curves import CurvesPanel
from app.look import DARK, LIGHT
from tests.app.drawing.samples import turn_wheel

LEFT = Qt.MouseButton.LeftButton


def made_up(*, flows=201, highest_ul_min=2000.0, gain=0.2, valid_up_to_ul_min=1500.0):
    """Return a made-up estimate with simple closed forms: Re = Q / 10, forward drop 2 Q, Di - 1 = gain (Q / Qmax)^3."""
    flow = np.linspace(0.0, highest_ul_min, flows)
    rectification = gain * (flow / highest_ul_min) ** 3
    return SimpleNamespace(
        flow_ul_min=flow,
        reynolds=flow / 10.0,
        forward_pressure_pa=2.0 * flow,
        reverse_pressure_pa=2.0 * flow * (1.0 + rectification),
        rectification=rectification,
        diodicity=1.0 + rectification,
        error_band_percent=np.full(flows, 10.0),
        rectification_band_percent=np.full(flows, 50.0),
        valid=flow <= valid_up_to_ul_min,
    )


@pytest.fixture
def panel(qtbot, monkeypatch):
    """Show a made-up estimate at 1000 uL/min to a hand faster than the hundred moves a second listened to."""
    monkeypatch.setitem(pg.CONFIG_OPTIONS, "mouseRateLimit", 0)
    made = CurvesPanel()
    qtbot.addWidget(made)
    made.resize(1200, 280)
    made.show_estimate(made_up(), flow_ul_min=1000.0)
    made.show()
    qtbot.waitExposed(made)
    return made


def pixel_of(plot, x, y=None):
    """Return the pixel of a place in a plot; default height: the middle."""
    y = sum(plot.view_box.viewRange()[1]) / 2.0 if y is None else y
    return plot.mapFromScene(plot.view_box.mapViewToScene(QPointF(x, y)))


def move(plot, kind, pos, *, button=LEFT, buttons=LEFT):
    """Send one mouse event to a plot, as the window system does."""
    view = plot.viewport()
    event = QMouseEvent(
        kind, QPointF(pos), QPointF(view.mapToGlobal(pos)), button, buttons, Qt.KeyboardModifier.NoModifier
    )
    QApplication.sendEvent(view, event)


def drag(plot, start, end):
    """Drag from one pixel to another in small steps."""
    none = Qt.MouseButton.NoButton
    move(plot, QMouseEvent.Type.MouseMove, start, button=none, buttons=none)
    move(plot, QMouseEvent.Type.MouseButtonPress, start)
    for share in np.linspace(0.1, 1.0, 10):
        move(plot, QMouseEvent.Type.MouseMove, start + (end - start) * float(share), button=none)
    move(plot, QMouseEvent.Type.MouseButtonRelease, end, buttons=none)


def hatched(plot):
    """Return the hatched stretches."""
    return [region.getRegion() for region in plot.outside if region.isVisible()]


# --- what is shown


def test_curves_are_the_estimate(panel):
    """Truth: the arrays given, in the base units."""
    given = made_up()
    x, y = panel.pressure_plot.curves["reverse"].getData()
    assert np.array_equal(x, given.flow_ul_min)
    assert np.array_equal(y, given.reverse_pressure_pa)
    x, y = panel.diodicity_plot.curves["Di"].getData()
    assert np.array_equal(x, given.reynolds)
    assert np.array_equal(y, given.diodicity)


def test_bands(panel):
    """Truth: at the last flow 4000 Pa +- 10 %, and 1 + 0.2 +- 50 % of 0.2."""
    _, band = panel.pressure_plot.bands["forward"].getData()
    assert band[[200, 201]] == pytest.approx([3600.0, 4400.0])
    _, band = panel.diodicity_plot.bands["Di"].getData()
    assert band[[200, 201]] == pytest.approx([1.1, 1.3])


def test_nothing_looks_like_nothing(panel):
    """Truth: a Di of 1.0002 stays near the foot of an axis that reaches 1.1 at least."""
    panel.show_estimate(made_up(gain=0.0002), flow_ul_min=1000.0)
    low, high = panel.diodicity_plot.view_box.viewRange()[1]
    assert low == pytest.approx(1.0, abs=0.01)
    assert high >= 1.1


def test_bands_fit_the_axes(panel):
    """Truth: the upper end of the widest band lies below the top."""
    assert panel.pressure_plot.view_box.viewRange()[1][1] > 4000.0 * 1.2 * 1.1
    assert panel.diodicity_plot.view_box.viewRange()[1][1] > 1.3
    assert panel.pressure_plot.view_box.viewRange()[0] == pytest.approx([0.0, 2000.0])


def test_operating_point_lies_on_the_curves(panel):
    """Truth: the closed forms at 1000 uL/min; Di - 1 = 0.2 / 8."""
    assert panel.pressure_plot.handle.value() == pytest.approx(1000.0)
    assert panel.diodicity_plot.handle.value() == pytest.approx(100.0)
    spots = {name: spot.pos().toTuple() for name, spot in panel.pressure_plot.spots.items()}
    assert spots["forward"] == pytest.approx((1000.0, 2000.0))
    assert spots["reverse"] == pytest.approx((1000.0, 2050.0))
    assert panel.diodicity_plot.spots["Di"].y() == pytest.approx(1.025)


def test_stretch_without_validity_is_hatched_and_named(panel):
    """Truth: valid up to 1500 uL/min, Re 150."""
    assert hatched(panel.pressure_plot) == [pytest.approx((1500.0, 2000.0))]
    assert hatched(panel.diodicity_plot) == [pytest.approx((150.0, 200.0))]
    assert panel.pressure_plot.outside_label.isVisible()
    panel.show_estimate(made_up(valid_up_to_ul_min=1e9), flow_ul_min=1000.0)
    assert hatched(panel.pressure_plot) == []
    assert not panel.pressure_plot.outside_label.isVisible()
    panel.show_estimate(made_up(valid_up_to_ul_min=-1.0), flow_ul_min=1000.0)
    assert hatched(panel.pressure_plot) == [pytest.approx((0.0, 2000.0))]


def test_units(panel):
    """Truth: 2000 uL/min are 2 mL/min, 2 x 1000 Pa are 20 mbar."""
    panel.set_units(flow="mL/min", pressure="mbar")
    assert panel.pressure_plot.view_box.viewRange()[0] == pytest.approx([0.0, 2.0])
    assert panel.pressure_plot.spots["forward"].pos().toTuple() == pytest.approx((1.0, 20.0))
    assert "mL/min" in panel.pressure_plot.axes["bottom"].labelText
    assert "mbar" in panel.pressure_plot.axes["left"].labelText


def test_comparison_comes_and_goes(panel):
    """Truth: three curves and two names for each set; nothing is left afterwards."""
    before = len(panel.pressure_plot.view_box.childGroup.childItems())
    panel.show_comparison([("Wide loop", made_up(gain=0.1)), ("Control", made_up(gain=0.0))])
    assert len(panel.pressure_plot.view_box.childGroup.childItems()) == before + 6
    names = [item.toPlainText() for item in panel.diodicity_plot.compared if hasattr(item, "toPlainText")]
    assert names == ["Wide loop", "Control"]
    panel.show_comparison([])
    assert len(panel.pressure_plot.view_box.childGroup.childItems()) == before


def test_single_results_are_marked(panel):
    """Truth: the values given, in the units shown."""
    panel.set_units(pressure="kPa")
    score = SimpleNamespace(
        flow_ul_min=500.0, forward_pressure_pa=900.0, reverse_pressure_pa=950.0, reynolds=50.0, diodicity=1.05
    )
    panel.show_points([score])
    x, y = panel.pressure_plot.points["reverse"].getData()
    assert (list(x), list(y)) == ([500.0], [pytest.approx(0.95)])
    panel.show_points([])
    assert len(panel.pressure_plot.points["reverse"].getData()[0]) == 0


@pytest.mark.parametrize("palette", [LIGHT, DARK], ids=lambda palette: palette.name)
def test_colours_and_dashes(panel, palette):
    """Truth: the palette; reverse differs by its dashes and its square too."""
    panel.use_palette(palette)
    plot = panel.pressure_plot
    pens = {name: plot.curves[name].opts["pen"] for name in ("forward", "reverse")}
    assert pens["forward"].color().name() == palette.forward
    assert pens["reverse"].color().name() == palette.reverse
    assert pens["forward"].style() == Qt.PenStyle.SolidLine
    assert pens["reverse"].style() == Qt.PenStyle.CustomDashLine
    assert type(plot.spots["forward"]) is not type(plot.spots["reverse"])
    corner = plot.grab().toImage().pixelColor(plot.grab().width() - 6, 6)
    assert corner.name() == palette.panel


# --- what the user does


@pytest.mark.parametrize(
    ("name", "x", "expected"), [("pressure_plot", 1400.0, 1400.0), ("diodicity_plot", 60.0, 600.0)]
)
def test_drag_the_operating_point(panel, name, x, expected):
    """Truth: the place where it is let go; steps on the way, one end."""
    plot, dragged, ended = getattr(panel, name), [], []
    panel.operating_flow_dragged.connect(dragged.append)
    panel.operating_flow_dragged.connect(lambda flow: panel.show_estimate(made_up(), flow_ul_min=flow))
    panel.operating_flow_set.connect(ended.append)
    drag(plot, pixel_of(plot, plot.handle.value()), pixel_of(plot, x))
    assert len(dragged) > 3
    assert ended == [pytest.approx(expected, abs=15.0)]
    assert dragged[-1] == pytest.approx(ended[0])


def test_drag_ends_at_the_axis(panel):
    """Truth: beyond the axis there is no flow to choose."""
    ended = []
    panel.operating_flow_set.connect(ended.append)
    plot = panel.pressure_plot
    drag(plot, pixel_of(plot, 1000.0), pixel_of(plot, 1000.0) - QPoint(2000, 0))
    assert ended == [pytest.approx(0.0)]


def test_drag_in_other_units(panel):
    """Truth: the signal is in uL/min whatever is shown."""
    panel.set_units(flow="mL/min")
    ended = []
    panel.operating_flow_set.connect(ended.append)
    drag(panel.pressure_plot, pixel_of(panel.pressure_plot, 1.0), pixel_of(panel.pressure_plot, 0.5))
    assert ended == [pytest.approx(500.0, abs=15.0)]


def test_click_sets_the_flow(panel, qtbot):
    """Truth: the flow under the pointer."""
    plot = panel.pressure_plot
    pos = pixel_of(plot, 400.0)
    with qtbot.waitSignal(panel.operating_flow_set) as chosen:
        move(plot, QMouseEvent.Type.MouseButtonPress, pos)
        move(plot, QMouseEvent.Type.MouseButtonRelease, pos, buttons=Qt.MouseButton.NoButton)
    assert chosen.args[0] == pytest.approx(400.0, abs=10.0)


@pytest.mark.parametrize(
    ("name", "key", "shift", "expected"),
    [
        ("pressure_plot", Qt.Key.Key_Right, False, 1020.0),
        ("pressure_plot", Qt.Key.Key_Left, True, 800.0),
        ("diodicity_plot", Qt.Key.Key_Left, False, 980.0),
        ("diodicity_plot", Qt.Key.Key_Right, True, 1200.0),
    ],
)
def test_keys_step_the_flow(panel, qtbot, name, key, shift, expected):
    """Truth: a hundredth of the axis, with Shift a tenth."""
    plot = getattr(panel, name)
    plot.setFocus()
    modifier = Qt.KeyboardModifier.ShiftModifier if shift else Qt.KeyboardModifier.NoModifier
    with qtbot.waitSignal(panel.operating_flow_set) as chosen:
        qtbot.keyClick(plot, key, modifier)
    assert chosen.args[0] == pytest.approx(expected)


def test_wheel_leaves_the_axes_alone(panel):
    """Truth: axes before and after; a curve that drifts away helps nobody."""
    before = panel.pressure_plot.view_box.viewRange()
    turn_wheel(panel.pressure_plot.viewport(), QPoint(200, 100), 2)
    assert panel.pressure_plot.view_box.viewRange() == before


def test_empty_panel_does_no_harm(qtbot):
    """Truth: before the first estimate units, colours and keys change nothing and break nothing."""
    panel = CurvesPanel()
    qtbot.addWidget(panel)
    panel.set_units(flow="mL/min")
    panel.use_palette(DARK)
    with qtbot.assertNotEmitted(panel.operating_flow_set):
        qtbot.keyClick(panel.diodicity_plot, Qt.Key.Key_Right)
        qtbot.keyClick(panel.pressure_plot, Qt.Key.Key_Right)


def test_names_for_screen_readers(panel):
    """Truth: each plot says what it is."""
    assert panel.pressure_plot.accessibleName().startswith("Pressure drop against flow")
    assert panel.diodicity_plot.accessibleName().startswith("Di against Re")
