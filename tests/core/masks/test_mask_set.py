"""Whole mask sets: names, report, note, summary; same bytes for the same input."""

from __future__ import annotations

import hashlib
import json
import os
import subprocess
import sys
from itertools import pairwise
from pathlib import Path

import pytest

from core.errors import ExportError
from core.geometry.shape import build_shape
from core.masks.mask_set import mask_summary, write_mask_set
from core.masks.options import MaskOptions
from core.masks.read_dxf import read_dxf
from core.masks.read_gdsii import read_gdsii
from core.parameters import ChannelParameters
from tests.core.masks.readers import dxf_layers_by_dxfgrabber, gdsii_layers_by_klamath
from tests.core.masks.samples import SETS, shape_of
from tests.core.masks.truth import covered

ROOT = Path(__file__).parents[3]
PAIR = ["One loop", "Control"]
WHOLE_SET = ["BENCH_7_ORDER.txt", "BENCH_7_ORDER.pdf", "BENCH_7_SHA256.txt", "BENCH_7.zip"]


def pair() -> list[tuple[str, object]]:
    return [(name, shape_of(name)) for name in PAIR]


def test_one_mask_for_each_set(tmp_path: Path) -> None:
    report = write_mask_set(pair(), folder=tmp_path, chip_name="Bench 7")
    names = [f"BENCH_7_{stem}.{end}" for stem in ("ONE_LOOP", "CONTROL") for end in ("dxf", "gds", "svg")]
    assert [file.name for file in report.files] == [*names, *WHOLE_SET]
    for file in report.files:
        data = (tmp_path / file.name).read_bytes()
        assert (file.size_bytes, file.sha256) == (len(data), hashlib.sha256(data).hexdigest())
    one, control = report.files[1], report.files[4]
    assert (one.format, one.island_count, control.island_count) == ("GDSII", 1, 0)
    assert control.area_um2 == pytest.approx(2000.0 * 200.0, rel=1e-9)  # leads of 1 mm, 200 um wide
    assert control.bounds_um == pytest.approx((0.0, -100.0, 2000.0, 100.0), abs=1e-3)
    assert read_gdsii(tmp_path / one.name).top_cells() == ["BENCH_7_ONE_LOOP"]
    json.dumps(report.as_dict(), allow_nan=False)


def test_all_sets_on_one_mask(tmp_path: Path) -> None:
    options = MaskOptions(one_file_per_set=False, clearance_um=500.0, has_preview=False)
    report = write_mask_set(pair() + pair(), folder=tmp_path, chip_name="Bench 7", options=options)
    assert [file.name for file in report.files] == ["BENCH_7.dxf", "BENCH_7.gds", *WHOLE_SET]
    read = read_gdsii(tmp_path / "BENCH_7.gds")
    assert [element.target for element in read.cells["BENCH_7"]] == ["ONE_LOOP", "CONTROL", "ONE_LOOP_2", "CONTROL_2"]
    for seen in (
        gdsii_layers_by_klamath(tmp_path / "BENCH_7.gds", "BENCH_7"),
        dxf_layers_by_dxfgrabber(tmp_path / "BENCH_7.dxf"),
    ):
        parts = sorted(covered(seen)["L1_CHAN"].geoms, key=lambda part: -part.bounds[3])
        assert [len(part.interiors) for part in parts] == [1, 0, 1, 0]
        gaps = [above.bounds[1] - below.bounds[3] for above, below in pairwise(parts)]
        assert all(500.0 - 0.05 <= gap <= 501.0 for gap in gaps)


def test_names_of_channels_and_pieces_never_meet(tmp_path: Path) -> None:
    shape = shape_of("One loop")
    names = ["A", "A start", "A__START", "Bench 7", "x" * 40, "X" * 41]
    options = MaskOptions(one_file_per_set=False, formats=("GDSII",))
    report = write_mask_set([(name, shape) for name in names], folder=tmp_path, chip_name="Bench 7", options=options)
    cells = read_gdsii(tmp_path / report.files[0].name).cells
    assert len(cells) == 3 * len(names) + 1
    assert report.files[0].island_count == len(names)


@pytest.mark.parametrize(
    "options",
    [
        {"dxf_version": "R12", "islands": "loops", "formats": ("DXF",)},
        {"chord_tolerance_um": 1.0, "formats": ("GDSII",)},
        {"one_file_per_set": False},
    ],
)
def test_the_summary_tells_what_is_written(tmp_path: Path, options: dict[str, object]) -> None:
    chosen = MaskOptions(**options)
    summary = mask_summary(pair(), chosen, chip_name="Bench 7")
    report = write_mask_set(pair(), folder=tmp_path, chip_name="Bench 7", options=chosen)
    assert [(file.name, file.format) for file in summary.files] == [(f.name, f.format) for f in report.files]
    told = "\n".join(summary.sentences)
    assert all(file.name in told for file in summary.files)
    assert ("1 nm grid" in told, "millimetres" in told) == ("GDSII" in chosen.formats, "DXF" in chosen.formats)
    for planned, written in zip(summary.files, report.files, strict=True):
        path = tmp_path / written.name
        if path.suffix == ".dxf":
            loops = read_dxf(path).loops
            assert planned.vertex_count == sum(len(loop.corners) for loop in loops)
            assert planned.figure_count == len(loops)
            assert set(planned.layers) == {loop.layer for loop in loops}
        if path.suffix == ".gds":
            figures = [e for cell in read_gdsii(path).cells.values() for e in cell if e.kind == "BOUNDARY"]
            assert planned.figure_count == len(figures)
            assert planned.vertex_count == sum(len(figure.points_nm) - 1 for figure in figures)
        if written.bounds_um is not None:
            x0, y0, x1, y1 = written.bounds_um
            assert (planned.width_um, planned.height_um) == pytest.approx((x1 - x0, y1 - y0), abs=4e-3)
            assert planned.island_count == written.island_count
    json.dumps(summary.as_dict(), allow_nan=False)


