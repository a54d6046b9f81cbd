"""An ``Ask`` with ready answers, which remembers what it was asked."""

from __future__ import annotations

from app.panels.ask import Ask, Recovery, Unsaved


class ReadyAnswers(Ask):
    """Answers at once; set the attributes to what the user would choose."""

    def __init__(self):
        self.asked = []
        self.unsaved_answer = Unsaved.STAY
        self.recovery_answer = Recovery.LATER
        self.path = None
        self.told = []

    def unsaved(self, parent, chip_name):
        self.asked.append(("unsaved", chip_name))
        return self.unsaved_answer

    def recovery(self, parent, story):
        self.asked.append(("recovery", story))
        return self.recovery_answer

    def tell(self, parent, title, text, details=()):
        self.told.append((title, text, details))

    def file_to_open(self, parent, folder):
        self.asked.append(("open", folder))
        return self.path

    def file_to_save(self, parent, suggestion):
        self.asked.append(("save", suggestion))
        return self.path

    def file_to_write(self, parent, title, name, kinds):
        self.asked.append(("write", name))
        return self.path

    def folder(self, parent, start):
        self.asked.append(("folder", start))
        return self.path
