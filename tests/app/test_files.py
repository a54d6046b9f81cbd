"""Files and the user's work: nothing goes without a question, nothing is lost to a failure."""

from __future__ import annotations

import pytest
from PySide6.QtWidgets import QWidget

from app.document import Document
from app.files import ProjectFiles
from app.panels.ask import Recovery, Unsaved
from app.settings import Settings
from core.project import ChipProject, ParameterSet, RecoveryStore, read_project, write_project
from tests.app.answers import ReadyAnswers


class Desk:
    """A document, its files and a user with ready answers."""

    def __init__(self, qtbot, tmp_path):
        self.window = QWidget()
        qtbot.addWidget(self.window)
        self.folder = tmp_path
        self.document = Document(parent=self.window)
        self.settings = Settings(tmp_path / "settings.ini", self.window)
        self.recovery_folder = tmp_path / "recovery"
        self.recovery = RecoveryStore(self.recovery_folder)
        self.ask = ReadyAnswers()
        self.files = ProjectFiles(
            self.document, settings=self.settings, recovery=self.recovery, ask=self.ask, window=self.window
        )

    def change(self):
        self.document.change_channel({"stages": 9})

    def copies(self):
        return list(self.recovery_folder.glob("*.recovery"))


@pytest.fixture
def desk(qtbot, tmp_path):
    desk = Desk(qtbot, tmp_path)
    yield desk
    desk.recovery.discard()  # frees its lock


@pytest.fixture
def other_file(tmp_path):
    path = tmp_path / "other.sideloop"
    write_project(ChipProject(name="Other chip", sets=(ParameterSet(name="One"),)), path)
    return path


def test_open_remembers_the_file(desk, other_file):
    desk.ask.path = other_file
    desk.files.open()
    assert desk.document.project.name == "Other chip"
    assert desk.document.path == other_file
    assert desk.settings.recent_files == [other_file]


def test_unsaved_changes_hold_back_everything_that_would_lose_them(desk, other_file):
    desk.change()
    before = desk.document.project
    for leave in (desk.files.new, lambda: desk.files.open_path(other_file), desk.files.open):
        leave()
        assert desk.document.project is before
    assert [kind for kind, _ in desk.ask.asked] == ["unsaved"] * 3


def test_discard_lets_go(desk):
    desk.change()
    desk.ask.unsaved_answer = Unsaved.DISCARD
    desk.files.new()
    assert not desk.document.is_modified
    assert desk.document.channel.stages == 4


def test_save_first_then_leave(desk, other_file, tmp_path):
    desk.change()
    desk.ask.unsaved_answer = Unsaved.SAVE
    desk.ask.path = tmp_path / "mine"
    assert desk.files.open_path(other_file)
    assert read_project(tmp_path / "mine.sideloop").sets[0].channel.stages == 9


def test_a_save_that_fails_does_not_leave(desk, other_file, tmp_path):
    desk.change()
    desk.ask.unsaved_answer = Unsaved.SAVE
    desk.ask.path = tmp_path / "no such folder" / "mine.sideloop"
    assert not desk.files.open_path(other_file)
    assert desk.document.channel.stages == 9
    assert desk.ask.told
    assert "still here" in desk.ask.told[0][1]


def test_a_cancelled_save_as_does_not_leave(desk, other_file):
    desk.change()
    desk.ask.unsaved_answer = Unsaved.SAVE
    desk.ask.path = None
    assert not desk.files.open_path(other_file)
    assert desk.document.is_modified


def test_save_goes_to_the_known_file(desk, other_file):
    desk.files.open_path(other_file)
    desk.change()
    assert desk.files.save()
    assert not any(kind == "save" for kind, _ in desk.ask.asked)
    assert read_project(other_file) == desk.document.project


@pytest.mark.parametrize("content", [b"", b"\x00\xff\xfe", b"{}", b"not json"])
def test_a_bad_file_is_told_and_the_work_stays(desk, tmp_path, content):
    path = tmp_path / "bad.sideloop"
    path.write_bytes(content)
    desk.settings.add_recent_file(path)
    before = desk.document.project
    assert not desk.files.open_path(path)
    assert desk.document.project is before
    assert len(desk.ask.told) == 1
    assert "\n" not in desk.ask.told[0][1]
    assert path not in desk.settings.recent_files


def test_a_copy_is_kept_while_modified_and_goes_on_save(desk, tmp_path):
    desk.files.keep_copy()
    assert desk.copies() == [], "nothing to keep"
    desk.change()
    desk.files.keep_copy()
    assert len(desk.copies()) == 1
    desk.ask.path = tmp_path / "mine.sideloop"
    desk.files.save()
    assert desk.copies() == []


def test_undoing_everything_removes_the_copy(desk):
    desk.change()
    desk.files.keep_copy()
    desk.document.undo_stack.undo()
    assert desk.copies() == []


@pytest.fixture
def crashed(desk):
    """Leave a copy as a process does that is killed: its lock is free."""
    store = RecoveryStore(desk.recovery_folder)
    store.keep(ChipProject(name="Lost chip", sets=(ParameterSet(name="One"),)), None)
    store._lock.close()
    store._lock = None
    return store


def test_recovered_work_is_modified_and_still_safe(desk, crashed):
    desk.ask.recovery_answer = Recovery.RECOVER
    desk.files.offer_recovery()
    assert "Lost chip" in desk.ask.asked[0][1]
    assert desk.document.project.name == "Lost chip"
    assert desk.document.is_modified
    assert len(desk.copies()) == 1, "the copy of this process has taken the place of the old one"


def test_later_keeps_and_discard_removes(desk, crashed):
    desk.files.offer_recovery()
    assert len(desk.copies()) == 1
    assert desk.document.project.name != "Lost chip"
    desk.ask.recovery_answer = Recovery.DISCARD
    desk.files.offer_recovery()
    assert desk.copies() == []
