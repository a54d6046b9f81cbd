"""The drawing under the hand of a user: mouse, wheel, fingers, keys."""

from __future__ import annotations

import pytest
from PySide6.QtCore import QEvent, QPoint, QPointF, Qt
from PySide6.QtGui import QColor, QHelpEvent, QKeyEvent, QNativeGestureEvent, QPointingDevice
from PySide6.QtWidgets import QApplication, QToolTip

from app.drawing.zoom_area import MARGINS_PX
from app.look import DARK, LIGHT
from core.geometry.shape import build_shape
from core.parameters import ChannelParameters
from tests.app.drawing.samples import DOUBTFUL, GOOD, IMPOSSIBLE, turn_wheel

LEFT = Qt.MouseButton.LeftButton


def colour_at(view, point_um):
    """Return the colour painted at a place."""
    pixel = view.camera.to_px(point_um).toPoint()
    return view.grab().toImage().pixelColor(pixel).name()


def is_fitted(view):
    """Whether the drawing fills the room left by the margins, one way at least."""
    x_min, y_min, x_max, y_max = GOOD.outline.bounds_um
    low, high = view.camera.to_px((x_min, y_max)), view.camera.to_px((x_max, y_min))
    room = (view.width() - MARGINS_PX[0] - MARGINS_PX[2], view.height() - MARGINS_PX[1] - MARGINS_PX[3])
    ratios = ((high.x() - low.x()) / room[0], (high.y() - low.y()) / room[1])
    return max(ratios) == pytest.approx(1.0, rel=1e-6)


# --- what is painted


def test_channel_island_and_chip_are_told_apart(view):
    """Truth: palette colours at the middles of bypass, loop and island, and far outside."""
    place = GOOD.centreline.stages[1]
    view.set_dimensions_shown(False)
    assert colour_at(view, place.mouth_um) == LIGHT.fluid
    assert colour_at(view, place.loop_section_um.mean(axis=0)) == LIGHT.fluid
    island = GOOD.outline.islands[1].vertices_um.mean(axis=0)
    assert colour_at(view, island) in (LIGHT.solid, LIGHT.grid)
    assert colour_at(view, (2000.0, 1100.0)) in (LIGHT.solid, LIGHT.grid)


def test_colours_change_at_run_time(view):
    """Truth: the other palette's colours."""
    view.use_palette(DARK)
    view.set_dimensions_shown(False)
    assert colour_at(view, GOOD.centreline.stages[1].mouth_um) == DARK.fluid


def test_impossible_shape_shows_the_last_good_one_pale(view):
    """Truth: nowhere the colour of a valid channel; pale, hatched and the error's line are there."""
    view.show_shape(IMPOSSIBLE, last_good=GOOD)
    image = view.grab().toImage()
    seen = {image.pixelColor(x, y).name() for x in range(0, 1000, 2) for y in range(60, 560, 2)}
    assert {LIGHT.pale, LIGHT.error} <= seen
    assert LIGHT.fluid not in seen
    assert "stage gap" in view.accessibleDescription().lower()


def test_impossible_shape_without_a_last_good_one(view):
    """Truth: it paints, and says why there is no channel."""
    view.show_shape(IMPOSSIBLE)
    assert not view.grab().isNull()
    assert view.accessibleDescription().startswith("4 stages; ")


def test_no_shape(view):
    """Truth: nothing but chip and one sentence; keys and mouse do no harm."""
    view.show_shape(None)
    assert view.accessibleDescription() == "No channel."
    view.fit()
    assert colour_at(view, GOOD.centreline.stages[1].mouth_um) in (LIGHT.solid, LIGHT.grid)


def test_said_in_words(view):
    """Truth: counted by eye, and the bounds of the outline."""
    assert view.accessibleName()
    view.set_length_unit("mm")
    assert view.accessibleDescription() == "4 stages; 6.378 mm by 1.238 mm."
    view.show_shape(build_shape(ChannelParameters(stages=0)))
    assert view.accessibleDescription() == "Plain straight channel; 2 mm by 0.2 mm."


