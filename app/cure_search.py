"""The search for changes that cure findings: in the background, when the hand rests."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, QTimer, Signal

from app.assessment import cured_findings_of
from app.background import BackgroundJob, Ending

if TYPE_CHECKING:
    from app.assessment import Checked
    from core.findings import Finding

_REST_MS = 200
_KEPT = 32


class CureSearch(QObject):
    """Looks for cures of one thing at a time; what was found is kept.

    Signals
    -------
    found()
        ``cured`` has an answer that it did not have.
    """

    found = Signal()

    def __init__(self, parent: QObject) -> None:
        super().__init__(parent)
        self._wanted: Checked | None = None
        self._kept: dict[Checked, tuple[Finding, ...]] = {}
        self._job: BackgroundJob | None = None
        self._rest = QTimer(self, singleShot=True, interval=_REST_MS)
        self._rest.timeout.connect(self._start)

    @property
    def is_searching(self) -> bool:
        """Whether there may be more cures to come."""
        return self._wanted is not None

    def cured(self, checked: Checked) -> tuple[Finding, ...] | None:
        """Return the findings with their cures; None where they have not been looked for."""
        return self._kept.get(checked)

    def look_for(self, checked: Checked | None) -> None:
        """Look for cures after a rest, unless they are known; None gives up what is being looked for."""
        wanted = None if checked in self._kept else checked
        if wanted == self._wanted:
            return
        self._wanted = wanted
        if self._job is not None:
            self._job.cancel()
        if wanted is None:
            self._rest.stop()
        else:
            self._rest.start()

    def _start(self) -> None:
        wanted = self._wanted
        if wanted is None or self._job is not None:  # the end of the old search starts the new one
            return
        self._job = BackgroundJob(lambda report: cured_findings_of(wanted, lambda: report(0, 0, "")), self)
        self._job.ended.connect(lambda ending, outcome: self._on_ended(wanted, ending, outcome))
        self._job.start()

    def _on_ended(self, searched: Checked, ending: Ending, outcome: object) -> None:
        if self._job is not None:
            self._job.wait()
            self._job.deleteLater()
            self._job = None
        if ending is not Ending.CANCELLED:
            # a search that failed has found nothing, and is not begun again
            self._keep(searched, outcome if isinstance(outcome, tuple) else ())
        if self._wanted == searched and ending is not Ending.CANCELLED:
            self._wanted = None
            self.found.emit()
        elif self._wanted is not None and not self._rest.isActive():
            self._start()

    def _keep(self, checked: Checked, findings: tuple[Finding, ...]) -> None:
        self._kept[checked] = findings
        while len(self._kept) > _KEPT:
            del self._kept[next(iter(self._kept))]
