"""Set the tests up and run all of them: ``python3 tests/start.py [--fast] [arguments of pytest]``.

Style, import contracts and types first; then the tests of ``core`` in an environment without Qt, and
the others in the complete one; benchmarks last, alone on the machine. Each test runs once. Paths
among the arguments replace the whole suite; ``--fast`` leaves slow tests and benchmarks out.
"""

from __future__ import annotations

import sys

# Before anything that an old Python would stumble over: it gets a sentence and no traceback.
if sys.version_info < (3, 11):
    sys.exit("Sideloop needs Python 3.11 or newer; this is Python " + sys.version.split()[0])

import os
import time
from dataclasses import dataclass
from pathlib import Path

sys.path[0] = str(Path(__file__).resolve().parents[1])  # this folder's own names must not hide packages

from app.environment import ROOT, SetUpError, core_environment, ready_qt, run, say, suite_environment

CORE_TESTS = (ROOT / "tests" / "core", ROOT / "core")  # the second for the examples in docstrings
NOTHING_COLLECTED = 5  # pytest's exit status
SIDE_BY_SIDE = ("-n", "2", "--dist", "worksteal")  # two processes; benchmarks run alone


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """One command of the run, and whether finding no test in it is fine."""

    name: str
    command: list[str | Path]
    may_be_empty: bool = False

    def passes(self) -> bool:
        """Run the command and tell whether it found nothing wrong."""
        say(f"--- {self.name}")
        status = run(self.command, folder=ROOT)
        return status == 0 or (self.may_be_empty and status == NOTHING_COLLECTED)


def main(arguments: list[str]) -> int:
    """Run everything, whatever fails on the way, and sum up.

    Parameters
    ----------
    arguments : list of str
        ``--fast``, paths of tests, and arguments for pytest.

    Returns
    -------
    int
        0 if all steps passed, 1 otherwise.
    """
    os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")  # as in conftest.py
    os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")  # two processes share the processors already
    complete, bare = suite_environment().prepare(), core_environment().prepare()
    if not ready_qt(complete):
        raise SetUpError("the tests of the window cannot run without Qt")
    outcomes = []
    for step in [*checking_steps(complete), *testing_steps(complete, bare, arguments)]:
        begun_s = time.monotonic()
        passed = step.passes()
        outcomes.append((step.name, passed, time.monotonic() - begun_s))
    return summary(outcomes)


def checking_steps(python: Path) -> list[Step]:
    """Return the checks that run no test."""
    tool = python.parent
    return [
        Step(name="style", command=[python, "-m", "ruff", "check"]),
        Step(name="format", command=[python, "-m", "ruff", "format", "--check"]),
        Step(name="imports", command=[tool / "lint-imports", "--no-cache"]),
        Step(name="types", command=[python, "-m", "mypy"]),
    ]


def testing_steps(complete: Path, bare: Path, arguments: list[str]) -> list[Step]:
    """Return the runs of pytest.

    Parameters
    ----------
    complete, bare : Path
        Interpreters with Qt and without.
    arguments : list of str
        As for ``main``.

    Returns
    -------
    list of Step
        For each environment the tests, then the benchmarks.
    """
    is_fast = "--fast" in arguments
    paths, options = split_arguments([argument for argument in arguments if argument != "--fast"])
    core_paths, other_paths = share_out(paths)
    steps = []
    for name, python, chosen in (("core, without Qt", bare, core_paths), ("app", complete, other_paths)):
        if not chosen:
            continue
        profile = "fast" if is_fast else "ci"
        pytest = [python, "-P", "-m", "pytest", *chosen, f"--hypothesis-profile={profile}"]
        marks = "not slow and not benchmark" if is_fast else "not benchmark"
        command = [*pytest, "-m", marks, *SIDE_BY_SIDE, *options]
        steps.append(Step(name=f"tests of {name}", command=command, may_be_empty=bool(arguments)))
        if not is_fast:
            command = [*pytest, "-m", "benchmark", "-s", *options]
            steps.append(Step(name=f"benchmarks of {name}", command=command, may_be_empty=True))
    return steps


def split_arguments(arguments: list[str]) -> tuple[list[str], list[str]]:
    """Tell paths of tests, made absolute, from options.

    A path may start from the current folder or from the repository, and carry ``::name`` of a test.
    """
    paths, options = [], []
    for argument in arguments:
        place, mark, name = argument.partition("::")
        found = [folder / place for folder in (Path.cwd(), ROOT) if (folder / place).exists()]
        if found and not argument.startswith("-"):
            paths.append(f"{found[0].resolve()}{mark}{name}")
        else:
            options.append(argument)
    return paths, options


def share_out(paths: list[str]) -> tuple[list[str | Path], list[str | Path]]:
    """Return what runs without Qt and what runs with it; no paths stands for the whole suite."""
    if not paths:
        return [*CORE_TESTS], [ROOT / "tests", f"--ignore={CORE_TESTS[0]}"]
    is_core = {path: any(Path(path).is_relative_to(folder) for folder in CORE_TESTS) for path in paths}
    return [path for path in paths if is_core[path]], [path for path in paths if not is_core[path]]


def summary(outcomes: list[tuple[str, bool, float]]) -> int:
    """Print one line for each step and one for all; return the exit status."""
    say("---")
    for name, passed, duration_s in outcomes:
        say(f"{'passed' if passed else 'FAILED'}  {duration_s:6.1f} s  {name}")
    failed = [name for name, passed, _ in outcomes if not passed]
    say(f"FAILED: {', '.join(failed)}" if failed else "everything passed")
    return 1 if failed else 0


if __name__ == "__main__":
    try:
        sys.exit(main(sys.argv[1:]))
    except SetUpError as error:
        sys.exit(f"sideloop: {error}")
    except KeyboardInterrupt:
        sys.exit(130)