@pytest.mark.parametrize("field", ["loop_radius_um", "run_bend_deg", "depth_um", "nose_radius_um", "lead_in_um"])
def test_handled_dimension_is_stressed(view, field):
    """Truth: the accent colour is on the drawing while a slider is handled, and not afterwards."""
    view.clearFocus()

    def has_accent():
        image = view.grab().toImage()
        wanted = QColor(LIGHT.accent).rgb()
        return any(image.pixel(x, y) == wanted for x in range(image.width()) for y in range(0, image.height(), 2))

    assert not has_accent()
    view.highlight_field(field)
    assert has_accent()
    view.highlight_field(None)
    assert not has_accent()


def test_shares_are_written_and_taken_away(view):
    """Truth: the picture changes and comes back to what it was."""
    view.show_shape(build_shape(ChannelParameters(stages=1)))
    before = view.grab().toImage()
    view.show_shares(lambda _stage: (0.23, 0.61))
    assert view.grab().toImage() != before
    view.show_shares(None)
    assert view.grab().toImage() == before


def test_the_stage_in_view_is_labelled_with_its_own_shares(view):
    """Truth: where only the last stage is to be seen, the last stage's shares are asked for."""
    asked = []
    shape = build_shape(ChannelParameters(stages=3))
    view.set_animated(False)
    view.show_shape(shape)
    view.show_shares(lambda stage: asked.append(stage) or (0.1 * stage, 0.5))
    view.grab()
    assert asked[-1] == 0
    last = shape.centreline.stages[2]
    x, y = last.loop_section_um.mean(axis=0)
    view.show_part((x - 500.0, y - 500.0, x + 500.0, y + 500.0))
    view.grab()
    assert asked[-1] == 2


# --- zoom, pan, fit


def test_starts_fitted(view):
    """Truth: the room between the margins."""
    assert is_fitted(view)
    assert view.is_following


@pytest.mark.parametrize("notches", [1, -1, 3])
def test_wheel_zooms_at_the_pointer(view, qtbot, notches):
    """Truth: the place under the pointer stays."""
    pointer = QPoint(300, 200)
    before, size = view.camera.to_um(QPointF(pointer)), view.camera.um_per_px
    with qtbot.waitSignal(view.view_changed):
        turn_wheel(view, pointer, notches)
    assert view.camera.to_um(QPointF(pointer)) == pytest.approx(before)
    assert (view.camera.um_per_px < size) == (notches > 0)
    assert not view.is_following


def test_zoom_has_limits(view):
    """Truth: a hundred notches either way still show a picture."""
    for notches in (100, -200):
        turn_wheel(view, QPoint(500, 300), notches)
        assert 0.01 < view.camera.um_per_px < 3000.0
        assert not view.grab().isNull()


def test_two_fingers_pan_on_a_touch_pad(view):
    """Truth: the paper follows the fingers, the scale stays."""
    before = view.camera
    turn_wheel(view, QPoint(500, 300), 0, phase=Qt.ScrollPhase.ScrollUpdate, pixels=QPoint(30, -20))
    assert view.camera == before.moved(30.0, -20.0)


def test_pinch_on_a_touch_pad(view):
    """Truth: 20 % closer, the place between the fingers stays."""
    at, before = QPointF(400.0, 250.0), view.camera
    event = QNativeGestureEvent(
        Qt.NativeGestureType.ZoomNativeGesture, QPointingDevice.primaryPointingDevice(), 2, at, at, at, 0.2, QPointF()
    )
    QApplication.sendEvent(view, event)
    assert view.camera.um_per_px == pytest.approx(before.um_per_px / 1.2)
    assert view.camera.to_um(at) == pytest.approx(before.to_um(at))


def test_drag_takes_the_paper_along(view, qtbot):
    """Truth: the place pressed is under the pointer when released."""
    start, end = QPoint(500, 300), QPoint(380, 340)
    place = view.camera.to_um(QPointF(start))
    qtbot.mousePress(view, LEFT, pos=start)
    for pos in (QPoint(470, 310), QPoint(420, 330), end):
        qtbot.mouseMove(view, pos)
    qtbot.mouseRelease(view, LEFT, pos=end)
    assert view.camera.to_um(QPointF(end)) == pytest.approx(place)
    qtbot.mouseMove(view, QPoint(100, 100))
    assert view.camera.to_um(QPointF(end)) == pytest.approx(place)


