"""The results of flow solves that the window knows: facts, which no undo takes away."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, Signal

from app.assessment import making_by
from core.project.solved import SolvedResult, kept_results

if TYPE_CHECKING:
    from collections.abc import Iterable

    from core.operating import OperatingPoint
    from core.parameters import ChannelParameters
    from core.project import ChipProject


class SolvedStore(QObject):
    """Holds results by what they belong to; a result for other parameters is stale, not wrong.

    Signals
    -------
    changed()
        There are other results, or they were saved.
    """

    changed = Signal()

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._results: tuple[SolvedResult, ...] = ()
        self._is_unsaved = False

    @property
    def results(self) -> tuple[SolvedResult, ...]:
        """All results, the oldest first."""
        return self._results

    @property
    def is_unsaved(self) -> bool:
        """Whether there are results that no file holds."""
        return self._is_unsaved

    def load(self, results: Iterable[SolvedResult]) -> None:
        """Hold the results of another project."""
        self._results, self._is_unsaved = tuple(results), False
        self.changed.emit()

    def add(self, results: Iterable[SolvedResult]) -> None:
        """Take in new results; each replaces an older one of the same question."""
        self._results, self._is_unsaved = kept_results((*self._results, *results)), True
        self.changed.emit()

    def mark_saved(self) -> None:
        """Know that a file holds all results."""
        self._is_unsaved = False
        self.changed.emit()

    def kept_with(self, project: ChipProject) -> tuple[SolvedResult, ...]:
        """Return the results that belong to a project: to one of its sets, by name or by what is made of it."""
        names = {each.name for each in project.sets}
        channels = {making_by(each.channel, project.process).flow for each in project.sets}
        return tuple(each for each in self._results if each.set_name in names or each.channel in channels)

    def at(self, channel: ChannelParameters, operating: OperatingPoint) -> SolvedResult | None:
        """Return the latest result of a design at an operating point."""
        return next((each for each in reversed(self._results) if each.belongs_to(channel, operating)), None)

    def along(self, channel: ChannelParameters, operating: OperatingPoint) -> tuple[SolvedResult, ...]:
        """Return the results of a design with a fluid, at whatever flow, one for each flow."""
        found = {
            each.flow_ul_min: each for each in self._results if each.belongs_to(channel, operating, at_any_flow=True)
        }
        return tuple(found[flow] for flow in sorted(found))

    def stale_of(self, set_name: str) -> SolvedResult | None:
        """Return the latest result of a set, whatever the set was then."""
        return next((each for each in reversed(self._results) if each.set_name == set_name), None)
