"""One order: what is written, what is refused in one clear line, and that files appear all or none."""

from __future__ import annotations

import errno
import hashlib
import os
import shutil
import zipfile
from dataclasses import replace
from datetime import date
from pathlib import Path

import pytest

from core.chip.plan import ChipChannel, ChipPlan
from core.errors import DesignRefusedError, DesignValueError, ExportError
from core.fabrication.process import ProcessKind
from core.fabrication.shipped import shipped_process
from core.masks import placing
from core.parameters import ChannelParameters
from core.project import ChipProject, ParameterSet
from core.project.checks import errors_in, order_findings
from core.project.order import order_facts, order_of, write_order

DAY = date(2031, 5, 17)
SMALL = ChannelParameters(stages=1)
IMPOSSIBLE = ChannelParameters(loop_radius_um=10.0)
BARE = ChipPlan(
    chip_width_um=12_000.0, chip_height_um=6_000.0, alignment_pairs=0, corner_marks="no", cut_lines="none",
    scale_bar="no", test_bars="no", text_height_um=300.0, label="B",
)  # fmt: skip


def project_of(**channels: ChannelParameters) -> ChipProject:
    sets = tuple(ParameterSet(name=name, channel=channel) for name, channel in channels.items())
    return ChipProject(name="Bench chip", lab="Fernhollow Bench Fluidics", sets=sets, plan=BARE)


def placed(*places: tuple[float, float], name: str = "a", plan: ChipPlan = BARE) -> ChipPlan:
    return replace(plan, channels=tuple(ChipChannel(set_name=name, x_um=x, y_um=y) for x, y in places))


def sheet_of(folder: Path) -> str:
    (sheet,) = folder.glob("*_ORDER.txt")
    return sheet.read_text(encoding="utf-8")


def refusal(project: ChipProject, folder: Path, **options: object) -> str:
    with pytest.raises(ExportError) as caught:
        write_order(project, folder, date=DAY, **options)
    assert str(caught.value).isprintable()
    return str(caught.value)


# --- what is written ------------------------------------------------------------------------


def test_an_order_is_masks_sheet_previews_and_one_archive_of_them(tmp_path):
    report = write_order(project_of(a=SMALL), tmp_path / "order", date=DAY)
    written = {each.name: each.read_bytes() for each in (tmp_path / "order").iterdir()}
    assert sorted(written) == sorted(file.name for file in report.files)
    assert {Path(name).suffix for name in written} >= {".dxf", ".gds", ".txt", ".pdf", ".svg", ".zip"}
    for file in report.files:
        assert hashlib.sha256(written[file.name]).hexdigest() == file.sha256
    (archive,) = (tmp_path / "order").glob("*.zip")
    with zipfile.ZipFile(archive) as held:
        assert all(held.read(name) == written[Path(name).name] for name in held.namelist())
    sheet = sheet_of(tmp_path / "order")
    for words in ("Bench chip", "Fernhollow Bench Fluidics", "2031-05-17", "cast, film mask", "1/(1 -", "confirm"):
        assert words in sheet


def test_the_same_order_has_the_same_bytes(tmp_path):
    folders = [tmp_path / "one", tmp_path / "two"]
    for folder in folders:
        write_order(project_of(a=SMALL), folder, date=DAY)
    one, two = ({each.name: each.read_bytes() for each in folder.iterdir()} for folder in folders)
    assert one == two


@pytest.mark.parametrize("kind", ProcessKind)
def test_the_sheet_says_what_the_process_asks_for(kind):
    project = project_of(a=SMALL).with_process(shipped_process(kind))
    facts = order_facts(project, date=DAY)
    assert facts.process_name == str(kind)
    assert facts.cautions
    assert facts.forced == ()


def test_shrinkage_is_made_up_for_once():
    assert order_of(project_of(a=SMALL), date=DAY).scene.scale == pytest.approx(1 / 0.985, rel=1e-12)


def test_names_that_files_cannot_hold_are_made_safe_and_said_so(tmp_path):
    project = replace(project_of(a=SMALL), name="Ω rinse")
    report = write_order(project, tmp_path, date=DAY)
    assert all(file.name.isascii() for file in report.files)
    assert all("RINSE" in file.name for file in report.files if file.name.endswith((".dxf", ".gds")))
    assert "'Ω rinse'" in sheet_of(tmp_path)


# --- what is refused ------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("change", "parts"),
    [
        (placed((0.0, 0.0), plan=replace(BARE, chip_width_um=3_000.0)), ["chip_width_um"]),
        (placed((0.0, 0.0), (0.0, 300.0)), ["a"]),
        (placed((4_900.0, 0.0)), ["edge"]),
        (placed((0.0, 0.0), name="gone"), ["gone"]),
    ],
    ids=["chip smaller than its channels", "channels overlap", "port off the chip", "unknown set"],
)
def test_a_chip_that_cannot_be_made_is_refused_in_one_line(tmp_path, change, parts):
    project = project_of(a=SMALL).with_plan(change)
    with pytest.raises(DesignRefusedError):
        write_order(project, tmp_path / "order", date=DAY)
    message = refusal(project, tmp_path / "order")
    assert message.startswith("chip 'Bench chip' cannot be made: ")
    assert message.endswith("or add --force")
    assert all(part in message for part in parts)
    assert not (tmp_path / "order").exists()


