"""The chip's drawing under the hand: choose, carry, nudge, let go; copies; findings.

Truth: places of channels are those of the plan that was shown.
"""

from __future__ import annotations

import pytest
from PySide6.QtCore import QPoint, QPointF, Qt

from app.drawing.chip_shown import ShownChip
from app.drawing.chip_view import ChipView
from core.chip.plan import ChipChannel, ChipPlan
from core.chip.scene import Scene
from core.findings import Finding, Severity
from tests.app.drawing.chip_scenes import channel_block, chip_block, plate_scene

LEFT = Qt.MouseButton.LeftButton
WIDTH_UM, HEIGHT_UM = 14000.0, 8000.0
Y_UM = (2000.0, -2000.0)


def chip(names=("Alpha", "Beta")):
    """Return a chip with two channels one above the other."""
    block = chip_block("CHIP", (channel_block(4),) * 2, width_um=WIDTH_UM, height_um=12000.0)
    y_um = [placed.dy_um for placed in block.placed]
    channels = tuple(ChipChannel(set_name=name, x_um=0.25, y_um=y) for name, y in zip(names, y_um, strict=True))
    plan = ChipPlan(chip_width_um=WIDTH_UM, chip_height_um=12000.0, channels=channels)
    return ShownChip.of(Scene(top=block), plan, [(block, 0.0, 0.0)])


def made_finding(x_um=0.0, y_um=0.0):
    return Finding(
        code="made_up", severity=Severity.ERROR, message="lower spacing_um", field="spacing_um", x_um=x_um, y_um=y_um
    )


@pytest.fixture
def view(qtbot):
    made = ChipView()
    qtbot.addWidget(made)
    made.set_animated(False)
    made.resize(1000, 600)
    made.show_chip(chip())
    with qtbot.waitExposed(made):
        made.show()
    made.setFocus()
    return made


def middle_of(view, index):
    return view.box_of(index).center().toPoint()


def carry(qtbot, view, start, end):
    qtbot.mousePress(view, LEFT, pos=start)
    for share in (0.3, 0.7, 1.0):
        qtbot.mouseMove(view, start + (end - start) * share)
    qtbot.mouseRelease(view, LEFT, pos=end)


def test_click_takes_a_channel_in_hand_and_beside_it_none(view, qtbot):
    chosen = []
    view.channel_selected.connect(chosen.append)
    qtbot.mouseClick(view, LEFT, pos=middle_of(view, 1))
    qtbot.mouseClick(view, LEFT, pos=middle_of(view, 0))
    qtbot.mouseClick(view, LEFT, pos=QPoint(5, 5))
    assert chosen == [1, 0, -1]


def test_space_steps_through_channels(view, qtbot):
    chosen = []
    view.channel_selected.connect(chosen.append)
    for modifier in (Qt.KeyboardModifier.NoModifier,) * 3 + (Qt.KeyboardModifier.ShiftModifier,):
        qtbot.keyClick(view, Qt.Key.Key_Space, modifier)
    assert chosen == [0, 1, 0, 1]


def test_a_carried_channel_is_put_down_on_whole_micrometres(view, qtbot):
    start, by = middle_of(view, 0), QPoint(37, -21)
    with qtbot.waitSignal(view.move_requested) as moved:
        carry(qtbot, view, start, start + by)
    index, x_um, y_um, is_held = moved.args
    place = view.shown.plan.channels[0]
    assert (index, is_held) == (0, False)
    assert (x_um, y_um) == (round(x_um), round(y_um))
    assert x_um == pytest.approx(place.x_um + 37 * view.camera.um_per_px, abs=0.51)
    assert y_um == pytest.approx(place.y_um + 21 * view.camera.um_per_px, abs=0.51)
    assert view.selected == 0


def test_what_is_told_while_carrying_is_where_it_will_stand(view, qtbot):
    start = middle_of(view, 0)
    qtbot.mousePress(view, LEFT, pos=start)
    qtbot.mouseMove(view, start + QPoint(37, -21))
    told = view._picture._place_text()
    with qtbot.waitSignal(view.move_requested) as moved:
        qtbot.mouseRelease(view, LEFT, pos=start + QPoint(37, -21))
    _, x_um, y_um, _ = moved.args
    assert told == f"Alpha: x {x_um:g} \N{MICRO SIGN}m, y {y_um:g} \N{MICRO SIGN}m"


def test_escape_while_carrying_leaves_it_where_it_was(view, qtbot):
    start = middle_of(view, 0)
    qtbot.mousePress(view, LEFT, pos=start)
    qtbot.mouseMove(view, start + QPoint(40, 0))
    with qtbot.assertNotEmitted(view.move_requested):
        qtbot.keyClick(view, Qt.Key.Key_Escape)
        qtbot.mouseRelease(view, LEFT, pos=start + QPoint(40, 0))
    assert view.selected == 0, "it is still in hand"


def test_a_drag_beside_all_channels_takes_the_paper_along(view, qtbot):
    before = view.camera
    with qtbot.assertNotEmitted(view.move_requested):
        carry(qtbot, view, QPoint(20, 300), QPoint(60, 310))
    after = before.moved(40.0, 10.0)
    assert (view.camera.left_um, view.camera.top_um) == pytest.approx((after.left_um, after.top_um))


