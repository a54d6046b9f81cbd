"""Set-up shared by the two start scripts: environments, packages, screen.

Runs on the Python that the user happens to have, before anything is installed: the standard
library alone, and no other module of the project.
"""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
import tomllib
from dataclasses import dataclass
from pathlib import Path

ROOT = Path(__file__).resolve().parents[1]
STAMP = "sideloop-packages.txt"

# What Qt's wheels expect of the system on Debian and its relatives, by the libraries they link to:
# the first line to draw at all, the others to put a window on an X11 or Wayland screen.
QT_SYSTEM_PACKAGES = [
    "libglib2.0-0", "libegl1", "libgl1", "libx11-6", "libxkbcommon0", "libfontconfig1", "libdbus-1-3",
    "fonts-dejavu-core", "libx11-xcb1", "libxkbcommon-x11-0", "libxcb-cursor0", "libxcb-icccm4", "libxcb-image0",
    "libxcb-keysyms1", "libxcb-randr0", "libxcb-render-util0", "libxcb-shape0", "libxcb-sync1", "libxcb-util1",
    "libxcb-xfixes0", "libxcb-xkb1", "libwayland-client0", "libwayland-cursor0",
]  # fmt: skip

# Making an application object loads the platform plugin; Qt aborts the process when it cannot.
_QT_PROBE = "from PySide6.QtWidgets import QApplication; QApplication([])"


class SetUpError(Exception):
    """The program cannot be set up or run here; the message says what the user can do."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Environment:
    """One virtual environment of the project.

    Attributes
    ----------
    name : str
        Folder under the repository root.
    requirements : tuple of str
        Packages with their bounds, as in ``pyproject.toml``.
    """

    name: str
    requirements: tuple[str, ...]

    @property
    def folder(self) -> Path:
        """Where the environment lives."""
        return ROOT / self.name

    @property
    def python(self) -> Path:
        """Its interpreter, on this system."""
        return self.folder / ("Scripts/python.exe" if os.name == "nt" else "bin/python")

    def is_ready(self) -> bool:
        """Tell whether the environment holds these packages for this version of Python."""
        stamp = self.folder / STAMP
        if not (stamp.is_file() and self.python.exists()):
            return False
        version, *installed = stamp.read_text(encoding="utf-8").splitlines()
        return version == _python_version() and set(self.requirements) <= set(installed)

    def prepare(self) -> Path:
        """Make the environment, or use it as it is, and return its interpreter.

        Returns
        -------
        Path
            Interpreter that has all packages.

        Raises
        ------
        SetUpError
            If the environment cannot be made or a package cannot be installed.
        """
        if not self.is_ready():
            say(f"preparing {self.name} (this is done once and needs the network)")
            (self.folder / STAMP).unlink(missing_ok=True)
            if not self._has_pip():
                self._create()
            self._install()
            lines = (_python_version(), *self.requirements)
            (self.folder / STAMP).write_text("\n".join(lines) + "\n", encoding="utf-8")
        return self.python

    def _has_pip(self) -> bool:
        """Tell whether there is a working environment of the right version to build on."""
        code = f"import pip, sys; sys.exit({_python_version()!r} != '%d.%d' % sys.version_info[:2])"
        return self.python.exists() and _succeeds([self.python, "-c", code])

    def _create(self) -> None:
        command = [sys.executable, "-m", "venv", "--clear", self.folder]
        if _succeeds(command):
            return
        install_system_packages(["python3-venv"], reason="Python's venv module is not complete here")
        if not _succeeds(command):
            raise SetUpError(f"a virtual environment could not be made in {self.folder}; is the folder writable?")

    def _install(self) -> None:
        command = [self.python, "-m", "pip", "install", "--quiet", "--disable-pip-version-check", *self.requirements]
        if subprocess.run(command, env=child_environment(), check=False).returncode:
            raise SetUpError("the packages could not be installed (see above); check the network and start again")


def app_environment() -> Environment:
    """Return what the program itself needs."""
    return _environment(".venv", extras=["window"])


def suite_environment() -> Environment:
    """Return what the whole suite needs: the program, and the tools of the tests."""
    return _environment(".venv", extras=["window"], groups=["test"])


def core_environment() -> Environment:
    """Return an environment without Qt, to prove that the engine does without."""
    return _environment(".venv-core", groups=["core-test"])


def _environment(name: str, *, extras: list[str] | None = None, groups: list[str] | None = None) -> Environment:
    with (ROOT / "pyproject.toml").open("rb") as file:
        project = tomllib.load(file)
    wanted: list[str] = [*project["project"]["dependencies"]]
    for extra in extras or []:
        wanted += project["project"]["optional-dependencies"][extra]
    for group in groups or []:
        wanted += _group(project["dependency-groups"], group)
    return Environment(name=name, requirements=tuple(wanted))


def _group(groups: dict[str, list[str | dict[str, str]]], name: str) -> list[str]:
    """Return the requirements of a dependency group with those that it includes."""
    found: list[str] = []
    for entry in groups[name]:
        found += [entry] if isinstance(entry, str) else _group(groups, entry["include-group"])
    return found


def has_screen(environ: dict[str, str] | None = None, platform: str = sys.platform) -> bool:
    """Tell whether a window could be seen by somebody.

    Parameters
    ----------
    environ : dict, optional
        Environment variables; those of this process by default.
    platform : str
        As ``sys.platform``.

    Returns
    -------
    bool
        False on a Unix without an X11 or Wayland display, and where Qt is told to draw nowhere.
    """
    environ = dict(os.environ) if environ is None else environ
    chosen = environ.get("QT_QPA_PLATFORM", "").split(":")[0]
    if chosen in {"offscreen", "minimal"}:
        return False
    if chosen or platform in {"win32", "darwin", "cygwin"}:
        return True
    return bool(environ.get("DISPLAY") or environ.get("WAYLAND_DISPLAY"))


def child_environment() -> dict[str, str]:
    """Return the variables for a child Python: this project's modules, and no others from outside."""
    environ = {name: value for name, value in os.environ.items() if name not in {"PYTHONHOME", "VIRTUAL_ENV"}}
    environ["PYTHONPATH"] = str(ROOT)
    if not has_screen():
        environ.setdefault("QT_QPA_PLATFORM", "offscreen")
    return environ


