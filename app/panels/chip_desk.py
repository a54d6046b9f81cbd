"""The chip in the window: keeps drawing, table and plan in step, and does what the user asks of placed channels."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, QTimer

from app.background import BackgroundJob, Ending, sentence_of
from app.chip_work import ChipOutcome, ChipTask, chip_outcome, placed_plan
from app.drawing.chip_shown import NONE
from app.shown_values import ShownUnits, screen_words
from core.chip.adding import added
from core.chip.bodies import channel_of, level_turn, title_of
from core.chip.fitting import packed
from core.errors import CoreError, DesignValueError

if TYPE_CHECKING:
    from collections.abc import Callable

    from app.arrangement import Arrangement
    from app.document import Document
    from app.findings_desk import FindingsDesk
    from app.settings import Settings
    from core.chip.plan import ChipChannel, ChipPlan
    from core.findings import Finding

_QUARTER_DEG = 90.0


class ChipDesk(QObject):
    """Draws the chip while its page is open, and changes its plan.

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
    refuse : callable
        Told of a ``CoreError`` when a change cannot be used.
    parent : QObject
        As for any object.
    """

    def __init__(
        self, document: Document, *, parts: Arrangement, settings: Settings, findings: FindingsDesk,
        refuse: Callable[[CoreError], object], parent: QObject,
    ) -> None:  # fmt: skip
        super().__init__(parent)
        self._document, self._parts, self._settings = document, parts, settings
        self._findings, self._refuse = findings, refuse
        self._outcome: ChipOutcome | None = None
        self._job: BackgroundJob | None = None
        self._gesture: int | None = None
        self._draw_soon = QTimer(self, singleShot=True, interval=0)
        self._draw_soon.timeout.connect(self.draw)
        self._connect()

    def _connect(self) -> None:
        view, places = self._parts.chip_view, self._parts.places
        self._document.project_changed.connect(self._on_project_changed)
        self._settings.units_changed.connect(self._show_units)
        self._parts.page_changed.connect(self._on_page_changed)
        view.channel_selected.connect(self._on_view_channel_selected)
        view.move_requested.connect(self._on_move_requested)
        view.remove_requested.connect(self.remove)
        view.finding_selected.connect(self._on_view_finding_selected)
        places.channel_chosen.connect(view.select)
        places.model.place_requested.connect(lambda row, name, value: self._change(row, {name: value}))
        places.model.refused.connect(self._refuse)
        self._findings.chip_finding_chosen.connect(self._on_chip_finding_chosen)
        self._show_units()

    # --- showing --------------------------------------------------------------------------

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
        elif task.is_quick:
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
        self._outcome = outcome
        view = self._parts.chip_view
        view.show_message("")
        view.show_chip(outcome.shown, outcome.findings)
        if is_new:
            view.fit(animated=False)
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

    def _on_view_finding_selected(self, index: int) -> None:
        self._findings.choose_chip_finding(index)

    def _on_chip_finding_chosen(self, index: int) -> None:
        self._parts.chip_view.show_finding(index)

    # --- doing ----------------------------------------------------------------------------

    @property
    def chosen(self) -> int:
        """The placed channel in hand, -1 for none."""
        return self._parts.chip_view.selected

    def _plan(self) -> ChipPlan:
        """Return the plan with the place of every channel; raises ``CoreError`` when they cannot be packed."""
        return placed_plan(ChipTask.of(self._document.project))

    def _try(self, change: Callable[[ChipPlan], tuple[ChipPlan, str]], *, gesture: int | None = None) -> None:
        """Put the plan in place that a change makes of the present one, as one step."""
        try:
            self._document.change_plan(*change(self._plan()), gesture=gesture)
        except CoreError as error:
            self._refuse(error)

    def _change(
        self, index: int, values: dict[str, object], *, gesture: int | None = None, verb: str = "Place"
    ) -> None:
        def change(plan: ChipPlan) -> tuple[ChipPlan, str]:
            channel = plan.channels[index]
            return _with_channel(plan, index, channel.with_values(values)), f"{verb} '{title_of(channel)}'"

        self._try(change, gesture=gesture)

    def _change_chosen(self, verb: str, values: Callable[[ChipPlan, ChipChannel], dict[str, object]]) -> None:
        index = self.chosen
        if index == NONE:
            return

        def change(plan: ChipPlan) -> tuple[ChipPlan, str]:
            channel = plan.channels[index]
            changed = channel.with_values(values(plan, channel))
            return _with_channel(plan, index, changed), f"{verb} '{title_of(channel)}'"

        self._try(change)

    def _on_move_requested(self, index: int, x_um: float, y_um: float, is_held: bool) -> None:
        if not is_held or self._gesture is None:
            self._gesture = self._document.new_gesture()
        self._change(index, {"x_um": x_um, "y_um": y_um}, gesture=self._gesture, verb="Move")
        self.draw()  # a held key goes on from where the channel is now

    def add(self, *, is_control: bool) -> None:
        """Place the set in hand once more, or the plain channel to measure it against."""
        task, name = ChipTask.of(self._document.project), self._document.current_set.name
        what = f"Place a control of '{name}'" if is_control else f"Place '{name}'"
        self._try(lambda plan: (added(plan, task.channels, task.process, set_name=name, is_control=is_control), what))
        self.draw()
        if self._outcome is not None:
            self._parts.chip_view.select(len(self._outcome.plan.channels) - 1)

    def pack(self) -> None:
        """Pack all that is placed anew."""
        task = ChipTask.of(self._document.project)
        self._try(lambda plan: (packed(plan, task.channels, task.process, chip_name=task.chip_name), "Pack the chip"))

    def turn(self) -> None:
        """Turn the channel in hand by a quarter."""
        self._change_chosen("Turn", lambda _plan, channel: {"turn_deg": (channel.turn_deg + _QUARTER_DEG) % 360.0})

    def level(self) -> None:
        """Turn the channel in hand so that both its ports stand at one height."""
        task = ChipTask.of(self._document.project)

        def values(plan: ChipPlan, channel: ChipChannel) -> dict[str, object]:
            shape = channel_of(channel, task.channels)
            return {"turn_deg": level_turn(plan, channel, shape, task.process)}

        self._change_chosen("Level", values)

    def fold(self, rows: int) -> None:
        """Fold the channel in hand into more or fewer rows."""
        self._change_chosen("Fold" if rows > 0 else "Unfold", lambda _plan, channel: {"rows": channel.rows + rows})

    def remove(self, index: int | None = None) -> None:
        """Take a channel off the chip; the last one cannot go."""
        gone = self.chosen if index is None else index
        if gone == NONE:
            return

        def change(plan: ChipPlan) -> tuple[ChipPlan, str]:
            kept = plan.channels[:gone] + plan.channels[gone + 1 :]
            if not kept:
                raise _last_one()
            return replace(plan, channels=kept), f"Remove '{title_of(plan.channels[gone])}' from the chip"

        self._try(change)

    def end_now(self) -> None:
        """Stop what is being done in the background."""
        if self._job is not None:
            self._job.ended.disconnect(self._on_job_ended)
            self._job.cancel()
            self._job.wait()


def _with_channel(plan: ChipPlan, index: int, channel: ChipChannel) -> ChipPlan:
    return replace(plan, channels=(*plan.channels[:index], channel, *plan.channels[index + 1 :]))


def _last_one() -> DesignValueError:
    return DesignValueError(
        field="channels",
        value="nothing",
        limit="at least one placed channel, since an empty chip is packed with every set",
        way_out="add another channel first",
    )
