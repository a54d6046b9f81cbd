"""Undo by swapping whole values: the project is frozen, so the old one is simply put back."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from PySide6.QtGui import QUndoCommand

if TYPE_CHECKING:
    from collections.abc import Callable

    from app.document import Document
    from core.project import ChipProject

# All changes share one kind, so that Qt offers each to the one before it; the gesture decides.
_KIND = 1


@dataclass(frozen=True, slots=True, kw_only=True)
class Held:
    """What the document holds at one moment.

    Attributes
    ----------
    project : ChipProject
        The whole project.
    index : int
        The parameter set that is worked on.
    """

    project: ChipProject
    index: int


class ChangeProjectCommand(QUndoCommand):
    """One step of the user's work.

    Parameters
    ----------
    document : Document
        Where values are swapped; widgets follow its signals.
    old, new : Held
        Before and after.
    describe : callable
        Takes old and new and says in plain words what the step did.
    gesture : int or None
        Changes of one drag carry the same number and become one step.
    """

    def __init__(
        self,
        document: Document,
        *,
        old: Held,
        new: Held,
        describe: Callable[[Held, Held], str],
        gesture: int | None = None,
    ) -> None:
        super().__init__(describe(old, new))
        self._document = document
        self._old, self._new = old, new
        self._describe = describe
        self._gesture = gesture

    def id(self) -> int:
        """Return a kind that Qt may try to merge, -1 for a step that stands alone."""
        return -1 if self._gesture is None else _KIND

    def mergeWith(self, other: QUndoCommand) -> bool:
        """Take in a later change of the same drag."""
        if not isinstance(other, ChangeProjectCommand) or other._gesture != self._gesture:
            return False
        self._new = other._new
        self.setText(self._describe(self._old, self._new))
        self.setObsolete(self._old == self._new)  # dragged back to where it began
        return True

    def redo(self) -> None:
        """Put the new value in place."""
        self._document.hold(self._new)

    def undo(self) -> None:
        """Put the old value back."""
        self._document.hold(self._old)
