"""One family for everything that can go wrong for a reason a user can act on.

::

    CoreError
    ├── DesignValueError   a field holds a value that cannot be used (also a ValueError)
    ├── GeometryError      a shape cannot be built from values that are fine one by one
    ├── SolveError         the flow solve cannot give an answer
    ├── ExportError        mask files cannot be written, or do not read back as written
    │   └── DesignRefusedError   the design has findings that forbid what was asked
    └── ProjectFileError   a chip project cannot be read or saved

Anything else that escapes from ``core`` is a defect of the program, not of the input.
"""

from __future__ import annotations

from difflib import get_close_matches
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterable

LONGEST_GUESS = 100  # characters of a wrong name that are compared with the right ones
MOST_NAMES = 20  # right names told when none is near


class CoreError(Exception):
    """Base of all errors that are told to the user in one line."""


class DesignValueError(CoreError, ValueError):
    """A field holds a value that cannot be used.

    Parameters
    ----------
    field : str
        Name of the field as in files and on the command line.
    value : object
        The value that was given.
    limit : str
        What would be accepted, in words with units.
    way_out : str
        What the user can do about it.
    """

    def __init__(self, *, field: str, value: object, limit: str, way_out: str) -> None:
        self.field = field
        self.value = value
        self.limit = limit
        self.way_out = way_out
        super().__init__(f"{field} is {shown(value)}; allowed: {limit}; {way_out}")

    def __reduce__(self) -> tuple[object, ...]:
        """Keep keyword-only arguments alive across processes."""
        return (_rebuild_value_error, (self.field, self.value, self.limit, self.way_out))


class GeometryError(CoreError):
    """A shape cannot be built from values that are fine one by one."""


class SolveError(CoreError):
    """The flow solve cannot give an answer."""


class ExportError(CoreError):
    """Mask files cannot be written, or do not read back as written."""


class DesignRefusedError(ExportError):
    """The design has findings that forbid what was asked."""


class ProjectFileError(CoreError):
    """A chip project cannot be read or saved.

    Parameters
    ----------
    message : str
        The whole story in one line.
    problems : iterable of str
        Every separate problem found, for a list on screen.
    """

    def __init__(self, message: str, problems: Iterable[str] = ()) -> None:
        self.problems = tuple(problems)
        super().__init__(message)


def _rebuild_value_error(field: str, value: object, limit: str, way_out: str) -> DesignValueError:
    return DesignValueError(field=field, value=value, limit=limit, way_out=way_out)


def shown(value: object, longest: int = 60) -> str:
    """Return a value as one short printable line, for messages.

    Parameters
    ----------
    value : object
        Anything a user or a file may have given.
    longest : int
        Number of characters kept.

    Returns
    -------
    str
        Printable text without line breaks.
    """
    text = value if isinstance(value, str) else f"{value:g}" if isinstance(value, float) else repr(value)
    text = "".join(c if c.isprintable() else "?" for c in text[: longest + 1])
    if isinstance(value, str):
        text = f"'{text}'"
    return text if len(text) <= longest else f"{text[: longest - 3]}..."


def did_you_mean(name: str, choices: Iterable[str]) -> str:
    """Return a hint for a misspelt name: the nearest choice, or all of them.

    Parameters
    ----------
    name : str
        What was given.
    choices : iterable of str
        What would be accepted.

    Returns
    -------
    str
        ``"did you mean 'x'?"`` or ``"known names: a, b, c"``.
    """
    known = list(choices)
    near = get_close_matches(name[:LONGEST_GUESS], known, n=1, cutoff=0.6)
    near = near or [choice for choice in known if name and choice.startswith(name)]  # the unit left out, say
    if near:
        return f"did you mean '{near[0]}'?"
    more = ", ..." if len(known) > MOST_NAMES else ""
    return f"known names: {', '.join(known[:MOST_NAMES])}{more}"
