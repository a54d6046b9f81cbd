"""Opening, saving, leaving and recovering chip projects: nothing is lost without a question."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, QTimer

from app.panels.ask import Recovery, Unsaved
from core.errors import CoreError, ProjectFileError
from core.project import PROJECT_SUFFIX, new_project, read_project

if TYPE_CHECKING:
    from PySide6.QtWidgets import QWidget

    from app.document import Document
    from app.panels.ask import Ask
    from app.settings import Settings
    from core.project import RecoveryStore

# A recovery copy is at most this much older than the hand.
KEEP_AFTER_MS = 5000


class ProjectFiles(QObject):
    """Takes projects from files into the document and back.

    Parameters
    ----------
    document : Document
        What is worked on.
    settings : Settings
        Remembers recent files.
    recovery : RecoveryStore
        Keeps a copy while there is something unsaved.
    ask : Ask
        Puts questions to the user.
    window : QWidget
        Window above which questions open.
    """

    def __init__(
        self, document: Document, *, settings: Settings, recovery: RecoveryStore, ask: Ask, window: QWidget
    ) -> None:
        super().__init__(window)
        self._document, self._settings, self._recovery = document, settings, recovery
        self._ask, self._window = ask, window
        self._keep_timer = QTimer(self, singleShot=True, interval=KEEP_AFTER_MS)
        self._keep_timer.timeout.connect(self.keep_copy)
        document.project_changed.connect(self._on_project_changed)
        document.modified_changed.connect(self._on_modified_changed)

    # --- files ----------------------------------------------------------------------------

    def new(self) -> None:
        """Start a new chip."""
        if self.may_leave():
            self._document.load(new_project(), path=None)

    def open(self) -> None:
        """Ask for a file and open it."""
        if self.may_leave() and (path := self._ask.file_to_open(self._window, self._folder())):
            self._read(path)

    def open_path(self, path: Path) -> bool:
        """Open a file, after asking about unsaved changes; return whether it is open."""
        return self.may_leave() and self._read(path)

    def _read(self, path: Path) -> bool:
        try:
            project = read_project(path)
        except ProjectFileError as error:
            self._settings.remove_recent_file(path)
            self._ask.tell(self._window, "Not opened", str(error), error.problems)
            return False
        self._document.load(project, path=path)
        self._settings.add_recent_file(path)
        return True

    def save(self) -> bool:
        """Save to the project's file, or ask for one; return whether it is saved."""
        path = self._document.path
        return self.save_as() if path is None else self._write(path)

    def save_as(self) -> bool:
        """Ask for a file and save to it; return whether it is saved."""
        suggestion = self._document.path or self._folder() / f"{self._document.project.name}{PROJECT_SUFFIX}"
        path = self._ask.file_to_save(self._window, suggestion)
        return path is not None and self._write(path if path.suffix else path.with_suffix(PROJECT_SUFFIX))

    def _write(self, path: Path) -> bool:
        try:
            self._document.save(path)
        except CoreError as error:
            self._ask.tell(self._window, "Not saved", f"{error}. Your work is still here.", ())
            return False
        self._settings.add_recent_file(path)
        return True

    def _folder(self) -> Path:
        if self._document.path is not None:
            return self._document.path.parent
        recent = self._settings.recent_files
        return recent[0].parent if recent else Path.home()

    def may_leave(self) -> bool:
        """Return whether the project in hand may go: saved, or given up by the user."""
        if not self._document.is_modified:
            return True
        answer = self._ask.unsaved(self._window, self._document.project.name)
        if answer is Unsaved.SAVE:
            return self.save()
        return answer is Unsaved.DISCARD

    # --- recovery -------------------------------------------------------------------------

    def _on_project_changed(self) -> None:
        if self._document.is_modified and not self._keep_timer.isActive():
            self._keep_timer.start()

    def _on_modified_changed(self, is_modified: bool) -> None:
        if is_modified:
            self._keep_timer.start()
        else:
            self.forget_copy()

    def keep_copy(self) -> None:
        """Keep a copy of unsaved work for the day after a crash."""
        if self._document.is_modified:
            self._recovery.keep(self._document.kept_project, self._document.path)

    def forget_copy(self) -> None:
        """Remove the copy: the work is saved, or given up by the user."""
        self._keep_timer.stop()
        self._recovery.discard()

    def offer_recovery(self) -> None:
        """Offer unsaved work that a crash left behind; one project at most is taken up."""
        for offer in self._recovery.offers():
            story = f"Sideloop ended before '{offer.project.name}' was saved"
            when = offer.kept_at.astimezone().strftime("%d %B %Y, %H:%M")
            where = f" Its file is {offer.original_path}." if offer.original_path else " It was never saved to a file."
            answer = self._ask.recovery(self._window, f"{story}. A copy from {when} was kept.{where}")
            if answer is Recovery.DISCARD:
                self._recovery.discard(offer)
            if answer is Recovery.RECOVER and self.may_leave():
                self._document.load(offer.project, path=offer.original_path, is_modified=True)
                self.keep_copy()  # before the offered copy goes
                self._recovery.discard(offer)
                return
