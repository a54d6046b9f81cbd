"""What a chip's drawing lies on: the plate or wafer with the rim that stays free, and the chips upon it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QBrush, QColor, QPainter, QPainterPath

from app.drawing.signs import line_pen

if TYPE_CHECKING:
    from collections.abc import Sequence

    from app.drawing.camera import Camera
    from app.look import Palette
    from core.chip.plan import ChipPlan

WAFER, PLATE = "wafer", "plate"


@dataclass(frozen=True, slots=True, kw_only=True)
class Ground:
    """Plate and chips as paths [um], made once for a plan.

    Attributes
    ----------
    chips : QPainterPath
        Outlines of all chips.
    plate : QPainterPath or None
        Outline of the plate or wafer; None for a single chip.
    rim : QPainterPath or None
        The part of the plate that is kept free of chips.
    box_um : QRectF
        Extent of all, its top being the smaller y [um].
    """

    chips: QPainterPath
    plate: QPainterPath | None
    rim: QPainterPath | None
    box_um: QRectF


def ground_of(plan: ChipPlan, centres_um: Sequence[tuple[float, float]]) -> Ground:
    """Return what the chips of a plan lie on.

    Parameters
    ----------
    plan : ChipPlan
        Sizes of chip and plate.
    centres_um : sequence of (x, y)
        Middles of all chips [um].
    """
    chips = QPainterPath()
    size = QRectF(-plan.chip_width_um / 2.0, -plan.chip_height_um / 2.0, plan.chip_width_um, plan.chip_height_um)
    for x, y in centres_um:
        chips.addRect(size.translated(x, y))
    plate = rim = None
    if plan.plate == WAFER:
        plate, free = QPainterPath(), QPainterPath()
        radius, inner = plan.wafer_diameter_um / 2.0, plan.wafer_diameter_um / 2.0 - plan.edge_exclusion_um
        plate.addEllipse(QPointF(), radius, radius)
        free.addEllipse(QPointF(), inner, inner)
        rim = plate.subtracted(free) if plan.edge_exclusion_um else None
    elif plan.plate == PLATE:
        plate, free = QPainterPath(), QPainterPath()
        box = QRectF(-plan.plate_width_um / 2.0, -plan.plate_height_um / 2.0, plan.plate_width_um, plan.plate_height_um)
        edge = plan.edge_exclusion_um
        plate.addRect(box)
        free.addRect(box.adjusted(edge, edge, -edge, -edge))
        rim = plate.subtracted(free) if edge else None
    box = chips.boundingRect().united(plate.boundingRect()) if plate else chips.boundingRect()
    return Ground(chips=chips, plate=plate, rim=rim, box_um=box)


def draw_ground(painter: QPainter, ground: Ground, camera: Camera, palette: Palette) -> None:
    """Draw plate, free rim (hatched) and chips."""
    transform = camera.transform()
    painter.save()
    painter.setTransform(transform, True)
    if ground.plate is not None:
        painter.fillPath(ground.plate, QColor(palette.field))
        if ground.rim is not None:
            hatch = QBrush(QColor(palette.rule), Qt.BrushStyle.BDiagPattern)
            hatch.setTransform(transform.inverted()[0])  # the same hatch on the screen at every zoom
            painter.fillPath(ground.rim, hatch)
            painter.strokePath(ground.rim, line_pen(palette.rule))
        painter.strokePath(ground.plate, line_pen(palette.ink_soft, width_px=1.5))
    painter.setRenderHint(QPainter.RenderHint.Antialiasing, False)
    painter.fillPath(ground.chips, QColor(palette.solid))
    painter.strokePath(ground.chips, line_pen(palette.pale_edge))
    painter.restore()