def ready_qt(python: Path) -> bool:
    """Make sure that Qt starts, with system libraries installed where that is possible.

    Parameters
    ----------
    python : Path
        Interpreter of an environment that has Qt.

    Returns
    -------
    bool
        False if Qt cannot start here; what is missing has then been said.
    """
    probe = [python, "-c", _QT_PROBE]
    if _succeeds(probe):
        return True
    try:
        install_system_packages(QT_SYSTEM_PACKAGES, reason="Qt does not start here")
    except SetUpError as error:
        say(str(error))
        return False
    if _succeeds(probe):
        return True
    say("Qt still does not start; in its own words:")
    return subprocess.run(probe, env=child_environment(), check=False).returncode == 0


def install_system_packages(packages: list[str], *, reason: str) -> None:
    """Install packages of the system where we may, or say what to install.

    Parameters
    ----------
    packages : list of str
        Names on Debian and its relatives.
    reason : str
        Why they are needed, as the beginning of a sentence.

    Raises
    ------
    SetUpError
        If they cannot be installed from here; the message holds the command to give.
    """
    command = f"apt-get install --yes --no-install-recommends {' '.join(packages)}"
    if shutil.which("apt-get") is None:
        raise SetUpError(f"{reason}; install what your system calls: {' '.join(packages)}")
    if os.geteuid() != 0:
        raise SetUpError(f"{reason}; give this command, then start again: sudo {command}")
    say(f"{reason}; installing {' '.join(packages)}")
    environ = {**os.environ, "DEBIAN_FRONTEND": "noninteractive"}
    subprocess.run(["apt-get", "update", "--quiet=2"], env=environ, check=False)
    if subprocess.run(command.split(), env=environ, stdout=subprocess.DEVNULL, check=False).returncode:
        raise SetUpError(f"{reason}, and this command failed: {command}")


def run(command: list[str | Path], *, folder: Path | None = None) -> int:
    """Run a command in the project's environment variables and return its exit status.

    Parameters
    ----------
    command : list of str or Path
        Program and arguments.
    folder : Path, optional
        Where to run it; the current folder by default.

    Returns
    -------
    int
        Exit status.
    """
    return subprocess.run(command, env=child_environment(), cwd=folder, check=False).returncode


def say(sentence: str) -> None:
    """Print a line of the start scripts, apart from the output of what they start."""
    print(f"sideloop: {sentence}", flush=True)


def _succeeds(command: list[str | Path]) -> bool:
    """Run a command silently and tell whether it went well."""
    return subprocess.run(command, env=child_environment(), capture_output=True, check=False).returncode == 0


def _python_version() -> str:
    return "{}.{}".format(*sys.version_info[:2])
