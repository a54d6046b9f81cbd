"""The start scripts, as far as they can be judged without the network."""

from __future__ import annotations

import ast
import importlib.util
import subprocess
import sys
from pathlib import Path
from typing import TYPE_CHECKING

import pytest

from app import environment
from app.environment import Environment, SetUpError

if TYPE_CHECKING:
    from types import ModuleType

ROOT = Path(__file__).resolve().parents[1]
SCRIPTS = [ROOT / "app" / "start.py", ROOT / "tests" / "start.py"]


def script(path: Path, monkeypatch: pytest.MonkeyPatch) -> ModuleType:
    """Load a start script as a module, without letting it change where modules are found."""
    monkeypatch.setattr(sys, "path", [str(path.parent), *sys.path])
    name = f"{path.parent.name}_start"
    spec = importlib.util.spec_from_file_location(name, path)
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    monkeypatch.setitem(sys.modules, name, module)
    spec.loader.exec_module(module)
    return module


@pytest.fixture
def app_start(monkeypatch: pytest.MonkeyPatch) -> ModuleType:
    return script(SCRIPTS[0], monkeypatch)


@pytest.fixture
def tests_start(monkeypatch: pytest.MonkeyPatch) -> ModuleType:
    return script(SCRIPTS[1], monkeypatch)


