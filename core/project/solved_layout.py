"""Results of flow solves as they stand in a project file."""

from __future__ import annotations

from typing import TYPE_CHECKING

from core.errors import shown
from core.operating import OPERATING_FIELDS, OperatingPoint
from core.parameters import CHANNEL_FIELDS, ChannelParameters
from core.project.reading import entries, tell_unknown, tried, values
from core.project.solved import KEYS, LISTS, SolvedResult

if TYPE_CHECKING:
    from collections.abc import Iterable


def solved_data(results: Iterable[SolvedResult]) -> list[dict[str, object]]:
    """Return results as plain data."""
    return [_result_data(each) for each in results]


def _result_data(result: SolvedResult) -> dict[str, object]:
    groups = {
        "channel": result.channel.as_dict(),
        "operating": result.operating.as_dict(),
        "notes": list(result.notes),
        **{name: list(getattr(result, name)) for name in LISTS},
    }
    return {key: groups.get(key, getattr(result, key)) for key in KEYS}


def solved_from_data(data: object, problems: list[str]) -> tuple[SolvedResult, ...]:
    """Return the usable results of a file; every problem is noted."""
    listed = entries(data, "solved", "result", problems)
    found = [_result(each, f"solved {number}: ", problems) for number, each in enumerate(listed, start=1)]
    return tuple(each for each in found if each is not None)


def _result(data: object, where: str, problems: list[str]) -> SolvedResult | None:
    """Return one result of a flow solve; None when it cannot be used (told in the problems)."""
    if not isinstance(data, dict):
        problems.append(f"{where}{shown(data)} is no result; remove it and solve again")
        return None
    before = len(problems)
    tell_unknown(data, KEYS, where, problems)
    missing = [key for key in ("set_name", "channel", "operating", "reynolds") if key not in data]
    problems.extend(f"{where}{key} is missing; remove the entry and solve again" for key in missing)
    channel = values(data.get("channel", {}), CHANNEL_FIELDS, where, problems)
    operating = values(data.get("operating", {}), OPERATING_FIELDS, where, problems)
    notes = data.get("notes", [])
    if not isinstance(notes, list):
        problems.append(f"{where}notes: {shown(notes)} is no list of texts")
    if len(problems) > before:
        return None
    others = {key: data[key] for key in KEYS if key in data and key not in ("channel", "operating", "notes")}
    return tried(
        lambda: SolvedResult(
            **others,
            channel=ChannelParameters(**channel),  # type: ignore[arg-type]
            operating=OperatingPoint(**operating),  # type: ignore[arg-type]
            notes=tuple(notes),
        ),
        where,
        problems,
    )
