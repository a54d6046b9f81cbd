"""Findings in the window: collected from shape, process and chip, shown in list and drawing, cured on demand."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, Signal

from app.assessment import Checked, findings_of
from app.cure_search import CureSearch
from app.shown_values import ShownUnits, value_text
from app.throttle import Throttle
from core.errors import CoreError
from core.operating import OPERATING_FIELDS

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from app.document import Document
    from app.drawing.channel_view import ChannelView
    from app.panels.findings import FindingsPanel
    from app.settings import Settings
    from core.findings import Finding

# Checking against the process takes about as long as all the rest, so it may lag behind the hand by this;
# a shape that fails is told at once.
_LAG_MS = 250
_STORED = ShownUnits(length="um", flow="uL/min", pressure="Pa")


class FindingsDesk(QObject):
    """Keeps list and drawing in step, and applies cures.

    Findings of the set in hand come first, worst first. A view of the whole chip may add its own.

    Parameters
    ----------
    document : Document
        What is checked.
    panel : FindingsPanel
        Where findings are listed.
    drawing : ChannelView
        Where those of the set in hand are marked.
    settings : Settings
        Units.
    refuse : callable
        Told of a ``CoreError`` when a cure cannot be used after all.
    parent : QObject
        As for any object.

    Signals
    -------
    chip_finding_chosen(int)
        Which of the findings handed to ``show_chip_findings`` is pointed at, -1 for none.
    """

    chip_finding_chosen = Signal(int)

    def __init__(
        self,
        document: Document,
        *,
        panel: FindingsPanel,
        drawing: ChannelView,
        settings: Settings,
        refuse: Callable[[CoreError], object],
        parent: QObject,
    ) -> None:
        super().__init__(parent)
        self._document, self._panel, self._drawing, self._settings = document, panel, drawing, settings
        self._refuse = refuse
        self._own: tuple[Finding, ...] = ()
        self._chip: tuple[tuple[str, Finding], ...] = ()
        self._shown_of_chip: tuple[int, ...] = ()
        self._throttle = Throttle(self.refresh, interval_ms=_LAG_MS, parent=self)
        self._search = CureSearch(self)
        self._search.found.connect(self.refresh)
        document.channel_changed.connect(self._on_changed)
        document.estimate_changed.connect(self._on_changed)
        settings.units_changed.connect(self.refresh)
        panel.finding_chosen.connect(self._on_panel_finding_chosen)
        panel.cure_requested.connect(self.apply_cure)
        drawing.finding_selected.connect(self._on_drawing_finding_selected)
        self.refresh()

    @property
    def first_chip_number(self) -> int:
        """Number of the first finding of the chip in the list; the drawing numbers those before it."""
        return len(self._own) + 1

    def refresh(self) -> None:
        """Check what is in hand and show what was found."""
        checked = self._checked()
        self._own = self._search.cured(checked) or findings_of(checked)
        self._search.look_for(checked if any(finding.cure is None for finding in self._own) else None)
        self._show()

    def _checked(self) -> Checked:
        document = self._document
        score = document.assessment.score
        flow = value_text(OPERATING_FIELDS["flow_ul_min"], document.operating.flow_ul_min, _STORED)
        return Checked(
            channel=document.channel,
            process=document.process,
            pressure_pa=None if score is None else score.highest_pressure_pa,
            pressure_at=f"at {flow}",
        )

    def show_chip_findings(self, entries: Sequence[tuple[str, Finding]]) -> None:
        """List findings of the chip behind those of the set in hand, which are not listed twice.

        Parameters
        ----------
        entries : sequence of (str, Finding)
            Name of the set that it is about, or empty for the chip; none to show the set in hand alone.
        """
        self._chip = tuple(entries)
        self._show()

    def choose_chip_finding(self, index: int) -> None:
        """Point at a finding of the chip, as chosen in its view; -1 for none."""
        row = self._shown_of_chip.index(index) + len(self._own) if index in self._shown_of_chip else -1
        self._panel.point_at(row)
        self._drawing.mark_finding(-1)

    def apply_cure(self, row: int) -> None:
        """Change what cures a finding of the list, as one step."""
        origin, finding = self._entries()[row]
        if finding.cure is None:
            return
        names = [each.name for each in self._document.project.sets]
        try:
            self._document.apply_cure(*finding.cure, index=names.index(origin) if origin in names else None)
        except CoreError as error:
            self._refuse(error)

    # --- showing --------------------------------------------------------------------------

    def _on_changed(self) -> None:
        self._search.look_for(None)  # it would be in the way of the hand
        if self._document.shape.is_usable:
            self._throttle.call()
        else:
            self.refresh()

    def _entries(self) -> list[tuple[str, Finding]]:
        home = self._document.current_set.name
        return [*((home, each) for each in self._own), *(self._chip[index] for index in self._shown_of_chip)]

    def _show(self) -> None:
        home = self._document.current_set.name
        own = {(home, each) for each in self._own}
        self._shown_of_chip = tuple(index for index, entry in enumerate(self._chip) if entry not in own)
        self._panel.show_findings(self._entries(), ShownUnits.of(self._settings), home=home)
        self._panel.show_searching(self._search.is_searching)
        self._drawing.show_findings(self._own, chosen=self._chosen_of_own())

    def _chosen_of_own(self) -> int:
        return self._panel.chosen if self._panel.chosen < len(self._own) else -1

    def _on_panel_finding_chosen(self, row: int) -> None:
        self._drawing.show_finding(self._chosen_of_own())
        of_chip = row - len(self._own)
        self.chip_finding_chosen.emit(self._shown_of_chip[of_chip] if of_chip >= 0 else -1)

    def _on_drawing_finding_selected(self, index: int) -> None:
        if index != self._chosen_of_own():
            self._panel.point_at(index)
