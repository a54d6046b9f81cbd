"""All files or none: full disks, folders that are none, names that are taken, moves that fail half-way."""

from __future__ import annotations

import errno
import os
import shutil
import subprocess
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING

import pytest

from core.errors import ExportError
from core.masks.mask_set import write_mask_set
from core.masks.placing import put_in_place, workshop
from tests.core.masks.samples import shape_of

if TYPE_CHECKING:
    from collections.abc import Iterator

NAMES = ["a.dxf", "a.gds", "README.txt"]


def contents(folder: Path) -> dict[str, bytes | None]:
    """Return all files below a folder, and its folders as None."""
    return {str(path.relative_to(folder)): path.read_bytes() if path.is_file() else None for path in folder.rglob("*")}


def export(folder: Path) -> None:
    write_mask_set([("One", shape_of("One loop"))], folder=folder, chip_name="Bench 7")


@contextmanager
def nearly_full(folder: Path) -> Iterator[None]:
    """Make a folder refuse more than 20 kB for real: a tiny disk where one can be mounted, else a file size limit."""
    import resource

    mount = ["mount", "-t", "tmpfs", "-o", "size=20k", "tmpfs", str(folder)]
    try:
        is_mounted = subprocess.run(mount, capture_output=True, check=False).returncode == 0
    except OSError:
        is_mounted = False
    limits = resource.getrlimit(resource.RLIMIT_FSIZE)
    if not is_mounted:
        resource.setrlimit(resource.RLIMIT_FSIZE, (4096, limits[1]))
    try:
        yield
    finally:
        resource.setrlimit(resource.RLIMIT_FSIZE, limits)
        if is_mounted:
            subprocess.run(["umount", str(folder)], check=True)


def test_a_full_disk_leaves_the_folder_as_it_was(tmp_path: Path) -> None:
    folder = tmp_path / "disk"
    folder.mkdir()
    with nearly_full(folder):
        (folder / "BENCH_7_ONE.dxf").write_text("mine")
        with pytest.raises(ExportError, match=r"the disk is full; free some space|takes no file of that size"):
            export(folder)
        assert contents(folder) == {"BENCH_7_ONE.dxf": b"mine"}


@pytest.mark.parametrize(
    ("code", "words"),
    [
        (errno.ENOSPC, "the disk is full; free some space or choose another folder"),
        (errno.EROFS, "it is on a read-only disk; choose another folder"),
        (errno.EACCES, "it may not be written to; choose a folder of your own"),
        (errno.EIO, "Input/output error; choose another folder"),
    ],
)
def test_what_the_system_refuses_is_told_in_one_line(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, code: int, words: str
) -> None:
    def refuse(_: int) -> None:
        raise OSError(code, os.strerror(code))

    monkeypatch.setattr("core.masks.placing.os.fsync", refuse)
    folder = tmp_path / "new" / "masks"
    with pytest.raises(ExportError, match=words) as caught:
        export(folder)
    assert str(folder) in str(caught.value)
    assert "\n" not in str(caught.value)
    assert contents(tmp_path) == {}  # the folders made for it are gone too


@pytest.mark.parametrize("calls", [1, 4, 7])
def test_a_folder_that_goes_half_way(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, calls: int) -> None:
    real, done = os.fsync, []

    def gone(handle: int) -> None:
        real(handle)
        done.append(handle)
        if len(done) == calls:
            shutil.rmtree(tmp_path / "masks")

    monkeypatch.setattr("core.masks.placing.os.fsync", gone)
    with pytest.raises(ExportError, match="it has gone while the files were written; make it again") as caught:
        export(tmp_path / "masks")
    assert "\n" not in str(caught.value)
    assert contents(tmp_path) == {}


def test_a_file_that_another_program_holds(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    # as some systems do while a viewer has the old file open
    (tmp_path / "BENCH_7.zip").write_text("old")
    real = Path.replace

    def replace(self: Path, target: Path) -> Path:
        if self.parent == tmp_path and self.name == "BENCH_7.zip":
            raise OSError(errno.EBUSY, "held")
        return real(self, target)

    monkeypatch.setattr(Path, "replace", replace)
    with pytest.raises(ExportError, match="another program holds it; close that program"):
        export(tmp_path)
    assert contents(tmp_path) == {"BENCH_7.zip": b"old"}


@pytest.mark.parametrize("below", ["", "masks", "deep/masks"])
def test_a_file_in_the_way_of_the_folder(tmp_path: Path, below: str) -> None:
    (tmp_path / "file").write_text("mine")
    with pytest.raises(ExportError, match="a file stands where the folder should be; choose another folder"):
        export(tmp_path / "file" / below)
    assert contents(tmp_path) == {"file": b"mine"}


def test_a_folder_name_that_is_too_long(tmp_path: Path) -> None:
    with pytest.raises(ExportError, match="its name is too long; choose a shorter name"):
        export(tmp_path / ("x" * 300))


def test_old_files_are_replaced_and_others_stay(tmp_path: Path) -> None:
    (tmp_path / "BENCH_7_ONE.gds").write_text("old")
    (tmp_path / "notes.txt").write_text("mine")
    export(tmp_path)
    found = contents(tmp_path)
    assert found["notes.txt"] == b"mine"
    assert found["BENCH_7_ONE.gds"] != b"old"
    assert sorted(found) == [
        *["BENCH_7.zip", "BENCH_7_ONE.dxf", "BENCH_7_ONE.gds", "BENCH_7_ONE.svg"],
        *["BENCH_7_ORDER.pdf", "BENCH_7_ORDER.txt", "BENCH_7_SHA256.txt", "notes.txt"],
    ]


def test_a_folder_of_that_name_is_not_replaced(tmp_path: Path) -> None:
    (tmp_path / "BENCH_7_ONE.gds").mkdir()
    (tmp_path / "BENCH_7_ONE.gds" / "inside.txt").write_text("mine")
    with pytest.raises(ExportError, match=r"BENCH_7_ONE\.gds is not a plain file and is not replaced"):
        export(tmp_path)
    assert contents(tmp_path) == {"BENCH_7_ONE.gds": None, "BENCH_7_ONE.gds/inside.txt": b"mine"}


@pytest.mark.parametrize("failing", range(5))
def test_a_move_that_fails_half_way_is_undone(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, failing: int) -> None:
    # two of three files are there before: five moves, each of which fails once
    for name in NAMES[:2]:
        (tmp_path / name).write_text(f"old {name}")
    before = contents(tmp_path)
    real, moves = Path.replace, []

    def replace(self: Path, target: Path) -> Path:
        moves.append(self)
        if len(moves) == failing + 1:
            raise OSError(errno.EIO, "no")
        return real(self, target)

    with workshop(tmp_path) as new:
        for name in NAMES:
            (new / name).write_text(f"new {name}")
        with monkeypatch.context() as patch:
            patch.setattr(Path, "replace", replace)
            with pytest.raises(OSError, match="no"):
                put_in_place(new, tmp_path, NAMES)
    assert contents(tmp_path) == before
