"""The one thing the window works on: a chip project, which set is in hand, and how to undo.

Widgets never keep a copy of the design: they ask the document for a change and follow its signals.
"""

from __future__ import annotations

from dataclasses import replace
from itertools import count
from typing import TYPE_CHECKING

from app.assessment import fluid_of
from app.holder import ProjectHolder
from core.chip.plan import CHIP_FIELDS
from core.fabrication.process import PROCESS_FIELDS
from core.fabrication.shipped import shipped_process
from core.operating import OPERATING_FIELDS
from core.parameters import CHANNEL_FIELDS
from core.project import ParameterSet

if TYPE_CHECKING:
    from collections.abc import Mapping

    from PySide6.QtCore import QObject

    from app.undo import Held
    from core.chip.plan import ChipPlan
    from core.fabrication.process import ProcessKind
    from core.project import ChipProject


class Document(ProjectHolder):
    """Everything that can be done to the project, each change one step that can be undone.

    A change that cannot be used raises ``DesignValueError`` and leaves everything as it was. Changes that
    carry the same number of a gesture, as during a drag, become one step.
    """

    def __init__(self, project: ChipProject | None = None, parent: QObject | None = None) -> None:
        super().__init__(project, parent)
        self._gestures = count(1)

    def new_gesture(self) -> int:
        """Return a number for one drag or one press of a key: its changes become one step."""
        return next(self._gestures)

    def change_channel(self, values: Mapping[str, object], *, gesture: int | None = None) -> None:
        """Change fields of the set in hand, or raise ``DesignValueError`` and change nothing."""
        old = self.current_set
        new = replace(old, channel=old.channel.with_values(values))
        project = self.project.with_set_replaced(old.name, new)
        index = self.index
        self.push_values(project, CHANNEL_FIELDS, values, lambda each: each.sets[index].channel, gesture)

    def change_operating(self, values: Mapping[str, object], *, gesture: int | None = None) -> None:
        """Change fluid, temperature or flow.

        Raises ``DesignValueError`` and changes nothing if a value cannot be used or the fluid does
        not exist at the temperature.
        """
        operating = self.operating.with_values(values)
        fluid_of(operating)
        project = self.project.with_operating(operating)
        self.push_values(project, OPERATING_FIELDS, values, lambda each: each.operating, gesture)

    def change_process(self, values: Mapping[str, object], *, gesture: int | None = None) -> None:
        """Change values of the process, or raise ``DesignValueError`` and change nothing."""
        project = self.project.with_process(self.process.with_values(values))
        self.push_values(project, PROCESS_FIELDS, values, lambda each: each.process, gesture)

    def choose_process(self, kind: ProcessKind | str, *, gesture: int | None = None) -> None:
        """Make the chip in another way, with the values that are shipped for it."""

        def describe(_before: Held, after: Held) -> str:
            return f"Make it as {after.project.process.kind}"

        self.push(self.project.with_process(shipped_process(kind)), self.index, describe, gesture)

    def change_plan(self, plan: ChipPlan, text: str, *, gesture: int | None = None) -> None:
        """Put another plan of the chip in place; the text says in plain words what was done."""
        self.push_simple(self.project.with_plan(plan), self.index, text, gesture=gesture)

    def change_plan_values(self, values: Mapping[str, object], *, gesture: int | None = None) -> None:
        """Change fields of the plan, or raise ``DesignValueError`` and change nothing."""
        project = self.project.with_plan(self.plan.with_values(values))
        self.push_values(project, CHIP_FIELDS, values, lambda each: each.plan, gesture)

    def apply_cure(self, field: str, value: object, *, index: int | None = None) -> None:
        """Change the one field that cures a finding, of whatever it is a field, as one step.

        Parameters
        ----------
        field : str
            Name in one of the field tables.
        value : float, int or str
            Its new value.
        index : int, optional
            Set to which a field of the channel belongs; default: the one in hand, which it becomes.

        Raises
        ------
        DesignValueError
            If the value cannot be used.
        """
        if field in PROCESS_FIELDS:
            self.change_process({field: value})
        elif field in CHIP_FIELDS:
            self.change_plan_values({field: value})
        elif field in OPERATING_FIELDS:
            self.change_operating({field: value})
        else:
            if index is not None:
                self.select_set(index)
            self.change_channel({field: value})

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
        self.push_simple(self.project.with_set_added(added, position=place), place, f"{verb} '{added.name}'")

    def remove_set(self, index: int) -> None:
        """Take a set out of the project; the last one cannot go (``DesignValueError``)."""
        gone = self.project.sets[index].name
        project = self.project.with_set_removed(gone)
        in_hand = self.index - 1 if index < self.index else min(self.index, len(project.sets) - 1)
        self.push_simple(project, in_hand, f"Remove '{gone}'")

    def rename_set(self, index: int, name: str) -> None:
        """Give a set another name (``DesignValueError`` if it is taken or unusable)."""
        old = self.project.sets[index].name
        project = self.project.with_set_renamed(old, name)
        self.push_simple(project, self.index, f"Rename '{old}' to '{project.sets[index].name}'")

    def move_set(self, index: int, place: int) -> None:
        """Give a set another place in the row; the set in hand stays in hand."""
        in_hand = self.current_set.name
        moved = self.project.sets[index].name
        project = self.project.with_set_moved(moved, place)
        new_index = [each.name for each in project.sets].index(in_hand)
        self.push_simple(project, new_index, f"Move '{moved}'")

    def change_details(self, *, name: str, lab: str, author: str, notes: str) -> None:
        """Change what is said about the chip (``DesignValueError`` if words cannot be used)."""
        project = replace(self.project, name=name, lab=lab, author=author, notes=notes)
        self.push_simple(project, self.index, "Change the chip's details")

    def change_set_notes(self, notes: str) -> None:
        """Change the notes of the set in hand."""
        name = self.current_set.name
        project = self.project.with_set_replaced(name, replace(self.current_set, notes=notes))
        self.push_simple(project, self.index, f"Change the notes of '{name}'")

    def select_set(self, index: int) -> None:
        """Take another set in hand; this is no step to undo."""
        if 0 <= index < len(self.project.sets):
            self.hold(replace(self._held, index=index))
