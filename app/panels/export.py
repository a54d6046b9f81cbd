"""The dialog that writes mask files: what will be written, then the proof that it was."""

from __future__ import annotations

import json
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt, QTimer
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
from core.errors import CoreError
from core.masks.mask_set import mask_summary, write_mask_set
from core.masks.report import MaskSetReport

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
    """

    def __init__(self, parent: QWidget, *, document: Document, settings: Settings, ask: Ask) -> None:
        super().__init__(parent)
        self.setWindowTitle("Write masks")
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self._project = document.project
        self._settings = settings
        self._job: BackgroundJob | None = None
        self.report: MaskSetReport | None = None
        self.choices = ExportChoices(
            self._project.sets, in_hand=document.index, folder=_first_folder(document), ask=ask
        )
        self.choices.take_remembered(_remembered(settings))
        self._summarise = QTimer(self, singleShot=True, interval=0)
        self._summarise.timeout.connect(self.show_summary)
        self._build()
        self.choices.changed.connect(self._summarise.start)
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
        """Show what the choices would write, or why they cannot be used."""
        if self._job is not None:
            return
        self.heading.setText("What will be written")
        try:
            named, options = self._named_shapes(), self.choices.options()
            summary = mask_summary(named, options, chip_name=self._project.name)
        except CoreError as error:
            self.page.setHtml("")
            self._say(str(error), "error")
            self.write_button.setEnabled(False)
            return
        self.page.setHtml(summary_page(summary, folder=self.choices.folder))
        self._say("", "")
        self.write_button.setEnabled(True)

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
        self._say(text, "soft")

    def _on_job_ended(self, ending: Ending, outcome: object) -> None:
        job, self._job = self._job, None
        assert job is not None
        job.wait()
        job.deleteLater()
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
        if self._job is None:
            super().reject()
        else:
            self._job.cancel()
            self._say("Stopping\N{HORIZONTAL ELLIPSIS}", "soft")


def _written(
    report: Reporter, sets: list[ParameterSet], *, folder: Path, chip_name: str, options: MaskOptions
) -> MaskSetReport:
    steps = len(sets) + 1
    named = []
    for step, each in enumerate(sets):
        report(step, steps, f"Drawing {each.name}")
        named.append((each.name, shape_of(each.channel)))
    # From here on it is all or nothing: the files are put in place together, or none is.
    report(len(sets), steps, "Writing, reading back and comparing")
    return write_mask_set(named, folder=folder, chip_name=chip_name, options=options)


def _first_folder(document: Document) -> Path:
    beside = document.path.parent if document.path is not None else Path.home()
    return beside / "masks"


def _remembered(settings: Settings) -> dict[str, object]:
    try:
        choices = json.loads(settings.choices(_REMEMBERED) or "{}")
    except ValueError:
        return {}
    return choices if isinstance(choices, dict) else {}
