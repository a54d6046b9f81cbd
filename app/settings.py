"""What the program remembers between two starts: units, colours, recent files, window place.

The settings object is made once and handed to whoever needs it; tests hand in a fresh one.
"""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QByteArray, QObject, QSettings, QStandardPaths, Signal
from PySide6.QtWidgets import QApplication

from core.units import UNITS, base_unit

if TYPE_CHECKING:
    from collections.abc import Callable

SCHEMA_VERSION = 1
RECENT_FILES_KEPT = 8
SCHEMES = ("system", "light", "dark")

# one small step per version of the file, from the version named to the next
_MIGRATIONS: dict[int, Callable[[QSettings], None]] = {}


def made_application() -> QApplication:
    """Return the one application object, made if need be."""
    made = QApplication.instance()
    application = made if isinstance(made, QApplication) else QApplication(["sideloop"])
    application.setApplicationName("Sideloop")
    return application


def user_folder() -> Path:
    """Return the folder in the user's account that holds settings, recovery copies and the log."""
    base = QStandardPaths.writableLocation(QStandardPaths.StandardLocation.GenericConfigLocation)
    return Path(base) / "sideloop"


class Settings(QObject):
    """Remembered choices, kept in one ini file.

    Parameters
    ----------
    path : Path
        The ini file; made when something is first remembered.

    Signals
    -------
    units_changed()
        A unit shown on the screen was changed.
    scheme_changed(str)
        Light, dark or as the system has it.
    recent_files_changed()
        The list of recent files is different.
    """

    units_changed = Signal()
    scheme_changed = Signal(str)
    recent_files_changed = Signal()

    def __init__(self, path: Path, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._store = QSettings(str(path), QSettings.Format.IniFormat, self)
        self._migrate()

    def _migrate(self) -> None:
        version = self._number("schema_version", SCHEMA_VERSION)
        if version > SCHEMA_VERSION:
            # A newer program wrote this file. Its choices may mean something else here, so the
            # defaults are used; the file is written in this version's way at the next choice.
            self._store.clear()
        for step in range(version, SCHEMA_VERSION):
            _MIGRATIONS[step](self._store)

    def _keep(self, key: str, value: object) -> None:
        self._store.setValue("schema_version", SCHEMA_VERSION)
        self._store.setValue(key, value)
        self._store.sync()

    def _number(self, key: str, default: int) -> int:
        try:
            return int(str(self._store.value(key, default)))
        except ValueError:
            return default

    def unit(self, quantity: str) -> str:
        """Return the unit in which a quantity (length, flow, pressure) is shown."""
        unit = str(self._store.value(f"units/{quantity}", ""))
        default = "kPa" if quantity == "pressure" else base_unit(quantity)
        return unit if unit in UNITS[quantity] else default

    def set_unit(self, quantity: str, unit: str) -> None:
        """Show a quantity in another unit from now on."""
        if unit in UNITS[quantity] and unit != self.unit(quantity):
            self._keep(f"units/{quantity}", unit)
            self.units_changed.emit()

    @property
    def scheme(self) -> str:
        """``system``, ``light`` or ``dark``."""
        scheme = str(self._store.value("scheme", "system"))
        return scheme if scheme in SCHEMES else "system"

    def set_scheme(self, scheme: str) -> None:
        """Choose light, dark or as the system has it."""
        if scheme in SCHEMES and scheme != self.scheme:
            self._keep("scheme", scheme)
            self.scheme_changed.emit(scheme)

    @property
    def recent_files(self) -> list[Path]:
        """Files opened or saved lately, the latest first."""
        stored = self._store.value("recent_files", [])
        names = stored if isinstance(stored, list) else [stored]
        return [Path(str(name)) for name in names if name]

    def add_recent_file(self, path: Path) -> None:
        """Put a file at the head of the recent ones."""
        path = path.absolute()
        others = [other for other in self.recent_files if other != path]
        self._set_recent_files([path, *others][:RECENT_FILES_KEPT])

    def remove_recent_file(self, path: Path) -> None:
        """Forget a file that is no longer there."""
        self._set_recent_files([other for other in self.recent_files if other != path])

    def _set_recent_files(self, paths: list[Path]) -> None:
        self._keep("recent_files", [str(path) for path in paths])
        self.recent_files_changed.emit()

    def arrangement(self, name: str) -> QByteArray | None:
        """Return the stored place of a window or splitter, None when there is none."""
        value = self._store.value(f"arrangement/{name}")
        return value if isinstance(value, QByteArray) else None

    def set_arrangement(self, name: str, state: QByteArray) -> None:
        """Remember the place of a window or splitter."""
        self._keep(f"arrangement/{name}", state)

    def choices(self, name: str) -> str:
        """Return remembered dialog choices as the text that was given to ``set_choices``."""
        return str(self._store.value(f"choices/{name}", ""))

    def set_choices(self, name: str, text: str) -> None:
        """Remember the choices of a dialog."""
        self._keep(f"choices/{name}", text)
