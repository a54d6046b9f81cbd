"""Flow solves in the window: what is started, what is kept, and what panel, drawing and curves show of it."""

from __future__ import annotations

import time
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject

from app.background import Ending
from app.drawing.flow_overlay import FlowOverlay, Shown
from app.panels.solve import SolvePanel, Standing
from app.progress_line import time_left_text
from app.shown_values import ShownUnits, entry_text, screen_words, word_for
from app.solving.numbers import write_numbers
from app.solving.pictures import write_picture
from app.solving.process import COMMAND, SolveProcess
from app.solving.protocol import SolveRequest
from app.solving.waiting import WaitingChild
from core.flow.channel_places import curve_flows_ul_min, streamline_seeds_um
from core.geometry.shape import build_shape
from core.units import unit_symbol

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence
    from pathlib import Path

    from PySide6.QtWidgets import QWidget

    from app.arrangement import Arrangement
    from app.document import Document
    from app.panels.ask import Ask
    from app.settings import Settings
    from app.solving.process import SolveAnswer
    from core.flow.result import FlowField
    from core.operating import OperatingPoint
    from core.parameters import ChannelParameters
    from core.project.solved import SolvedResult

_KEPT_FIELDS = 4  # pictures of as many solves can be shown again
_CELLS_PER_WIDTH = 16  # of the raster on which streamlines are followed


