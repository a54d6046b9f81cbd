"""Sentences about changes, in plain words."""

from __future__ import annotations

from typing import TYPE_CHECKING

from app.shown_values import ShownUnits, value_text

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

    from core.fields import Field

# Undo texts are kept while units on the screen may change, so they speak in stored units.
_STORED = ShownUnits(length="um", flow="uL/min", pressure="Pa")


def changes_text(fields: Mapping[str, Field], names: Iterable[str], before: object, after: object) -> str:
    """Return what a change did, such as ``Loop radius 320 to 340 µm``.

    Parameters
    ----------
    fields : mapping
        The field table.
    names : iterable of str
        Fields that were changed.
    before, after : object
        Values with those fields as attributes.
    """
    texts = []
    for name in names:
        field = fields[name]
        old, new = (value_text(field, getattr(holder, name), _STORED) for holder in (before, after))
        unit = old.partition(" ")[2] if field.unit else ""
        if unit and old.endswith(unit):
            old = old[: -len(unit)].rstrip()
        texts.append(f"{field.label} {old} to {new}")
    return ", ".join(texts)
