"""The page of the chip's plan and the table of what is placed: both ways, refusals told, nothing half done.

Truth: the plan in the document, and the table of its fields.
"""

from __future__ import annotations

from dataclasses import replace

import pytest
from PySide6.QtCore import Qt

from app.panels.chip import ChipPanel
from app.panels.chip_places_model import COLUMNS, PlacesModel
from app.shown_values import ShownUnits
from core.chip.plan import CHIP_FIELDS, ChipChannel, ChipPlan, SteppedField


@pytest.fixture
def panel(qtbot, document, settings):
    panel = ChipPanel(document, settings)
    qtbot.addWidget(panel)
    panel.resize(360, 900)
    with qtbot.waitExposed(panel):
        panel.show()
    return panel


def typed(qtbot, entry, text):
    entry.setFocus()
    entry.selectAll()
    qtbot.keyClicks(entry, text)
    qtbot.keyClick(entry, Qt.Key.Key_Return)


def test_every_field_of_the_plan_has_a_row(panel):
    assert list(panel.editors) == list(CHIP_FIELDS)
    assert list(panel.groups) == list(dict.fromkeys(field.group for field in CHIP_FIELDS.values()))


def test_a_typed_size_is_taken_and_undone(panel, qtbot, document):
    typed(qtbot, panel.editors["chip_width_um"].entry, "25000")
    assert document.plan.chip_width_um == 25000.0
    assert document.undo_stack.undo_text == "Chip width 40000 to 25000 \N{MICRO SIGN}m"
    document.undo_stack.undo()
    assert panel.editors["chip_width_um"].entry.text() == "40000"


def test_a_size_out_of_bounds_is_refused_in_the_row(panel, qtbot, document):
    typed(qtbot, panel.editors["chip_width_um"].entry, "3")
    assert document.plan.chip_width_um == 40000.0
    assert "at least 500" in panel.editors["chip_width_um"].problem_label.text()


@pytest.mark.parametrize(
    ("plate", "shown"),
    [
        ("single chip", set()),
        ("wafer", {"wafer_diameter_um", "edge_exclusion_um", "street_um"}),
        ("plate", {"plate_width_um", "plate_height_um", "edge_exclusion_um", "street_um"}),
    ],
)
def test_only_fields_that_mean_something_are_shown(panel, document, plate, shown):
    document.change_plan_values({"plate": plate})
    named = ("wafer_diameter_um", "plate_width_um", "plate_height_um", "edge_exclusion_um", "street_um")
    assert {name for name in named if not panel.editors[name].isHidden()} == shown
    assert panel.series.isHidden() == (plate == "single chip")


def test_a_row_that_comes_makes_the_column_as_wide_as_it_needs(panel, qtbot, document, settings):
    """Nothing runs under the edge: the column never scrolls sideways."""
    panel.resize(10, 900)
    rows = (SteppedField(name="loop_radius_um", first=320.0, last=400.0, steps=5),)
    document.change_plan(replace(document.plan, plate="wafer", series=rows), "x")
    for unit in ("mm", "um"):
        settings.set_unit("length", unit)
        qtbot.waitUntil(lambda: panel.column.width() <= panel.viewport().width())
        reset = panel.editors["plate"].reset_button
        assert reset.isVisible()
        right = reset.mapTo(panel.viewport(), reset.rect().topRight()).x()
        assert right < panel.viewport().width()
    assert panel.minimumWidth() < 340, "a series needs no more room than the rows above it"


def test_a_button_back_to_the_default_is_drawn_whole(panel, document):
    document.change_plan_values({"plate": "wafer"})
    for editor in (panel.editors["plate"], panel.editors["chip_width_um"]):
        assert editor.reset_button.height() == 24
        assert editor.reset_button.minimumHeight() <= 24


def test_words_on_the_chip(panel, qtbot, document):
    assert panel.label_entry.placeholderText() == "Bench chip"
    typed(qtbot, panel.label_entry, "rinse 4")
    assert document.plan.label == "rinse 4"
    typed(qtbot, panel.label_entry, "x" * 61)
    assert document.plan.label == "rinse 4"
    assert panel.label_entry.text() == "rinse 4"
    assert "60" in panel.label_problem.text()
    document.undo_stack.undo()
    assert panel.label_entry.text() == ""
    assert panel.label_problem.text() == ""


def choose(qtbot, row, name):
    row.box.setCurrentIndex(row.box.findData(name))
    row.box.activated.emit(row.box.currentIndex())


def test_two_fields_are_stepped_over_the_plate(panel, qtbot, document):
    document.change_plan_values({"plate": "wafer"})
    first, second = panel.series.series_rows
    choose(qtbot, first, "loop_radius_um")
    typed(qtbot, first.entries["first"], "250")
    typed(qtbot, first.entries["last"], "400")
    typed(qtbot, first.entries["steps"], "4")
    choose(qtbot, second, "stage_gap_um")
    assert document.plan.series[0] == SteppedField(name="loop_radius_um", first=250.0, last=400.0, steps=4)
    assert document.plan.series[1].name == "stage_gap_um"
    assert document.undo_stack.undo_text == "Step Loop radius, Stage gap over the plate"
    choose(qtbot, first, "")
    assert [each.name for each in document.plan.series] == ["stage_gap_um"]


