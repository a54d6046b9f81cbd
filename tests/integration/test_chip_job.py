"""From a set to an order as one user does it: choose a process, meet a finding, cure it, place, fill a wafer, write.

Truth: what the scene means, put together by shapely, against five readers that share no code with the writers.
"""

from __future__ import annotations

from datetime import date

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QKeySequence
from PySide6.QtWidgets import QApplication

from app.actions import ACTIONS
from app.panels.export import ExportDialog
from core.findings import Severity
from core.operating import OperatingPoint
from core.parameters import ChannelParameters
from core.project import ChipProject, ParameterSet, read_project
from core.project.order import order_of
from tests.core.masks.truth import check_files

pytest_plugins = ["tests.app.windows"]
pytestmark = [pytest.mark.gui, pytest.mark.slow, pytest.mark.qt_log_ignore("propagateSizeHints")]


def press(qtbot, window, name):
    """Start an action by its first key."""
    words = next(each for each in ACTIONS if each.name == name)
    combination = QKeySequence(words.keys[0])[0]
    qtbot.keyClick(QApplication.focusWidget() or window, combination.key(), combination.keyboardModifiers())
    QApplication.processEvents()


def choose(qtbot, box, word):
    """Choose a word of a box by the arrow keys."""
    box.setFocus()
    step = Qt.Key.Key_Down if box.findData(word) > box.currentIndex() else Qt.Key.Key_Up
    while box.currentData() != word:
        qtbot.keyClick(box, step)
    QApplication.processEvents()


def blocking(window):
    return [each for each in window.parts.verdict.findings.findings if each.severity is Severity.ERROR]


def narrow_project() -> ChipProject:
    """Return a chip whose sets a film mask cannot hold, and of which one is deeper than a cast lid can be."""
    channel = ChannelParameters(
        channel_width_um=40.0, loop_width_um=40.0, loop_radius_um=90.0, stage_gap_um=150.0, depth_um=60.0, stages=2,
        nose_radius_um=10.0,
    )  # fmt: skip
    sets = (
        ParameterSet(name="Fine loops", channel=channel.with_values({"depth_um": 90.0})),
        ParameterSet(name="Fine loops, more", channel=channel.with_values({"depth_um": 80.0, "stages": 4})),
    )
    operating = OperatingPoint(flow_ul_min=100.0)
    return ChipProject(name="Wafer chip", lab="Fernhollow Bench Fluidics", sets=sets, operating=operating)


def test_from_a_set_to_an_order(window, qtbot, tmp_path):
    document, panel = window.document, window.parts.verdict.findings
    document.load(narrow_project(), path=None)

    # the film mask cannot hold it; the chrome mask can, but the walls would lean
    qtbot.waitUntil(lambda: any("channel_width_um" in each.message for each in blocking(window)), timeout=10_000)
    press(qtbot, window, "show_process")
    choose(qtbot, window.parts.process.kind_box, "cast, chrome mask")
    assert document.process.kind == "cast, chrome mask"
    qtbot.waitUntil(lambda: bool(blocking(window)) and blocking(window)[0].cure is not None, timeout=10_000)

    # step to the finding and cure it by key
    press(qtbot, window, "next_finding")
    assert panel.chosen == 0
    press(qtbot, window, "use_cure")  # bypass and loop are as wide, so that one cure is good for both
    qtbot.waitUntil(lambda: not blocking(window), timeout=10_000)
    assert document.channel.depth_um == pytest.approx(80.0)

    # two sets are packed; one stands there twice, and a straight control beside it
    press(qtbot, window, "show_chip")
    assert [each.set_name for each in window.chip.outcome.plan.channels] == ["Fine loops", "Fine loops, more"]
    press(qtbot, window, "place_set")
    press(qtbot, window, "place_control")
    placed = [(each.set_name, each.is_control) for each in document.plan.channels]
    assert placed == [
        ("Fine loops", False), ("Fine loops, more", False), ("Fine loops", False), ("Fine loops", True),
    ]  # fmt: skip
    assert not [each for each in window.chip.outcome.findings if each.severity is Severity.ERROR]

    # a wafer full of them
    choose(qtbot, window.parts.chip.editors["plate"].box, "wafer")
    qtbot.waitUntil(lambda: "chips on the wafer" in window.parts.chip.count_label.text(), timeout=20_000)

    # saved, and the order written from what is saved
    file = tmp_path / "wafer.sideloop"
    window.ask.path = file
    press(qtbot, window, "save")
    project = read_project(file)
    assert (project.process, project.plan) == (document.process, document.plan)
    report = ordered(window, qtbot, tmp_path / "order")
    order = order_of(project, date=date.today())
    assert check_files(report, order.scene, order.options, most_readers=1) == 2


def ordered(window, qtbot, folder):
    """Write the order through the dialog and return its report."""
    window.actions_by_name["export"].trigger()
    dialog = window.findChild(ExportDialog)
    with qtbot.waitSignal(dialog.summary_shown, timeout=60_000):
        dialog.choices.folder_entry.setText(str(folder))
    qtbot.waitUntil(dialog.write_button.isEnabled, timeout=60_000)
    qtbot.mouseClick(dialog.write_button, Qt.MouseButton.LeftButton)
    with qtbot.waitSignal(dialog._job.ended, timeout=120_000):
        pass
    assert dialog.report is not None, dialog.message.text()
    assert sorted(path.name for path in folder.iterdir()) == sorted(file.name for file in dialog.report.files)
    report = dialog.report
    dialog.reject()
    return report
