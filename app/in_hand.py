"""What follows from the set in hand, kept until something else is in hand."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, Signal

from app.assessment import Assessment, assessment_of, curve_top_ul_min
from core.geometry.shape import build_shape

if TYPE_CHECKING:
    from app.undo import Held
    from core.geometry.shape import ChannelShape
    from core.project import ChipProject


class InHand(QObject):
    """Shape and score of the set in hand; tells of those that are different.

    Signals
    -------
    channel_changed(ChannelShape)
        The shape in hand is different.
    estimate_changed(Assessment)
        The score in hand is different.
    """

    channel_changed = Signal(object)
    estimate_changed = Signal(object)

    def __init__(self, held: Held, parent: QObject) -> None:
        super().__init__(parent)
        self.shape: ChannelShape | None = None
        self.assessment: Assessment | None = None
        self._last_good: tuple[int, ChannelShape] | None = None
        self._curve_top_ul_min = curve_top_ul_min(held.project.operating.flow_ul_min)
        self.is_curve_held = False

    def follow(self, held: Held) -> None:
        """Bring shape and score up to date and tell of those that are different."""
        project, index = held.project, held.index
        if not self.is_curve_held:
            self._curve_top_ul_min = curve_top_ul_min(project.operating.flow_ul_min)
        shape, assessment = build_shape(project.sets[index].channel), self.assessment_of(project, index)
        is_new_shape, is_new_assessment = shape is not self.shape, assessment is not self.assessment
        self.shape, self.assessment = shape, assessment
        if shape.is_usable:
            self._last_good = (index, shape)
        if is_new_shape:
            self.channel_changed.emit(shape)
        if is_new_assessment:
            self.estimate_changed.emit(assessment)

    def assessment_of(self, project: ChipProject, index: int) -> Assessment:
        """Return the score of any set of the project, with a curve over the flows of the one in hand."""
        return assessment_of(project.sets[index].channel, project.process, project.operating, self._curve_top_ul_min)

    def last_good(self, index: int) -> ChannelShape | None:
        """Return the latest usable shape of a set while it was in hand."""
        return self._last_good[1] if self._last_good and self._last_good[0] == index else None

    def forget(self) -> None:
        """Keep no usable shape: sets have other places now, or belong to another project."""
        self._last_good = None
