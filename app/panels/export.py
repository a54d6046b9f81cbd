"""The dialog that writes mask files: what will be written, then the proof that it was."""

from __future__ import annotations

import json
import time
from datetime import date
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

from app.background import BackgroundJob, Ending, sentence_of
from app.look import SPACING, font, set_role
from app.panels.export_choices import ExportChoices
from app.panels.export_pages import proof_page, summary_page
from app.panels.export_work import Prospect, prospect_of, written
from app.progress_line import time_left_text
from app.shown_values import screen_words
from core.errors import CoreError
from core.masks.report import MaskSetReport

if TYPE_CHECKING:
    from PySide6.QtWidgets import QWidget

    from app.document import Document
    from app.panels.ask import Ask
    from app.panels.export_work import ExportTask
    from app.settings import Settings

_REMEMBERED = "masks"


class ExportDialog(QDialog):
    """Chooses, shows what will be written, writes in the background and shows the proof.

    Parameters
    ----------
    parent : QWidget
        Window above which it opens.
    document : Document
        Whose chip is written, as it stands when the dialog opens.
    settings : Settings
        Remembers the choices.
    ask : Ask
        Asks for the folder.

    Signals
    -------
    summary_shown()
        What would be written, or why it cannot be, is on the screen.
    process_requested()
        The dialog has closed because the user wants to change the process.
    """

    summary_shown = Signal()
    process_requested = Signal()

    def __init__(self, parent: QWidget, *, document: Document, settings: Settings, ask: Ask) -> None:
        super().__init__(parent)
        self.setWindowTitle("Write masks")
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self._project = document.project
        self._settings = settings
        self._job: BackgroundJob | None = None
        self._summary_job: BackgroundJob | None = None
        self._is_summary_stale = False
        self._prospect = Prospect()
        self._began_s = 0.0
        self.report: MaskSetReport | None = None
        self.choices = ExportChoices(self._project, in_hand=document.index, folder=_first_folder(document), ask=ask)
        self.choices.take_remembered(_remembered(settings))
        self._summarise = QTimer(self, singleShot=True, interval=0)
        self._summarise.timeout.connect(self.show_summary)
        self._build()
        self.choices.changed.connect(self._on_choices_changed)
        self.choices.forced_changed.connect(self._show_whether_ready)
        self.choices.process_requested.connect(self._go_to_process)
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
        self.choices.show_errors(0)
        self.write_button.setEnabled(False)
        self.heading.setText("What will be written")
        try:
            task = self.choices.task()
        except CoreError as error:
            self._show_obstacle(error)
            return
        self._say("Looking at what will be written\N{HORIZONTAL ELLIPSIS}", "soft")
        self._is_summary_stale = False
        self._summary_job = BackgroundJob(
            lambda report: (task, prospect_of(task, day=date.today(), report=report)), self
        )
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
        elif isinstance(outcome, tuple):
            self._show_prospect(*outcome)
        else:
            self._show_obstacle(outcome)

    def _show_prospect(self, task: ExportTask, prospect: Prospect) -> None:
        self._prospect = prospect
        self.page.setHtml(summary_page(prospect, task, folder=self.choices.folder))
        self.choices.show_errors(0 if prospect.obstacle else prospect.errors)
        self._show_whether_ready()
        self.summary_shown.emit()

    def _show_whether_ready(self) -> None:
        """Let the user write, or say what stands in the way."""
        found, is_forced = self._prospect, self.choices.is_forced
        self.write_button.setEnabled(not found.obstacle and (is_forced or not found.errors))
        if found.obstacle:
            self._say(f"\N{BLACK DIAMOND} {screen_words(found.obstacle)}", "error")
        elif found.errors and not is_forced:
            findings = "A finding blocks" if found.errors == 1 else f"{found.errors} findings block"
            self._say(f"\N{BLACK DIAMOND} {findings} the order; cure what is told above.", "error")
        elif is_forced:
            self._say("\N{WHITE UP-POINTING TRIANGLE} The order sheet will name what is passed over.", "warning")
        else:
            self._say("", "")

    def _show_obstacle(self, error: object) -> None:
        self._prospect = Prospect(obstacle=sentence_of(error))
        self.page.setHtml("")
        self._show_whether_ready()
        self.summary_shown.emit()

    def _say(self, text: str, role: str) -> None:
        self.message.setText(text)
        set_role(self.message, role)

    # --- writing --------------------------------------------------------------------------

    def write(self) -> None:
        """Write the chosen masks in the background."""
        self._settings.set_choices(_REMEMBERED, json.dumps(self.choices.to_remember()))
        task, folder, is_forced = self.choices.task(), self.choices.folder, self.choices.is_forced
        self._job = BackgroundJob(
            lambda report: written(task, folder=folder, day=date.today(), is_forced=is_forced, report=report), self
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
            forced = self._prospect.errors if self.choices.is_forced else 0
            self.page.setHtml(proof_page(self.report, self._project.process, forced=forced))
            self._say(f"\N{CHECK MARK} All files are in {self.report.folder}.", "good")
            self.close_button.setFocus()
        elif ending is Ending.CANCELLED:
            self._say("Stopped; no file was written.", "warning")
        else:
            self._say(f"\N{BLACK DIAMOND} {sentence_of(outcome)}", "error")

    def _go_to_process(self) -> None:
        self.reject()
        self.process_requested.emit()

    def reject(self) -> None:
        """Close; while files are being written, ask the work to stop instead."""
        if self._job is not None:
            self._job.cancel()
            self._say("Stopping\N{HORIZONTAL ELLIPSIS} files that are already being put in place stay.", "soft")
            return
        self._summarise.stop()
        if self._summary_job is not None:
            self._summary_job.ended.disconnect(self._on_summary_job_ended)
            self._summary_job.cancel()
            self._summary_job.wait()
        super().reject()


def _clear_away(job: BackgroundJob | None) -> None:
    """Clear away work that has ended; its thread may still be on the way out."""
    if job is not None:
        job.wait()
        job.deleteLater()


def _first_folder(document: Document) -> Path:
    beside = document.path.parent if document.path is not None else Path.home()
    return beside / "masks"


def _remembered(settings: Settings) -> dict[str, object]:
    try:
        choices = json.loads(settings.choices(_REMEMBERED) or "{}")
    except ValueError:
        return {}
    return choices if isinstance(choices, dict) else {}
