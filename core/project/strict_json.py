"""JSON read with suspicion: whatever the bytes are, the answer is data or one clear error."""

from __future__ import annotations

import json

from core.errors import ProjectFileError, shown

LARGEST_FILE_BYTES = 10_000_000  # a project at all its limits takes 8.5 MB
_DEEPEST = 8
_MOST_PROBLEMS = 20


def parsed_json(content: bytes) -> tuple[object, list[str]]:
    """Return the data of a JSON text, with the problems that leave the rest readable.

    Parameters
    ----------
    content : bytes
        The whole file, UTF-8 with or without a byte-order mark.

    Returns
    -------
    tuple
        The data, and one line for every name that stands twice in one object.

    Raises
    ------
    ProjectFileError
        If the content is too large, empty, no text, no JSON or nested too deeply.
    """
    if len(content) > LARGEST_FILE_BYTES:
        raise ProjectFileError(
            f"larger than the {LARGEST_FILE_BYTES // 1_000_000} MB a chip project may have; choose another file"
        )
    text = _text(content)
    problems: list[str] = []

    def without_doubles(pairs: list[tuple[str, object]]) -> dict[str, object]:
        data = dict(pairs)
        if len(data) < len(pairs) and len(problems) < _MOST_PROBLEMS:
            seen: set[str] = set()
            doubles = dict.fromkeys(key for key, _ in pairs if key in seen or seen.add(key))  # type: ignore[func-returns-value]
            problems.extend(f"{shown(key)} is given more than once; keep one of them" for key in doubles)
        return data

    try:
        data = json.loads(text, object_pairs_hook=without_doubles)
    except json.JSONDecodeError as error:
        raise ProjectFileError(
            f"no valid JSON at line {error.lineno}, column {error.colno} ({error.msg}); repair it there or use a copy"
        ) from None
    except (RecursionError, ValueError) as error:  # ValueError: a number of thousands of digits
        reason = "brackets nested too deeply" if isinstance(error, RecursionError) else "a number with too many digits"
        raise ProjectFileError(f"no chip project: {reason}; choose another file") from None
    _refuse_deep(data)
    return data, problems[:_MOST_PROBLEMS]


def _text(content: bytes) -> str:
    if not content.strip():
        raise ProjectFileError("empty; choose another file or use a copy")
    try:
        text = content.decode("utf-8-sig")
    except UnicodeDecodeError:
        text = "\0"
    if "\0" in text:
        raise ProjectFileError("no text (a binary file, or text not in UTF-8); choose another file")
    return text


def _refuse_deep(data: object) -> None:
    """Refuse deep nesting, so that no later step has to be safe against it."""
    level = [data]
    for _ in range(_DEEPEST):
        level = [
            item
            for each in level
            if isinstance(each, dict | list)
            for item in (each.values() if isinstance(each, dict) else each)
        ]
    if level:
        raise ProjectFileError(f"no chip project: brackets nested more than {_DEEPEST} deep; choose another file")
