"""What stands where in a project file: the project as plain data, and back with every problem named."""

from __future__ import annotations

from functools import partial
from itertools import islice
from typing import TYPE_CHECKING, TypeVar

from core.errors import DesignValueError, ProjectFileError, did_you_mean, shown
from core.operating import OPERATING_FIELDS, OperatingPoint
from core.parameters import CHANNEL_FIELDS, ChannelParameters
from core.project.chip import ChipProject, ParameterSet, set_list_problems
from core.project.migration import SCHEMA, migrated
from core.project.solved import KEYS, SolvedResult
from core.project.text import checked_line, checked_name, checked_notes

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Mapping

    from core.fields import Field, Value

FORMAT = "sideloop chip project"

_Checked = TypeVar("_Checked")
_WORDS: dict[str, Callable[[object], str]] = {
    "name": partial(checked_name, field="name"),
    "lab": partial(checked_line, field="lab"),
    "author": partial(checked_line, field="author"),
    "notes": partial(checked_notes, field="notes"),
}
_TOP_KEYS = ("format", "schema", *_WORDS, "operating", "sets", "solved")
_SET_KEYS = ("name", "notes", "channel")
_MOST_UNKNOWN = 10  # unknown names told per object; a file of another kind may have thousands


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
        "sets": [{"name": each.name, "notes": each.notes, "channel": each.channel.as_dict()} for each in project.sets],
        "solved": [_solved_data(each) for each in project.solved],
    }


def _solved_data(result: SolvedResult) -> dict[str, object]:
    groups = {
        "channel": result.channel.as_dict(),
        "operating": result.operating.as_dict(),
        "notes": list(result.notes),
    }
    return {key: groups.get(key, getattr(result, key)) for key in KEYS}


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
    _tell_unknown(data, _TOP_KEYS, "", found)
    words = _words(data, "", found)
    operating = _values(data.get("operating", {}), OPERATING_FIELDS, "operating: ", found)
    sets = _sets(data.get("sets", []), found)
    solved = _solved(data.get("solved", []), found)
    if found:
        raise ProjectFileError(_told(found), found)
    values = {"name": "Untitled chip", **words}
    return ChipProject(
        **values,
        sets=tuple(sets),
        operating=OperatingPoint(**operating),  # type: ignore[arg-type]
        solved=tuple(solved),
    )


def _told(problems: list[str], most: int = 5) -> str:
    if len(problems) == 1:
        return problems[0]
    more = f"; and {len(problems) - most} more" if len(problems) > most else ""
    return f"{len(problems)} problems: {'; '.join(problems[:most])}{more}"


def _tried(make: Callable[[], _Checked], where: str, problems: list[str]) -> _Checked | None:
    try:
        return make()
    except DesignValueError as error:
        problems.append(f"{where}{error}")
        return None


def _tell_unknown(data: Mapping[str, object], known: Iterable[str], where: str, problems: list[str]) -> None:
    known = list(known)
    unknown = (key for key in data if key not in known)
    problems.extend(
        f"{where}{shown(key)} is unknown; {did_you_mean(key, known)}" for key in islice(unknown, _MOST_UNKNOWN)
    )


def _words(data: Mapping[str, object], where: str, problems: list[str]) -> dict[str, str]:
    """Return the usable texts among the values of an object."""
    tried = {key: _tried(partial(check, data[key]), where, problems) for key, check in _WORDS.items() if key in data}
    return {key: text for key, text in tried.items() if text is not None}


def _values(data: object, table: Mapping[str, Field], where: str, problems: list[str]) -> dict[str, Value]:
    """Return the usable values of a group of fields."""
    if not isinstance(data, dict):
        problems.append(f"{where}{shown(data)} is no group of fields; write {{ field: value, ... }}")
        return {}
    _tell_unknown(data, table, where, problems)
    tried = {
        name: _tried(partial(_value, table[name], value), where, problems)
        for name, value in data.items()
        if name in table
    }
    return {name: value for name, value in tried.items() if value is not None}


def _value(field: Field, value: object) -> Value:
    if isinstance(value, str) and not field.choices:
        raise DesignValueError(field=field.name, value=value, limit=field.limit, way_out="give a number without quotes")
    return field.checked(value)


def _sets(data: object, problems: list[str]) -> list[ParameterSet]:
    if not isinstance(data, list):
        problems.append(f"sets: {shown(data)} is no list; write [ ... ] with one entry per parameter set")
        return []
    too_few_or_many = set_list_problems([str(number) for number in range(len(data))])
    if too_few_or_many:
        problems.extend(map(str, too_few_or_many))
        return []
    tried = [_set(each, f"set {number}", problems) for number, each in enumerate(data, start=1)]
    sets = [each for each in tried if each is not None]
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
    _tell_unknown(data, _SET_KEYS, where, problems)
    channel = _values(data.get("channel", {}), CHANNEL_FIELDS, where, problems)
    words = _words({key: data[key] for key in ("name", "notes") if key in data}, where, problems)
    if "name" not in data:
        problems.append(f"{where}name is missing; give the set a name")
    if "name" not in words:
        return None
    return ParameterSet(**words, channel=ChannelParameters(**channel))  # type: ignore[arg-type]


def _solved(data: object, problems: list[str]) -> list[SolvedResult]:
    if not isinstance(data, list):
        problems.append(f"solved: {shown(data)} is no list; write [ ... ] with one entry per result")
        return []
    tried = [_solved_result(each, f"solved {number}: ", problems) for number, each in enumerate(data, start=1)]
    return [each for each in tried if each is not None]


def _solved_result(data: object, where: str, problems: list[str]) -> SolvedResult | None:
    """Return one result of a flow solve; None when it cannot be used (told in the problems)."""
    if not isinstance(data, dict):
        problems.append(f"{where}{shown(data)} is no result; remove it and solve again")
        return None
    before = len(problems)
    _tell_unknown(data, KEYS, where, problems)
    missing = [key for key in ("set_name", "channel", "operating", "reynolds") if key not in data]
    problems.extend(f"{where}{key} is missing; remove the entry and solve again" for key in missing)
    channel = _values(data.get("channel", {}), CHANNEL_FIELDS, where, problems)
    operating = _values(data.get("operating", {}), OPERATING_FIELDS, where, problems)
    notes = data.get("notes", [])
    if not isinstance(notes, list):
        problems.append(f"{where}notes: {shown(notes)} is no list of texts")
    if len(problems) > before:
        return None
    others = {key: data[key] for key in KEYS if key in data and key not in ("channel", "operating", "notes")}
    return _tried(
        lambda: SolvedResult(
            **others,
            channel=ChannelParameters(**channel),  # type: ignore[arg-type]
            operating=OperatingPoint(**operating),  # type: ignore[arg-type]
            notes=tuple(notes),
        ),
        where,
        problems,
    )
