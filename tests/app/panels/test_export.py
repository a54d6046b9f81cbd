"""The export dialog: summary before, proof after, nothing half done, the window never waits.

Truth for the proof: the files on the disk themselves (their sizes, and their checksums by hashlib).
"""

from __future__ import annotations

import hashlib
import threading
from dataclasses import replace

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QWidget

from app.document import Document
from app.panels import export_work
from app.panels.export import ExportDialog
from app.panels.export_work import What
from core.chip.plan import ChipChannel
from core.errors import ExportError
from core.parameters import ChannelParameters
from core.project import ChipProject, ParameterSet
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
def sound(qapp):
    """Return a chip that nothing speaks against, with two sets."""
    sets = (
        ParameterSet(name="Alpha", channel=ChannelParameters(stages=1)),
        ParameterSet(name="Beta", channel=ChannelParameters(stages=2, loop_radius_um=400)),
    )
    return Document(ChipProject(name="Bench chip", lab="Fernhollow Bench Fluidics", sets=sets))


@pytest.fixture
def opened(qtbot, parent, settings, folder):
    """Return a function that opens the dialog on a document and waits for the summary."""

    def open_on(document):
        dialog = ExportDialog(parent, document=document, settings=settings, ask=ReadyAnswers())
        dialog.choices.folder_entry.setText(str(folder))
        with qtbot.waitExposed(dialog):
            dialog.open()
        summarised(qtbot, dialog)
        return dialog

    return open_on


@pytest.fixture
def order(opened, sound):
    return opened(sound)


@pytest.fixture
def bare(qtbot, opened, document):
    """Open the dialog on a chip with a blocked set and choose bare channels."""
    dialog = opened(document)
    dialog.choices.what_buttons[What.BARE].setChecked(True)
    summarised(qtbot, dialog)
    return dialog


def summarised(qtbot, dialog):
    """Wait until the choices as they stand have been looked at."""
    with qtbot.waitSignal(dialog.summary_shown, timeout=60_000):
        pass


def written(qtbot, dialog):
    """Press Write, once it can be pressed, and wait for the end."""
    if not dialog.write_button.isEnabled():
        summarised(qtbot, dialog)
    qtbot.mouseClick(dialog.write_button, Qt.MouseButton.LeftButton)
    with qtbot.waitSignal(dialog._job.ended, timeout=60_000):
        pass


# --- an order


def test_summary_of_an_order_before_writing(order, folder):
    page = order.page.toPlainText()
    assert str(folder) in page
    for word in ("BENCH_CHIP", "DXF R2000", "GDSII", "read back", "2 channels", "CLEAR", "Cautions", "confirm"):
        assert word.lower() in page.lower(), word
    assert not folder.exists(), "nothing is written before it is asked for"
    assert not order.choices.force_box.isVisible()


def test_an_order_is_written_and_proven(order, qtbot, folder):
    written(qtbot, order)
    assert order.report is not None, order.message.text()
    assert sorted(path.name for path in folder.iterdir()) == sorted(file.name for file in order.report.files)
    page = order.page.toPlainText()
    for file in order.report.files:
        data = (folder / file.name).read_bytes()
        assert len(data) == file.size_bytes
        assert hashlib.sha256(data).hexdigest() in page
        assert all(sentence in page for sentence in file.proofs)
    assert "Cautions" in page
    assert "All files are in" in order.message.text()
    assert order.close_button.text() == "&Close"


@pytest.fixture
def overlapping(sound):
    """Put both channels of that chip at one place."""
    channels = tuple(ChipChannel(set_name=name) for name in ("Alpha", "Beta"))
    sound.change_plan(replace(sound.plan, channels=channels), "Put both in the middle")
    return sound


def test_findings_hold_an_order_back_until_it_is_forced(opened, overlapping, qtbot, folder):
    dialog = opened(overlapping)
    assert "overlap" in dialog.page.toPlainText()
    assert not dialog.write_button.isEnabled()
    assert "cure" in dialog.message.text()
    assert dialog.choices.force_box.isVisible()
    assert not dialog.choices.is_forced, "it must be said each time"
    qtbot.mouseClick(dialog.choices.force_box, Qt.MouseButton.LeftButton)
    assert dialog.write_button.isEnabled()
    assert "sheet" in dialog.message.text()


