"""The export dialog: summary before, proof after, nothing half done, the window never waits.

Truth for the proof: the files on the disk themselves (their sizes, and their checksums by hashlib).
"""

from __future__ import annotations

import hashlib
import threading

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QWidget

from app.panels import export
from app.panels.export import ExportDialog
from core.errors import ExportError
from tests.app.answers import ReadyAnswers


@pytest.fixture
def folder(tmp_path):
    return tmp_path / "out"


@pytest.fixture
def parent(qtbot):
    parent = QWidget()
    qtbot.addWidget(parent)
    return parent


@pytest.fixture
def dialog(qtbot, parent, document, settings, folder):
    dialog = ExportDialog(parent, document=document, settings=settings, ask=ReadyAnswers())
    dialog.choices.folder_entry.setText(str(folder))
    with qtbot.waitExposed(dialog):
        dialog.open()
    summarised(qtbot, dialog)
    return dialog


def summarised(qtbot, dialog):
    """Wait until the choices as they stand have been looked at."""
    with qtbot.waitSignal(dialog.summary_shown, timeout=30_000):
        pass


def written(qtbot, dialog):
    """Press Write, once it can be pressed, and wait for the end."""
    if not dialog.write_button.isEnabled():
        summarised(qtbot, dialog)
    qtbot.mouseClick(dialog.write_button, Qt.MouseButton.LeftButton)
    with qtbot.waitSignal(dialog._job.ended, timeout=30_000):
        pass


def test_summary_before_writing(dialog, folder):
    page = dialog.page.toPlainText()
    assert str(folder) in page
    for word in ("ALPHA", "BETA", "DXF R2000", "GDSII", "read back"):
        assert word.lower() in page.lower()
    assert not folder.exists(), "nothing is written before it is asked for"


def test_blocked_sets_cannot_be_ticked(dialog):
    item = dialog.choices.set_list.item(2)
    assert "blocked" in item.text().lower()
    assert not item.flags() & Qt.ItemFlag.ItemIsEnabled
    assert [each.name for each in dialog.choices.chosen_sets()] == ["Alpha", "Beta"]


def test_writing_and_proof(dialog, qtbot, folder):
    written(qtbot, dialog)
    assert dialog.report is not None
    assert sorted(path.name for path in folder.iterdir()) == sorted(file.name for file in dialog.report.files)
    page = dialog.page.toPlainText()
    for file in dialog.report.files:
        data = (folder / file.name).read_bytes()
        assert len(data) == file.size_bytes
        assert hashlib.sha256(data).hexdigest() in page
        assert all(sentence in page for sentence in file.proofs)
    assert "All files are in" in dialog.message.text()
    assert dialog.close_button.text() == "&Close"


def test_formats_and_one_mask_for_all(dialog, qtbot, folder):
    from core.masks.options import DxfVersion, MaskFormat

    dialog.choices.format_boxes[MaskFormat.GDSII].setChecked(False)
    dialog.choices.version_box.setCurrentIndex(dialog.choices.version_box.findData(DxfVersion.R12))
    dialog.choices.combined_box.setChecked(True)
    dialog.choices.preview_box.setChecked(False)
    written(qtbot, dialog)
    assert sum(path.suffix == ".dxf" for path in folder.iterdir()) == 1
    assert not any(path.suffix in (".gds", ".svg") for path in folder.iterdir())


@pytest.mark.parametrize(
    ("spoil", "words"),
    [
        (lambda c: c.number_entries["chord_tolerance_um"].setText("coarse"), "chord_tolerance_um is 'coarse'"),
        (lambda c: c.number_entries["clearance_um"].setText("1"), "at least 10"),
        (lambda c: [box.setChecked(False) for box in c.format_boxes.values()], "at least one"),
        (lambda c: [c.set_list.item(i).setCheckState(Qt.CheckState.Unchecked) for i in range(2)], "No set is ticked"),
    ],
)
def test_choices_that_cannot_be_are_told_before(dialog, qtbot, spoil, words):
    spoil(dialog.choices)
    summarised(qtbot, dialog)
    assert words in dialog.message.text()
    assert not dialog.write_button.isEnabled()


def test_an_unwritable_folder_is_told_and_leaves_nothing(dialog, qtbot, tmp_path):
    blocked = tmp_path / "file"
    blocked.write_text("in the way")
    dialog.choices.folder_entry.setText(str(blocked / "masks"))
    written(qtbot, dialog)
    assert dialog.report is None
    assert "cannot be written" in dialog.message.text()
    assert blocked.read_text() == "in the way"
    assert dialog.write_button.isEnabled(), "another folder can be tried"


def test_a_mismatch_is_told(dialog, qtbot, monkeypatch):
    def mismatch(*_args, **_options):
        raise ExportError("ALPHA.dxf does not read back as drawn")

    monkeypatch.setattr(export, "write_mask_set", mismatch)
    written(qtbot, dialog)
    assert "does not read back" in dialog.message.text()


def test_stopping(dialog, qtbot, monkeypatch, folder):
    reached, go_on = threading.Event(), threading.Event()

    def slow(channel):
        reached.set()
        assert go_on.wait(10)
        return original(channel)

    original = export.shape_of
    monkeypatch.setattr(export, "shape_of", slow)
    qtbot.mouseClick(dialog.write_button, Qt.MouseButton.LeftButton)
    assert reached.wait(10)
    assert dialog.close_button.text() == "&Stop"
    assert not dialog.choices.isEnabled()
    with qtbot.waitSignal(dialog._job.ended, timeout=10_000):
        dialog.reject()
        assert dialog.isVisible(), "it closes only when the work has ended"
        go_on.set()
    assert "no file was written" in dialog.message.text()
    assert not folder.exists()


def test_choices_are_remembered(dialog, qtbot, document, settings):
    dialog.choices.combined_box.setChecked(True)
    dialog.choices.number_entries["chord_tolerance_um"].setText("0.05")
    written(qtbot, dialog)
    again = ExportDialog(dialog.parentWidget(), document=document, settings=settings, ask=ReadyAnswers())
    again.reject()
    assert again.choices.combined_box.isChecked()
    assert again.choices.options().chord_tolerance_um == 0.05


def test_nonsense_in_the_settings_is_passed_over(dialog, document, settings):
    settings.set_choices("masks", '{"formats": ["PAPER"], "colour": 3}')
    again = ExportDialog(dialog.parentWidget(), document=document, settings=settings, ask=ReadyAnswers())
    again.reject()
    assert len(again.choices.options().formats) == 2


def test_the_folder_is_asked_for(dialog, qtbot, tmp_path):
    dialog.choices._ask.path = tmp_path / "elsewhere"
    qtbot.mouseClick(dialog.choices.folder_button, Qt.MouseButton.LeftButton)
    assert dialog.choices.folder == tmp_path / "elsewhere"


def test_closing_while_the_summary_is_made(qtbot, parent, document, settings):
    dialog = ExportDialog(parent, document=document, settings=settings, ask=ReadyAnswers())
    dialog.open()
    assert dialog._summary_job is not None
    dialog.reject()
    assert not parent.findChildren(ExportDialog) or not dialog.isVisible()


def test_choices_made_meanwhile_are_looked_at_next(dialog, qtbot):
    dialog.show_summary()
    dialog.choices.combined_box.setChecked(True)
    assert not dialog.write_button.isEnabled()
    summarised(qtbot, dialog)
    assert dialog.write_button.isEnabled()
    assert "BETA" not in dialog.page.toPlainText(), "one mask for all carries the name of the chip"
