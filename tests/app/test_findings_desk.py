"""From choosing a process to a channel that it can make, as a user goes.

Truth: the shipped limits of the process, and that a cure takes its finding away in one step that undo takes back.
"""

from __future__ import annotations

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication

from app.look import Scheme
from core.fabrication.shipped import shipped_process
from core.findings import Finding, Severity

pytest_plugins = ["tests.app.windows"]
pytestmark = pytest.mark.qt_log_ignore("propagateSizeHints")

ON_CHIP = (
    ("", Finding(code="port_edge", severity=Severity.ERROR, message="a port is off the chip", field="chip_width_um",
                 x_um=1.0, y_um=2.0, cure=("chip_width_um", 50000.0))),
    ("Set 1 2", Finding(code="near", severity=Severity.WARNING, message="channels are near", field="stages",
                      cure=("stages", 3))),
)  # fmt: skip


def press(window, qtbot, name):
    """Press the keys of an action."""
    action = window.actions_by_name[name]
    combination = action.shortcut()[0]
    qtbot.keyClick(QApplication.focusWidget() or window, combination.key(), combination.keyboardModifiers())


def told(window, qtbot, code):
    """Wait until a finding is listed and return its row."""
    panel = window.parts.verdict.findings

    def is_listed():
        assert code in [finding.code for finding in panel.findings]

    qtbot.waitUntil(is_listed)
    return [finding.code for finding in panel.findings].index(code)


def rests(window, qtbot):
    """Wait until what follows from the last change is shown."""
    window.document.settle()
    panel = window.parts.verdict.findings
    qtbot.waitUntil(lambda: not window.findings._throttle._rest.isActive() and not panel._is_searching, timeout=15_000)


@pytest.fixture
def narrow(window, qtbot):
    """Return a window whose channel is too narrow for the process, and the finding's row."""
    window.document.change_channel({"channel_width_um": 60.0, "loop_width_um": 60.0, "depth_um": 60.0})
    window.parts.left.setCurrentWidget(window.parts.process)
    box = window.parts.process.kind_box
    box.setFocus()
    assert window.parts.verdict.findings.findings == ()
    while box.currentData() != "laser-cut film":
        qtbot.keyClick(box, Qt.Key.Key_Down)
    assert window.document.process == shipped_process("laser-cut film")
    rests(window, qtbot)
    return window


def test_a_process_that_cannot_make_it_says_so(narrow):
    panel = narrow.parts.verdict.findings
    assert panel.findings, "60 um is too narrow for a laser that makes 250 um"
    assert panel.heading.text().startswith("Findings: ")
    assert panel.findings[0].severity is Severity.ERROR
    assert panel.list.item(0).text().startswith("\N{BLACK DIAMOND} Blocks: ")
    assert narrow.parts.drawing.findings == panel.findings


def test_a_finding_is_stepped_to_cured_and_taken_back_by_key(window, qtbot):
    document, panel, drawing = window.document, window.parts.verdict.findings, window.parts.drawing
    document.change_channel({"channel_width_um": 45.0, "loop_width_um": 60.0, "depth_um": 50.0})
    rests(window, qtbot)
    cured = [i for i, finding in enumerate(panel.findings) if finding.cure is not None]
    assert cured, "45 um is below the 50 um of this process"
    press(window, qtbot, "next_finding")
    while panel.chosen != cured[0]:
        press(window, qtbot, "next_finding")
    finding = panel.findings[cured[0]]
    assert drawing.selected_finding == cured[0]
    if finding.x_um is not None:
        assert drawing.is_in_view(finding.x_um, finding.y_um)
    assert panel.cure_button.isVisible()
    assert panel.cure_button.text().startswith("&Use ")
    steps, before = document.undo_stack.count(), document.project
    press(window, qtbot, "use_cure")
    rests(window, qtbot)
    assert document.undo_stack.count() == steps + 1
    assert finding.code not in [each.code for each in panel.findings if each.field == finding.field]
    press(window, qtbot, "undo")
    rests(window, qtbot)
    assert document.project == before
    assert finding in panel.findings


def test_the_button_cures_too(window, qtbot):
    window.document.change_channel({"channel_width_um": 45.0, "loop_width_um": 60.0, "depth_um": 50.0})
    rests(window, qtbot)
    panel = window.parts.verdict.findings
    row = next(i for i, finding in enumerate(panel.findings) if finding.cure is not None)
    code = panel.findings[row].code
    panel.list.setCurrentRow(row)
    qtbot.mouseClick(panel.cure_button, Qt.MouseButton.LeftButton)
    rests(window, qtbot)
    assert code not in [each.code for each in panel.findings]
    assert not panel.cure_button.isVisible() or panel.chosen >= 0


def test_stepping_back_goes_round(narrow, qtbot):
    panel, drawing = narrow.parts.verdict.findings, narrow.parts.drawing
    press(narrow, qtbot, "previous_finding")
    assert panel.chosen == drawing.selected_finding == len(panel.findings) - 1
    press(narrow, qtbot, "next_finding")
    assert panel.chosen == drawing.selected_finding == 0


def test_a_mark_that_is_clicked_is_pointed_at_and_the_view_stays(window, qtbot):
    drawing, panel = window.parts.drawing, window.parts.verdict.findings
    window.document.change_channel({"channel_width_um": 45.0, "loop_width_um": 60.0, "depth_um": 50.0})
    rests(window, qtbot)
    boxes = drawing.finding_boxes()
    index, box = next((i, box) for i, box in boxes.items() if drawing.rect().contains(box.center().toPoint()))
    before = drawing.camera
    qtbot.mouseClick(drawing, Qt.MouseButton.LeftButton, pos=box.center().toPoint())
    assert panel.chosen == index
    assert drawing.camera == before


