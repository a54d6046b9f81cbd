"""Projects read from and written to disk."""

from __future__ import annotations

import errno
import os
import stat
import subprocess
import time
from pathlib import Path

import pytest
from hypothesis import given

from core.errors import ProjectFileError
from core.project import files, new_project, read_project, safe_save, write_project
from core.project.files import project_bytes, project_from_bytes
from core.project.strict_json import LARGEST_FILE_BYTES
from tests.core.project.builders import any_project, rinse_project


@pytest.fixture
def saved(tmp_path):
    """Return a file that holds the small project."""
    file = tmp_path / "chip.sideloop"
    write_project(rinse_project(), file)
    return file


def refusal(path) -> ProjectFileError:
    with pytest.raises(ProjectFileError) as caught:
        read_project(path)
    assert "\n" not in str(caught.value)
    assert caught.value.problems
    return caught.value


def save_refusal(path) -> str:
    with pytest.raises(ProjectFileError) as caught:
        write_project(new_project(), path)
    assert "\n" not in str(caught.value)
    return str(caught.value)


# --- there and back -------------------------------------------------------------------------


def test_round_trip(saved):
    assert read_project(saved) == rinse_project()
    assert [each.name for each in saved.parent.iterdir()] == [saved.name]


@given(any_project)
def test_any_project_reads_back_equal(project):
    content = project_bytes(project)
    assert project_from_bytes(content) == project
    assert project_bytes(project_from_bytes(content)) == content


def test_the_largest_project_fits(tmp_path):
    project = rinse_project()
    full = "\U0001f4a7" * 10_000
    named = (f"{number:03}{'é' * 57}" for number in range(97))
    for name in named:
        project = project.with_set_added(type(project.sets[0])(name=name, notes=full))
    write_project(project, tmp_path / "large.sideloop")
    assert read_project(tmp_path / "large.sideloop") == project


def test_a_byte_order_mark_is_taken(saved):
    saved.write_bytes(b"\xef\xbb\xbf" + saved.read_bytes())
    assert read_project(saved) == rinse_project()


# --- files that are no projects -------------------------------------------------------------


@pytest.mark.parametrize(
    ("content", "part"),
    [
        (b"", "empty"),
        (b" \n ", "empty"),
        (b"\x00\x01\x02", "binary"),
        (b"\x89PNG\r\n\x1a\n\xff\xfe", "binary"),
        (b'{"format": "sideloop chip project"\x00}', "binary"),
        ("{}".encode("utf-16"), "binary"),
        (b"stages = 4\n", "no valid JSON at line 1, column 1"),
        (b'{\n "schema": 1,\n}', "no valid JSON at line 3"),
        (b"[]", "no chip project"),
        (b"[" * 100_000, "nested too deeply"),
        (b"[" * 500 + b"]" * 500, "nested more than 8 deep"),
        (b'{"a": ' * 20 + b"1" + b"}" * 20, "nested more than 8 deep"),
        (b"1" * 5_000, "too many digits"),
        (b'"' + b"x" * LARGEST_FILE_BYTES + b'"', "larger than the 10 MB"),
        (b'{"' + b"x" * 1_000_000 + b'": 1, "format": "sideloop chip project", "schema": 1}', "'xxxxx"),
    ],
)
def test_other_content(tmp_path, content, part):
    file = tmp_path / "some.sideloop"
    file.write_bytes(content)
    start = time.monotonic()
    message = str(refusal(file))
    assert time.monotonic() - start < 3.0
    assert part in message
    assert message.startswith("'some.sideloop' cannot be opened: ")
    assert len(message) < 600


@pytest.mark.parametrize("literal", ["NaN", "Infinity", "-Infinity", "1e999"])
def test_numbers_that_are_none(saved, literal):
    saved.write_text(saved.read_text(encoding="utf-8").replace("850.25", literal), encoding="utf-8")
    message = str(refusal(saved))
    assert "flow_ul_min is " in message
    assert "0.001 to 1e+06 uL/min" in message


def test_a_huge_file_is_not_read_whole(tmp_path):
    file = tmp_path / "huge.sideloop"
    with file.open("wb") as handle:
        handle.truncate(1 << 40)  # a sparse file: reading it whole would exhaust the memory
    assert "larger than the 10 MB" in str(refusal(file))


def test_a_missing_file_is_answered_with_its_neighbours(saved):
    assert "did you mean 'chip.sideloop'?" in str(refusal(saved.with_name("chop.sideloop")))
    assert "no such file" in str(refusal(saved.parent / "nowhere" / "a.sideloop"))


def test_places_that_are_no_files(tmp_path):
    assert "it is a folder" in str(refusal(tmp_path))
    assert "it is no ordinary file" in str(refusal("/dev/null"))
    assert "null byte" in str(refusal("a\0b"))
    assert "File name too long" in str(refusal(tmp_path / ("x" * 300)))


def test_a_file_that_may_not_be_read(saved, monkeypatch):
    # the test may run as an account that may read everything, so the refusal is made
    def refuse(*_args, **_kwargs):
        raise PermissionError(errno.EACCES, os.strerror(errno.EACCES))

    monkeypatch.setattr(Path, "open", refuse)
    assert "Permission denied" in str(refusal(saved))


# --- saving that fails ----------------------------------------------------------------------


