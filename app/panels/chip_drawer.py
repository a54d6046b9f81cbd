"""The chip in the window: drawing, table, panel and findings follow the document."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, QTimer

from app.background import BackgroundJob, Ending, sentence_of
from app.chip_work import ChipOutcome, ChipTask, chip_outcome
from app.drawing.chip_shown import NONE
from app.shown_values import ShownUnits, screen_words
from core.errors import CoreError

if TYPE_CHECKING:
    from app.arrangement import Arrangement
    from app.document import Document
    from app.findings_desk import FindingsDesk
    from app.settings import Settings
    from core.findings import Finding


class ChipDrawer(QObject):
    """Draws the chip while its page is open.

    Parameters
    ----------
    document : Document
        What is worked on.
    parts : Arrangement
        Drawing, table and panel of the chip.
    settings : Settings
        Units.
    findings : FindingsDesk
        Lists the findings of the chip.
    parent : QObject
        As for any object.
    """

    def __init__(
        self,
        document: Document,
        *,
        parts: Arrangement,
        settings: Settings,
        findings: FindingsDesk,
        parent: QObject,
    ) -> None:
        super().__init__(parent)
        self._document, self._parts, self._settings, self._findings = document, parts, settings, findings
        self._outcome: ChipOutcome | None = None
        self._last: ChipOutcome | None = None  # to go by, though it may no longer be shown
        self._to_select: int | None = None  # as soon as it is drawn
        self._job: BackgroundJob | None = None
        self._draw_soon = QTimer(self, singleShot=True, interval=0)
        self._draw_soon.timeout.connect(self.draw)
        document.project_changed.connect(self._on_project_changed)
        settings.units_changed.connect(self._show_units)
        parts.page_changed.connect(self._on_page_changed)
        parts.places.channel_chosen.connect(parts.chip_view.select)
        parts.chip_view.channel_selected.connect(self._on_view_channel_selected)
        parts.chip_view.finding_selected.connect(findings.choose_chip_finding)
        findings.chip_finding_chosen.connect(parts.chip_view.show_finding)
        self._show_units()

    @property
    def outcome(self) -> ChipOutcome | None:
        """What is drawn now."""
        return self._outcome

    def draw(self) -> None:
        """Bring the drawing up to date, at once or, when that takes long, in the background."""
        task = ChipTask.of(self._document.project)
        if self._outcome is not None and self._outcome.task == task:
            return
        older = self._outcome.shown.store if self._outcome else None
        if self._job is not None:
            self._job.cancel()  # its ending draws again
        elif task.is_quick(self._last):
            try:
                self._show(chip_outcome(task, older=older))
            except CoreError as error:
                self._show_obstacle(error)
        else:
            self._parts.chip_view.show_message("Drawing the plate\N{HORIZONTAL ELLIPSIS}")
            self._job = BackgroundJob(lambda report: chip_outcome(task, report, older=older), self)
            self._job.ended.connect(self._on_job_ended)
            self._job.start()

    def _on_job_ended(self, ending: Ending, outcome: object) -> None:
        assert self._job is not None
        self._job.wait()
        self._job.deleteLater()
        self._job = None
        if isinstance(outcome, ChipOutcome):
            self._show(outcome)
        elif ending is Ending.FAILED:
            self._show_obstacle(outcome)
        if ending is Ending.CANCELLED or self._is_stale():
            self._draw_soon.start()

    def _is_stale(self) -> bool:
        return self._outcome is not None and self._outcome.task != ChipTask.of(self._document.project)

    def _show(self, outcome: ChipOutcome) -> None:
        is_new = self._outcome is None
        self._outcome = self._last = outcome
        view = self._parts.chip_view
        view.show_message("")
        view.show_chip(outcome.shown, outcome.findings)
        if is_new:
            view.fit(animated=False)
        if self._to_select is not None and not self._is_stale():
            view.select(self._to_select)
            self._to_select = None
        self._show_places()
        plate, chips = outcome.plan.plate, len(outcome.shown.copies)
        on_it = "" if plate == "single chip" else f"{chips} chip{'' if chips == 1 else 's'} on the {plate}."
        self._parts.chip.show_count(on_it)
        self._list_findings(outcome.findings)

    def _show_obstacle(self, error: object) -> None:
        """Say why there is no drawing of the plan as it stands; what was drawn before is taken away."""
        self._outcome = None
        text = screen_words(sentence_of(error))
        self._parts.chip_view.show_chip(None)
        self._parts.chip_view.show_message(text)
        self._parts.chip.show_count(text)
        self._show_places()
        self._list_findings(())

    def _show_places(self) -> None:
        plan = self._outcome.plan if self._outcome else self._document.plan
        units = ShownUnits.of(self._settings)
        self._parts.places.show_plan(plan, units, is_packed=not self._document.plan.channels)
        self._parts.places.point_at(self._parts.chip_view.selected)

    def _show_units(self) -> None:
        self._parts.chip_view.set_length_unit(ShownUnits.of(self._settings).length)
        self._show_places()

    def _list_findings(self, findings: tuple[Finding, ...]) -> None:
        self._findings.show_chip_findings([("", finding) for finding in findings] if self._parts.is_chip_shown else [])
        self._parts.chip_view.set_first_number(self._findings.first_chip_number)

    def _on_project_changed(self) -> None:
        if self._parts.is_chip_shown:
            self._draw_soon.start()

    def _on_page_changed(self) -> None:
        if self._parts.is_chip_shown:
            self._list_findings(self._outcome.findings if self._outcome else ())
            self.draw()
        else:
            self._list_findings(())

    def _on_view_channel_selected(self, index: int) -> None:
        self._parts.places.point_at(index)
        if index != NONE and self._outcome is not None:
            names = [each.name for each in self._document.project.sets]
            name = self._outcome.plan.channels[index].set_name
            if name in names:
                self._document.select_set(names.index(name))

    def end_now(self) -> None:
        """Stop what is being done in the background."""
        if self._job is not None:
            self._job.ended.disconnect(self._on_job_ended)
            self._job.cancel()
            self._job.wait()
