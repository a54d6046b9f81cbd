"""A chip project: one chip, its parameter sets and the conditions it is run at."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from functools import partial
from itertools import count
from typing import TYPE_CHECKING

from core.chip.plan import ChipPlan
from core.errors import DesignValueError, did_you_mean
from core.fabrication.process import ProcessKind
from core.fabrication.shipped import shipped_process
from core.operating import OperatingPoint
from core.parameters import ChannelParameters
from core.project.solved import MOST_SOLVED, SolvedResult
from core.project.text import LONGEST_NAME, checked_line, checked_name, checked_notes, name_key

if TYPE_CHECKING:
    from core.fabrication.process import Process

MOST_SETS = 100


@dataclass(frozen=True, slots=True, kw_only=True)
class ParameterSet:
    """One named channel design of a chip.

    Attributes
    ----------
    name : str
        1 to 60 printable characters, unique in its project.
    channel : ChannelParameters
        The design itself.
    notes : str
        What it is for, in the user's words.

    Raises
    ------
    DesignValueError
        If the name or the notes cannot be used.
    """

    name: str
    channel: ChannelParameters = field(default_factory=ChannelParameters)
    notes: str = ""

    def __post_init__(self) -> None:
        """Check the words."""
        object.__setattr__(self, "name", checked_name(self.name, field="set name"))
        object.__setattr__(self, "notes", checked_notes(self.notes, field="set notes"))


@dataclass(frozen=True, slots=True, kw_only=True)
class ChipProject:
    """Everything that is saved about one chip; changes give a new project.

    Attributes
    ----------
    name : str
        Name of the chip, 1 to 60 printable characters.
    sets : tuple of ParameterSet
        1 to 100 designs; no two names may differ in upper and lower case only.
    operating : OperatingPoint
        Fluid, temperature and flow.
    lab, author : str
        Who keeps the project; may be empty.
    notes : str
        What the chip is for, in the user's words.
    process : Process
        How the chip is made.
    plan : ChipPlan
        What is placed on the chip, and the plate it is copied over.
    solved : tuple of SolvedResult
        Results of flow solves, the oldest first; at most 500.

    Raises
    ------
    DesignValueError
        If a name, the notes or the list of sets cannot be used.
    """

    name: str
    sets: tuple[ParameterSet, ...]
    operating: OperatingPoint = field(default_factory=OperatingPoint)
    lab: str = ""
    author: str = ""
    notes: str = ""
    process: Process = field(default_factory=partial(shipped_process, ProcessKind.CAST_FILM))
    plan: ChipPlan = field(default_factory=ChipPlan)
    solved: tuple[SolvedResult, ...] = ()

    def __post_init__(self) -> None:
        """Check the words and that every set has a name of its own."""
        object.__setattr__(self, "name", checked_name(self.name, field="chip name"))
        object.__setattr__(self, "lab", checked_line(self.lab, field="lab"))
        object.__setattr__(self, "author", checked_line(self.author, field="author"))
        object.__setattr__(self, "notes", checked_notes(self.notes, field="chip notes"))
        object.__setattr__(self, "sets", tuple(self.sets))
        object.__setattr__(self, "solved", tuple(self.solved)[-MOST_SOLVED:])
        if problems := set_list_problems([each.name for each in self.sets]):
            raise problems[0]

    def set_named(self, name: str) -> ParameterSet:
        """Return the parameter set of that name.

        Raises
        ------
        DesignValueError
            If the project has no such set; the nearest name is suggested.
        """
        return self.sets[self._position(name)]

    def unused_name(self, wish: str) -> str:
        """Return a free set name: the wish itself, or the wish with a number behind it."""
        taken = {name_key(each.name) for each in self.sets}
        stem = checked_name(wish, field="set name")
        endings = (f" {number}" for number in count(2))
        name = stem
        while name_key(name) in taken:
            ending = next(endings)
            name = stem[: LONGEST_NAME - len(ending)].rstrip() + ending
        return name

    def with_set_added(self, added: ParameterSet, *, position: int | None = None) -> ChipProject:
        """Return a copy with one more set, at the end or before the given position."""
        place = len(self.sets) if position is None else position
        return replace(self, sets=(*self.sets[:place], added, *self.sets[place:]))

    def with_set_replaced(self, name: str, new: ParameterSet) -> ChipProject:
        """Return a copy in which another set stands in the place of the named one, also on the chip."""
        place = self._position(name)
        placed = tuple(
            replace(each, set_name=new.name) if each.set_name == name else each for each in self.plan.channels
        )
        sets = (*self.sets[:place], new, *self.sets[place + 1 :])
        return replace(self, sets=sets, plan=replace(self.plan, channels=placed))

    def with_set_removed(self, name: str) -> ChipProject:
        """Return a copy without the named set and its places on the chip; the last one cannot be removed."""
        place = self._position(name)
        placed = tuple(each for each in self.plan.channels if each.set_name != name)
        sets = self.sets[:place] + self.sets[place + 1 :]
        return replace(self, sets=sets, plan=replace(self.plan, channels=placed))

    def with_set_moved(self, name: str, position: int) -> ChipProject:
        """Return a copy in which the named set has the given place (0 is the first)."""
        moved = self.set_named(name)
        others = [each for each in self.sets if each is not moved]
        others.insert(max(0, position), moved)
        return replace(self, sets=tuple(others))

    def with_set_renamed(self, name: str, new_name: str) -> ChipProject:
        """Return a copy in which the named set has a new name."""
        return self.with_set_replaced(name, replace(self.set_named(name), name=new_name))

    def with_operating(self, operating: OperatingPoint) -> ChipProject:
        """Return a copy run at other conditions."""
        return replace(self, operating=operating)

    def with_process(self, process: Process) -> ChipProject:
        """Return a copy made in another way."""
        return replace(self, process=process)

    def with_plan(self, plan: ChipPlan) -> ChipProject:
        """Return a copy with another chip."""
        return replace(self, plan=plan)

    def _position(self, name: str) -> int:
        names = [each.name for each in self.sets]
        if name not in names:
            raise DesignValueError(
                field="set", value=name, limit="a parameter set of this project", way_out=did_you_mean(name, names)
            )
        return names.index(name)


def set_list_problems(names: list[str]) -> list[DesignValueError]:
    """Return every problem of a list of set names: none, too many, or two alike."""
    if not 1 <= len(names) <= MOST_SETS:
        return [
            DesignValueError(
                field="sets",
                value=len(names),
                limit=f"1 to {MOST_SETS} parameter sets",
                way_out="keep at least one" if not names else "remove some",
            )
        ]
    problems, seen = [], set()
    for name in names:
        if name_key(name) in seen:
            problems.append(
                DesignValueError(
                    field="set name",
                    value=name,
                    limit="a name that no other set of the chip has (upper and lower case count as equal)",
                    way_out="give this set another name",
                )
            )
        seen.add(name_key(name))
    return problems


def new_project() -> ChipProject:
    """Return the project a new window starts with: one set, everything at its default."""
    return ChipProject(name="Untitled chip", sets=(ParameterSet(name="Set 1"),))