@pytest.mark.parametrize(
    "name",
    ["fsync", "replace", "chmod", "write"],
)
@pytest.mark.parametrize("code", [errno.ENOSPC, errno.EROFS, errno.EIO])
def test_a_failing_step_leaves_the_old_file_and_nothing_else(saved, monkeypatch, name, code):
    def fail(*_args, **_kwargs):
        raise OSError(code, os.strerror(code))

    if name == "write":
        monkeypatch.setattr(safe_save, "_write_flushed", fail)
    elif name == "chmod":
        monkeypatch.setattr(Path, "chmod", fail)
    else:
        monkeypatch.setattr(safe_save.os, name, fail)
    message = save_refusal(saved)
    assert os.strerror(code) in message
    assert "nothing was changed on the disk" in message
    monkeypatch.undo()
    assert read_project(saved) == rinse_project()
    assert [each.name for each in saved.parent.iterdir()] == [saved.name]


def test_an_interrupted_save_leaves_no_temporary_file(saved, monkeypatch):
    def interrupt(*_args):
        raise KeyboardInterrupt

    monkeypatch.setattr(safe_save.os, "replace", interrupt)
    with pytest.raises(KeyboardInterrupt):
        write_project(new_project(), saved)
    assert read_project(saved) == rinse_project()
    assert [each.name for each in saved.parent.iterdir()] == [saved.name]


def test_a_project_that_does_not_read_back_is_not_saved(saved, monkeypatch):
    monkeypatch.setattr(files, "project_from_bytes", lambda _content: new_project())
    with pytest.raises(ProjectFileError, match="does not read back"):
        write_project(rinse_project(), saved)


def test_unusable_places(tmp_path):
    (tmp_path / "folder.sideloop").mkdir()
    assert "there is a folder of that name" in save_refusal(tmp_path / "folder.sideloop")
    assert "is not there" in save_refusal(tmp_path / "gone" / "a.sideloop")
    assert "null byte" in save_refusal(tmp_path / "a\0b")
    assert "File name too long" in save_refusal(tmp_path / ("x" * 300))
    assert [each.name for each in tmp_path.iterdir()] == ["folder.sideloop"]


def test_a_file_in_place_of_the_folder(saved):
    assert "is not there" in save_refusal(saved / "a.sideloop")


def test_a_write_protected_file_is_kept(saved, monkeypatch):
    saved.chmod(0o444)
    monkeypatch.setattr(safe_save.os, "access", lambda _path, _mode: False)  # what other accounts are told
    assert "write-protected" in save_refusal(saved)
    assert read_project(saved) == rinse_project()


def test_a_folder_that_may_not_be_written(saved, unprivileged):
    saved.parent.chmod(0o555)
    message = unprivileged(f"write_project(new_project(), {str(saved)!r})")
    assert "ProjectFileError 'chip.sideloop' cannot be saved: " in message
    assert read_project(saved) == rinse_project()


@pytest.fixture
def unprivileged(tmp_path):
    """Return a function that runs one line as an account without special rights."""
    if os.name != "posix" or os.geteuid() != 0:
        pytest.skip("takes the rights of another account for the time of the test")

    def run(line: str) -> str:
        from core.project import new_project, write_project

        names = {"write_project": write_project, "new_project": new_project}
        for folder in (tmp_path, *tmp_path.parents[:2]):
            folder.chmod(folder.stat().st_mode | 0o011)
        os.seteuid(65534)
        try:
            eval(line, names)
        except ProjectFileError as error:
            return f"ProjectFileError {error}"
        finally:
            os.seteuid(0)
        return "saved"

    return run


@pytest.fixture
def full_disk(tmp_path):
    """Return a folder on a real file system of 64 kB."""
    folder = tmp_path / "disk"
    folder.mkdir()
    command = ["mount", "-t", "tmpfs", "-o", "size=64k", "tmpfs", str(folder)]
    try:
        subprocess.run(command, check=True, capture_output=True)
    except (OSError, subprocess.CalledProcessError):
        pytest.skip("this account may not mount a small file system")
    yield folder
    subprocess.run(["umount", str(folder)], check=True)


def test_a_full_disk(full_disk):
    file = full_disk / "chip.sideloop"
    write_project(rinse_project(), file)
    (full_disk / "filler").write_bytes(b"x" * (64 * 1024 - 2 * 4096))  # one page is left: a small file fits no more
    larger = rinse_project().with_set_replaced(
        "Control", type(rinse_project().sets[0])(name="Control", notes="long " * 1900)
    )
    with pytest.raises(ProjectFileError, match="No space left on device"):
        write_project(larger, file)
    assert read_project(file) == rinse_project()
    assert sorted(each.name for each in full_disk.iterdir()) == ["chip.sideloop", "filler"]


# --- what saving keeps ----------------------------------------------------------------------


@pytest.mark.skipif(os.name != "posix", reason="permission bits and links as POSIX has them")
def test_permissions_and_links_survive(saved):
    saved.chmod(0o640)
    link = saved.with_name("link.sideloop")
    link.symlink_to(saved.name)
    write_project(new_project(), link)
    assert link.is_symlink()
    assert read_project(saved) == new_project()
    assert stat.S_IMODE(saved.stat().st_mode) == 0o640


@pytest.mark.skipif(os.name != "posix", reason="permission bits as POSIX has them")
def test_a_new_file_has_the_usual_permissions(saved):
    plain = saved.with_name("plain")
    plain.write_text("x")
    assert saved.stat().st_mode == plain.stat().st_mode


def test_what_a_killed_save_left_is_swept_later(saved):
    old, young = (saved.with_name(f".sideloop-{name}.saving") for name in ("old", "young"))
    for file in (old, young):
        file.write_text("{")
    os.utime(old, (time.time() - 3600,) * 2)
    write_project(new_project(), saved)
    assert not old.exists()
    assert young.exists()