@pytest.mark.parametrize(("name", "text"), [("first", "1e9"), ("steps", "1"), ("last", "wide"), ("last", "320")])
def test_a_series_that_cannot_be_is_told_and_the_old_one_stays(panel, qtbot, document, name, text):
    series = (SteppedField(name="loop_radius_um", first=320.0, last=400.0, steps=5),)
    document.change_plan(replace(document.plan, plate="wafer", series=series), "x")
    row = panel.series.series_rows[0]
    typed(qtbot, row.entries[name], text)
    assert document.plan.series == series
    assert "stays as it was" in panel.series.problem_label.text()
    assert row.entries["last"].text() == "400"


def test_the_same_field_twice_is_told(panel, qtbot, document):
    document.change_plan_values({"plate": "wafer"})
    for row in panel.series.series_rows:
        choose(qtbot, row, "loop_radius_um")
    assert len(document.plan.series) == 1
    assert "no other series" in panel.series.problem_label.text()


def test_lengths_of_a_series_follow_the_unit(panel, qtbot, document, settings):
    series = (SteppedField(name="loop_radius_um", first=250.0, last=400.0, steps=4),)
    document.change_plan(replace(document.plan, plate="wafer", series=series), "x")
    settings.set_unit("length", "mm")
    row = panel.series.series_rows[0]
    assert row.entries["first"].text() == "0.25"
    typed(qtbot, row.entries["last"], "0.5")
    assert document.plan.series[0].last == pytest.approx(500.0)


# --- the table of what is placed


PLAN = ChipPlan(channels=(ChipChannel(set_name="Alpha", x_um=120.0), ChipChannel(set_name="Alpha", is_control=True)))


def made_model(qtmodeltester):
    model = PlacesModel()
    model.show_plan(PLAN, ShownUnits())
    qtmodeltester.check(model)
    return model


def cell(model, row, name):
    return model.index(row, next(i for i, field in enumerate(COLUMNS) if field is not None and field.name == name))


def test_the_table_shows_the_plan(qapp, qtmodeltester):
    model = made_model(qtmodeltester)
    assert [model.index(row, 0).data() for row in range(2)] == ["Alpha", "Alpha control"]
    assert cell(model, 0, "x_um").data() == "120"
    heads = [model.headerData(column, Qt.Orientation.Horizontal) for column in range(model.columnCount())]
    assert heads == ["Channel", "Across [\N{MICRO SIGN}m]", "Up [\N{MICRO SIGN}m]", "Turn [\N{DEGREE SIGN}]", "Rows"]
    model.show_plan(PLAN, ShownUnits(length="mm"))
    assert cell(model, 0, "x_um").data() == "0.12"
    model.show_plan(None, ShownUnits())
    assert model.rowCount() == 0


def test_numbers_are_read_short_and_typed_in_full(qtbot, qapp, qtmodeltester):
    model = PlacesModel()
    model.show_plan(ChipPlan(channels=(ChipChannel(set_name="Alpha", turn_deg=-7.92805634),)), ShownUnits())
    qtmodeltester.check(model)
    turn = cell(model, 0, "turn_deg")
    assert turn.data() == "-7.928"
    assert turn.data(Qt.ItemDataRole.EditRole) == "-7.928056"
    with qtbot.assertNotEmitted(model.place_requested):
        assert model.setData(turn, "-7.928056"), "left as it was: the value keeps all its digits"
    with qtbot.waitSignal(model.place_requested) as asked:
        assert model.setData(turn, "-7.928")
    assert asked.args == [0, "turn_deg", -7.928]


def test_a_typed_place_is_asked_for_in_stored_units(qtbot, qapp, qtmodeltester):
    model = made_model(qtmodeltester)
    model.show_plan(PLAN, ShownUnits(length="mm"))
    with qtbot.waitSignal(model.place_requested) as asked:
        assert model.setData(cell(model, 1, "y_um"), "-1.5")
    assert asked.args == [1, "y_um", pytest.approx(-1500.0)]


@pytest.mark.parametrize(("name", "text"), [("x_um", "left"), ("rows", "0"), ("rows", "1.5"), ("turn_deg", "400")])
def test_a_place_that_cannot_be_is_refused(qtbot, qapp, qtmodeltester, name, text):
    model = made_model(qtmodeltester)
    with qtbot.assertNotEmitted(model.place_requested), qtbot.waitSignal(model.refused) as refused:
        assert not model.setData(cell(model, 0, name), text)
    assert refused.args[0].field == name
    assert not model.setData(model.index(0, 0), "Beta"), "the name is not typed here"
