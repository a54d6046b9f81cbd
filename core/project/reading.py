"""Plain data of a file read field by field: what can be used is returned, every problem is noted in one line."""

from __future__ import annotations

from functools import partial
from itertools import islice
from typing import TYPE_CHECKING, TypeVar

from core.errors import DesignValueError, did_you_mean, shown

if TYPE_CHECKING:
    from collections.abc import Callable, Iterable, Mapping

    from core.fields import Field, Value

_Checked = TypeVar("_Checked")
_MOST_UNKNOWN = 10  # unknown names told per object; a file of another kind may have thousands


def told(problems: list[str], most: int = 5) -> str:
    """Return problems as one line; the first few in full, the others counted."""
    if len(problems) == 1:
        return problems[0]
    more = f"; and {len(problems) - most} more" if len(problems) > most else ""
    return f"{len(problems)} problems: {'; '.join(problems[:most])}{more}"


def tried(make: Callable[[], _Checked], where: str, problems: list[str]) -> _Checked | None:
    """Return what a function makes; None when it refuses a value, which is then noted.

    Parameters
    ----------
    make : callable
        Makes a checked value.
    where : str
        Place in the file, put before the problem.
    problems : list of str
        Grows by what was found.
    """
    try:
        return make()
    except DesignValueError as error:
        problems.append(f"{where}{error}")
        return None


def tell_unknown(data: Mapping[str, object], known: Iterable[str], where: str, problems: list[str]) -> None:
    """Note the names that nobody knows, each with the nearest known one."""
    known = list(known)
    unknown = (key for key in data if key not in known)
    problems.extend(
        f"{where}{shown(key)} is unknown; {did_you_mean(key, known)}" for key in islice(unknown, _MOST_UNKNOWN)
    )


def words(
    data: Mapping[str, object], checks: Mapping[str, Callable[[object], str]], where: str, problems: list[str]
) -> dict[str, str]:
    """Return the usable texts among the values of an object; keys that are missing stay so."""
    found = {key: tried(partial(check, data[key]), where, problems) for key, check in checks.items() if key in data}
    return {key: text for key, text in found.items() if text is not None}


def values(
    data: object, table: Mapping[str, Field], where: str, problems: list[str], *, others: Iterable[str] = ()
) -> dict[str, Value]:
    """Return the usable values of a group of fields.

    Parameters
    ----------
    data : object
        What the file holds in the place of the group.
    table : mapping
        Known fields.
    where : str
        Place in the file, put before every problem.
    problems : list of str
        Grows by what was found.
    others : iterable of str
        Names in the group that are no fields and are read elsewhere.
    """
    if not isinstance(data, dict):
        problems.append(f"{where}{shown(data)} is no group of fields; write {{ field: value, ... }}")
        return {}
    tell_unknown(data, (*table, *others), where, problems)
    found = {
        name: tried(partial(_value, table[name], value), where, problems)
        for name, value in data.items()
        if name in table
    }
    return {name: value for name, value in found.items() if value is not None}


def _value(field: Field, value: object) -> Value:
    if isinstance(value, str) and not field.choices:
        raise DesignValueError(field=field.name, value=value, limit=field.limit, way_out="give a number without quotes")
    return field.checked(value)


def entries(data: object, where: str, content: str, problems: list[str]) -> list[object]:
    """Return the entries of a list; what is no list is noted and counts as empty.

    Parameters
    ----------
    data : object
        What the file holds in the place of the list.
    where : str
        Name of the list.
    content : str
        What its entries are, for the message.
    problems : list of str
        Grows by what was found.
    """
    if isinstance(data, list):
        return data
    problems.append(f"{where}: {shown(data)} is no list; write [ ... ] with one entry per {content}")
    return []
