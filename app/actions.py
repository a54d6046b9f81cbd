"""Every action of the window, once: name, words, menu and keys. Menus and the keys page read this."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from PySide6.QtGui import QAction, QKeySequence

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from PySide6.QtWidgets import QMainWindow, QMenu


@dataclass(frozen=True, slots=True, kw_only=True)
class ActionWords:
    """What an action is called and which keys start it.

    Attributes
    ----------
    name : str
        Name in code.
    menu : str
        Heading under which it is found.
    text : str
        Words in the menu, with ``&`` before the letter that picks it.
    keys : tuple of str
        Key sequences, the first is shown.
    is_switch : bool
        True for what is either on or off.
    begins_part : bool
        True to draw a line above it in the menu.
    """

    name: str
    menu: str
    text: str
    keys: tuple[str, ...] = ()
    is_switch: bool = False
    begins_part: bool = False

    @property
    def plain_text(self) -> str:
        """The words without the mark of the letter."""
        return self.text.replace("&", "")


def _words(menu: str, *rows: tuple[str, str, str] | tuple[str, str, str, str]) -> tuple[ActionWords, ...]:
    return tuple(
        ActionWords(
            name=name,
            menu=menu,
            text=text,
            keys=tuple(keys.split()),
            is_switch="switch" in "".join(marks),
            begins_part="part" in "".join(marks),
        )
        for name, text, keys, *marks in rows
    )


ACTIONS: tuple[ActionWords, ...] = (
    *_words(
        "&Chip",
        ("new", "&New chip", "Ctrl+N"),
        ("open", "&Open\N{HORIZONTAL ELLIPSIS}", "Ctrl+O"),
        ("save", "&Save", "Ctrl+S", "part"),
        ("save_as", "Save &as\N{HORIZONTAL ELLIPSIS}", "Ctrl+Shift+S"),
        ("details", "Chip &details\N{HORIZONTAL ELLIPSIS}", "Ctrl+I", "part"),
        ("export", "Write &masks\N{HORIZONTAL ELLIPSIS}", "Ctrl+E"),
        ("quit", "&Quit", "Ctrl+Q", "part"),
    ),
    *_words(
        "&Edit",
        ("undo", "&Undo", "Ctrl+Z"),
        ("redo", "&Redo", "Ctrl+Shift+Z Ctrl+Y"),
    ),
    *_words(
        "&Set",
        ("add_set", "&New set", "Ctrl+Shift+N"),
        ("copy_set", "&Copy set", "Ctrl+D"),
        ("rename_set", "&Rename set", "F2"),
        ("note_set", "N&otes of the set\N{HORIZONTAL ELLIPSIS}", "Ctrl+Shift+I"),
        ("remove_set", "Re&move set", "Ctrl+Del"),
        ("move_earlier", "Move &earlier", "Alt+Left", "part"),
        ("move_later", "Move &later", "Alt+Right"),
        ("previous_set", "&Previous set", "Ctrl+PgUp", "part"),
        ("next_set", "Ne&xt set", "Ctrl+PgDown"),
        ("compare", "Compare side &by side", "F7", "part switch"),
    ),
    *_words(
        "&Place",
        ("place_set", "&Add the set in hand", "Ctrl+Shift+A"),
        ("place_control", "Add its &control", "Ctrl+Shift+K"),
        ("turn_placed", "&Turn by a quarter", "Ctrl+R", "part"),
        ("level_placed", "&Level its ports", "Ctrl+L"),
        ("fold_placed", "&Fold into one row more", "Ctrl+]"),
        ("unfold_placed", "&Unfold by one row", "Ctrl+["),
        ("remove_placed", "&Remove from the chip", "Ctrl+Shift+Del", "part"),
        ("pack_chip", "&Pack all anew", "Ctrl+K", "part"),
        ("fold_to_fit", "Fold to f&it", "Ctrl+Shift+F"),
    ),
    *_words(
        "S&olve",
        ("solve", "Solve the flow &here", "F5"),
        ("solve_curve", "Solve along the &curve", "Shift+F5"),
        ("stop_solve", "&Stop the flow solve", "Ctrl+."),
        ("save_picture", "Save the &picture\N{HORIZONTAL ELLIPSIS}", "Ctrl+P", "part"),
        ("save_numbers", "Save the &numbers\N{HORIZONTAL ELLIPSIS}", "Ctrl+Shift+P"),
    ),
    *_words(
        "&View",
        ("fit", "&Fit the drawing", "Ctrl+0"),
        ("zoom_in", "Zoom &in", "Ctrl++ Ctrl+="),
        ("zoom_out", "Zoom &out", "Ctrl+-"),
        ("next_finding", "Ne&xt finding", "F8", "part"),
        ("previous_finding", "Previous fi&nding", "Shift+F8"),
        ("use_cure", "&Use the finding's cure", "Ctrl+F8"),
        ("show_drawn", "Walls as &drawn on the mask", "F9", "part switch"),
        ("show_made", "&Walls as made", "Shift+F9", "switch"),
        ("show_channel", "Page of the &channel", "Ctrl+1", "part"),
        ("show_process", "Page of the &making", "Ctrl+2"),
        ("show_chip", "Page of the c&hip", "Ctrl+3"),
        ("next_part", "&Go to the next part of the window", "F6"),
        ("previous_part", "Go to the &previous part", "Shift+F6"),
    ),
    *_words(
        "&Help",
        ("keys", "&Keys", "F1"),
        ("cautions", "&Cautions", "Shift+F1"),
        ("about", "&About", ""),
    ),
)


def made_actions(window: QMainWindow, handlers: Mapping[str, Callable[[], object]]) -> dict[str, QAction]:
    """Return one QAction for every row of ``ACTIONS``, added to the window.

    Parameters
    ----------
    window : QMainWindow
        Owner; the keys work all over it.
    handlers : mapping
        Action name to what it does.
    """
    actions = {}
    for words in ACTIONS:
        action = QAction(words.text, window)
        action.setObjectName(words.name)
        action.setShortcuts([QKeySequence(key) for key in words.keys])
        action.setCheckable(words.is_switch)
        shown_keys = QKeySequence(words.keys[0]).toString(QKeySequence.SequenceFormat.NativeText) if words.keys else ""
        action.setToolTip(f"{words.plain_text} ({shown_keys})" if shown_keys else words.plain_text)
        action.triggered.connect(lambda _checked=False, name=words.name: handlers[name]())
        window.addAction(action)
        actions[words.name] = action
    return actions


def fill_menus(window: QMainWindow, actions: Mapping[str, QAction]) -> dict[str, QMenu]:
    """Put the actions into menus and return the menus by heading."""
    menus: dict[str, QMenu] = {}
    for words in ACTIONS:
        if words.menu not in menus:
            menus[words.menu] = window.menuBar().addMenu(words.menu)
        if words.begins_part:
            menus[words.menu].addSeparator()
        menus[words.menu].addAction(actions[words.name])
    return menus


def keys_page() -> str:
    """Return the page of keys as simple rich text."""
    parts = ["<h3>Keys</h3>"]
    headings = dict.fromkeys(words.menu for words in ACTIONS)
    for heading in headings:
        rows = "".join(
            f"<tr><td>{words.plain_text}&nbsp;&nbsp;</td><td>{_native(words.keys)}</td></tr>"
            for words in ACTIONS
            if words.menu == heading and words.keys
        )
        parts.append(f"<h4>{heading.replace('&', '')}</h4><table>{rows}</table>")
    hand = (
        ("Slider or entry: one step, ten steps", "Arrow keys, Page Up, Page Down"),
        ("Slider: bounds", "Home, End"),
        ("Entry: take it, take typing back", "Enter, Escape"),
        ("Next and previous field", "Tab, Shift+Tab"),
        ("Row of sets: another set", "Left, Right"),
        ("Chip: next and previous channel", "Space, Shift+Space"),
        ("Chip: move a channel by 100 \N{MICRO SIGN}m, by 1 \N{MICRO SIGN}m", "Arrow keys, Shift+Arrow keys"),
        ("Chip: remove a channel, let go of it", "Delete, Escape"),
        ("Chip: show all, show one chip", "F, C"),
        ("Findings: step, go to the field", "Up and Down, Enter"),
    )
    rows = "".join(f"<tr><td>{what}&nbsp;&nbsp;</td><td>{keys}</td></tr>" for what, keys in hand)
    parts.append(f"<h4>Under the hand</h4><table>{rows}</table>")
    return "".join(parts)


def _native(keys: tuple[str, ...]) -> str:
    return " or ".join(QKeySequence(key).toString(QKeySequence.SequenceFormat.NativeText) for key in keys)
