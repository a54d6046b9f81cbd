"""Marks of a whole plate: the corners of the area to be written, and a title outside the chips."""

from __future__ import annotations

from typing import TYPE_CHECKING

from core.chip.lettering import lettered
from core.chip.marks import MOST_UNITS, corner_mark, mark_unit_um
from core.chip.plan import PlateKind
from core.chip.scene import PlacedBlock

if TYPE_CHECKING:
    from core.chip.plan import ChipPlan
    from core.fabrication.process import Process

TITLE_HEIGHT_UM = 2000.0  # of capitals; 1 to 3 mm are usual
_SHARE = 0.5  # of the free rim that a title may take


def plate_blocks(plan: ChipPlan, process: Process, *, chip_name: str, scale: float) -> list[PlacedBlock]:
    """Return corner marks and the title of a plate, unscaled.

    The title names the chip and, where it is not 1, the factor by which everything has been enlarged. On a wafer
    it stands outside the circle, in the lower left corner of the square round it; on a plate in the lower rim
    that is kept free of chips, smaller where that is narrow. Without room for it there is none.

    Parameters
    ----------
    plan, process : ChipPlan, Process
        Plate, and how the chip is made.
    chip_name : str
        As the user typed it.
    scale : float
        Factor of the whole scene.
    """
    unit = mark_unit_um(process, depth_um=0.0)
    if plan.plate == PlateKind.WAFER:
        half = (0.5 * plan.wafer_diameter_um, 0.5 * plan.wafer_diameter_um)
        rim = TITLE_HEIGHT_UM / _SHARE
    else:
        half = (0.5 * plan.plate_width_um, 0.5 * plan.plate_height_um)
        rim = plan.edge_exclusion_um
    marks: list[PlacedBlock] = []
    arm = MOST_UNITS * unit
    if plan.corner_marks == "yes" and (plan.plate == PlateKind.WAFER or rim >= arm + 2.0 * unit):
        for across in (-1, 1):
            for up in (-1, 1):
                stamp = corner_mark(arm_um=arm, unit_um=unit, across=across, up=up)
                marks.append(PlacedBlock(block=stamp.block, dx_um=across * half[0], dy_um=up * half[1]))
    title = chip_name if scale == 1.0 else f"{chip_name} SCALE {scale:.5f}"
    height = min(TITLE_HEIGHT_UM, _SHARE * rim)
    left, low = -half[0] + arm + 2.0 * unit, -half[1] + 2.0 * unit
    while height >= 7.0 * process.min_drawn_um:
        line = lettered(title, height_um=height)
        right = left + line.width_um
        far = half[0] - arm
        if plan.plate == PlateKind.WAFER:
            far = -((half[0] ** 2 - min(0.0, low + height) ** 2) ** 0.5)
        if right <= far and low + height <= -half[1] + rim - unit:
            return marks + [PlacedBlock(block=s.block, dx_um=left + s.dx_um, dy_um=low) for s in line.placed]
        height = round(0.8 * height, 1)
    return marks
