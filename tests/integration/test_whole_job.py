"""The whole job as one user does it: open, drag, undo, redo, add a set, save, reopen, export, read the files.

Truth: areas and island counts of the exported files come from readers that share no code with the
writers (pyogrio for DXF, klamath for GDSII) and are compared with the exact area of the outline.
"""

from __future__ import annotations

import klamath
import numpy as np
import pyogrio
import pytest
import shapely
from PySide6.QtCore import QPoint, Qt
from PySide6.QtGui import QKeySequence
from PySide6.QtWidgets import QApplication

from app.actions import ACTIONS
from app.panels.export import ExportDialog
from app.panels.export_work import What
from core.geometry.shape import build_shape
from core.project import read_project

pytest_plugins = ["tests.app.windows"]
pytestmark = [pytest.mark.gui, pytest.mark.qt_log_ignore("propagateSizeHints")]


@pytest.fixture
def sample(tmp_path, request):
    """Return a copy of a sample design that may be changed."""
    original = request.config.rootpath / "sample_designs" / "rinse-loop.sideloop"
    copy = tmp_path / original.name
    copy.write_bytes(original.read_bytes())
    return copy


def press(qtbot, window, name):
    words = next(each for each in ACTIONS if each.name == name)
    combination = QKeySequence(words.keys[0])[0]
    qtbot.keyClick(QApplication.focusWidget() or window, combination.key(), combination.keyboardModifiers())


def drag(qtbot, slider, to_tick):
    handle = slider._handle_rect()
    middle = slider.height() // 2
    span = slider.width() - handle.width()

    def at(tick):
        return QPoint(round(handle.width() / 2 + span * tick / slider.maximum()), middle)

    start = slider.value()
    qtbot.mousePress(slider, Qt.MouseButton.LeftButton, pos=at(start))
    for part in np.linspace(0.0, 1.0, 8)[1:]:
        qtbot.mouseMove(slider, at(start + part * (to_tick - start)))
    qtbot.mouseRelease(slider, Qt.MouseButton.LeftButton, pos=at(to_tick))


def dxf_area_mm2(path):
    """Return the area of all closed figures of a DXF file whose islands are cut into pieces."""
    frame = pyogrio.raw.read(path, columns=["Layer"])
    rings = shapely.get_parts(shapely.from_wkb(frame[2]))
    return float(sum(shapely.area(shapely.polygons(shapely.get_coordinates(ring))) for ring in rings))


def gdsii_area_um2(path):
    """Return the area of a GDSII file with every reference placed."""
    with path.open("rb") as stream:
        header = klamath.library.FileHeader.read(stream)
        cells = {}
        while (found := klamath.library.try_read_struct(stream)) is not None:
            cells[found[0]] = found[1]
    scale = header.meters_per_db_unit * 1e6

    def area(name):
        total = 0.0
        for element in cells[name]:
            if isinstance(element, klamath.elements.Boundary):
                total += abs(shapely.area(shapely.polygons(element.xy[:-1].astype(float))))
            elif isinstance(element, klamath.elements.Reference):
                total += area(element.struct_name)
        return total

    children = {e.struct_name for cell in cells.values() for e in cell if isinstance(e, klamath.elements.Reference)}
    (top,) = set(cells) - children
    return area(top) * scale**2


def test_the_whole_job(window, make_window, qtbot, sample, tmp_path):
    document = window.document
    assert window.files.open_path(sample)
    first = document.project
    assert window.parts.verdict.diodicity_label.text()

    # drag a slider: the drawing and the score follow, as one step
    editor = window.parts.sliders.editors["loop_radius_um"]
    before = document.channel.loop_radius_um
    window.parts.sliders.ensureWidgetVisible(editor)
    with qtbot.waitSignals([document.channel_changed, document.estimate_changed]):
        drag(qtbot, editor.slider, editor.slider.value() + 60)
    dragged = document.channel.loop_radius_um
    assert dragged > before
    assert document.undo_stack.count() == 1
    assert document.shape.is_usable
    assert window.parts.verdict.diodicity_label.text() == f"Di {document.assessment.score.diodicity:.3f}"

    # undo, redo
    press(qtbot, window, "undo")
    assert document.project == first
    press(qtbot, window, "redo")
    assert document.channel.loop_radius_um == dragged

    # add a set, and work on it by typing
    press(qtbot, window, "copy_set")
    name = document.current_set.name
    stages = window.parts.sliders.editors["stages"].entry
    stages.setFocus()
    stages.selectAll()
    qtbot.keyClicks(stages, "6")
    qtbot.keyClick(stages, Qt.Key.Key_Return)
    assert document.channel.stages == 6

    # save and reopen in another window
    press(qtbot, window, "save")
    assert not window.isWindowModified()
    assert read_project(sample) == document.project
    other = make_window()
    assert other.files.open_path(sample)
    assert other.document.project == document.project
    assert [each.name for each in other.document.project.sets].count(name) == 1

    # export
    other.actions_by_name["export"].trigger()
    dialog = other.findChild(ExportDialog)
    folder = tmp_path / "masks"
    dialog.choices.what_buttons[What.BARE].setChecked(True)
    dialog.choices.folder_entry.setText(str(folder))
    with qtbot.waitSignal(dialog.summary_shown, timeout=30_000):
        pass
    qtbot.mouseClick(dialog.write_button, Qt.MouseButton.LeftButton)
    with qtbot.waitSignal(dialog._job.ended, timeout=60_000):
        pass
    report = dialog.report
    assert report is not None, dialog.message.text()
    dialog.reject()

    # read the files with independent readers
    usable = [each for each in document.project.sets if build_shape(each.channel).is_usable]
    areas_um2 = sorted(build_shape(each.channel).outline.area_um2 for each in usable)
    dxf = sorted(dxf_area_mm2(path) * 1e6 for path in folder.glob("*.dxf"))
    gdsii = sorted(gdsii_area_um2(path) for path in folder.glob("*.gds"))
    # the reader breaks arcs into chords of its own; the GDSII chords lie within 0.02 um of the arcs
    assert dxf == pytest.approx(areas_um2, rel=1e-3)
    assert gdsii == pytest.approx(areas_um2, rel=3e-4)
    assert sorted(path.name for path in folder.iterdir()) == sorted(file.name for file in report.files)