class SolveDesk(QObject):
    """Connects the child process to the document and to all that shows its answers.

    Parameters
    ----------
    document : Document
        What is solved, and where results are kept.
    parts : Arrangement
        Where they are shown.
    settings : Settings
        Units.
    ask : Ask
        Asks where to save.
    window : QWidget
        Window above which questions open.
    """

    def __init__(
        self, document: Document, *, parts: Arrangement, settings: Settings, ask: Ask, window: QWidget
    ) -> None:
        super().__init__(window)
        self._document, self._parts, self._settings = document, parts, settings
        self._ask, self._window = ask, window
        self.command: Sequence[str] = COMMAND
        self.process: SolveProcess | None = None
        self._began_s = 0.0
        self._fields: dict[tuple[ChannelParameters, OperatingPoint], dict[str, FlowField]] = {}
        self._failure = ""
        self._points: list[SolvedResult] = []
        self._shown_field: object = None
        self.panel = SolvePanel()
        self._waiting = WaitingChild(lambda: None if self.process is not None else self.command, near=self.panel)
        self.overlay = FlowOverlay(self)
        parts.verdict.add_part(self.panel)
        parts.drawing.use_overlay(self.overlay)
        self._connect()
        self.refresh()

    def _connect(self) -> None:
        panel, document = self.panel, self._document
        panel.solve_requested.connect(self.solve_here)
        panel.curve_requested.connect(self.solve_curve)
        panel.cancel_requested.connect(self.cancel)
        panel.picture.changed.connect(self._show_picture)
        panel.picture_requested.connect(self.save_picture)
        panel.numbers_requested.connect(self.save_numbers)
        document.channel_changed.connect(self.refresh)
        document.estimate_changed.connect(self.refresh)
        document.solved.changed.connect(self.refresh)
        self._settings.units_changed.connect(self.refresh)

    # --- doing ----------------------------------------------------------------------------

    def solve_here(self) -> None:
        """Solve the set in hand at the operating flow."""
        self._start((self._document.operating.flow_ul_min,))

    def solve_curve(self) -> None:
        """Solve the set in hand at some flows along the curve, the operating flow among them."""
        estimate = self._document.assessment.estimate
        if estimate is not None:
            flow = self._document.operating.flow_ul_min
            self._start(curve_flows_ul_min(float(estimate.flow_ul_min[-1]), through_ul_min=flow))

    def _start(self, flows_ul_min: tuple[float, ...]) -> None:
        document = self._document
        if self.process is not None or document.assessment.obstacle:
            return
        request = SolveRequest(
            set_name=document.current_set.name,
            channel=document.making.flow,
            operating=document.operating,
            flows_ul_min=flows_ul_min,
        )
        self._failure, self._began_s = "", time.monotonic()
        self.process = self._waiting.taken(self.command)
        self.process.progressed.connect(self._on_process_progressed)
        self.process.answered.connect(self._on_process_answered)
        self.process.ended.connect(self._on_process_ended)
        self.panel.show_running(True)
        self.process.start(request)

    def cancel(self) -> None:
        """Stop the solve that runs."""
        if self.process is not None:
            self.process.cancel()

    def end_now(self) -> None:
        """End every child process before this returns."""
        self._waiting.end_now()
        if self.process is not None:
            self.process.end_now()

    # --- what the child says --------------------------------------------------------------

    def _on_process_progressed(self, step: int, total: int, text: str) -> None:
        left = time_left_text(step, total, elapsed_s=time.monotonic() - self._began_s)
        self.panel.show_progress(step, total, f"{text}; {left}" if left else text)

    def _on_process_answered(self, answer: SolveAnswer) -> None:
        if answer.fields:
            key = (answer.request.channel, answer.request.operating)
            self._fields.pop(key, None)
            self._fields[key] = answer.fields
            while len(self._fields) > _KEPT_FIELDS:
                del self._fields[next(iter(self._fields))]
        self._document.solved.add(answer.results)  # which tells all to refresh

    def _on_process_ended(self, ending: Ending, text: str) -> None:
        if self.process is not None:
            self.process.deleteLater()
            self.process = None
        self._failure = screen_words(text) if ending is Ending.FAILED else ""
        self.panel.show_running(False)
        self.refresh()

    # --- showing --------------------------------------------------------------------------

    def refresh(self) -> None:
        """Show what is known about what is in hand."""
        document, store = self._document, self._document.solved
        current = store.at(document.making.flow, document.operating)
        self._show_figures(current)
        score = document.assessment.score
        for each in (current, score):
            if each is not None and each.shares_of(0) is not None:
                self._parts.drawing.show_shares(each.shares_of)
                break
        along = store.along(document.making.flow, document.operating)
        points = [each for each in along if each.diodicity is not None]
        if points != self._points:  # painting curves takes time
            self._points = points
            self._parts.curves.show_points(points)
        self._show_picture()

    def _show_figures(self, current: SolvedResult | None) -> None:
        units = ShownUnits.of(self._settings)
        if current is not None:
            self.panel.show_result(current, units, standing=self._standing(current), remark=self._failure)
        elif (stale := self._stale()) is not None:
            remark = self._failure or self._what_changed(stale.channel, stale.operating)
            self.panel.show_result(stale, units, standing=Standing.STALE, remark=remark)
        else:
            self.panel.show_nothing()
            self.panel.show_failure(self._failure)

    def _stale(self) -> SolvedResult | None:
        """Return what comes nearest: what is made of the set at the nearest flow, else what was made of it once."""
        document, store = self._document, self._document.solved
        flow = document.operating.flow_ul_min
        along = store.along(document.making.flow, document.operating)
        nearest = min(along, key=lambda each: abs(each.flow_ul_min - flow), default=None)
        return nearest or store.stale_of(document.current_set.name)

    def _standing(self, result: SolvedResult) -> Standing:
        if result.diodicity is None:
            return Standing.LOST
        if result.quality == "coarse":
            return Standing.COARSE if self.process is not None else Standing.COARSE_ONLY
        return Standing.CURRENT if result.valid else Standing.DOUBTFUL

    def _what_changed(self, channel: ChannelParameters, operating: OperatingPoint) -> str:
        if channel != self._document.making.flow:
            return "These figures belong to earlier parameters of this set, or of its process; solve again."
        return f"These figures were solved at {self._condition(operating)}; solve again."

    def _condition(self, operating: OperatingPoint) -> str:
        units = ShownUnits.of(self._settings)
        flow = f"{entry_text(units.shown(operating.flow_ul_min, 'uL/min'))} {unit_symbol(units.flow)}"
        return f"{flow}, {word_for(operating.fluid)}, {operating.temperature_c:g} \N{DEGREE SIGN}C"

    def _show_picture(self) -> None:
        """Show the picture that belongs to what is made of the channel in hand; never another channel's."""
        document, panel = self._document, self.panel.picture
        solved = document.making.flow  # what is made of the set in hand, not what is wanted
        key = (solved, document.operating)
        if key not in self._fields:
            key = next((each for each in reversed(self._fields) if each[0] == solved), key)
        direction = "forward" if panel.is_forward else "reverse"
        field = self._fields.get(key, {}).get(direction)
        is_stale = field is not None and key[1] != document.operating
        self.overlay.set_units(ShownUnits.of(self._settings))
        if field is not self._shown_field:
            self._shown_field = field
            self.overlay.set_field(
                field,
                seeds_um=streamline_seeds_um(build_shape(solved), is_forward=panel.is_forward),
                cell_um=solved.channel_width_um / _CELLS_PER_WIDTH,
                caption=f"{direction} flow",
            )
        self.overlay.set_view(panel.shown, height_share=panel.height_share)
        self.overlay.set_remark(f"Stale: solved at {self._condition(key[1])}" if is_stale else "")
        panel.show_hint(_hint(panel.shown, has_field=field is not None))

    def text_at(self, x_um: float, y_um: float) -> str:
        """Return the value of the flow picture at a place, for the read-out; empty where there is none."""
        return self.overlay.text_at(x_um, y_um)

    # --- saving ---------------------------------------------------------------------------

    def save_picture(self) -> None:
        """Ask for a file and save the drawing as it is seen."""
        self._save(
            "Save the picture", ".png", "Pictures (*.png *.svg)", lambda path: write_picture(self._parts.drawing, path)
        )

    def save_numbers(self) -> None:
        """Ask for a file and save the results of the design in hand, or the stale ones of its set."""
        document, store = self._document, self._document.solved
        name = document.current_set.name
        results = store.along(document.making.flow, document.operating) or tuple(
            each for each in store.results if each.set_name == name
        )
        if results:
            self._save("Save the numbers", ".csv", "Tables (*.csv)", lambda path: write_numbers(results, path))

    def _save(self, title: str, suffix: str, kinds: str, write: Callable[[Path], None]) -> None:
        path = self._ask.file_to_write(self._window, title, f"{self._document.current_set.name}{suffix}", kinds)
        if path is None:
            return
        try:
            write(path if path.suffix else path.with_suffix(suffix))
        except OSError as error:
            self._ask.tell(self._window, "Not saved", f"The system refused: {error.strerror or error}.", ())


def _hint(shown: Shown, *, has_field: bool) -> str:
    if shown is Shown.NOTHING or has_field:
        return ""
    return "No flow picture of what is in hand: solve here to see it."
