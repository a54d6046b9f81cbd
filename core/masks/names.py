"""Names that every reader takes, made from whatever the user typed."""

from __future__ import annotations

import re
import unicodedata
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterable

PIECE_MARK = "__"  # before the name of a piece; no safe name has two underscores in a row
LONGEST_CELL_NAME = 27  # the strictest published limit for GDSII is "fewer than 28"


def safe_name(text: str, *, longest: int = LONGEST_CELL_NAME, fallback: str = "CHANNEL") -> str:
    """Return a name of upper-case letters, digits and underscores.

    Parameters
    ----------
    text : str
        Any text; accents are dropped, every other foreign sign becomes an underscore.
    longest : int
        Number of characters kept.
    fallback : str
        Name used when nothing is left.

    Returns
    -------
    str
        Starts with a letter or digit, never empty.

    Examples
    --------
    >>> safe_name("Wide loop, 2nd try")
    'WIDE_LOOP_2ND_TRY'
    """
    plain = unicodedata.normalize("NFKD", text)
    plain = "".join(c for c in plain if not unicodedata.combining(c)).upper()
    plain = re.sub(r"[^A-Z0-9]+", "_", plain).strip("_")
    return plain[:longest].strip("_") or fallback[:longest]


def unique_safe_names(texts: Iterable[str], *, longest: int, taken: Iterable[str] = ()) -> list[str]:
    """Return safe names that differ from one another and from those taken.

    Parameters
    ----------
    texts : iterable of str
        Names as the user typed them.
    longest : int
        Number of characters kept, any added number included.
    taken : iterable of str
        Names that are already in use.

    Returns
    -------
    list of str
        In the order given; names that would repeat get ``_2``, ``_3`` ... at the end.
    """
    used = set(taken)
    names: list[str] = []
    for text in texts:
        name, count = safe_name(text, longest=longest), 1
        while name in used:
            count += 1
            tail = f"_{count}"
            name = safe_name(text, longest=longest - len(tail)) + tail
        used.add(name)
        names.append(name)
    return names