@pytest.fixture
def small_environment(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Environment:
    """Return an environment in a temporary folder that looks finished, with two packages."""
    monkeypatch.setattr(environment, "ROOT", tmp_path)
    ready = Environment(name=".venv", requirements=("numpy>=2.0", "scipy>=1.14"))
    ready.python.parent.mkdir(parents=True)
    ready.python.touch()
    version = "{}.{}".format(*sys.version_info[:2])
    (ready.folder / environment.STAMP).write_text(f"{version}\nnumpy>=2.0\nscipy>=1.14\n", encoding="utf-8")
    return ready


@pytest.mark.parametrize("path", SCRIPTS, ids=lambda path: path.parent.name)
class TestBeforeAnythingIsInstalled:
    def test_an_old_python_can_read_the_script(self, path: Path):
        ast.parse(path.read_text(encoding="utf-8"), feature_version=(3, 7))

    def test_an_old_python_gets_a_sentence(self, path: Path, monkeypatch: pytest.MonkeyPatch):
        monkeypatch.setattr(sys, "version_info", (3, 9, 1))
        with pytest.raises(SystemExit, match=r"needs Python 3\.11 or newer"):
            script(path, monkeypatch)

    def test_only_the_standard_library_is_needed(self, path: Path):
        code = f"import runpy; runpy.run_path({str(path)!r}, run_name='not main')"
        # -I and -S: no packages beside the standard library can be found
        done = subprocess.run([sys.executable, "-I", "-S", "-c", code], capture_output=True, text=True, check=False)
        assert done.returncode == 0, done.stderr


class TestRequirements:
    def test_program_has_qt_and_no_test_tools(self):
        names = " ".join(environment.app_environment().requirements)
        assert "PySide6" in names
        assert "pytest" not in names

    def test_suite_has_everything_the_program_has(self):
        suite, program = environment.suite_environment(), environment.app_environment()
        assert set(program.requirements) < set(suite.requirements)
        assert any(name.startswith("pytest-qt") for name in suite.requirements)
        assert suite.folder == program.folder

    def test_core_environment_is_another_one_and_has_no_qt(self):
        bare = environment.core_environment()
        assert bare.folder != environment.suite_environment().folder
        assert not [name for name in bare.requirements if "qt" in name.lower() or "pyside" in name.lower()]
        assert any(name.startswith("hypothesis") for name in bare.requirements)


class TestReadiness:
    def test_finished_environment_is_used_again(self, small_environment: Environment):
        assert small_environment.is_ready()
        assert small_environment.prepare() == small_environment.python

    def test_fewer_packages_than_there_are_is_fine(self, small_environment: Environment):
        assert Environment(name=".venv", requirements=("numpy>=2.0",)).is_ready()

    @pytest.mark.parametrize("requirement", ["numpy>=2.1", "shapely>=2.1"])
    def test_changed_or_added_package_is_noticed(self, small_environment: Environment, requirement: str):
        assert not Environment(name=".venv", requirements=(requirement,)).is_ready()

    def test_other_python_is_noticed(self, small_environment: Environment, monkeypatch: pytest.MonkeyPatch):
        monkeypatch.setattr(sys, "version_info", (3, 99, 0))
        assert not small_environment.is_ready()

    def test_interrupted_set_up_is_noticed(self, small_environment: Environment):
        (small_environment.folder / environment.STAMP).unlink()
        assert not small_environment.is_ready()


class TestScreen:
    @pytest.mark.parametrize(
        ("environ", "platform", "expected"),
        [
            ({}, "linux", False),
            ({"DISPLAY": ":0"}, "linux", True),
            ({"WAYLAND_DISPLAY": "wayland-0"}, "linux", True),
            ({"DISPLAY": ""}, "linux", False),
            ({"DISPLAY": ":0", "QT_QPA_PLATFORM": "offscreen"}, "linux", False),
            ({"QT_QPA_PLATFORM": "minimal:size=800"}, "win32", False),
            ({"QT_QPA_PLATFORM": "vnc"}, "linux", True),
            ({}, "win32", True),
            ({}, "darwin", True),
            ({}, "freebsd14", False),
        ],
    )
    def test_a_screen_is_told_from_none(self, environ: dict[str, str], platform: str, expected: bool):
        assert environment.has_screen(environ, platform) is expected

    def test_children_see_this_project_and_no_foreign_modules(self, monkeypatch: pytest.MonkeyPatch):
        monkeypatch.setenv("PYTHONPATH", "/somewhere/else")
        monkeypatch.setenv("PYTHONHOME", "/nowhere")
        environ = environment.child_environment()
        assert environ["PYTHONPATH"] == str(ROOT)
        assert "PYTHONHOME" not in environ

    def test_without_a_screen_children_draw_off_screen(self, monkeypatch: pytest.MonkeyPatch):
        for name in ("DISPLAY", "WAYLAND_DISPLAY", "QT_QPA_PLATFORM"):
            monkeypatch.delenv(name, raising=False)
        monkeypatch.setattr(environment, "has_screen", lambda: False)
        assert environment.child_environment()["QT_QPA_PLATFORM"] == "offscreen"


class TestSystemPackages:
    def test_other_systems_are_told_what_to_install(self, monkeypatch: pytest.MonkeyPatch):
        monkeypatch.setattr(environment.shutil, "which", lambda name: None)
        with pytest.raises(SetUpError, match=r"Qt does not start here; install .*libegl1"):
            environment.install_system_packages(["libegl1"], reason="Qt does not start here")

    def test_other_users_are_told_the_command(self, monkeypatch: pytest.MonkeyPatch):
        monkeypatch.setattr(environment.shutil, "which", lambda name: f"/usr/bin/{name}")
        monkeypatch.setattr(environment.os, "geteuid", lambda: 1000, raising=False)
        with pytest.raises(SetUpError, match="sudo apt-get install --yes --no-install-recommends libegl1"):
            environment.install_system_packages(["libegl1"], reason="Qt does not start here")


class TestStartingTheProgram:
    def test_without_arguments_the_first_sample_is_opened(self, app_start: ModuleType):
        assert app_start.design_to_open([]) == min((ROOT / "sample_designs").glob("*.sideloop"))

    def test_a_named_design_is_opened(self, app_start: ModuleType):
        assert app_start.design_to_open(["open", "mine.sideloop"]) == Path("mine.sideloop")

    @pytest.mark.parametrize("arguments", [["score", "a"], ["masks", "a", "--out", "b"], ["--help"], ["open"]])
    def test_other_commands_are_passed_on(self, app_start: ModuleType, arguments: list[str]):
        assert app_start.design_to_open(arguments) is None

    @pytest.fixture
    def commands(self, app_start: ModuleType, monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> list[list[str]]:
        """Return the commands that the script has run since: instead of running, they are noted."""
        noted: list[list[str]] = []

        def note(command: list[str | Path]) -> int:
            noted.append([str(part) for part in command[4:]])
            return 0

        monkeypatch.setattr(app_start, "run", note)
        monkeypatch.setattr(Environment, "prepare", lambda self: self.python)
        monkeypatch.setattr(app_start, "ready_qt", lambda python: True)
        monkeypatch.chdir(tmp_path)
        return noted

    def test_with_a_screen_the_window_opens(self, app_start, commands, monkeypatch):
        monkeypatch.setattr(app_start, "has_screen", lambda: True)
        assert app_start.main(["open", "mine.sideloop"]) == 0
        assert commands == [["open", "mine.sideloop"]]

    @pytest.mark.parametrize(("screen", "qt"), [(False, True), (True, False)])
    def test_without_a_window_it_answers_in_words(self, app_start, commands, monkeypatch, tmp_path, screen, qt):
        monkeypatch.setattr(app_start, "has_screen", lambda: screen)
        monkeypatch.setattr(app_start, "ready_qt", lambda python: qt)
        assert app_start.main(["open", "mine.sideloop"]) == 0
        assert commands == [
            ["score", "mine.sideloop"],
            ["masks", "mine.sideloop", "--out", str(tmp_path / app_start.MASK_FOLDER)],
        ]

    def test_failure_of_a_command_is_the_exit_status(self, app_start, commands, monkeypatch):
        monkeypatch.setattr(app_start, "run", lambda command: 2)
        assert app_start.main(["score", "missing.sideloop"]) == 2


class TestStartingTheTests:
    def test_core_and_the_rest_share_the_suite(self, tests_start: ModuleType):
        core_paths, other_paths = tests_start.share_out([])
        assert ROOT / "tests" / "core" in core_paths
        assert other_paths == [ROOT / "tests", f"--ignore={ROOT / 'tests' / 'core'}"]

    @pytest.mark.parametrize("folder", [ROOT, ROOT.parent])
    def test_paths_are_told_from_options(self, tests_start, monkeypatch, folder):
        monkeypatch.chdir(folder)
        paths, options = tests_start.split_arguments(["tests/test_start.py::TestScreen", "-k", "screen", "-x"])
        assert paths == [f"{ROOT / 'tests' / 'test_start.py'}::TestScreen"]
        assert options == ["-k", "screen", "-x"]

    def test_named_tests_go_to_their_environment(self, tests_start: ModuleType):
        python = Path("python")
        path = str(ROOT / "tests" / "test_start.py")
        steps = tests_start.testing_steps(python, Path("bare"), ["--fast", path])
        assert [step.command[0] for step in steps] == [python]
        assert path in steps[0].command

    def test_fast_leaves_slow_tests_and_benchmarks_out(self, tests_start: ModuleType):
        steps = tests_start.testing_steps(Path("python"), Path("bare"), ["--fast"])
        assert ["not slow and not benchmark" in step.command for step in steps] == [True, True]

    def test_benchmarks_run_after_the_tests_of_their_environment(self, tests_start: ModuleType):
        names = [step.name.partition(" ")[0] for step in tests_start.testing_steps(Path("p"), Path("b"), [])]
        assert names == ["tests", "benchmarks"] * 2

    @pytest.mark.parametrize(
        ("code", "may_be_empty", "passes"), [(0, False, True), (1, True, False), (5, False, False), (5, True, True)]
    )
    def test_no_test_is_a_failure_unless_asked_for(self, tests_start, code, may_be_empty, passes):
        command = [sys.executable, "-c", f"raise SystemExit({code})"]
        assert tests_start.Step(name="a", command=command, may_be_empty=may_be_empty).passes() is passes

    def test_one_failure_fails_the_run(self, tests_start: ModuleType, capsys: pytest.CaptureFixture[str]):
        assert tests_start.summary([("style", True, 0.5), ("types", False, 1.0)]) == 1
        assert capsys.readouterr().out.splitlines()[-1] == "sideloop: FAILED: types"

    def test_all_well_is_said_last(self, tests_start: ModuleType, capsys: pytest.CaptureFixture[str]):
        assert tests_start.summary([("style", True, 0.5)]) == 0
        assert capsys.readouterr().out.splitlines()[-1] == "sideloop: everything passed"
