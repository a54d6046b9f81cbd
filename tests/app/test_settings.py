"""Remembered choices: kept between starts, and never trusted blindly."""

from __future__ import annotations

from pathlib import Path

import pytest
from PySide6.QtCore import QByteArray

from app.settings import RECENT_FILES_KEPT, Settings


@pytest.fixture
def path(qapp, tmp_path):
    return tmp_path / "folder" / "settings.ini"


def test_defaults(path):
    settings = Settings(path)
    assert (settings.unit("length"), settings.unit("flow"), settings.unit("pressure")) == ("um", "uL/min", "kPa")
    assert settings.scheme == "system"
    assert settings.recent_files == []
    assert settings.arrangement("window") is None


def test_choices_are_kept(path, qtbot):
    settings = Settings(path)
    with qtbot.waitSignals([settings.units_changed, settings.scheme_changed]):
        settings.set_unit("pressure", "psi")
        settings.set_scheme("dark")
    settings.set_choices("masks", '{"a": [1, 2]}')
    settings.set_arrangement("window", QByteArray(b"\x00\x01state"))
    again = Settings(path)
    assert again.unit("pressure") == "psi"
    assert again.scheme == "dark"
    assert again.choices("masks") == '{"a": [1, 2]}'
    assert bytes(again.arrangement("window")) == b"\x00\x01state"


def test_unknown_words_are_not_taken(path, qtbot):
    settings = Settings(path)
    with qtbot.assertNotEmitted(settings.units_changed):
        settings.set_unit("length", "furlong")
    settings.set_scheme("mauve")
    assert settings.unit("length") == "um"
    assert settings.scheme == "system"


def test_recent_files_latest_first_each_once_and_few(path, tmp_path):
    settings = Settings(path)
    files = [tmp_path / f"chip {n}.sideloop" for n in range(RECENT_FILES_KEPT + 3)]
    for file in (*files, files[5]):
        settings.add_recent_file(file)
    recent = Settings(path).recent_files
    assert len(recent) == RECENT_FILES_KEPT
    assert recent[:2] == [files[5], files[-1]]
    settings.remove_recent_file(files[5])
    assert files[5] not in settings.recent_files


def test_one_recent_file_survives_the_file_format(path, tmp_path):
    Settings(path).add_recent_file(tmp_path / "only one, with comma.sideloop")
    assert Settings(path).recent_files == [tmp_path / "only one, with comma.sideloop"]


@pytest.mark.parametrize(
    "content",
    ["\x00\x01binary\xff", "[units]\nlength=furlong\npressure=@Variant(garbage\n", "schema_version=99\nscheme=dark\n"],
)
def test_damaged_or_newer_files_give_defaults(path, content):
    path.parent.mkdir()
    Path(path).write_text(content, encoding="latin-1")
    settings = Settings(path)
    assert settings.unit("length") == "um"
    assert settings.scheme == "system"
    settings.set_unit("length", "mm")
    assert Settings(path).unit("length") == "mm"