def test_pressure_above_what_the_bond_holds_is_found(window, qtbot):
    """Truth: 200 kPa over a safety factor of 2 is passed at some flow, and not at a hundredth of it."""

    def codes():
        return {finding.code for finding in window.parts.verdict.findings.findings}

    window.document.change_operating({"flow_ul_min": 50000.0})
    rests(window, qtbot)
    assert window.document.assessment.score.highest_pressure_pa > 100_000.0
    high = codes()
    window.document.change_operating({"flow_ul_min": 500.0})
    rests(window, qtbot)
    assert high - codes(), "a finding went with the pressure"


def test_enter_leads_to_a_field_of_the_process(window, qtbot):
    window.document.change_process({"min_width_um": 400.0})
    window.parts.reveal_field("min_width_um")
    assert window.parts.left.currentWidget() is window.parts.process
    assert window.parts.process.editors["min_width_um"].entry.hasFocus()
    window.parts.reveal_field("loop_radius_um")
    assert window.parts.sliders.editors["loop_radius_um"].entry.hasFocus()


def test_findings_of_the_chip_are_listed_behind_and_cured(window, qtbot):
    document, panel, desk = window.document, window.parts.verdict.findings, window.findings
    document.add_set()
    document.select_set(0)
    rests(window, qtbot)
    own = len(panel.findings)
    desk.show_chip_findings(ON_CHIP)
    assert desk.first_chip_number == own + 1
    assert [finding.code for finding in panel.findings[own:]] == ["port_edge", "near"]
    assert "Blocks, chip: " in panel.list.item(own).text()
    assert "Note, Set 1 2: " in panel.list.item(own + 1).text()
    with qtbot.waitSignal(desk.chip_finding_chosen, check_params_cb=lambda index: index == 1):
        panel.list.setCurrentRow(own + 1)
    assert window.parts.drawing.selected_finding == -1
    press(window, qtbot, "use_cure")
    assert document.current_set.name == "Set 1 2"
    assert document.channel.stages == 3
    desk.choose_chip_finding(0)
    assert panel.findings[panel.chosen].code == "port_edge"
    press(window, qtbot, "use_cure")
    assert document.plan.chip_width_um == 50000.0
    desk.show_chip_findings(())
    assert "port_edge" not in [finding.code for finding in panel.findings]


def test_a_finding_of_the_set_in_hand_is_not_listed_twice(narrow, qtbot):
    panel, home = narrow.parts.verdict.findings, narrow.document.current_set.name
    count = len(panel.findings)
    narrow.findings.show_chip_findings([(home, panel.findings[0]), *ON_CHIP])
    assert len(panel.findings) == count + 2
    with qtbot.waitSignal(narrow.findings.chip_finding_chosen, check_params_cb=lambda index: index == 2):
        panel.list.setCurrentRow(count + 1)


def test_a_cure_that_is_no_longer_allowed_is_told(window):
    bad = Finding(code="x", severity=Severity.ERROR, message="x", field="stages", cure=("stages", 9999))
    window.findings.show_chip_findings([("", bad)])
    before = window.document.project
    window.findings.apply_cure(len(window.parts.drawing.findings))
    assert window.document.project is before
    assert "9999" in window.statusBar().currentMessage()


# --- as drawn and as made


@pytest.mark.parametrize("scheme", [Scheme.LIGHT, Scheme.DARK])
def test_walls_as_drawn_and_as_made_are_switched_by_key(window, qtbot, scheme):
    window.look.set_scheme(scheme)
    document, drawing = window.document, window.parts.drawing
    beside = drawing._picture.beside
    assert not beside.is_shown, "nothing differs as long as nothing moves the walls"
    document.change_process({"bias_um": 15.0})
    document.settle()
    assert not beside.is_shown, "compensated: what is made is what is wanted"
    before = drawing.grab().toImage()
    press(window, qtbot, "show_drawn")
    assert beside.is_shown
    assert drawing.grab().toImage() != before
    press(window, qtbot, "show_drawn")
    assert drawing.grab().toImage() == before
    document.change_process({"allowance": "not at all"})
    document.settle()
    assert beside.is_shown, "what is made differs, and is shown without being asked for"
    press(window, qtbot, "show_made")
    assert not beside.is_shown


def test_the_verdict_says_how_it_is_made_and_what_that_does(window):
    label = window.parts.verdict.notes_label
    window.document.choose_process("milled mould")
    window.document.settle()
    assert "As it will be made: milled mould" in window.parts.verdict.condition_label.text()
    assert "enlarged once" in label.text()
    assert "'Nose radius' is 10 \N{MICRO SIGN}m as wanted and comes out as 100 \N{MICRO SIGN}m" in label.text()


@pytest.mark.parametrize("size", [(1280, 720), (1600, 1000)])
@pytest.mark.parametrize("kind", ["cast, film mask", "milled mould"])
def test_nothing_of_the_process_page_is_cut_off(window, size, kind):
    window.document.choose_process(kind)
    window.parts.left.setCurrentWidget(window.parts.process)
    window.resize(*size)
    QApplication.processEvents()
    column = window.parts.process.column
    assert (window.width(), window.height()) == size
    assert window.parts.drawing.width() > 0.4 * size[0]
    assert column.widget().minimumSizeHint().width() <= column.viewport().width()