def test_a_new_look_takes_the_force_back(opened, overlapping, qtbot, folder, tmp_path):
    dialog = opened(overlapping)
    dialog.choices.force_box.setChecked(True)
    dialog.choices.folder_entry.setText(str(tmp_path / "elsewhere"))
    summarised(qtbot, dialog)
    assert not dialog.choices.is_forced
    assert not dialog.write_button.isEnabled()


def test_a_forced_order_says_so(opened, sound, qtbot, folder):
    sound.change_process({"min_width_um": 300.0})  # a finding that leaves something to draw
    dialog = opened(sound)
    assert dialog.choices.force_box.isVisible(), dialog.page.toPlainText()
    dialog.choices.force_box.setChecked(True)
    written(qtbot, dialog)
    assert dialog.report is not None, dialog.message.text()
    assert "passed over" in dialog.page.toPlainText()
    sheet = next(folder.glob("*ORDER.txt")).read_text()
    assert "min_width_um" in sheet or "300" in sheet


def test_nothing_to_draw_cannot_be_forced(opened, qtbot, qapp):
    blocked = ParameterSet(name="Blocked", channel=ChannelParameters(loop_radius_um=20))
    dialog = opened(Document(ChipProject(name="Bench chip", sets=(blocked,))))
    assert not dialog.write_button.isEnabled()
    assert not dialog.choices.force_box.isVisible()
    assert "nothing to write" in dialog.message.text()


def test_the_way_to_the_file_choices(order, qtbot):
    with qtbot.waitSignal(order.process_requested):
        qtbot.mouseClick(order.choices.process_button, Qt.MouseButton.LeftButton)
    assert not order.isVisible()


@pytest.mark.parametrize("format_word", ["DXF", "GDSII"])
def test_formats_come_from_the_process(opened, sound, qtbot, folder, format_word):
    sound.change_process({"formats": format_word})
    written(qtbot, opened(sound))
    suffix, other = (".dxf", ".gds") if format_word == "DXF" else (".gds", ".dxf")
    assert list(folder.glob(f"*{suffix}"))
    assert not list(folder.glob(f"*{other}"))


def test_an_unwritable_folder_is_told_and_leaves_nothing(order, qtbot, tmp_path):
    blocked = tmp_path / "file"
    blocked.write_text("in the way")
    order.choices.folder_entry.setText(str(blocked / "masks"))
    written(qtbot, order)
    assert order.report is None
    assert "cannot be written" in order.message.text()
    assert blocked.read_text() == "in the way"
    assert order.write_button.isEnabled(), "another folder can be tried"


def test_a_mismatch_is_told(order, qtbot, monkeypatch):
    def mismatch(*_args, **_options):
        raise ExportError("BENCH_CHIP.dxf does not read back as drawn")

    monkeypatch.setattr(export_work, "write_order", mismatch)
    written(qtbot, order)
    assert "does not read back" in order.message.text()


def test_stopping_leaves_nothing(order, qtbot, monkeypatch, folder):
    reached, go_on = threading.Event(), threading.Event()

    def slow(*args, report, **how):
        def held(*told):
            reached.set()
            assert go_on.wait(10)
            report(*told)

        return original(*args, report=held, **how)

    original = export_work.write_order
    monkeypatch.setattr(export_work, "write_order", slow)
    qtbot.mouseClick(order.write_button, Qt.MouseButton.LeftButton)
    assert reached.wait(20)
    assert order.close_button.text() == "&Stop"
    assert not order.choices.isEnabled()
    with qtbot.waitSignal(order._job.ended, timeout=20_000):
        order.reject()
        assert order.isVisible(), "it closes only when the work has ended"
        go_on.set()
    assert "no file was written" in order.message.text()
    assert not folder.exists()


def test_progress_and_time_left(order, monkeypatch):
    order._began_s -= 0.0
    monkeypatch.setattr("app.panels.export.time.monotonic", lambda: order._began_s + 10.0)
    order._on_job_progressed(1, 4, "Writing")
    assert order.message.text() == "Writing; about 30 s left"
    assert (order.progress.value(), order.progress.maximum()) == (1, 4)


