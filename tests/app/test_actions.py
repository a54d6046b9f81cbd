"""Every action can be found by keyboard, and no key means two things."""

from __future__ import annotations

from collections import Counter

from PySide6.QtGui import QKeySequence

from app.actions import ACTIONS, keys_page

# reached through the menu's letters alone; everything else has a key
WITHOUT_KEYS = {"about"}


def test_every_action_has_a_key():
    assert {words.name for words in ACTIONS if not words.keys} == WITHOUT_KEYS


def test_keys_are_real_and_used_once():
    keys = [QKeySequence(key).toString() for words in ACTIONS for key in words.keys]
    assert all(keys)
    assert [key for key, times in Counter(keys).items() if times > 1] == []


def test_letters_in_one_menu_are_used_once():
    for menu in {words.menu for words in ACTIONS}:
        letters = [words.text.split("&")[1][0].lower() for words in ACTIONS if words.menu == menu and "&" in words.text]
        assert len(letters) == sum(words.menu == menu for words in ACTIONS), f"an action of {menu} has no letter"
        assert [letter for letter, times in Counter(letters).items() if times > 1] == [], menu


def test_the_keys_page_lists_them():
    page = keys_page()
    for words in ACTIONS:
        if words.keys:
            assert words.plain_text in page