@pytest.mark.parametrize(
    ("modifier", "step_um"), [(Qt.KeyboardModifier.NoModifier, 100.0), (Qt.KeyboardModifier.ShiftModifier, 1.0)]
)
def test_arrows_move_the_channel_in_hand(view, qtbot, modifier, step_um):
    view.select(1)
    place = view.shown.plan.channels[1]
    wanted = {
        Qt.Key.Key_Left: (-step_um, 0.0), Qt.Key.Key_Right: (step_um, 0.0),
        Qt.Key.Key_Up: (0.0, step_um), Qt.Key.Key_Down: (0.0, -step_um),
    }  # fmt: skip
    for key, (dx, dy) in wanted.items():
        with qtbot.waitSignal(view.move_requested) as moved:
            qtbot.keyClick(view, key, modifier)
        assert moved.args == [1, round(place.x_um + dx), round(place.y_um + dy), False]


def test_arrows_pan_when_nothing_is_in_hand(view, qtbot):
    before = view.camera
    qtbot.keyClick(view, Qt.Key.Key_Left)
    assert view.camera == before.moved(60.0, 0.0)


def test_delete_asks_to_remove(view, qtbot):
    with qtbot.assertNotEmitted(view.remove_requested):
        qtbot.keyClick(view, Qt.Key.Key_Delete)
    view.select(1)
    with qtbot.waitSignal(view.remove_requested) as removed:
        qtbot.keyClick(view, Qt.Key.Key_Delete)
    assert removed.args == [1]


def test_another_chip_lets_go_of_what_it_does_not_have(view, qtbot):
    view.select(1)
    block = chip_block("CHIP", (channel_block(4),), width_um=WIDTH_UM, height_um=HEIGHT_UM)
    plan = ChipPlan(chip_width_um=WIDTH_UM, chip_height_um=HEIGHT_UM, channels=(ChipChannel(set_name="Alpha"),))
    with qtbot.waitSignal(view.channel_selected) as chosen:
        view.show_chip(ShownChip.of(Scene(top=block), plan, [(block, 0.0, 0.0)]))
    assert chosen.args == [-1]
    view.show_chip(None)
    assert not view.grab().isNull()


def test_findings_are_stepped_through_and_clicked(view, qtbot):
    view.show_chip(chip(), (made_finding(-3000.0), made_finding(3000.0)))
    picked = []
    view.finding_selected.connect(picked.append)
    qtbot.keyClick(view, Qt.Key.Key_PageDown)
    qtbot.keyClick(view, Qt.Key.Key_PageDown)
    qtbot.mouseClick(view, LEFT, pos=view.finding_boxes()[0].center().toPoint())
    qtbot.keyClick(view, Qt.Key.Key_Escape)
    assert picked == [0, 1, 0, -1]


def test_a_shown_finding_comes_into_view(view):
    view.show_chip(chip(), (made_finding(6000.0, 5000.0),))
    view.zoom(30.0, QPointF(100.0, 300.0))
    assert not view.is_in_view(6000.0, 5000.0)
    view.show_finding(0)
    assert view.is_in_view(6000.0, 5000.0)


@pytest.fixture
def plate(view):
    scene = plate_scene(copies_across=3, stages=4, channels=2, is_stepped=False)
    chips = [(placed.block, placed.dx_um, placed.dy_um) for placed in scene.top.placed]
    pitch_um = chips[1][1] - chips[0][1]
    channels = tuple(ChipChannel(set_name=name) for name in ("Alpha", "Beta"))
    rise_um = chips[3][2] - chips[0][2]
    plan = ChipPlan(
        chip_width_um=pitch_um - 200.0, chip_height_um=rise_um - 200.0, plate="wafer", wafer_diameter_um=80000.0,
        channels=channels,
    )  # fmt: skip
    view.show_chip(ShownChip.of(scene, plan, chips), (made_finding(),))
    view.fit()
    return chips


def test_the_middle_chip_of_a_plate_is_in_hand_first(view, plate):
    assert plate[view.copy_in_hand][1:] == (0.0, 0.0)


def test_a_click_takes_another_chip_of_the_plate_in_hand(view, plate, qtbot):
    _, dx, dy = plate[8]
    qtbot.mouseClick(view, LEFT, pos=view.camera.to_px((dx, dy + 2500.0)).toPoint())
    assert view.copy_in_hand == 8
    mark = view.finding_boxes()[0].center()
    assert (mark - view.camera.to_px((dx, dy))).manhattanLength() < 1.0, "its findings are marked on that chip"


def test_c_shows_one_chip_and_f_the_whole_plate(view, plate, qtbot):
    whole = view.camera
    qtbot.keyClick(view, Qt.Key.Key_C)
    assert view.camera.um_per_px < 0.5 * whole.um_per_px
    assert view.is_in_view(0.0, 0.0)
    qtbot.keyClick(view, Qt.Key.Key_F)
    assert view.camera == whole


def test_the_drawing_is_told_in_words(view):
    view.show_chip(chip(), (made_finding(),))
    view.select(1)
    words = view.accessibleDescription()
    for part in ("14000", "Alpha", "Beta", "in hand: Beta", "Lower 'Channel spacing'"):
        assert part in words


def test_a_line_over_the_drawing(view):
    before = view.grab().toImage()
    view.show_message("Drawing the plate")
    assert view.grab().toImage() != before
    view.show_message("")
    assert view.grab().toImage() == before
