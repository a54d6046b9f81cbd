"""Which words a project may hold: names, single lines and notes."""

from __future__ import annotations

import unicodedata

from core.errors import DesignValueError

LONGEST_NAME = 60
LONGEST_NOTES = 10_000


def checked_name(value: object, *, field: str) -> str:
    """Return a name without spaces around it, or say why it cannot be used.

    Parameters
    ----------
    value : object
        What was given.
    field : str
        What the name is for, as named in messages.

    Returns
    -------
    str
        1 to 60 printable characters.

    Raises
    ------
    DesignValueError
        If it is no text, empty, too long or holds a character that cannot be printed.

    Examples
    --------
    >>> checked_name(" Four loops ", field="set name")
    'Four loops'
    """
    limit = f"1 to {LONGEST_NAME} printable characters"
    name = checked_line(value, field=field, limit=limit)
    if not name:
        raise DesignValueError(field=field, value=value, limit=limit, way_out="give a name")
    return name


def checked_line(value: object, *, field: str, limit: str = f"up to {LONGEST_NAME} printable characters") -> str:
    """Return one line of text without spaces around it; it may be empty.

    Parameters
    ----------
    value : object
        What was given.
    field : str
        What the text is for, as named in messages.
    limit : str
        What is accepted, in words.

    Returns
    -------
    str
        Up to 60 printable characters.

    Raises
    ------
    DesignValueError
        If it is no text, too long or holds a character that cannot be printed.
    """
    text = _checked_text(value, field=field, limit=limit).strip()
    if len(text) > LONGEST_NAME:
        raise DesignValueError(field=field, value=value, limit=limit, way_out="shorten it")
    if not text.isprintable():
        raise DesignValueError(
            field=field, value=value, limit=limit, way_out="remove line breaks and characters that cannot be printed"
        )
    return text


def checked_notes(value: object, *, field: str) -> str:
    """Return free text of several lines.

    Parameters
    ----------
    value : object
        What was given.
    field : str
        What the notes belong to, as named in messages.

    Returns
    -------
    str
        Up to 10,000 characters; line breaks and tabs are the only control characters.

    Raises
    ------
    DesignValueError
        If it is no text, too long or holds other control characters.
    """
    limit = f"up to {LONGEST_NOTES} characters of text"
    text = _checked_text(value, field=field, limit=limit)
    if len(text) > LONGEST_NOTES:
        raise DesignValueError(field=field, value=value, limit=limit, way_out="shorten them")
    # Cc: control characters, Cs: halves of a character that no file can hold
    if any(unicodedata.category(c) in ("Cc", "Cs") for c in text if c not in "\n\t"):
        raise DesignValueError(
            field=field, value=value, limit=limit, way_out="remove control characters other than line breaks and tabs"
        )
    return text


def name_key(name: str) -> str:
    """Return what two names share when they would be mistaken for one another.

    Upper and lower case count as equal, because many file systems on which masks are written
    hold them equal, and so do two spellings of one accented letter.
    """
    return unicodedata.normalize("NFC", unicodedata.normalize("NFC", name).casefold())


def _checked_text(value: object, *, field: str, limit: str) -> str:
    if not isinstance(value, str):
        raise DesignValueError(field=field, value=value, limit=limit, way_out="give text")
    return value
