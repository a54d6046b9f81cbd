"""The slider column under hand and keys. Truth: the document must hold what the user did, in as many steps."""

from __future__ import annotations

import pytest
from PySide6.QtCore import QPoint, Qt

from app.panels.field_editor import ChoiceEditor, NumberEditor
from app.panels.sliders import SlidersPanel
from core.operating import OPERATING_FIELDS
from core.parameters import CHANNEL_FIELDS


@pytest.fixture
def panel(qtbot, document, settings):
    panel = SlidersPanel(document, settings)
    qtbot.addWidget(panel)
    panel.resize(320, 1400)
    with qtbot.waitExposed(panel):
        panel.show()
    return panel


def typed(qtbot, editor, text):
    editor.entry.setFocus()
    editor.entry.selectAll()
    qtbot.keyClicks(editor.entry, text)
    qtbot.keyClick(editor.entry, Qt.Key.Key_Return)


def place_px(slider, tick):
    """Where the handle's middle is for a place, by the style's own rule."""
    handle = slider._handle_rect()
    span = slider.width() - handle.width()
    return QPoint(round(handle.width() / 2 + span * tick / slider.maximum()), slider.height() // 2)


def test_every_field_has_a_row_with_words_and_limits(panel):
    assert set(panel.editors) == {*CHANNEL_FIELDS, *OPERATING_FIELDS}
    for name, editor in panel.editors.items():
        field = editor.field
        assert editor.name_label.text() == field.label
        assert field.help in editor.toolTip()
        assert "Allowed" in editor.toolTip()
        assert isinstance(editor, ChoiceEditor if field.choices else NumberEditor), name


def test_typing_is_one_step(panel, qtbot, document):
    typed(qtbot, panel.editors["loop_radius_um"], "345.5")
    assert document.channel.loop_radius_um == 345.5
    assert document.undo_stack.count() == 1


def test_typing_in_another_unit(panel, qtbot, document, settings):
    settings.set_unit("length", "mm")
    editor = panel.editors["loop_radius_um"]
    assert editor.entry.text() == "0.32"
    assert editor.unit_label.text() == "mm"
    typed(qtbot, editor, "0.4")
    assert document.channel.loop_radius_um == pytest.approx(400.0)


@pytest.mark.parametrize(
    ("name", "text", "words"),
    [
        ("loop_radius_um", "wide", ["Loop radius", "'wide'", "5 to 10000 µm", "320 µm stays"]),
        ("loop_radius_um", "3", ["3", "at least 5", "320 µm stays"]),
        ("loop_radius_um", "1,5", ["'1,5'", "give a number"]),
        ("loop_angle_deg", "500", ["500", "10 to 120 °", "at most 120"]),
        ("stages", "2.5", ["whole number"]),
        ("flow_ul_min", "nan", ["finite"]),
        ("flow_ul_min", "", ["Flow", "give a number"]),
    ],
)
def test_bad_typing_is_told_under_the_field_and_changes_nothing(panel, qtbot, document, name, text, words):
    before = document.project
    editor = panel.editors[name]
    kept = editor.entry.text()
    editor.entry.setFocus()
    editor.entry.selectAll()
    qtbot.keyClick(editor.entry, Qt.Key.Key_Backspace)
    typed(qtbot, editor, text)
    assert document.project is before
    assert editor.problem_label.isVisible()
    for word in words:
        assert word in editor.problem_label.text()
    assert editor.entry.text() == kept
    typed(qtbot, editor, "4" if name == "stages" else "50")
    assert not editor.problem_label.isVisible(), "the complaint goes with the next good value"


def test_a_fluid_that_cannot_be_is_told(panel, qtbot, document):
    typed(qtbot, panel.editors["temperature_c"], "95")
    editor = panel.editors["fluid"]
    index = editor.box.findData("ethanol")
    editor.box.setCurrentIndex(index)
    editor.box.activated.emit(index)
    assert document.operating.fluid == "water"
    assert editor.box.currentData() == "water"
    assert "95" in editor.problem_label.text()


def test_fields_of_other_fluids_are_hidden(panel, document):
    editors = panel.editors
    assert not editors["glycerol_percent"].isVisible()
    document.change_operating({"fluid": "glycerol-water"})
    assert editors["glycerol_percent"].isVisible()
    document.change_operating({"fluid": "own"})
    assert not editors["glycerol_percent"].isVisible()
    assert editors["own_density_kg_m3"].isVisible()
    assert editors["own_viscosity_mpa_s"].isVisible()


def test_dragging_is_one_step(panel, qtbot, document):
    slider = panel.editors["loop_radius_um"].slider
    ticks = (slider.value(), slider.value() + 50, slider.value() + 100)
    qtbot.mousePress(slider, Qt.MouseButton.LeftButton, pos=place_px(slider, ticks[0]))
    for tick in ticks[1:]:
        qtbot.mouseMove(slider, place_px(slider, tick))
    qtbot.mouseRelease(slider, Qt.MouseButton.LeftButton, pos=place_px(slider, ticks[-1]))
    assert document.channel.loop_radius_um > 320.0
    assert document.undo_stack.count() == 1
    document.undo_stack.undo()
    assert document.channel.loop_radius_um == 320.0
    assert panel.editors["loop_radius_um"].entry.text() == "320"


def test_a_press_beside_the_handle_takes_it_there(panel, qtbot, document):
    slider = panel.editors["loop_angle_deg"].slider
    target = place_px(slider, 60)
    qtbot.mouseClick(slider, Qt.MouseButton.LeftButton, pos=target)
    assert document.channel.loop_angle_deg == pytest.approx(70.0, abs=1.0)
    assert document.undo_stack.count() == 1


@pytest.mark.parametrize(
    ("key", "radius"),
    [
        (Qt.Key.Key_Right, 325.0),
        (Qt.Key.Key_Down, 315.0),
        (Qt.Key.Key_PageUp, 370.0),
        (Qt.Key.Key_End, 10000.0),
        (Qt.Key.Key_Home, 5.0),
    ],
)
def test_keys_on_the_slider_step_as_the_field_says(panel, qtbot, document, key, radius):
    qtbot.keyClick(panel.editors["loop_radius_um"].slider, key)
    assert document.channel.loop_radius_um == radius


def test_arrows_in_the_entry_step_too(panel, qtbot, document):
    qtbot.keyClick(panel.editors["stages"].entry, Qt.Key.Key_Up)
    assert document.channel.stages == 2
    for _ in range(5):
        qtbot.keyClick(panel.editors["stages"].entry, Qt.Key.Key_Down)
    assert document.channel.stages == 0, "the bound holds"


def test_escape_takes_typing_back(panel, qtbot, document):
    entry = panel.editors["loop_radius_um"].entry
    entry.setFocus()
    qtbot.keyClicks(entry, "99")
    qtbot.keyClick(entry, Qt.Key.Key_Escape)
    assert entry.text() == "320"
    assert document.undo_stack.count() == 0


def test_reset_goes_back_to_the_default(panel, qtbot, document):
    editor = panel.editors["depth_um"]
    assert not editor.reset_button.isVisible()
    typed(qtbot, editor, "80")
    assert editor.reset_button.isVisible()
    qtbot.mouseClick(editor.reset_button, Qt.MouseButton.LeftButton)
    assert document.channel.depth_um == CHANNEL_FIELDS["depth_um"].default


def test_the_wheel_never_changes_a_design(panel, qtbot, document):
    from PySide6.QtCore import QPointF
    from PySide6.QtGui import QWheelEvent
    from PySide6.QtWidgets import QApplication

    before = document.project
    for widget in (panel.editors["loop_radius_um"].slider, panel.editors["sides"].box):
        middle = QPointF(widget.rect().center())
        event = QWheelEvent(
            middle, middle, QPoint(), QPoint(0, 120), Qt.MouseButton.NoButton,
            Qt.KeyboardModifier.NoModifier, Qt.ScrollPhase.NoScrollPhase, False,
        )  # fmt: skip
        QApplication.sendEvent(widget, event)
    assert document.project is before


def test_focus_points_the_field_out(panel, qtbot):
    with qtbot.waitSignal(panel.field_attended, check_params_cb=lambda name: name == "depth_um"):
        panel.editors["depth_um"].entry.setFocus()


def test_groups_close_and_reveal_opens_them(panel, qtbot):
    editor = panel.editors["nose_radius_um"]
    group = panel.groups[editor.field.group]
    qtbot.mouseClick(group.header, Qt.MouseButton.LeftButton)
    assert not editor.isVisible()
    panel.reveal("nose_radius_um")
    assert editor.isVisible()
    assert editor.entry.hasFocus()


def test_the_column_follows_the_document(panel, document):
    document.select_set(1)
    assert panel.editors["loop_radius_um"].entry.text() == "400"
    document.change_channel({"sides": "same"})
    assert panel.editors["sides"].box.currentData() == "same"
