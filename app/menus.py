"""Menus whose rows are choices: units, colours, recent files."""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING

from PySide6.QtGui import QAction, QActionGroup
from PySide6.QtWidgets import QMenu

from app.settings import SCHEMES
from core.units import UNITS, unit_symbol

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence
    from pathlib import Path

    from app.settings import Settings

_SCHEME_WORDS = {"system": "As the &system", "light": "&Light", "dark": "&Dark"}
_QUANTITY_WORDS = {"length": "&Lengths in", "flow": "Flo&ws in", "pressure": "Press&ures in"}


class ChoiceMenu(QMenu):
    """A menu of which one row is always ticked.

    Parameters
    ----------
    title : str
        Words in the menu above.
    choices : sequence of (str, str)
        Value and words of each row.
    chosen : callable
        Returns the value that holds.
    choose : callable
        Takes the value the user picks.
    """

    def __init__(
        self,
        title: str,
        choices: Sequence[tuple[str, str]],
        *,
        chosen: Callable[[], str],
        choose: Callable[[str], object],
        parent: QMenu,
    ) -> None:
        super().__init__(title, parent)
        self._chosen = chosen
        group = QActionGroup(self)
        for value, words in choices:
            action = QAction(words, group, checkable=True)
            action.setData(value)
            action.triggered.connect(lambda _checked=False, value=value: choose(value))
            self.addAction(action)
        self.aboutToShow.connect(self.refresh)
        self.refresh()

    def refresh(self) -> None:
        """Tick the row that holds."""
        for action in self.actions():
            action.setChecked(action.data() == self._chosen())


class RecentMenu(QMenu):
    """The recent files, numbered for the keyboard."""

    def __init__(self, settings: Settings, open_path: Callable[[Path], object], parent: QMenu) -> None:
        super().__init__("Open &recent", parent)
        self._settings, self._open_path = settings, open_path
        settings.recent_files_changed.connect(self.refresh)
        self.refresh()

    def refresh(self) -> None:
        """List the files that the settings hold."""
        self.clear()
        for number, path in enumerate(self._settings.recent_files, start=1):
            action = self.addAction(f"&{number}  {path.stem}")
            action.setToolTip(str(path))
            action.triggered.connect(lambda _checked=False, path=path: self._open_path(path))
        self.setToolTipsVisible(True)
        self.setEnabled(not self.isEmpty())


def add_choice_menus(menu: QMenu, settings: Settings) -> None:
    """Put units and colours under a menu."""
    menu.addSeparator()
    for quantity, units in UNITS.items():
        menu.addMenu(
            ChoiceMenu(
                _QUANTITY_WORDS[quantity],
                [(unit, unit_symbol(unit)) for unit in units],
                chosen=partial(settings.unit, quantity),
                choose=partial(settings.set_unit, quantity),
                parent=menu,
            )
        )
    choices = [(scheme, _SCHEME_WORDS[scheme]) for scheme in SCHEMES]
    menu.addMenu(
        ChoiceMenu("&Colours", choices, chosen=lambda: settings.scheme, choose=settings.set_scheme, parent=menu)
    )
