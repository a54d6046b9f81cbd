"""Every question the program puts to the user, behind one object that tests replace."""

from __future__ import annotations

from enum import StrEnum
from pathlib import Path
from typing import TYPE_CHECKING, TypeVar

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFileDialog, QInputDialog, QLineEdit, QMessageBox, QPushButton

from core.project import PROJECT_SUFFIX

if TYPE_CHECKING:
    from PySide6.QtWidgets import QWidget

_PROJECT_FILTER = f"Chip projects (*{PROJECT_SUFFIX});;All files (*)"

Answer = TypeVar("Answer", bound=StrEnum)


class Unsaved(StrEnum):
    """What to do with changes that are not saved."""

    SAVE = "save"
    DISCARD = "discard"
    STAY = "stay"


class Recovery(StrEnum):
    """What to do with a project that a crash left behind."""

    RECOVER = "recover"
    DISCARD = "discard"
    LATER = "later"


class Ask:
    """Asks by dialogs; a test gives an object with the same methods and ready answers."""

    def unsaved(self, parent: QWidget, chip_name: str) -> Unsaved:
        """Ask what happens to unsaved changes before they would be lost."""
        box = _box(
            parent, QMessageBox.Icon.Warning, "Unsaved changes", f"'{chip_name}' has changes that are not saved."
        )
        save = box.addButton("&Save", QMessageBox.ButtonRole.AcceptRole)
        discard = box.addButton("&Discard changes", QMessageBox.ButtonRole.DestructiveRole)
        stay = box.addButton("Stay &here", QMessageBox.ButtonRole.RejectRole)
        box.setDefaultButton(save)
        box.setEscapeButton(stay)
        return _answer(box, {Unsaved.SAVE: save, Unsaved.DISCARD: discard, Unsaved.STAY: stay})

    def recovery(self, parent: QWidget, story: str) -> Recovery:
        """Ask what happens to a project that a crash left behind."""
        box = _box(parent, QMessageBox.Icon.Question, "Unsaved work found", story)
        recover = box.addButton("&Recover it", QMessageBox.ButtonRole.AcceptRole)
        discard = box.addButton("&Throw it away", QMessageBox.ButtonRole.DestructiveRole)
        later = box.addButton("Ask me &later", QMessageBox.ButtonRole.RejectRole)
        box.setDefaultButton(recover)
        box.setEscapeButton(later)
        return _answer(box, {Recovery.RECOVER: recover, Recovery.DISCARD: discard, Recovery.LATER: later})

    def tell(self, parent: QWidget, title: str, text: str, details: tuple[str, ...] = ()) -> None:
        """Tell what went wrong; several problems are listed."""
        box = _box(parent, QMessageBox.Icon.Warning, title, text)
        if len(details) > 1:
            box.setInformativeText("\n".join(f"\N{BULLET} {line}" for line in details))
        box.exec()
        box.deleteLater()

    def file_to_open(self, parent: QWidget, folder: Path) -> Path | None:
        """Ask for a project file; None when the user thinks better of it."""
        name, _ = QFileDialog.getOpenFileName(parent, "Open a chip project", str(folder), _PROJECT_FILTER)
        return Path(name) if name else None

    def file_to_save(self, parent: QWidget, suggestion: Path) -> Path | None:
        """Ask under which name to save; None when the user thinks better of it."""
        name, _ = QFileDialog.getSaveFileName(parent, "Save the chip project", str(suggestion), _PROJECT_FILTER)
        return Path(name) if name else None

    def file_to_write(self, parent: QWidget, title: str, name: str, kinds: str) -> Path | None:
        """Ask where to write a picture or a table; None when the user thinks better of it."""
        chosen, _ = QFileDialog.getSaveFileName(parent, title, str(Path.home() / name), f"{kinds};;All files (*)")
        return Path(chosen) if chosen else None

    def folder(self, parent: QWidget, start: Path) -> Path | None:
        """Ask for a folder; None when the user thinks better of it."""
        name = QFileDialog.getExistingDirectory(parent, "Folder for the mask files", str(start))
        return Path(name) if name else None

    def text(self, parent: QWidget, title: str, label: str, text: str) -> str | None:
        """Ask for one line of text; None when the user thinks better of it."""
        answer, is_given = QInputDialog.getText(parent, title, label, QLineEdit.EchoMode.Normal, text)
        return answer if is_given else None


def _answer(box: QMessageBox, buttons: dict[Answer, QPushButton]) -> Answer:
    """Open the question and return what the pressed button stands for; Escape presses one too."""
    box.exec()
    pressed = box.clickedButton()
    box.deleteLater()
    return next(answer for answer, button in buttons.items() if button == pressed)


def _box(parent: QWidget, icon: QMessageBox.Icon, title: str, text: str) -> QMessageBox:
    box = QMessageBox(icon, title, text, QMessageBox.StandardButton.NoButton, parent)
    box.setTextFormat(Qt.TextFormat.PlainText)
    return box
