"""What stands where in a project file: the project as plain data, and back with every problem named."""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING

from core.errors import ProjectFileError, shown
from core.operating import OPERATING_FIELDS, OperatingPoint
from core.parameters import CHANNEL_FIELDS, ChannelParameters
from core.project.chip import ChipProject, ParameterSet, set_list_problems
from core.project.migration import SCHEMA, migrated
from core.project.plan_layout import plan_data, plan_from_data, process_from_data
from core.project.reading import entries, tell_unknown, told, values, words
from core.project.solved_layout import solved_data, solved_from_data
from core.project.text import checked_line, checked_name, checked_notes

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable

FORMAT = "sideloop chip project"

_WORDS: dict[str, Callable[[object], str]] = {
    "name": partial(checked_name, field="name"),
    "lab": partial(checked_line, field="lab"),
    "author": partial(checked_line, field="author"),
    "notes": partial(checked_notes, field="notes"),
}
_SET_WORDS = {key: _WORDS[key] for key in ("name", "notes")}
_TOP_KEYS = ("format", "schema", *_WORDS, "operating", "process", "chip", "sets", "solved")


def project_data(project: ChipProject) -> dict[str, object]:
    """Return a project as plain data.

    Every field is written, also those at their default: a project is a record of what was
    decided, and must not change when a later version of the program has other defaults.
    """
    return {
        "format": FORMAT,
        "schema": SCHEMA,
        "name": project.name,
        "lab": project.lab,
        "author": project.author,
        "notes": project.notes,
        "operating": project.operating.as_dict(),
        "process": project.process.as_dict(),
        "chip": plan_data(project.plan),
        "sets": [{"name": each.name, "notes": each.notes, "channel": each.channel.as_dict()} for each in project.sets],
        "solved": solved_data(project.solved),
    }


def project_from_data(data: object, *, problems: Iterable[str] = ()) -> ChipProject:
    """Return the project that plain data describe; missing fields take their defaults.

    Parameters
    ----------
    data : object
        What a file held.
    problems : iterable of str
        Problems already found, to be reported with the others.

    Returns
    -------
    ChipProject
        The checked project.

    Raises
    ------
    ProjectFileError
        With every problem of the data in its ``problems``.
    """
    if not isinstance(data, dict) or data.get("format") != FORMAT:
        raise ProjectFileError(f'no chip project: "format" is not "{FORMAT}"; choose another file')
    data = migrated(data)
    found = list(problems)
    tell_unknown(data, _TOP_KEYS, "", found)
    named = words(data, _WORDS, "", found)
    operating = values(data.get("operating", {}), OPERATING_FIELDS, "operating: ", found)
    process = process_from_data(data.get("process", {}), found)
    plan = plan_from_data(data.get("chip", {}), found)
    sets = _sets(data.get("sets", []), found)
    solved = solved_from_data(data.get("solved", []), found)
    if found:
        raise ProjectFileError(told(found), found)
    return ChipProject(
        **{"name": "Untitled chip", **named},
        sets=tuple(sets),
        operating=OperatingPoint(**operating),  # type: ignore[arg-type]
        process=process,
        plan=plan,
        solved=solved,
    )


def _sets(data: object, problems: list[str]) -> list[ParameterSet]:
    before = len(problems)
    listed = entries(data, "sets", "parameter set", problems)
    too_few_or_many = set_list_problems([str(number) for number in range(len(listed))])
    if too_few_or_many:
        problems.extend(map(str, too_few_or_many) if len(problems) == before else ())
        return []
    found = [_set(each, f"set {number}", problems) for number, each in enumerate(listed, start=1)]
    sets = [each for each in found if each is not None]
    problems.extend(map(str, set_list_problems([each.name for each in sets]) if sets else ()))
    return sets


def _set(data: object, where: str, problems: list[str]) -> ParameterSet | None:
    """Return one parameter set; None when its name cannot be used (told in the problems)."""
    if not isinstance(data, dict):
        problems.append(f'{where}: {shown(data)} is no parameter set; write {{ "name": ..., "channel": ... }}')
        return None
    if isinstance(data.get("name"), str):
        where = f"{where} ({shown(data['name'])})"
    where = f"{where}: "
    tell_unknown(data, (*_SET_WORDS, "channel"), where, problems)
    channel = values(data.get("channel", {}), CHANNEL_FIELDS, where, problems)
    named = words(data, _SET_WORDS, where, problems)
    if "name" not in data:
        problems.append(f"{where}name is missing; give the set a name")
    if "name" not in named:
        return None
    return ParameterSet(**named, channel=ChannelParameters(**channel))  # type: ignore[arg-type]
