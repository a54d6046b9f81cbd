"""The dialog that writes mask files: what will be written, then the proof that it was."""

from __future__ import annotations

import json
import time
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt, QTimer, Signal
from PySide6.QtWidgets import (
    QDialog,
    QHBoxLayout,
    QLabel,
    QProgressBar,
    QPushButton,
    QTextBrowser,
    QVBoxLayout,
)

from app.assessment import shape_of
from app.background import BackgroundJob, Ending, Reporter, sentence_of
from app.look import SPACING, font, set_role
from app.panels.export_choices import ExportChoices
from app.panels.export_pages import proof_page, summary_page
from app.progress_line import time_left_text
from app.shown_values import screen_words
from core.errors import CoreError
from core.masks.mask_set import mask_summary, write_mask_set
from core.masks.report import MaskSetReport, MaskSummary

if TYPE_CHECKING:
    from PySide6.QtWidgets import QWidget

    from app.document import Document
    from app.panels.ask import Ask
    from app.settings import Settings
    from core.geometry.shape import ChannelShape
    from core.masks.options import MaskOptions
    from core.project import ParameterSet

_REMEMBERED = "masks"


class ExportDialog(QDialog):
    """Chooses, shows what will be written, writes in the background and shows the proof.

    Parameters
    ----------
    parent : QWidget
        Window above which it opens.
    document : Document
        Whose sets are written, as they stand when the dialog opens.
    settings : Settings
        Remembers the choices.
    ask : Ask
        Asks for the folder.

    Signals
    -------
    summary_shown()
        What would be written, or why it cannot be, is on the screen.
    """

    summary_shown = Signal()

    def __init__(self, parent: QWidget, *, document: Document, settings: Settings, ask: Ask) -> None:
        super().__init__(parent)
        self.setWindowTitle("Write masks")
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self._project = document.project
        self._settings = settings
        self._job: BackgroundJob | None = None
        self._summary_job: BackgroundJob | None = None
        self._is_summary_stale = False
        self._began_s = 0.0
        self.report: MaskSetReport | None = None
        self.choices = ExportChoices(
            self._project.sets, in_hand=document.index, folder=_first_folder(document), ask=ask
        )
        self.choices.take_remembered(_remembered(settings))
        self._summarise = QTimer(self, singleShot=True, interval=0)
        self._summarise.timeout.connect(self.show_summary)
        self._build()
        self.choices.changed.connect(self._on_choices_changed)
        self.show_summary()

    def _build(self) -> None:
        self.heading = QLabel("What will be written")
        self.heading.setFont(font("heading"))
        self.page = QTextBrowser()
        self.page.setAccessibleName("What is written")
        self.message = QLabel()
        self.message.setWordWrap(True)
        self.message.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self.progress = QProgressBar()
        self.progress.setTextVisible(False)
        self.progress.hide()
        self.write_button = QPushButton("&Write")
        self.write_button.setDefault(True)
        self.close_button = QPushButton("&Close")
        self.close_button.setAutoDefault(False)
        self.write_button.clicked.connect(self.write)
        self.close_button.clicked.connect(self.reject)
        right = QVBoxLayout()
        right.addWidget(self.heading)
        right.addWidget(self.page, 1)
        across = QHBoxLayout()
        across.setSpacing(SPACING.large)
        across.addWidget(self.choices)
        across.addLayout(right, 1)
        foot = QHBoxLayout()
        foot.addWidget(self.message, 1)
        foot.addWidget(self.write_button)
        foot.addWidget(self.close_button)
        layout = QVBoxLayout(self)
        layout.addLayout(across, 1)
        layout.addWidget(self.progress)
        layout.addLayout(foot)
        self.resize(980, 600)

    # --- before ---------------------------------------------------------------------------

    def show_summary(self) -> None:
        """Show what the choices would write, or why they cannot be used.

        Cutting and counting many channels takes a while, so it is done in the background; choices
        made meanwhile are looked at next.
        """
        if self._job is not None or self._summary_job is not None:
            return
        self.write_button.setEnabled(False)
        self.heading.setText("What will be written")
        try:
            named, options, chip_name = self._named_shapes(), self.choices.options(), self._project.name
        except CoreError as error:
            self._show_obstacle(error)
            return
        self._say("Looking at what will be written\N{HORIZONTAL ELLIPSIS}", "soft")
        self._is_summary_stale = False
        self._summary_job = BackgroundJob(lambda _report: mask_summary(named, options, chip_name=chip_name), self)
        self._summary_job.ended.connect(self._on_summary_job_ended)
        self._summary_job.start()

    def _on_choices_changed(self) -> None:
        self._is_summary_stale = True
        self.write_button.setEnabled(False)
        self._summarise.start()

    def _on_summary_job_ended(self, _ending: Ending, outcome: object) -> None:
        _clear_away(self._summary_job)
        self._summary_job = None
        if self._is_summary_stale:
            self._summarise.start()
        elif isinstance(outcome, MaskSummary):
            self.page.setHtml(summary_page(outcome, folder=self.choices.folder))
            self._say("", "")
            self.write_button.setEnabled(True)
            self.summary_shown.emit()
        else:
            self._show_obstacle(outcome)

    def _show_obstacle(self, error: object) -> None:
        self.page.setHtml("")
        self._say(screen_words(sentence_of(error)), "error")
        self.summary_shown.emit()

    def _named_shapes(self) -> list[tuple[str, ChannelShape]]:
        return [(each.name, shape_of(each.channel)) for each in self.choices.chosen_sets()]

    def _say(self, text: str, role: str) -> None:
        self.message.setText(text)
        set_role(self.message, role)

    # --- writing --------------------------------------------------------------------------

    def write(self) -> None:
        """Write the chosen masks in the background."""
        self._settings.set_choices(_REMEMBERED, json.dumps(self.choices.to_remember()))
        options, folder, sets = self.choices.options(), self.choices.folder, self.choices.chosen_sets()
        chip_name = self._project.name
        self._job = BackgroundJob(
            lambda report: _written(report, sets, folder=folder, chip_name=chip_name, options=options), self
        )
        self._job.progressed.connect(self._on_job_progressed)
        self._job.ended.connect(self._on_job_ended)
        self._began_s = time.monotonic()
        self._show_busy(True)
        self._job.start()

    def _show_busy(self, is_busy: bool) -> None:
        self.progress.setRange(0, 0)
        self.progress.setVisible(is_busy)
        self.choices.setEnabled(not is_busy)
        self.write_button.setEnabled(not is_busy)
        self.close_button.setText("&Stop" if is_busy else "&Close")

    def _on_job_progressed(self, step: int, total: int, text: str) -> None:
        self.progress.setRange(0, total)
        self.progress.setValue(step)
        left = time_left_text(step, total, elapsed_s=time.monotonic() - self._began_s)
        self._say(f"{text}; {left}" if left else text, "soft")

    def _on_job_ended(self, ending: Ending, outcome: object) -> None:
        _clear_away(self._job)
        self._job = None
        self._show_busy(False)
        if isinstance(outcome, MaskSetReport):
            self.report = outcome
            self.heading.setText("Written, read back and compared")
            self.page.setHtml(proof_page(self.report))
            self._say(f"\N{CHECK MARK} All files are in {self.report.folder}.", "good")
            self.close_button.setFocus()
        elif ending is Ending.CANCELLED:
            self._say("Stopped; no file was written.", "warning")
        else:
            self._say(f"\N{BLACK DIAMOND} {sentence_of(outcome)}", "error")

    def reject(self) -> None:
        """Close; while files are being written, ask the work to stop instead."""
        if self._job is not None:
            self._job.cancel()
            self._say("Stopping\N{HORIZONTAL ELLIPSIS} files that are already being put in place stay.", "soft")
            return
        self._summarise.stop()
        if self._summary_job is not None:
            self._summary_job.ended.disconnect(self._on_summary_job_ended)
            self._summary_job.wait()
        super().reject()


def _clear_away(job: BackgroundJob | None) -> None:
    """Clear away work that has ended; its thread may still be on the way out."""
    if job is not None:
        job.wait()
        job.deleteLater()


def _written(
    report: Reporter, sets: list[ParameterSet], *, folder: Path, chip_name: str, options: MaskOptions
) -> MaskSetReport:
    steps = len(sets)
    named = []
    for step, each in enumerate(sets):
        report(step, steps, f"Drawing {each.name}")
        named.append((each.name, shape_of(each.channel)))
    # All or nothing: the files are put in place together at the end, or none is.
    return write_mask_set(named, folder=folder, chip_name=chip_name, options=options, report=report)


def _first_folder(document: Document) -> Path:
    beside = document.path.parent if document.path is not None else Path.home()
    return beside / "masks"


def _remembered(settings: Settings) -> dict[str, object]:
    try:
        choices = json.loads(settings.choices(_REMEMBERED) or "{}")
    except ValueError:
        return {}
    return choices if isinstance(choices, dict) else {}