@pytest.mark.parametrize("key", [Qt.Key.Key_Plus, Qt.Key.Key_Equal, Qt.Key.Key_Minus])
def test_zoom_keys_keep_the_middle(view, qtbot, key):
    """Truth: the middle of the view stays."""
    middle, before = QPointF(500.0, 300.0), view.camera
    qtbot.keyClick(view, key)
    assert view.camera.to_um(middle) == pytest.approx(before.to_um(middle))
    assert (view.camera.um_per_px > before.um_per_px) == (key == Qt.Key.Key_Minus)


@pytest.mark.parametrize(
    ("key", "dx", "dy"),
    [(Qt.Key.Key_Left, 60, 0), (Qt.Key.Key_Right, -60, 0), (Qt.Key.Key_Up, 0, 60), (Qt.Key.Key_Down, 0, -60)],
)
def test_arrow_keys_look_that_way(view, qtbot, key, dx, dy):
    """Truth: looking left moves the paper right."""
    before = view.camera
    qtbot.keyClick(view, key)
    assert view.camera == before.moved(dx, dy)


@pytest.mark.parametrize("how", ["f", "0", "home", "double click"])
def test_ways_to_fit(view, qtbot, how):
    """Truth: fitted again after the user went elsewhere."""
    turn_wheel(view, QPoint(300, 200), 5)
    assert not is_fitted(view)
    if how == "double click":
        qtbot.mouseDClick(view, LEFT, pos=QPoint(20, 20))
    else:
        qtbot.keyClick(view, {"f": Qt.Key.Key_F, "0": Qt.Key.Key_0, "home": Qt.Key.Key_Home}[how])
    assert is_fitted(view)
    assert view.is_following


def test_other_keys_are_left_to_others(view):
    """Truth: nothing moves, and the event is not taken; key code 0 comes from input methods."""
    before = view.camera
    for key in (Qt.Key.Key_A, Qt.Key.Key_unknown, Qt.Key.Key_F5, 0):
        event = QKeyEvent(QEvent.Type.KeyPress, int(key), Qt.KeyboardModifier.NoModifier)
        QApplication.sendEvent(view, event)
        assert not event.isAccepted()
    assert view.camera == before


def test_resize_keeps_a_fit(view):
    """Truth: fitted before and after."""
    view.resize(700, 500)
    QApplication.processEvents()
    assert is_fitted(view)


def test_resize_keeps_the_middle_of_a_chosen_view(view):
    """Truth: the place in the middle stays there."""
    turn_wheel(view, QPoint(300, 200), 3)
    middle = view.camera.to_um(QPointF(500.0, 300.0))
    view.resize(700, 500)
    QApplication.processEvents()
    assert view.camera.to_um(QPointF(350.0, 250.0)) == pytest.approx(middle)


def test_small_changes_leave_the_view_alone(view):
    """Truth: a slider moved a little does not move the paper; one moved far does, so that all stays in view."""
    before = view.camera
    view.show_shape(build_shape(ChannelParameters(loop_radius_um=325.0)))
    assert view.camera == before
    view.show_shape(build_shape(ChannelParameters(stages=12)))
    assert view.camera.um_per_px > before.um_per_px
    view.show_shape(build_shape(ChannelParameters(stages=1)))
    assert view.camera.um_per_px < before.um_per_px


def test_a_chosen_view_stays_whatever_the_shape(view):
    """Truth: the user's view wins."""
    turn_wheel(view, QPoint(300, 200), 3)
    chosen = view.camera
    view.show_shape(build_shape(ChannelParameters(stages=30)))
    assert view.camera == chosen


def test_zoom_glides_to_its_goal(view, qtbot):
    """Truth: the pointer's place stays all the way, and the end is that of a jump."""
    pointer = QPointF(300.0, 200.0)
    place, goal = view.camera.to_um(pointer), view.camera.zoomed(2.0, pointer)
    view.set_animated(True)
    seen = []
    view.view_changed.connect(lambda: seen.append(view.camera))
    view.zoom(2.0, pointer)
    qtbot.waitUntil(lambda: view.camera == goal)
    assert len(seen) > 1
    assert all(camera.to_um(pointer) == pytest.approx(place) for camera in seen)


