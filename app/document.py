"""The one thing the window works on: a chip project, which set is in hand, and how to undo.

Widgets never keep a copy of the design: they ask the document for a change and follow its signals.
"""

from __future__ import annotations

from dataclasses import replace
from itertools import count
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, QTimer, Signal

from app.assessment import Assessment, assessment_of, curve_top_ul_min, fluid_of, shape_of
from app.solving.store import SolvedStore
from app.undo import Held, Step, UndoStack
from app.wording import changes_text
from core.operating import OPERATING_FIELDS
from core.parameters import CHANNEL_FIELDS
from core.project import ParameterSet, new_project, write_project

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping
    from pathlib import Path

    from core.geometry.shape import ChannelShape
    from core.operating import OperatingPoint
    from core.parameters import ChannelParameters
    from core.project import ChipProject


class Document(QObject):
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
        self._gestures = count(1)
        self.undo_stack = UndoStack(self.hold, self)
        self.undo_stack.clean_changed.connect(self._tell_modified)
        self._shape: ChannelShape | None = None
        self._assessment: Assessment | None = None
        self._last_good: tuple[int, ChannelShape] | None = None
        self._curve_top_ul_min = curve_top_ul_min(self.operating.flow_ul_min)
        self._is_curve_held = False
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
        """The shape of the set in hand, up to date."""
        self.settle()
        assert self._shape is not None
        return self._shape

    @property
    def assessment(self) -> Assessment:
        """The score of the set in hand, up to date."""
        self.settle()
        assert self._assessment is not None
        return self._assessment

    @property
    def last_good_shape(self) -> ChannelShape | None:
        """The latest usable shape of the set in hand, to draw while a finding blocks."""
        self.settle()
        return self._last_good[1] if self._last_good and self._last_good[0] == self.index else None

    def settle(self) -> None:
        """Bring shape and score up to date and tell of those that are different."""
        if not self._is_curve_held:
            self._curve_top_ul_min = curve_top_ul_min(self.operating.flow_ul_min)
        shape = shape_of(self.channel)
        assessment = assessment_of(self.channel, self.operating, self._curve_top_ul_min)
        is_new_shape, is_new_assessment = shape is not self._shape, assessment is not self._assessment
        self._shape, self._assessment = shape, assessment
        if shape.is_usable:
            self._last_good = (self.index, shape)
        if is_new_shape:
            self.channel_changed.emit(shape)
        if is_new_assessment:
            self.estimate_changed.emit(assessment)

    def hold_curve(self, is_held: bool) -> None:
        """Let the range of the curve stand still while the operating point is dragged along it."""
        self._is_curve_held = is_held
        self._catch_up.start()

    def assessment_beside(self, index: int) -> Assessment:
        """Return the score of another set under the same conditions, with a curve over the same flows."""
        return assessment_of(self.project.sets[index].channel, self.operating, self._curve_top_ul_min)

    def hold(self, held: Held) -> None:
        """Put a value in place without a new step to undo; only undo commands and selecting call this."""
        if held == self._held:
            return
        if held.index != self.index or len(held.project.sets) != len(self.project.sets):
            self._last_good = None
        self._held = held
        self.project_changed.emit()
        self._catch_up.start()

    def load(self, project: ChipProject, *, path: Path | None, is_modified: bool = False) -> None:
        """Work on another project from now on; nothing before it can be undone.

        ``is_modified`` is for a project that is not in its file as it stands (a recovered one).
        """
        self.undo_stack.clear()
        self._last_good = None
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

    def new_gesture(self) -> int:
        """Return a number for one drag or one press of a key: its changes become one step."""
        return next(self._gestures)

    def change_channel(self, values: Mapping[str, object], *, gesture: int | None = None) -> None:
        """Change fields of the set in hand, or raise ``DesignValueError`` and change nothing."""
        old = self.current_set
        new = replace(old, channel=old.channel.with_values(values))
        project = self.project.with_set_replaced(old.name, new)
        names = tuple(values)

        def describe(before: Held, after: Held) -> str:
            pair = (held.project.sets[self_index].channel for held in (before, after))
            return changes_text(CHANNEL_FIELDS, names, *pair)

        self_index = self.index
        self._push(project, self.index, describe, gesture)

    def change_operating(self, values: Mapping[str, object], *, gesture: int | None = None) -> None:
        """Change fluid, temperature or flow.

        Raises ``DesignValueError`` and changes nothing if a value cannot be used or the fluid does
        not exist at the temperature.
        """
        operating = self.operating.with_values(values)
        fluid_of(operating)
        names = tuple(values)

        def describe(before: Held, after: Held) -> str:
            return changes_text(OPERATING_FIELDS, names, before.project.operating, after.project.operating)

        self._push(self.project.with_operating(operating), self.index, describe, gesture)

    def add_set(self) -> None:
        """Put a set with default values behind the one in hand and take it in hand."""
        self._insert(ParameterSet(name=self.project.unused_name("Set 1")), "Add")

    def copy_set(self, index: int | None = None) -> None:
        """Put a copy of a set behind it and take the copy in hand."""
        place = self.index if index is None else index
        original = self.project.sets[place]
        copied = replace(original, name=self.project.unused_name(original.name))
        self._insert(copied, "Copy as", place)

    def _insert(self, added: ParameterSet, verb: str, behind: int | None = None) -> None:
        place = (self.index if behind is None else behind) + 1
        self._push_simple(self.project.with_set_added(added, position=place), place, f"{verb} '{added.name}'")

    def remove_set(self, index: int) -> None:
        """Take a set out of the project; the last one cannot go (``DesignValueError``)."""
        gone = self.project.sets[index].name
        project = self.project.with_set_removed(gone)
        in_hand = self.index - 1 if index < self.index else min(self.index, len(project.sets) - 1)
        self._push_simple(project, in_hand, f"Remove '{gone}'")

    def rename_set(self, index: int, name: str) -> None:
        """Give a set another name (``DesignValueError`` if it is taken or unusable)."""
        old = self.project.sets[index].name
        project = self.project.with_set_renamed(old, name)
        self._push_simple(project, self.index, f"Rename '{old}' to '{project.sets[index].name}'")

    def move_set(self, index: int, place: int) -> None:
        """Give a set another place in the row; the set in hand stays in hand."""
        in_hand = self.current_set.name
        moved = self.project.sets[index].name
        project = self.project.with_set_moved(moved, place)
        new_index = [each.name for each in project.sets].index(in_hand)
        self._push_simple(project, new_index, f"Move '{moved}'")

    def change_details(self, *, name: str, lab: str, author: str, notes: str) -> None:
        """Change what is said about the chip (``DesignValueError`` if words cannot be used)."""
        project = replace(self.project, name=name, lab=lab, author=author, notes=notes)
        self._push_simple(project, self.index, "Change the chip's details")

    def change_set_notes(self, notes: str) -> None:
        """Change the notes of the set in hand."""
        name = self.current_set.name
        project = self.project.with_set_replaced(name, replace(self.current_set, notes=notes))
        self._push_simple(project, self.index, f"Change the notes of '{name}'")

    def select_set(self, index: int) -> None:
        """Take another set in hand; this is no step to undo."""
        if 0 <= index < len(self.project.sets):
            self.hold(replace(self._held, index=index))

    def _push_simple(self, project: ChipProject, index: int, text: str) -> None:
        self._push(project, index, lambda _before, _after: text, None)

    def _push(
        self, project: ChipProject, index: int, describe: Callable[[Held, Held], str], gesture: int | None
    ) -> None:
        new = Held(project=project, index=index)
        if new.project != self.project:
            self.undo_stack.push(Step(old=self._held, new=new, describe=describe, gesture=gesture))
