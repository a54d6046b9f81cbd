"""Chips as mask files, made as each process wants them, seen by six readers that share nothing with the writers."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

import numpy as np
import pytest

from core.chip.build import chip_scene
from core.chip.plan import ChipPlan
from core.errors import GeometryError
from core.fabrication.process import ProcessKind
from core.fabrication.shipped import shipped_process
from core.masks.mask_set import scene_summary, write_scene
from core.masks.options import MaskOptions, options_of
from core.masks.order_facts import SheetFacts, process_facts
from core.parameters import ChannelParameters
from tests.core.masks.chips import plate, two_channel_chip
from tests.core.masks.samples import random_shapes
from tests.core.masks.truth import check_files
from tests.thorough import cases

if TYPE_CHECKING:
    from collections.abc import Iterator
    from pathlib import Path

    from core.chip.scene import Scene
    from core.masks.report import MaskSetReport

IN_EACH_PART = cases(50, share=10)  # of four parts
FACTS = SheetFacts(chip_title="Bench 7", date="2031-05-17")
# wide enough for every shipped process once its walls are moved
WIDE = {
    "channel_width_um": 900.0, "loop_width_um": 900.0, "loop_radius_um": 1200.0, "stage_gap_um": 2500.0,
    "lead_in_um": 4000.0, "lead_out_um": 4000.0, "nose_radius_um": 150.0, "corner_radius_um": 150.0,
    "depth_um": 150.0,
}  # fmt: skip


def written(scene: Scene, folder: Path, options: MaskOptions) -> MaskSetReport:
    return write_scene(scene, folder=folder, stem="Bench 7 A", options=options, facts=FACTS)


@pytest.mark.parametrize(
    ("kind", "plate_words"),
    [
        *((kind, "single chip") for kind in ProcessKind),
        pytest.param(ProcessKind.CAST_CHROME, "wafer", marks=pytest.mark.slow),
        pytest.param(ProcessKind.LASER_ACRYLIC, "plate", marks=pytest.mark.slow),
    ],
)
def test_a_chip_made_as_each_process_wants_it(tmp_path: Path, kind: ProcessKind, plate_words: str) -> None:
    process = shipped_process(kind)
    channels = {"Main": ChannelParameters(stages=2, **WIDE), "Control": ChannelParameters(stages=0, **WIDE)}
    plan = ChipPlan(
        plate=plate_words,
        wafer_diameter_um=100000.0,
        edge_exclusion_um=2000.0,
        plate_width_um=90000.0,
        label="FB 7",
        port_diameter_um=1500.0,
    )
    scene = chip_scene(plan, channels, process=process, chip_name="Bench 7")
    options = options_of(process)
    facts = replace(FACTS, **process_facts(process))
    report = write_scene(scene, folder=tmp_path, stem="Bench 7 A", options=options, facts=facts)
    most_readers = 3 if plate_words == "single chip" else 1  # whole plates take long to compare
    assert check_files(report, scene, options, most_readers=most_readers) == len(options.formats)


@pytest.mark.parametrize(
    "options",
    [
        {"islands": "pieces", "copies": "inserts", "dxf_version": "R12", "grid_nm": 5},
        {"islands": "loops", "copies": "inserts", "grid_nm": 100},
        {"islands": "loops", "copies": "flat", "dxf_version": "R12", "chord_tolerance_um": 0.5},
        {"islands": "nested", "dxf_version": "R12", "tone": "drawn lines are CUT"},
    ],
)
def test_a_plate_in_every_way_of_writing(tmp_path: Path, options: dict[str, object]) -> None:
    chosen = MaskOptions(**options)
    scene = plate(two_channel_chip(), rows=1)
    report = written(scene, tmp_path, chosen)
    assert check_files(report, scene, chosen) == 2
    summary = scene_summary(scene, stem="Bench 7 A", options=chosen)
    assert [(file.name, file.format) for file in summary.files] == [(f.name, f.format) for f in report.files]


def random_scenes(count: int, *, seed: int) -> Iterator[tuple[Scene, MaskOptions]]:
    """Yield chips of random channels, plans, processes and ways of writing."""
    rng = np.random.default_rng(seed)
    shapes = random_shapes(1000 * count, seed=seed)
    while count:
        process = shipped_process(rng.choice(list(ProcessKind))).with_values(
            {"grid_nm": int(rng.choice([1, 1, 5, 25]))}
        )
        options = replace(
            options_of(process),
            formats=("DXF", "GDSII"),
            islands=rng.choice(["pieces", "loops", "nested"]),
            copies=rng.choice(["inserts", "flat"]),
            dxf_version=rng.choice(["R2000", "R12"]),
        )
        channels = {f"Set {k}": next(shapes).parameters for k in range(int(rng.integers(1, 4)))}
        width_um = max(channel.channel_width_um for channel in channels.values())
        plan = ChipPlan(
            port_diameter_um=max(10.0, min(width_um * rng.uniform(1.2, 3.0), 20000.0)),
            port_clearance_um=0.0,
            alignment_pairs=int(rng.integers(0, 3)),
            cut_lines=rng.choice(["ticks", "outline", "none"]),
            corner_marks=rng.choice(["yes", "no"]),
            text_height_um=float(rng.uniform(100.0, 1500.0)),
            label=str(rng.choice(["FB 7", "No. 12-3", "A+B/C"])),
        )
        try:
            scene = chip_scene(plan, channels, process=process, chip_name=f"Bench {seed}")
        except GeometryError:  # the process cannot make it, or a pad does not fit: told in one line, elsewhere
            continue
        count -= 1
        yield scene, options


@pytest.mark.slow
@pytest.mark.parametrize("part", range(4))
def test_random_chips(tmp_path: Path, part: int) -> None:
    for number, (scene, options) in enumerate(random_scenes(IN_EACH_PART, seed=4000 + part)):
        report = written(scene, tmp_path / str(number), options)
        assert check_files(report, scene, options) == 2
