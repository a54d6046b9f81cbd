"""Shapes that the tests of the drawing share, and the wheel that Qt's test tools lack."""

from __future__ import annotations

from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtGui import QWheelEvent
from PySide6.QtWidgets import QApplication

from core.findings import Finding, Severity
from core.geometry.shape import ChannelShape, build_shape
from core.parameters import ChannelParameters

GOOD = build_shape(ChannelParameters())
IMPOSSIBLE = build_shape(ChannelParameters(stage_gap_um=0.0, loop_radius_um=500.0, sides="same", run_bend_deg=0.0))


def finding(severity: Severity, x_um: float | None, y_um: float | None, message: str = "raise stage_gap_um") -> Finding:
    """Return a finding at a place."""
    return Finding(code="made_up", severity=severity, message=message, field="stage_gap_um", x_um=x_um, y_um=y_um)


DOUBTFUL = ChannelShape(
    GOOD.parameters,
    GOOD.outline,
    (
        finding(Severity.WARNING, 1500.0, 200.0),
        finding(Severity.WARNING, 1500.0, 200.0),
        finding(Severity.ERROR, 3000.0, 0.0),
        finding(Severity.WARNING, None, None),
    ),
)


def turn_wheel(
    widget, at: QPoint, notches: float, *, phase=Qt.ScrollPhase.NoScrollPhase, pixels: QPoint | None = None
) -> None:
    """Turn the wheel as a mouse does, or two fingers as a touch pad does."""
    event = QWheelEvent(
        QPointF(at), QPointF(widget.mapToGlobal(at)), pixels or QPoint(), QPoint(0, round(120 * notches)),
        Qt.MouseButton.NoButton, Qt.KeyboardModifier.NoModifier, phase, False,
    )  # fmt: skip
    QApplication.sendEvent(widget, event)
