"""The process and the plan of a chip as they stand in a project file."""

from __future__ import annotations

from dataclasses import MISSING, fields
from typing import TYPE_CHECKING

from core.chip.plan import CHIP_FIELDS, ChipChannel, ChipPlan, SteppedField
from core.fabrication.process import PROCESS_FIELDS
from core.fabrication.shipped import shipped_process
from core.project.reading import entries, tried, values

if TYPE_CHECKING:
    from core.fabrication.process import Process

_Entry = ChipChannel | SteppedField
_LISTS: dict[str, tuple[str, type[_Entry]]] = {
    "channels": ("channel", ChipChannel),
    "series": ("stepped field", SteppedField),
}


def process_from_data(data: object, problems: list[str]) -> Process:
    """Return the process of a file; every problem is noted.

    Fields that are missing take the values shipped with the kind that the file names.
    """
    where = "process: "
    given = values(data, PROCESS_FIELDS, where, problems)
    shipped = shipped_process(str(given.get("kind", PROCESS_FIELDS["kind"].default)))
    return tried(lambda: shipped.with_values(given), where, problems) or shipped


def plan_data(plan: ChipPlan) -> dict[str, object]:
    """Return a plan as plain data, its channels and series as lists."""
    lists = {key: [_entry_data(each) for each in getattr(plan, key)] for key in _LISTS}
    return {**plan.as_dict(), "label": plan.label, **lists}


def _entry_data(entry: _Entry) -> dict[str, object]:
    return {field.name: getattr(entry, field.name) for field in fields(entry)}


def plan_from_data(data: object, problems: list[str]) -> ChipPlan:
    """Return the plan of a chip in a file; every problem is noted."""
    where = "chip: "
    given: dict[str, object] = {**values(data, CHIP_FIELDS, where, problems, others=("label", *_LISTS))}
    if not isinstance(data, dict):
        return ChipPlan()
    for key, (content, kind) in _LISTS.items():
        listed = entries(data.get(key, []), f"{where}{key}", content, problems)
        given[key] = _entries(listed, f"{where}{content}", kind, problems)
    if "label" in data:
        given["label"] = data["label"]
    return tried(lambda: ChipPlan(**given), where, problems) or ChipPlan()  # type: ignore[arg-type]


def _entries(data: list[object], where: str, kind: type[_Entry], problems: list[str]) -> tuple[_Entry, ...]:
    found = [_entry(each, f"{where} {number}: ", kind, problems) for number, each in enumerate(data, start=1)]
    return tuple(each for each in found if each is not None)


def _entry(data: object, where: str, kind: type[_Entry], problems: list[str]) -> _Entry | None:
    """Return one entry of a list; None when it cannot be used (told in the problems)."""
    before = len(problems)
    others = [field.name for field in fields(kind) if field.name not in kind.table()]
    numbers = values(data, kind.table(), where, problems, others=others)
    if not isinstance(data, dict):
        return None
    missing = [field.name for field in fields(kind) if field.default is MISSING and field.name not in data]
    problems.extend(f"{where}{name} is missing; give it" for name in missing)
    if len(problems) > before:
        return None
    given = {**numbers, **{name: data[name] for name in others if name in data}}
    return tried(lambda: kind(**given), where, problems)
