"""Undo by swapping whole values: the project is frozen, so the old one is simply put back."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, Signal

if TYPE_CHECKING:
    from collections.abc import Callable

    from core.project import ChipProject


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


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """One step of the user's work.

    Attributes
    ----------
    old, new : Held
        Before and after.
    describe : callable
        Takes old and new and says in plain words what the step did.
    gesture : int or None
        Changes of one drag carry the same number and become one step.
    """

    old: Held
    new: Held
    describe: Callable[[Held, Held], str]
    gesture: int | None = None

    @property
    def text(self) -> str:
        """What the step did, in plain words."""
        return self.describe(self.old, self.new)


class UndoStack(QObject):
    """The steps done and undone, as plain values.

    The tool kit has a stack of its own, but its commands are owned on both sides of the language
    border, and the process dies when Python clears them away in the wrong order.

    Parameters
    ----------
    hold : callable
        Puts a value in place; widgets follow the document's signals.
    parent : QObject, optional
        As for any object.

    Signals
    -------
    changed()
        What can be undone or redone may be another.
    clean_changed(bool)
        Whether the value in place is the saved one.
    """

    changed = Signal()
    clean_changed = Signal(bool)

    def __init__(self, hold: Callable[[Held], None], parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._hold = hold
        self._steps: list[Step] = []
        self._done = 0  # how many of the steps are in force
        self._saved: int | None = 0  # how many were when the value was saved; None: no way back there

    def push(self, step: Step) -> None:
        """Do a step; steps that were undone are forgotten, and a drag goes on in its own step."""
        was_clean = self.is_clean
        if self._saved is not None and self._saved > self._done:
            self._saved = None
        del self._steps[self._done :]
        last = self._steps[-1] if self._steps else None
        if last is not None and step.gesture is not None and last.gesture == step.gesture and not was_clean:
            self._steps[-1:] = [replace(last, new=step.new)] if last.old != step.new else []
        else:
            self._steps.append(step)
        self._done = len(self._steps)
        self._go(step.new, was_clean)

    def undo(self) -> None:
        """Put the value before the last step back."""
        if self.can_undo:
            was_clean = self.is_clean
            self._done -= 1
            self._go(self._steps[self._done].old, was_clean)

    def redo(self) -> None:
        """Do the step that was undone last once more."""
        if self.can_redo:
            was_clean = self.is_clean
            self._done += 1
            self._go(self._steps[self._done - 1].new, was_clean)

    def clear(self) -> None:
        """Forget all steps; the value in place counts as saved."""
        was_clean = self.is_clean
        self._steps.clear()
        self._done = self._saved = 0
        self._tell(was_clean)

    def set_clean(self) -> None:
        """Take the value in place as the saved one."""
        was_clean, self._saved = self.is_clean, self._done
        self._tell(was_clean)

    def reset_clean(self) -> None:
        """Take no value as the saved one."""
        was_clean, self._saved = self.is_clean, None
        self._tell(was_clean)

    def count(self) -> int:
        """Return the number of steps, undone ones included."""
        return len(self._steps)

    @property
    def is_clean(self) -> bool:
        """Whether the value in place is the saved one."""
        return self._saved == self._done

    @property
    def can_undo(self) -> bool:
        """Whether there is a step to undo."""
        return self._done > 0

    @property
    def can_redo(self) -> bool:
        """Whether there is a step to do once more."""
        return self._done < len(self._steps)

    @property
    def undo_text(self) -> str:
        """What undo would take back, or nothing."""
        return self._steps[self._done - 1].text if self.can_undo else ""

    @property
    def redo_text(self) -> str:
        """What redo would do once more, or nothing."""
        return self._steps[self._done].text if self.can_redo else ""

    def _go(self, held: Held, was_clean: bool) -> None:
        self._hold(held)
        self._tell(was_clean)

    def _tell(self, was_clean: bool) -> None:
        if was_clean != self.is_clean:
            self.clean_changed.emit(self.is_clean)
        self.changed.emit()