def test_pointer_is_told(view, qtbot):
    """Truth: the camera's own map."""
    expected = view.camera.to_um(QPointF(250.0, 130.0))
    with qtbot.waitSignal(view.pointer_moved) as moved:
        qtbot.mouseMove(view, QPoint(250, 130))
    assert moved.args == pytest.approx(expected)
    with qtbot.waitSignal(view.pointer_left):
        QApplication.sendEvent(view, QEvent(QEvent.Type.Leave))


# --- findings


def test_marks_do_not_hide_one_another(view):
    """Truth: three findings have a place, two of them the same one."""
    view.show_shape(DOUBTFUL)
    boxes = view.finding_boxes()
    assert sorted(boxes) == [0, 1, 2]
    assert not boxes[0].intersects(boxes[1])
    assert boxes[0].contains(view.camera.to_px((1500.0, 200.0)))


def test_click_picks_a_finding(view, qtbot):
    """Truth: the index of the mark under the pointer; beside it none."""
    view.show_shape(DOUBTFUL)
    with qtbot.waitSignal(view.finding_selected) as picked:
        qtbot.mouseClick(view, LEFT, pos=view.finding_boxes()[2].center().toPoint())
    assert picked.args == [2]
    with qtbot.waitSignal(view.finding_selected) as picked:
        qtbot.mouseClick(view, LEFT, pos=QPoint(5, 5))
    assert picked.args == [-1]


def test_drag_picks_nothing(view, qtbot):
    """Truth: no signal when a drag starts on a mark."""
    view.show_shape(DOUBTFUL)
    start = view.finding_boxes()[2].center().toPoint()
    with qtbot.assertNotEmitted(view.finding_selected):
        qtbot.mousePress(view, LEFT, pos=start)
        qtbot.mouseMove(view, start + QPoint(40, 0))
        qtbot.mouseRelease(view, LEFT, pos=start + QPoint(40, 0))


def test_keys_step_through_findings(view, qtbot):
    """Truth: round and round in their order, then none."""
    view.show_shape(DOUBTFUL)
    order = []
    view.finding_selected.connect(order.append)
    for _ in range(5):
        qtbot.keyClick(view, Qt.Key.Key_PageDown)
    qtbot.keyClick(view, Qt.Key.Key_PageUp)
    qtbot.keyClick(view, Qt.Key.Key_Escape)
    assert order == [0, 1, 2, 3, 0, 3, -1]


def test_page_up_starts_at_the_last(view, qtbot):
    """Truth: backwards from none is the last."""
    view.show_shape(DOUBTFUL)
    qtbot.keyClick(view, Qt.Key.Key_PageUp)
    assert view.selected_finding == 3


def test_shown_finding_comes_into_view(view):
    """Truth: its place is inside the widget afterwards."""
    view.show_shape(DOUBTFUL)
    turn_wheel(view, QPoint(100, 300), 12)
    assert not view.is_in_view(3000.0, 0.0)
    view.show_finding(2)
    assert view.is_in_view(3000.0, 0.0)
    view.show_finding(99)
    assert view.selected_finding == 2


def test_picked_finding_goes_with_its_shape(view, qtbot):
    """Truth: a shape without findings has none picked."""
    view.show_shape(DOUBTFUL)
    view.show_finding(1)
    with qtbot.waitSignal(view.finding_selected) as picked:
        view.show_shape(GOOD)
    assert picked.args == [-1]


def test_tool_tip_tells_the_finding(view, monkeypatch):
    """Truth: the finding's message with the field's label, over its mark only."""
    told = []
    monkeypatch.setattr(QToolTip, "showText", lambda _pos, text, _widget: told.append(text))
    view.show_shape(DOUBTFUL)
    for point in (view.finding_boxes()[0].center().toPoint(), QPoint(5, 5)):
        QApplication.sendEvent(view, QHelpEvent(QEvent.Type.ToolTip, point, view.mapToGlobal(point)))
    assert told == ["Raise 'Stage gap'", ""]