def test_the_folder_is_asked_for(order, qtbot, tmp_path):
    order.choices._ask.path = tmp_path / "elsewhere"
    qtbot.mouseClick(order.choices.folder_button, Qt.MouseButton.LeftButton)
    assert order.choices.folder == tmp_path / "elsewhere"


def test_closing_while_the_summary_is_made(qtbot, parent, sound, settings):
    dialog = ExportDialog(parent, document=sound, settings=settings, ask=ReadyAnswers())
    dialog.open()
    assert dialog._summary_job is not None
    dialog.reject()
    assert not parent.findChildren(ExportDialog) or not dialog.isVisible()


# --- bare channels


def test_summary_of_bare_channels(bare, folder):
    page = bare.page.toPlainText()
    assert str(folder) in page
    for word in ("ALPHA", "BETA", "DXF R2000", "GDSII", "read back"):
        assert word.lower() in page.lower()
    assert not folder.exists()


def test_blocked_sets_cannot_be_ticked(bare):
    item = bare.choices.set_list.item(2)
    assert "blocked" in item.text().lower()
    assert not item.flags() & Qt.ItemFlag.ItemIsEnabled
    assert bare.choices.task().names == ("Alpha", "Beta")


def test_bare_channels_are_written_and_proven(bare, qtbot, folder):
    written(qtbot, bare)
    assert bare.report is not None, bare.message.text()
    assert sorted(path.name for path in folder.iterdir()) == sorted(file.name for file in bare.report.files)
    assert sum(path.suffix == ".dxf" for path in folder.iterdir()) == 2


def test_one_mask_for_all_and_no_picture(bare, qtbot, folder):
    bare.choices.combined_box.setChecked(True)
    bare.choices.preview_box.setChecked(False)
    written(qtbot, bare)
    assert sum(path.suffix == ".dxf" for path in folder.iterdir()) == 1
    assert not any(path.suffix == ".svg" for path in folder.iterdir())


@pytest.mark.parametrize(
    ("spoil", "words"),
    [
        (lambda c: c.clearance_entry.setText("wide"), "'Clearance' is 'wide'"),
        (lambda c: c.clearance_entry.setText("1"), "at least 10"),
        (lambda c: [c.set_list.item(i).setCheckState(Qt.CheckState.Unchecked) for i in range(2)], "No set is ticked"),
    ],
)
def test_choices_that_cannot_be_are_told_before(bare, qtbot, spoil, words):
    spoil(bare.choices)
    summarised(qtbot, bare)
    assert words.replace("'Clearance'", "clearance_um") in bare.message.text()
    assert not bare.write_button.isEnabled()


def test_choices_are_remembered(bare, qtbot, document, settings):
    bare.choices.combined_box.setChecked(True)
    bare.choices.clearance_entry.setText("1500")
    written(qtbot, bare)
    again = ExportDialog(bare.parentWidget(), document=document, settings=settings, ask=ReadyAnswers())
    again.reject()
    assert again.choices.what is What.BARE
    assert again.choices.combined_box.isChecked()
    assert again.choices.task().options().clearance_um == 1500.0


@pytest.mark.parametrize("nonsense", ['{"what": "paper", "colour": 3}', '{"clearance_um": "wide"}', "[]", "{"])
def test_nonsense_in_the_settings_is_passed_over(parent, document, settings, nonsense):
    settings.set_choices("masks", nonsense)
    again = ExportDialog(parent, document=document, settings=settings, ask=ReadyAnswers())
    again.reject()
    assert again.choices.what is What.ORDER
    again.choices.what_buttons[What.BARE].setChecked(True)
    assert again.choices.task().options().clearance_um == 2000.0


def test_choices_made_meanwhile_are_looked_at_next(bare, qtbot):
    bare.show_summary()
    bare.choices.combined_box.setChecked(True)
    assert not bare.write_button.isEnabled()
    summarised(qtbot, bare)
    assert bare.write_button.isEnabled()
    assert "BETA" not in bare.page.toPlainText(), "one mask for all carries the name of the chip"
