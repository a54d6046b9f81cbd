"""The curves in the window: what they show, at most every so often, and the operating flow dragged along them."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QObject

from app.throttle import Throttle
from core.errors import CoreError

if TYPE_CHECKING:
    from collections.abc import Callable

    from app.arrangement import Arrangement
    from app.assessment import Assessment
    from app.document import Document

# Painting the curves takes longer than all the rest, so that they may lag behind the drawing by this.
_CURVES_MS = 50


class CurvesDesk(QObject):
    """Connects the curves to the document.

    Parameters
    ----------
    document : Document
        What is shown and changed.
    parts : Arrangement
        Where the curves are.
    is_comparing : callable
        Whether curves of the other sets are laid under those of the set in hand.
    refuse : callable
        Told of a ``CoreError`` when a flow cannot be used.
    parent : QObject
        As for any object.
    """

    def __init__(
        self,
        document: Document,
        *,
        parts: Arrangement,
        is_comparing: Callable[[], bool],
        refuse: Callable[[CoreError], object],
        parent: QObject,
    ) -> None:
        super().__init__(parent)
        self._document, self._parts = document, parts
        self._is_comparing, self._refuse = is_comparing, refuse
        self._throttle = Throttle(self._show, interval_ms=_CURVES_MS, parent=self)
        self._gesture: int | None = None
        document.estimate_changed.connect(self.show_assessment)
        parts.curves.operating_flow_dragged.connect(self._on_flow_dragged)
        parts.curves.operating_flow_set.connect(self._on_flow_set)
        self.show_assessment(document.assessment)

    def show_assessment(self, assessment: Assessment) -> None:
        """Show other curves, or say that there are none."""
        self._parts.show_curves(assessment.score is not None)
        if assessment.score is not None:
            self._throttle.call()

    def show_compared(self) -> None:
        """Lay the curves of the other sets under those of the set in hand, or take them away."""
        document, named = self._document, []
        if self._is_comparing():
            for index, each in enumerate(document.project.sets):
                beside = document.assessment_beside(index).estimate
                if index != document.index and beside is not None:
                    named.append((each.name, beside))
        self._parts.curves.show_comparison(named)

    def _show(self) -> None:
        assessment = self._document.assessment
        if assessment.estimate is not None:
            self._parts.curves.show_estimate(assessment.estimate, flow_ul_min=assessment.flow_ul_min)
            self.show_compared()

    def _on_flow_dragged(self, flow_ul_min: float) -> None:
        if self._gesture is None:
            self._gesture = self._document.new_gesture()
            self._document.hold_curve(True)
        try:
            self._document.change_operating({"flow_ul_min": flow_ul_min}, gesture=self._gesture)
        except CoreError as error:
            self._refuse(error)

    def _on_flow_set(self, flow_ul_min: float) -> None:
        self._on_flow_dragged(flow_ul_min)
        self._gesture = None
        self._document.hold_curve(False)
