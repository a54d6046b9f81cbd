"""A plate of 10,000 stages (100 chips of 100 stages) opened, moved and zoomed in the window, 1600 x 1000.

Two plates: one made by hand with a single channel of 100 stages on every chip, and one as the program builds it, with
ten channels of ten stages, ports, marks and lettering; each with all chips alike, and with every chip another.

Each frame is the whole widget painted into a pixmap of the window's size: plate, chips, channels, legend, names.
Zooming goes through the same steps as under the hand: eight frames of gliding for each notch of the wheel and two of
rest. Aim: 30 frames a second or better, 33 ms a frame. Times on the clock and of the processor are printed; asserted is
their 95th percentile as a part of the named baseline: one frame of the whole plate with every wall painted anew.
"""

from __future__ import annotations

import time

import numpy as np
import pytest
from PySide6.QtCore import QPoint, QPointF
from PySide6.QtGui import QPixmap

from app.chip_work import ChipTask, chip_outcome
from app.drawing import chip_painter
from app.drawing.chip_shown import ShownChip
from app.drawing.chip_view import ChipView
from core.chip.plan import ChipChannel, ChipPlan, SteppedField
from core.parameters import ChannelParameters
from core.project import ChipProject, ParameterSet
from tests.app.drawing.chip_scenes import plate_scene

pytestmark = [pytest.mark.benchmark, pytest.mark.gui]

LARGEST_PART = 0.5  # of the baseline
ACROSS = 10  # chips along x and along y
GLIDE, REST, NOTCHES = 8, 2, 26


class Watch:
    """Paints frames and keeps how long each took."""

    def __init__(self, view):
        self.view = view
        self.pixmap = QPixmap(1600, 1000)
        self.clock_ms, self.cpu_ms = [], []

    def paint(self):
        clock, cpu = time.perf_counter(), time.process_time()
        self.view.render(self.pixmap, QPoint())
        self.cpu_ms.append(1000.0 * (time.process_time() - cpu))
        self.clock_ms.append(1000.0 * (time.perf_counter() - clock))

    def zoom(self, factor, at):
        """Zoom by one notch as the wheel does, frame by frame."""
        view = self.view
        start = view.camera
        view.zoom(factor, at, animated=True)
        view._animation.stop()  # the frames are painted here, whatever the clock says
        for step in range(1, GLIDE + 1):
            view._set_camera(view._goal if step == GLIDE else start.blended(view._goal, step / GLIDE))
            self.paint()
        for _ in range(REST):
            self.paint()

    def every_wall_ms(self, monkeypatch):
        """Return the processor time of one frame of the whole plate without any kept picture, the median of three."""
        with monkeypatch.context() as patch:
            patch.setattr(chip_painter, "LARGEST_IMAGE_PX", 0.0)  # every block is too large for a picture
            for _ in range(3):
                self.paint()
        taken, self.cpu_ms, self.clock_ms = float(np.median(self.cpu_ms)), [], []
        return taken

    def tell(self, what, baseline_ms, capsys):
        cpu, clock = np.array(self.cpu_ms), np.array(self.clock_ms)
        with capsys.disabled():
            print(
                f"\n{what}, {len(cpu)} frames: processor median {np.median(cpu):.1f} ms, 95th percentile "
                f"{np.percentile(cpu, 95):.1f} ms, longest {cpu.max():.1f} ms; clock median {np.median(clock):.1f} ms, "
                f"95th percentile {np.percentile(clock, 95):.1f} ms ({1000.0 / np.percentile(clock, 95):.0f} / s); "
                f"{np.percentile(cpu, 95) / baseline_ms:.2f} of painting every wall, {baseline_ms:.0f} ms"
            )
        assert np.percentile(cpu, 95) < LARGEST_PART * baseline_ms
        self.cpu_ms, self.clock_ms = [], []


def plate_by_hand(*, is_stepped):
    scene = plate_scene(copies_across=ACROSS, stages=100, channels=1, is_stepped=is_stepped)
    chips = [(placed.block, placed.dx_um, placed.dy_um) for placed in scene.top.placed]
    size = {
        "chip_width_um": chips[1][1] - chips[0][1] - 200.0, "chip_height_um": chips[ACROSS][2] - chips[0][2] - 200.0,
    }  # fmt: skip
    plan = ChipPlan(plate="wafer", wafer_diameter_um=300_000.0, channels=(ChipChannel(set_name="Set"),), **size)
    return ShownChip.of(scene, plan, chips)


def plate_as_built(*, is_stepped):
    sets = tuple(ParameterSet(name=f"Set {n}", channel=ChannelParameters(stages=10)) for n in range(10))
    side_um, street_um, edge_um = 36_000.0, 200.0, 4000.0
    plate_um = ACROSS * (side_um + street_um) - street_um + 2.0 * edge_um
    series = (
        SteppedField(name="loop_radius_um", first=300.0, last=318.0, steps=ACROSS),
        SteppedField(name="stage_gap_um", first=400.0, last=418.0, steps=ACROSS),
    )
    plan = ChipPlan(
        plate="plate", plate_width_um=plate_um, plate_height_um=plate_um, chip_width_um=side_um, chip_height_um=side_um,
        street_um=street_um, edge_exclusion_um=edge_um, series=series if is_stepped else (),
    )  # fmt: skip
    return chip_outcome(ChipTask.of(ChipProject(name="Ten by ten", sets=sets, plan=plan))).shown


@pytest.mark.parametrize("is_stepped", [False, True], ids=["all alike", "every chip another"])
@pytest.mark.parametrize("make", [plate_by_hand, plate_as_built])
def test_opening_moving_and_zooming(qtbot, capsys, monkeypatch, make, is_stepped):
    begun = time.process_time()
    shown = make(is_stepped=is_stepped)
    made_s = time.process_time() - begun
    assert len(shown.copies) == ACROSS**2
    view = ChipView()
    qtbot.addWidget(view)
    view.resize(1600, 1000)
    view.set_animated(True)
    view.show()
    watch, what = Watch(view), f"{make.__name__}, {'every chip another' if is_stepped else 'all alike'}"
    begun = time.perf_counter()
    view.show_chip(shown)
    view.fit(animated=False)
    view.grab()  # the paths are made with the first picture
    opened_ms = 1000.0 * (time.perf_counter() - begun)
    with capsys.disabled():
        print(f"\n{what}: made beside the window in {made_s:.2f} s, first picture {opened_ms:.0f} ms later")
    baseline_ms = watch.every_wall_ms(monkeypatch)
    for _ in range(20):
        watch.paint()
    watch.tell(f"{what}: opened", baseline_ms, capsys)
    at = QPointF(700.0, 420.0)
    for factor in (1.25, 1.0 / 1.25):
        for _ in range(NOTCHES):
            watch.zoom(factor, at)
        watch.tell(f"{what}: zoomed {'in' if factor > 1.0 else 'out'}", baseline_ms, capsys)
    for closer in (1.7, 3.0, 4.0, 5.0):
        view.zoom(closer, at, animated=False)
        for _ in range(40):
            view.pan(-11.3, 7.1)
            watch.paint()
    watch.tell(f"{what}: moved", baseline_ms, capsys)
