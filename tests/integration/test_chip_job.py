"""From a process to a wafer of chips as one user does it: choose, cure, place, fill, write, read the files.

Truth: how many chips a wafer holds is counted here by trying every place; how many islands stand on it follows from
the stages that were placed; areas are those of the exact outlines. The files are read by klamath (GDSII) and pyogrio
(DXF), which share no code with the writers.
"""

from __future__ import annotations

from datetime import date
from itertools import product
from math import hypot

import klamath
import numpy as np
import pyogrio
import pytest
import shapely
from PySide6.QtCore import Qt
from PySide6.QtGui import QKeySequence
from PySide6.QtWidgets import QApplication

from app.actions import ACTIONS
from app.panels.export import ExportDialog
from core.chip.scene import BlockKind
from core.fabrication.shipped import shipped_process
from core.findings import Severity
from core.parameters import ChannelParameters
from core.project import ChipProject, ParameterSet, read_project
from core.project.order import order_of

pytest_plugins = ["tests.app.windows"]
pytestmark = [pytest.mark.gui, pytest.mark.slow, pytest.mark.qt_log_ignore("propagateSizeHints")]

STAGES = (4, 6, 8)


def press(qtbot, window, name):
    words = next(each for each in ACTIONS if each.name == name)
    combination = QKeySequence(words.keys[0])[0]
    qtbot.keyClick(QApplication.focusWidget() or window, combination.key(), combination.keyboardModifiers())
    QApplication.processEvents()


def typed(qtbot, entry, text):
    entry.setFocus()
    entry.selectAll()
    qtbot.keyClicks(entry, text)
    qtbot.keyClick(entry, Qt.Key.Key_Return)
    QApplication.processEvents()


def chosen(box, words):
    """Pick a choice of a box as the user does, by its words."""
    box.setCurrentIndex(next(i for i in range(box.count()) if box.itemText(i).casefold() == words.casefold()))
    box.activated.emit(box.currentIndex())
    QApplication.processEvents()


def chips_on_wafer(plan):
    """Count the chips whose corners all lie inside the free circle, for the best of the four natural grids."""
    pitch = plan.chip_width_um + plan.street_um, plan.chip_height_um + plan.street_um
    radius, half = (
        plan.wafer_diameter_um / 2 - plan.edge_exclusion_um,
        (plan.chip_width_um / 2, plan.chip_height_um / 2),
    )

    def count(along, up):
        places = product(np.arange(-60, 61) + along, np.arange(-60, 61) + up)
        return sum(hypot(abs(i) * pitch[0] + half[0], abs(j) * pitch[1] + half[1]) <= radius for i, j in places)

    return max(count(along, up) for along in (0.0, 0.5) for up in (0.0, 0.5))


class Gdsii:
    """Cells of a file as klamath reads them."""

    def __init__(self, path):
        with path.open("rb") as stream:
            self.um = klamath.library.FileHeader.read(stream).meters_per_db_unit * 1e6
            self.cells = {}
            while (found := klamath.library.try_read_struct(stream)) is not None:
                self.cells[found[0]] = found[1]
        children = {each.struct_name for cell in self.cells.values() for each in self.references(cell)}
        (self.top,) = set(self.cells) - children

    @staticmethod
    def references(cell):
        return [each for each in cell if isinstance(each, klamath.elements.Reference)]

    @staticmethod
    def copies(reference):
        return [
            np.array(reference.xy[0], dtype=float) + column * step_x + row * step_y
            for columns, rows in [reference.colrow or (1, 1)]
            for step_x in [(reference.xy[1] - reference.xy[0]) / columns if reference.colrow else np.zeros(2)]
            for step_y in [(reference.xy[2] - reference.xy[0]) / rows if reference.colrow else np.zeros(2)]
            for column in range(columns)
            for row in range(rows)
        ]

    def polygons(self, name, layer):
        """Return all figures of a layer in a cell and below it [database units]."""
        own = [
            shapely.polygons(each.xy[:-1].astype(float))
            for each in self.cells[name]
            if isinstance(each, klamath.elements.Boundary) and each.layer[0] == layer
        ]
        for reference in self.references(self.cells[name]):
            below = self.polygons(reference.struct_name, layer)
            for shift in self.copies(reference) if below else ():
                own += [shapely.transform(each, lambda xy, by=shift: xy + by) for each in below]
        return own


def dxf_areas_mm2(path):
    """Return the area of each layer's closed figures, every insert placed."""
    pyogrio.set_gdal_config_options({"OGR_ARC_STEPSIZE": "1"})
    how = {"CLOSED_LINE_AS_POLYGON": "YES", "MERGE_BLOCK_GEOMETRIES": "NO"}
    _, _, shapes, (layers,) = pyogrio.raw.read(path, columns=["Layer"], **how)
    areas = shapely.area(shapely.from_wkb(shapes))
    return {str(layer): float(areas[layers == layer].sum()) for layer in set(layers)}