def test_forced_findings_stand_on_the_sheet(tmp_path):
    project = project_of(a=SMALL).with_plan(placed((4_900.0, 0.0)))
    forced = errors_in(order_findings(project), project)
    assert forced
    write_order(project, tmp_path, date=DAY, force=True)
    sheet = "".join(sheet_of(tmp_path).split())
    assert all("".join(finding.message.split()) in sheet for _, finding in forced)


def test_without_force_nothing_of_the_kind_is_said(tmp_path):
    write_order(project_of(a=SMALL), tmp_path, date=DAY, force=True)
    write_order(project_of(a=SMALL), tmp_path / "again", date=DAY)
    assert sheet_of(tmp_path) == sheet_of(tmp_path / "again")


def test_by_force_a_set_without_an_outline_is_left_out_and_said_so(tmp_path):
    project = project_of(a=SMALL, broken=IMPOSSIBLE)
    assert "set 'broken'" in refusal(project, tmp_path / "order")
    order = order_of(project, date=DAY, force=True)
    assert order.left_out == ("broken",)
    order.write(tmp_path / "order")
    assert "set 'broken' cannot be drawn and is left out" in " ".join(sheet_of(tmp_path / "order").split())


def test_a_chip_of_which_nothing_can_be_drawn_is_refused_even_by_force(tmp_path):
    message = refusal(project_of(broken=IMPOSSIBLE), tmp_path / "order", force=True)
    assert "nothing to write: 'broken' cannot be drawn" in message
    assert not (tmp_path / "order").exists()


@pytest.mark.parametrize(
    ("kind", "values", "parts"),
    [
        (ProcessKind.CAST_FILM, {"min_depth_um": 900.0}, ["min_depth_um is 900", "max_depth_um", "lower"]),
        (ProcessKind.CAST_FILM, {"max_width_to_depth": 30.0}, ["max_width_to_depth is 30", "collapse_width_to_depth"]),
        (ProcessKind.CAST_FILM, {"kerf_um": 100.0}, ["kerf_um is 100"]),
        (ProcessKind.LASER_FILM, {"undercut_ratio": 1.0}, ["undercut_ratio is 1"]),
        (ProcessKind.KNIFE_FILM, {"tool_diameter_um": 200.0}, ["tool_diameter_um is 200"]),
        (ProcessKind.LASER_ACRYLIC, {"islands": "pieces"}, ["islands is 'pieces'"]),
    ],
)
def test_process_values_that_contradict_each_other(kind, values, parts):
    with pytest.raises(DesignValueError) as error:
        shipped_process(kind).with_values(values)
    assert str(error.value).isprintable()
    assert all(part in str(error.value) for part in parts)


# --- disks and folders ----------------------------------------------------------------------


@pytest.mark.parametrize("flushed_before", [0, 1, 3])
def test_a_full_disk_leaves_the_folder_as_it_was(tmp_path, monkeypatch, flushed_before):
    (tmp_path / "mine.txt").write_text("x")
    real, calls = os.fsync, []

    def full(handle):
        calls.append(handle)
        if len(calls) > flushed_before:
            raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))
        real(handle)

    monkeypatch.setattr("core.masks.placing.os.fsync", full)
    message = refusal(project_of(a=SMALL), tmp_path)
    assert "the disk is full; free some space or choose another folder" in message
    assert [each.name for each in tmp_path.iterdir()] == ["mine.txt"]


def test_a_folder_that_is_gone_half_way(tmp_path):
    folder = tmp_path / "order"

    def report(*_progress):
        shutil.rmtree(folder, ignore_errors=True)

    with pytest.raises(ExportError, match="cannot be written") as error:
        write_order(project_of(a=SMALL), folder, date=DAY, report=report)
    assert str(error.value).isprintable()
    assert not folder.exists()


def test_a_locked_folder(tmp_path, monkeypatch):
    def locked(*_arguments, **_settings):
        raise PermissionError(errno.EACCES, "Permission denied")

    monkeypatch.setattr(placing.tempfile, "mkdtemp", locked)
    message = refusal(project_of(a=SMALL), tmp_path / "order")
    assert "it may not be written to; choose a folder of your own" in message
    assert not (tmp_path / "order").exists()


def test_a_file_in_the_way(tmp_path):
    (tmp_path / "order").write_text("x")
    assert "a file stands where the folder should be" in refusal(project_of(a=SMALL), tmp_path / "order")


def test_a_stop_leaves_nothing(tmp_path):
    class Stopped(Exception):
        pass

    def stop(*_progress):
        raise Stopped

    with pytest.raises(Stopped):
        write_order(project_of(a=SMALL), tmp_path / "order", date=DAY, report=stop)
    assert not (tmp_path / "order").exists()
