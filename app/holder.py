"""A chip project in hand: the value, its file, the steps back, and what follows from it."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, QTimer, Signal

from app.assessment import making_by
from app.in_hand import InHand
from app.solving.store import SolvedStore
from app.undo import Held, Step, UndoStack
from app.wording import changes_text
from core.project import new_project, write_project

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Mapping
    from pathlib import Path

    from app.assessment import Assessment
    from core.chip.plan import ChipPlan
    from core.fabrication.making import Making
    from core.fabrication.process import Process
    from core.fields import Field
    from core.geometry.shape import ChannelShape
    from core.operating import OperatingPoint
    from core.parameters import ChannelParameters
    from core.project import ChipProject, ParameterSet


class ProjectHolder(QObject):
    """Holds one frozen project and swaps it for another on every change.

    Shape and score follow at the next turn of the event loop, once for however many changes came
    in between, so that the window cannot fall behind the hand. Reading ``shape`` or ``assessment``
    before that brings them up to date at once.

    Signals
    -------
    project_changed()
        Anything in the project is different, or another set is in hand.
    channel_changed(ChannelShape)
        The shape in hand is different.
    estimate_changed(Assessment)
        The score in hand is different.
    path_changed(object)
        The project's file is another one (Path, or None for never saved).
    modified_changed(bool)
        Whether there is something to save.
    """

    project_changed = Signal()
    channel_changed = Signal(object)
    estimate_changed = Signal(object)
    path_changed = Signal(object)
    modified_changed = Signal(bool)

    def __init__(self, project: ChipProject | None = None, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.solved = SolvedStore(self)
        self.solved.changed.connect(self._tell_modified)
        self._held = Held(project=project or new_project(), index=0)
        self._path: Path | None = None
        self.undo_stack = UndoStack(self.hold, self)
        self.undo_stack.clean_changed.connect(self._tell_modified)
        self._in_hand = InHand(self._held, self)
        self._in_hand.channel_changed.connect(self.channel_changed)
        self._in_hand.estimate_changed.connect(self.estimate_changed)
        self._catch_up = QTimer(self, singleShot=True, interval=0)
        self._catch_up.timeout.connect(self.settle)
        self._catch_up.start()

    @property
    def project(self) -> ChipProject:
        """The project as it stands."""
        return self._held.project

    @property
    def index(self) -> int:
        """Which set is in hand."""
        return self._held.index

    @property
    def current_set(self) -> ParameterSet:
        """The parameter set in hand."""
        return self.project.sets[self.index]

    @property
    def channel(self) -> ChannelParameters:
        """The design of the set in hand."""
        return self.current_set.channel

    @property
    def operating(self) -> OperatingPoint:
        """Fluid, temperature and flow."""
        return self.project.operating

    @property
    def process(self) -> Process:
        """How the chip is made."""
        return self.project.process

    @property
    def plan(self) -> ChipPlan:
        """What is placed on the chip."""
        return self.project.plan

    @property
    def making(self) -> Making:
        """What the process makes of the set in hand."""
        return making_by(self.channel, self.process)

    @property
    def path(self) -> Path | None:
        """The project's file; None before the first save."""
        return self._path

    @property
    def is_modified(self) -> bool:
        """Whether there is something to save."""
        return not self.undo_stack.is_clean or self.solved.is_unsaved

    @property
    def kept_project(self) -> ChipProject:
        """The project as it goes into a file: with the results of its flow solves."""
        return replace(self.project, solved=self.solved.kept_with(self.project))

    @property
    def shape(self) -> ChannelShape:
        """The shape of the set in hand, as it is wanted, up to date."""
        self.settle()
        assert self._in_hand.shape is not None
        return self._in_hand.shape

    @property
    def assessment(self) -> Assessment:
        """The score of the set in hand, as it will be made, up to date."""
        self.settle()
        assert self._in_hand.assessment is not None
        return self._in_hand.assessment

    @property
    def last_good_shape(self) -> ChannelShape | None:
        """The latest usable shape of the set in hand, to draw while a finding blocks."""
        self.settle()
        return self._in_hand.last_good(self.index)

    def settle(self) -> None:
        """Bring shape and score up to date and tell of those that are different."""
        self._in_hand.follow(self._held)

    def hold_curve(self, is_held: bool) -> None:
        """Let the range of the curve stand still while the operating point is dragged along it."""
        self._in_hand.is_curve_held = is_held
        self._catch_up.start()

    def assessment_beside(self, index: int) -> Assessment:
        """Return the score of another set under the same conditions, with a curve over the same flows."""
        return self._in_hand.assessment_of(self.project, index)

    def hold(self, held: Held) -> None:
        """Put a value in place without a new step to undo; only undo commands and selecting call this."""
        if held == self._held:
            return
        if held.index != self.index or len(held.project.sets) != len(self.project.sets):
            self._in_hand.forget()
        self._held = held
        self.project_changed.emit()
        self._catch_up.start()

    def load(self, project: ChipProject, *, path: Path | None, is_modified: bool = False) -> None:
        """Work on another project from now on; nothing before it can be undone.

        ``is_modified`` is for a project that is not in its file as it stands (a recovered one).
        """
        self.undo_stack.clear()
        self._in_hand.forget()
        self.solved.load(project.solved)
        self.hold(Held(project=replace(project, solved=()) if project.solved else project, index=0))
        self._set_path(path)
        if is_modified:
            self.undo_stack.reset_clean()

    def save(self, path: Path) -> None:
        """Write the project and make this its file.

        Raises
        ------
        ProjectFileError
            If it cannot be written; the document stays modified and keeps its old file.
        """
        write_project(self.kept_project, path)
        self._set_path(path)
        self.solved.mark_saved()
        self.undo_stack.set_clean()

    def _tell_modified(self) -> None:
        self.modified_changed.emit(self.is_modified)

    def _set_path(self, path: Path | None) -> None:
        if path != self._path:
            self._path = path
            self.path_changed.emit(path)

    def push_values(
        self,
        project: ChipProject,
        fields: Mapping[str, Field],
        names: Iterable[str],
        part_of: Callable[[ChipProject], object],
        gesture: int | None,
    ) -> None:
        """Put a project in place in which some fields of one part are different."""
        changed = tuple(names)

        def describe(before: Held, after: Held) -> str:
            return changes_text(fields, changed, part_of(before.project), part_of(after.project))

        self.push(project, self.index, describe, gesture)

    def push_simple(self, project: ChipProject, index: int, text: str, *, gesture: int | None = None) -> None:
        """Put a project in place by a step that is always told in the same words."""
        self.push(project, index, lambda _before, _after: text, gesture)

    def push(
        self, project: ChipProject, index: int, describe: Callable[[Held, Held], str], gesture: int | None
    ) -> None:
        """Put a project in place as a step that can be undone, if it is another one."""
        new = Held(project=project, index=index)
        if new.project != self.project:
            self.undo_stack.push(Step(old=self._held, new=new, describe=describe, gesture=gesture))