@pytest.fixture
def begun(window, tmp_path):
    """Begin with one set, meant for another process, whose loop is narrower than a film mask can show."""
    channel = ChannelParameters(stages=STAGES[0], loop_width_um=40.0, depth_um=60.0)
    project = ChipProject(
        name="Rinse wafer",
        sets=(ParameterSet(name="Alpha", channel=channel),),
        process=shipped_process("laser-cut film"),
        lab="Fernhollow Bench Fluidics",
    )
    window.document.load(project, path=tmp_path / "rinse-wafer.sideloop")
    QApplication.processEvents()
    return window


def test_from_a_process_to_a_wafer(begun, qtbot, tmp_path):
    window, document, parts = begun, begun.document, begun.parts

    # choose the process: it objects to the loop
    press(qtbot, window, "show_process")
    chosen(parts.process.kind_box, "cast, film mask")
    assert document.process == shipped_process("cast, film mask")
    panel = parts.verdict.findings
    qtbot.waitUntil(lambda: any(finding.field == "loop_width_um" for finding in panel.findings))

    # go to the finding and use its cure, until nothing blocks
    for _ in range(5):
        errors = [finding for finding in panel.findings if finding.severity is Severity.ERROR]
        if not errors:
            break
        while panel.chosen < 0 or panel.findings[panel.chosen] != errors[0]:
            press(qtbot, window, "next_finding")
        qtbot.waitUntil(lambda: panel.findings[panel.chosen].cure is not None)
        press(qtbot, window, "use_cure")
        qtbot.waitUntil(lambda gone=errors[0]: gone not in panel.findings)
    assert not errors
    assert document.channel.loop_width_um >= document.process.min_width_um

    # two more channels like it, longer
    for stages in STAGES[1:]:
        press(qtbot, window, "copy_set")
        press(qtbot, window, "show_channel")
        typed(qtbot, parts.sliders.editors["stages"].entry, str(stages))
    assert tuple(each.channel.stages for each in document.project.sets) == STAGES

    # on the chip: all three packed, and a control beside the first
    press(qtbot, window, "show_chip")
    assert [each.set_name for each in window.chip.outcome.plan.channels] == [e.name for e in document.project.sets]
    document.select_set(0)
    press(qtbot, window, "place_control")
    assert [each.is_control for each in document.plan.channels] == [False, False, False, True]
    parts.chip_view.setFocus()
    qtbot.keyClick(parts.chip_view, Qt.Key.Key_Up, Qt.KeyboardModifier.ShiftModifier)
    qtbot.keyClick(parts.chip_view, Qt.Key.Key_Down, Qt.KeyboardModifier.ShiftModifier)
    assert not [finding for finding in window.chip.outcome.findings if finding.severity is Severity.ERROR]

    # fill a wafer
    chosen(parts.chip.editors["plate"].box, "wafer")
    copies = chips_on_wafer(document.plan)
    assert len(parts.chip_view.shown.copies) == copies > 1
    assert f"{copies} chips on the wafer" in parts.chip.count_label.text()

    # save, write, read back
    press(qtbot, window, "save")
    assert read_project(tmp_path / "rinse-wafer.sideloop").plan == document.plan
    press(qtbot, window, "export")
    dialog = window.findChild(ExportDialog)
    folder = tmp_path / "order"
    dialog.choices.folder_entry.setText(str(folder))
    qtbot.waitUntil(
        lambda: dialog.write_button.isEnabled() and str(folder) in dialog.page.toPlainText(), timeout=60_000
    )
    qtbot.mouseClick(dialog.write_button, Qt.MouseButton.LeftButton)
    with qtbot.waitSignal(dialog._job.ended, timeout=120_000):
        pass
    assert dialog.report is not None, dialog.message.text()
    assert sorted(path.name for path in folder.iterdir()) == sorted(file.name for file in dialog.report.files)
    dialog.reject()

    scene = order_of(document.project, date=date(2031, 5, 17)).scene
    chip = next(placed.block for placed in scene.top.placed if placed.block.kind is BlockKind.CHIP)
    bodies = [placed.block.body for placed in chip.placed if placed.channel is not None]
    area_um2 = copies * sum(body.outline.area_um2 for body in bodies)

    gdsii = Gdsii(next(folder.glob("*.gds")))
    figures = gdsii.polygons(gdsii.top, 1)
    channels = shapely.get_parts(shapely.union_all(figures))
    assert len(channels) == 4 * copies, "three rectifiers and a control on each chip"
    assert sum(len(each.interiors) for each in channels) == sum(STAGES) * copies
    assert shapely.area(figures).sum() * gdsii.um**2 == pytest.approx(area_um2, rel=3e-4)
    for each in channels[:8]:
        x0, y0, x1, y1 = np.array(each.bounds) * gdsii.um
        assert hypot(max(-x0, x1), max(-y0, y1)) < document.plan.wafer_diameter_um / 2

    areas = dxf_areas_mm2(next(folder.glob("*.dxf")))
    assert areas["L1_CHAN"] * 1e6 == pytest.approx(area_um2, rel=1e-3)
    assert set(areas) >= {"L1_CHAN", "PORTS", "MARKS", "TEXT"}
