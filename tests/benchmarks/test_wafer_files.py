"""Files of a wafer of 10,000 stages (100 chips of 100 stages) against the same wafer written flat.

Asserted, as promised to users: at most 1/50 of the flat size, written at least 20 times faster, less than
300 MB at the peak for the whole set, proof, order sheet and archive included. Processor time is compared,
which other work on the machine changes least.
"""

from __future__ import annotations

import subprocess
import sys
import time
from pathlib import Path

import numpy as np
import pytest

from core.chip.scene import Block, BlockKind, PlacedBlock, Scene
from core.fabrication.choices import DxfVersion
from core.geometry.body import channel_body
from core.masks.drawing import MaskDrawing
from core.masks.dxf import dxf_text
from core.masks.dxf_blocks import dxf_blocks
from core.masks.gdsii import gdsii_bytes
from core.masks.gdsii_cells import GdsiiCell, gdsii_cells
from core.masks.options import MaskOptions
from core.parameters import ChannelParameters

pytestmark = pytest.mark.benchmark

ROOT = Path(__file__).parents[2]
CHIPS, STAGES = 100, 100
SMALLER, FASTER, MOST_MB = 50.0, 20.0, 300.0


def wafer(chips: int = CHIPS, stages: int = STAGES, *, is_shared: bool = True) -> Scene:
    """Return equal chips of one long chain, ten in a row; each drawn on its own unless shared."""
    blocks = [_chip(stages)] * chips if is_shared else [_chip(stages) for _ in range(chips)]
    x0, y0, x1, y1 = blocks[0].placed[0].block.body.bounds_um
    width, height = x1 - x0 + 2000.0, y1 - y0 + 2000.0
    placed = tuple(
        PlacedBlock(block=block, dx_um=round((k % 10 - 4.5) * width), dy_um=round((k // 10 - 4.5) * height))
        for k, block in enumerate(blocks)
    )
    return Scene(top=Block(name="Wafer", kind=BlockKind.PLATE, placed=placed))


def _chip(stages: int) -> Block:
    # level and small enough for ten to stand side by side
    channel = ChannelParameters(
        stages=stages, loop_radius_um=40.0, loop_width_um=20.0, channel_width_um=25.0, stage_gap_um=60.0,
        nose_radius_um=2.0, corner_radius_um=1.0,
    )  # fmt: skip
    body = channel_body(channel, centre_um=(0.0, 0.0), pad_radius_um=400.0)
    inner = Block(name="Chain", kind=BlockKind.CHANNEL, body=body)
    return Block(name="Chip", kind=BlockKind.CHIP, placed=(PlacedBlock(block=inner),))


def flattened(cells: tuple[GdsiiCell, ...]) -> GdsiiCell:
    """Return one cell that holds everything."""
    known: dict[str, list[tuple[int, np.ndarray]]] = {}
    for cell in cells:
        known[cell.name] = list(cell.rings_nm)
        for name, x, y in cell.references:
            known[cell.name] += [(layer, ring + np.array([x, y])) for layer, ring in known[name]]
    return GdsiiCell(name=cells[-1].name, rings_nm=tuple(known[cells[-1].name]))


def gdsii(scene: Scene, *, is_flat: bool = False) -> bytes:
    cells = gdsii_cells(MaskDrawing(scene, stem="Wafer"), chord_tolerance_um=0.02)
    return gdsii_bytes([flattened(cells)] if is_flat else cells, library="WAFER")


def dxf(scene: Scene, version: DxfVersion, copies: str) -> bytes:
    drawing = MaskDrawing(scene, stem="Wafer")
    blocks = dxf_blocks(drawing, MaskOptions(copies=copies))
    return dxf_text(blocks, bounds_um=drawing.bounds_um, version=version).encode("ascii")


def timed(work, *arguments, **more):
    began = time.process_time()
    data = work(*arguments, **more)
    return data, time.process_time() - began


def test_gdsii_against_flat(capsys):
    gdsii(wafer(2, 3))  # engines are loaded
    small, small_s = timed(gdsii, wafer())
    flat, flat_s = timed(gdsii, wafer(is_shared=False), is_flat=True)
    with capsys.disabled():
        print(f"\nGDSII: {len(small)} bytes in {small_s:.3f} s; flat {len(flat)} bytes in {flat_s:.2f} s")
    assert len(flat) >= SMALLER * len(small)
    assert flat_s >= FASTER * small_s


def test_dxf_against_flat(capsys):
    version = DxfVersion.R2000  # R12 is larger and slower, and gains the same
    dxf(wafer(2, 3), version, "inserts")
    small, small_s = timed(dxf, wafer(), version, "inserts")
    flat, flat_s = timed(dxf, wafer(), version, "flat")
    with capsys.disabled():
        print(f"\nDXF {version}: {len(small)} bytes in {small_s:.3f} s; flat {len(flat)} bytes in {flat_s:.2f} s")
    assert len(flat) >= SMALLER * len(small)
    assert flat_s >= FASTER * small_s


SCRIPT = """
import sys, time
from pathlib import Path
from core.masks.mask_set import write_scene
from core.masks.options import MaskOptions
from core.masks.order_facts import SheetFacts
from tests.benchmarks.test_wafer_files import wafer
began = time.process_time()
report = write_scene(wafer(), folder=sys.argv[1], stem="Wafer", options=MaskOptions(), facts=SheetFacts(chip_title="W"))
assert all(file.island_count == 10_000 for file in report.files if file.area_um2 is not None)
used = time.process_time() - began
# the peak of this process alone; getrusage would tell that of whoever started it
(peak_kb,) = (line.split()[1] for line in Path("/proc/self/status").read_text().splitlines() if "VmHWM" in line)
print(used, int(peak_kb) / 1024.0)
"""


@pytest.mark.skipif(not Path("/proc/self/status").exists(), reason="the system does not tell the peak")
def test_memory_of_a_whole_set(tmp_path, capsys):
    arguments = [sys.executable, "-c", SCRIPT, str(tmp_path)]
    done = subprocess.run(arguments, check=True, capture_output=True, text=True, cwd=ROOT)
    seconds, peak_mb = map(float, done.stdout.split())
    with capsys.disabled():
        print(f"\nWhole set, read back and proven: {seconds:.1f} s of processor time, {peak_mb:.0f} MB at the peak")
    assert peak_mb < MOST_MB
