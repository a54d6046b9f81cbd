"""The layers hold: imports point down, and nothing that is not asked for is loaded."""

from __future__ import annotations

import importlib.util
import os
import pkgutil
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

import core

ROOT = Path(__file__).resolve().parents[1]
SCREEN = {"PySide6", "shiboken6", "pyqtgraph"}
ENGINES = {"scipy", "shapely", "ezdxf", "chemicals", "skfem", "netgen"}
CORE_MODULES = [core.__name__, *(module.name for module in pkgutil.walk_packages(core.__path__, "core."))]


def contracts_kept(folder: Path) -> tuple[bool, str]:
    """Run the import contracts of the project in a folder; return the verdict and the report."""
    command = [Path(sys.executable).with_name("lint-imports"), "--no-cache"]
    done = subprocess.run(
        command, cwd=folder, env=_environ(folder), capture_output=True, text=True, encoding="utf-8", check=False
    )
    return done.returncode == 0, done.stdout + done.stderr


def loaded_by(statement: str) -> set[str]:
    """Return the top-level packages that a fresh Python has loaded after a statement."""
    code = f"import sys; {statement}; print(*{{name.partition('.')[0] for name in sys.modules}})"
    done = subprocess.run(
        [sys.executable, "-P", "-c", code], env=_environ(ROOT), capture_output=True, text=True, check=False
    )
    assert done.returncode == 0, done.stderr
    return set(done.stdout.split())


def _environ(folder: Path) -> dict[str, str]:
    return {**os.environ, "PYTHONPATH": str(folder), "PYTHONIOENCODING": "utf-8"}


@pytest.fixture
def copy_of_the_project(tmp_path: Path) -> Path:
    """Return a copy of code and contracts that a test may spoil."""
    for package in ("app", "core"):
        shutil.copytree(ROOT / package, tmp_path / package, ignore=shutil.ignore_patterns("__pycache__"))
    shutil.copy(ROOT / "pyproject.toml", tmp_path)
    return tmp_path


def test_import_contracts_are_kept():
    kept, report = contracts_kept(ROOT)
    assert kept, report


@pytest.mark.parametrize(
    ("module", "line", "contract"),
    [
        ("core/units.py", "import PySide6.QtCore", "core knows no screen"),
        ("core/units.py", "def later():\n    import pyqtgraph", "core knows no screen"),
        ("core/geometry/contour.py", "import app.environment", "core knows no screen"),
        ("core/errors.py", "import core.units", "imports in core point down"),
        ("core/hydraulics/ducts.py", "import core.flow", "imports in core point down"),
        ("core/geometry/contour.py", "import core.masks", "imports in core point down"),
        ("core/stray.py", "", "imports in core point down"),
        ("core/masks/gdsii.py", "import gdstk", "the program does without the tools of its tests"),
        ("app/command_line.py", "import PySide6.QtWidgets", "the command line answers without Qt"),
    ],
)
def test_import_contracts_can_fail(copy_of_the_project: Path, module: str, line: str, contract: str):
    with (copy_of_the_project / module).open("a", encoding="utf-8") as file:
        file.write(f"\n\n{line}\n")
    kept, report = contracts_kept(copy_of_the_project)
    assert not kept
    assert f"{contract} BROKEN" in report or ("stray" in report and "point down" in report), report


def test_all_of_core_loads_without_qt():
    assert not loaded_by(f"import {', '.join(CORE_MODULES)}") & SCREEN


@pytest.mark.parametrize("module", ["core.parameters", "core.geometry.shape", "core.hydraulics.estimate"])
def test_shape_and_estimate_load_without_heavy_engines(module: str):
    assert not loaded_by(f"import {module}") & ENGINES


def test_command_line_loads_without_qt_or_heavy_engines():
    assert not loaded_by("import app.command_line") & (SCREEN | ENGINES)


def test_loaded_packages_are_seen():
    """The three checks above would notice: the same question about a Qt module answers yes."""
    assert importlib.util.find_spec("PySide6")
    assert "PySide6" in loaded_by("import PySide6.QtCore")
