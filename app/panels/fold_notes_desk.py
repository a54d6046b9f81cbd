"""What folding costs, said under the table of places: worked out in the background, when the hand rests."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, QTimer

from app.background import BackgroundJob
from app.shown_values import screen_words
from core.project.folds import fold_notes

if TYPE_CHECKING:
    from app.arrangement import Arrangement
    from app.document import Document
    from core.project import ChipProject

_REST_MS = 200


class FoldNotesDesk(QObject):
    """Keeps the sentences about folded channels up to date while the page of the chip is open.

    Parameters
    ----------
    document : Document
        What is worked on.
    parts : Arrangement
        Holds the table of places.
    parent : QObject
        As for any object.
    """

    def __init__(self, document: Document, *, parts: Arrangement, parent: QObject) -> None:
        super().__init__(parent)
        self._document, self._parts = document, parts
        self._said_of: ChipProject | None = None  # for which project the sentences hold
        self._job: BackgroundJob | None = None
        self._rest = QTimer(self, singleShot=True, interval=_REST_MS)
        self._rest.timeout.connect(self._start)
        document.project_changed.connect(self._on_changed)
        parts.page_changed.connect(self._on_changed)

    @property
    def is_up_to_date(self) -> bool:
        """Whether the sentences hold for the project as it stands."""
        return self._said_of == self._document.project

    def _on_changed(self) -> None:
        if not self._parts.is_chip_shown or self.is_up_to_date:
            return
        if any(entry.rows > 1 for entry in self._document.plan.channels):
            self._rest.start()  # anew, until the hand rests
        else:
            self._rest.stop()
            self._say(self._document.project, ())

    def _start(self) -> None:
        if self._job is not None:  # its end looks again
            return
        project = self._document.project
        self._job = BackgroundJob(lambda _report: fold_notes(project), self)
        self._job.ended.connect(lambda _ending, outcome: self._on_job_ended(project, outcome))
        self._job.start()

    def _on_job_ended(self, project: ChipProject, outcome: object) -> None:
        if self._job is not None:
            self._job.wait()
            self._job.deleteLater()
            self._job = None
        self._say(project, outcome if isinstance(outcome, tuple) else ())
        self._on_changed()

    def _say(self, project: ChipProject, notes: tuple[str, ...]) -> None:
        self._said_of = project
        self._parts.places.notes.show_sentences([_sentence(note) for note in notes])

    def end_now(self) -> None:
        """Stop what is being done in the background."""
        self._rest.stop()
        if self._job is not None:
            self._job.ended.disconnect()
            self._job.wait()


def _sentence(note: str) -> str:
    text = screen_words(note)
    return f"{text[:1].upper()}{text[1:]}."
