"""Plain pages and small dialogs: keys, cautions, about, details of the chip, notes."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QDialog,
    QDialogButtonBox,
    QFormLayout,
    QLabel,
    QLineEdit,
    QPlainTextEdit,
    QTextBrowser,
    QVBoxLayout,
)

from app.look import SPACING, font, set_role
from core.errors import DesignValueError

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from PySide6.QtWidgets import QWidget

    from app.document import Document

ABOUT_PAGE = (
    "<h3>Sideloop</h3>"
    "<p>Shapes a passive flow rectifier for a microfluidic chip, says before anything is made how much it will "
    "rectify and what it costs in pressure, and writes mask files that are read back before they are called done.</p>"
    "<h4>What the figures mean</h4>"
    "<p><b>Di</b> is the pressure drop in the reverse direction over that in the forward direction at the same flow. "
    "1 means that nothing is gained. At slow flow every rigid channel has Di 1, whatever its shape.</p>"
    "<p><b>Loop share</b> is the part of the flow that takes the loop. <b>Re</b> compares inertia with friction in the "
    "channel's section; rectification lives on inertia.</p>"
    "<p>The estimate is put together from published formulas. Its bands say how far it may be off; outside its range "
    "it says so.</p>"
)


class PageDialog(QDialog):
    """A page to read."""

    def __init__(self, parent: QWidget, title: str, page: str) -> None:
        super().__init__(parent)
        self.setWindowTitle(title)
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.page = QTextBrowser()
        self.page.setHtml(page)
        self.page.setAccessibleName(title)
        buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Close)
        buttons.rejected.connect(self.reject)
        layout = QVBoxLayout(self)
        layout.addWidget(self.page)
        layout.addWidget(buttons)
        self.resize(560, 600)


class WordsDialog(QDialog):
    """A few words to edit: single lines, and notes.

    Parameters
    ----------
    parent : QWidget
        Window above which it opens.
    title : str
        What is edited.
    words : mapping
        Field name to (label, text); fields named ``notes`` have several lines.
    take : callable
        Given the new words; a ``DesignValueError`` keeps the dialog open and is shown in it.
    """

    def __init__(
        self,
        parent: QWidget,
        title: str,
        words: Mapping[str, tuple[str, str]],
        take: Callable[[dict[str, str]], object],
    ) -> None:
        super().__init__(parent)
        self.setWindowTitle(title)
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self._take = take
        self.entries: dict[str, QLineEdit | QPlainTextEdit] = {}
        form = QFormLayout(self)
        form.setVerticalSpacing(SPACING.small)
        for name, (label, text) in words.items():
            entry = QPlainTextEdit(text) if name == "notes" else QLineEdit(text)
            if isinstance(entry, QPlainTextEdit):
                entry.setTabChangesFocus(True)
            self.entries[name] = entry
            form.addRow(label, entry)
        self.problem_label = QLabel()
        self.problem_label.setWordWrap(True)
        self.problem_label.setFont(font("small"))
        set_role(self.problem_label, "error")
        form.addRow(self.problem_label)
        buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Ok | QDialogButtonBox.StandardButton.Cancel)
        buttons.accepted.connect(self.accept)
        buttons.rejected.connect(self.reject)
        form.addRow(buttons)
        self.resize(480, self.sizeHint().height())

    def accept(self) -> None:
        """Hand over the words, or say why they cannot be used."""
        words = {
            name: entry.toPlainText() if isinstance(entry, QPlainTextEdit) else entry.text()
            for name, entry in self.entries.items()
        }
        try:
            self._take(words)
        except DesignValueError as error:
            self.problem_label.setText(str(error))
        else:
            super().accept()


def details_dialog(parent: QWidget, document: Document) -> WordsDialog:
    """Return the dialog for the chip's name, lab, author and notes."""
    project = document.project
    words = {
        "name": ("&Name of the chip", project.name),
        "lab": ("&Lab", project.lab),
        "author": ("&Author", project.author),
        "notes": ("N&otes", project.notes),
    }
    return WordsDialog(parent, "Chip details", words, lambda new: document.change_details(**new))


def notes_dialog(parent: QWidget, document: Document) -> WordsDialog:
    """Return the dialog for the notes of the set in hand."""
    words = {"notes": ("&Notes", document.current_set.notes)}
    title = f"Notes of '{document.current_set.name}'"
    return WordsDialog(parent, title, words, lambda new: document.change_set_notes(new["notes"]))