SCRIPT = """
import sys
from tests.core.masks.test_mask_set import write_both
write_both(sys.argv[1])
"""


def write_both(folder: str | Path) -> None:
    for version in ("R2000", "R12"):
        options = MaskOptions(dxf_version=version, one_file_per_set=False)
        write_mask_set(pair(), folder=Path(folder) / version, chip_name="Bench 7", options=options)


def test_same_input_same_bytes(tmp_path: Path) -> None:
    write_both(tmp_path / "a")
    write_both(tmp_path / "b")
    # and once more in another process, with another hash seed
    arguments = [sys.executable, "-c", SCRIPT, str(tmp_path / "c")]
    subprocess.run(arguments, check=True, env={**os.environ, "PYTHONHASHSEED": "7"}, cwd=ROOT)
    first, *others = (
        {str(path.relative_to(folder)): path.read_bytes() for path in folder.rglob("*.*")}
        for folder in (tmp_path / "a", tmp_path / "b", tmp_path / "c")
    )
    assert len(first) == 2 * 7
    assert all(other == first for other in others)


def test_an_unusable_shape_is_named_with_its_finding(tmp_path: Path) -> None:
    shape = build_shape(ChannelParameters(loop_radius_um=30.0, loop_width_um=200.0))
    assert shape.outline is None
    with pytest.raises(ExportError) as caught:
        write_mask_set([("Fine", shape_of("Control")), ("Too tight", shape)], folder=tmp_path, chip_name="x")
    assert "'Too tight' cannot be put on a mask" in str(caught.value)
    assert shape.findings[0].message in str(caught.value)
    assert list(tmp_path.iterdir()) == []
    with pytest.raises(ExportError, match="'Too tight'"):
        mask_summary([("Too tight", shape)])


def test_no_sets_at_all(tmp_path: Path) -> None:
    with pytest.raises(ExportError, match="choose at least one"):
        write_mask_set([], folder=tmp_path, chip_name="x")


def test_a_mask_of_more_than_2_m_is_refused(tmp_path: Path) -> None:
    values = {"stages": 100, "stage_gap_um": 20000.0, "loop_radius_um": 3000.0, "lead_in_um": 1e5}
    shape = build_shape(ChannelParameters(**values))
    with pytest.raises(ExportError, match="from its origin; allowed: 2000 mm; use fewer stages"):
        write_mask_set([("Long", shape)], folder=tmp_path, chip_name="x")


@pytest.mark.slow
def test_a_hundred_stages(tmp_path: Path) -> None:
    shape = build_shape(ChannelParameters(stages=100))
    report = write_mask_set([("Long", shape)], folder=tmp_path, chip_name="x")
    dxf, gds = report.files[:2]
    assert (dxf.island_count, gds.island_count) == (100, 100)
    assert dxf.area_um2 == pytest.approx(shape.outline.area_um2, rel=1e-11)
    assert gds.size_bytes < 50_000  # by reference, not copied


def test_every_sample_set_has_its_own_safe_name(tmp_path: Path) -> None:
    summary = mask_summary([(name, shape_of(name)) for name in SETS], chip_name="a very long chip name, with signs")
    stems = {file.name.rpartition(".")[0] for file in summary.files if file.format == "GDSII"}
    assert len(stems) == len(SETS)
    assert all(len(stem) <= 27 for stem in stems)


class Stopped(Exception):
    pass


def test_progress_is_told_and_a_stop_leaves_nothing(tmp_path: Path) -> None:
    steps: list[tuple[int, int]] = []

    def report(step: int, total: int, text: str) -> None:
        steps.append((step, total))
        assert text
        if step == 1:
            raise Stopped

    shape = build_shape(ChannelParameters(stages=2))
    with pytest.raises(Stopped):
        write_mask_set([("one", shape), ("two", shape)], folder=tmp_path / "out", chip_name="Chip", report=report)
    assert steps == [(0, 5), (1, 5)]
    assert list(tmp_path.iterdir()) == []


def test_a_file_that_shops_find_large_says_so(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("core.masks.mask_files.LARGE_BYTES", 1000)
    report = write_mask_set(pair()[:1], folder=tmp_path, chip_name="Bench 7")
    assert "larger than 50 MB: ask the shop" in report.files[0].proofs[-1]
    assert "larger than 50 MB" in (tmp_path / "BENCH_7_ORDER.txt").read_text(encoding="utf-8")
