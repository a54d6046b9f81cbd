"""Checksums and archive: what they hold, and that a spoilt archive is found out."""

from __future__ import annotations

import hashlib
import subprocess
from dataclasses import replace
from typing import TYPE_CHECKING
from zipfile import ZipFile

import pytest

from core.errors import ExportError
from core.masks.mask_set import write_scene
from core.masks.options import MaskOptions
from core.masks.order_facts import SheetFacts
from core.masks.package import archive_bytes, prove_archive
from core.masks.report import MaskFile
from tests.core.masks.chips import plate, two_channel_chip

if TYPE_CHECKING:
    from pathlib import Path


def test_the_archive_holds_the_whole_set(tmp_path: Path) -> None:
    scene = plate(two_channel_chip())
    facts = SheetFacts(chip_title="Bench 7", date="2031-05-17")
    for folder in (tmp_path / "a", tmp_path / "b"):
        report = write_scene(scene, folder=folder, stem="Bench 7 A", options=MaskOptions(), facts=facts)
    *others, archive = report.files
    assert archive.name == "BENCH_7_A.zip"
    with ZipFile(tmp_path / "a" / archive.name) as read:
        assert read.testzip() is None
        assert read.namelist() == [file.name for file in others]
        for file in others:
            assert hashlib.sha256(read.read(file.name)).hexdigest() == file.sha256
    # the same scene, the same bytes, of the archive too
    for file in report.files:
        assert (tmp_path / "a" / file.name).read_bytes() == (tmp_path / "b" / file.name).read_bytes()
    # the list of checksums is what the usual tool takes
    checked = subprocess.run(
        ["sha256sum", "--check", "BENCH_7_A_SHA256.txt"], cwd=tmp_path / "a", capture_output=True, text=True, check=True
    )
    assert checked.stdout.count(": OK") == len(others) - 1


def made(folder: Path) -> tuple[Path, list[MaskFile]]:
    files = []
    for name in ("a.dxf", "a.gds"):
        (folder / name).write_bytes(name.encode() * 100)
        data = (folder / name).read_bytes()
        files.append(MaskFile(name=name, format="", size_bytes=0, sha256=hashlib.sha256(data).hexdigest()))
    path = folder / "all.zip"
    path.write_bytes(archive_bytes(folder, [file.name for file in files]))
    return path, files


def test_a_sound_archive_passes(tmp_path: Path) -> None:
    prove_archive(*made(tmp_path))


def test_a_spoilt_archive_is_found_out(tmp_path: Path) -> None:
    path, files = made(tmp_path)
    sound = path.read_bytes()
    for spoilt in (sound[:-30], sound[:40] + b"\xff\xff" + sound[42:], b""):
        path.write_bytes(spoilt)
        with pytest.raises(ExportError, match=r"all\.zip does not read back"):
            prove_archive(path, files)


@pytest.mark.parametrize("change", [lambda f: f[:1], lambda f: f[::-1], lambda f: [f[0], replace(f[1], sha256="0")]])
def test_an_archive_of_other_files_is_found_out(tmp_path: Path, change: object) -> None:
    path, files = made(tmp_path)
    with pytest.raises(ExportError, match=r"all\.zip does not hold the files of the mask set"):
        prove_archive(path, change(files))
