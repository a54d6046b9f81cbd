"""Safe names. Limits: A-Z, 0-9 and underscore, fewer than 28 characters, the strictest published rules."""

from __future__ import annotations

import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.masks.names import safe_name, unique_safe_names

ALLOWED = re.compile(r"[A-Z0-9][A-Z0-9_]*")


@pytest.mark.parametrize(
    ("typed", "safe"),
    [
        ("Wide loop", "WIDE_LOOP"),
        ("  200 µm, Nr. 3 ", "200_M_NR_3"),
        ("Größe Älter", "GROSSE_ALTER"),
        ("../../etc", "ETC"),
        ("$TOP?", "TOP"),
        ("水路", "CHANNEL"),
        ("", "CHANNEL"),
        ("___", "CHANNEL"),
    ],
)
def test_safe_name(typed: str, safe: str) -> None:
    assert safe_name(typed) == safe


@given(st.lists(st.text(max_size=40), max_size=12), st.integers(8, 27))
def test_any_names_become_safe_short_and_different(typed: list[str], longest: int) -> None:
    names = unique_safe_names(typed, longest=longest, taken=("CHANNEL",))
    assert len({*names, "CHANNEL"}) == len(typed) + 1
    assert all(ALLOWED.fullmatch(name) and len(name) <= longest for name in names)


def test_repeated_names_are_numbered() -> None:
    assert unique_safe_names(["a", "A", "a!", "b"], longest=20, taken=["B"]) == ["A", "A_2", "A_3", "B_2"]
