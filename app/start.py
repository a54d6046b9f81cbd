"""Set Sideloop up and start it: ``python3 app/start.py [arguments of python -m app]``.

Without arguments the window opens on a sample design. On a machine without a screen the design is
scored in words instead, and its mask files are written to a folder.
"""

from __future__ import annotations

import sys

# Before anything that an old Python would stumble over: it gets a sentence and no traceback.
if sys.version_info < (3, 11):
    sys.exit("Sideloop needs Python 3.11 or newer; this is Python " + sys.version.split()[0])

from pathlib import Path

sys.path[0] = str(Path(__file__).resolve().parents[1])  # this folder's own names must not hide packages

from app.environment import ROOT, SetUpError, app_environment, has_screen, ready_qt, run, say

MASK_FOLDER = "sideloop_masks"


def main(arguments: list[str]) -> int:
    """Set up, then open the window, answer in words, or pass a command on.

    Parameters
    ----------
    arguments : list of str
        As for ``python -m app``; empty to open the first sample.

    Returns
    -------
    int
        Exit status.
    """
    python = app_environment().prepare()
    program = [python, "-P", "-m", "app"]
    design = design_to_open(arguments)
    if design is None:
        return run([*program, *arguments])
    if not has_screen():
        say("there is no screen here, so the design is scored and its masks are written")
    elif ready_qt(python):
        return run([*program, "open", design])
    else:
        say("the window cannot open, so the design is scored and its masks are written")
    return answer_in_words(program, design)


def design_to_open(arguments: list[str]) -> Path | None:
    """Return the design that a window is wanted for, or None if another command was given."""
    if not arguments:
        return sorted((ROOT / "sample_designs").glob("*.sideloop"))[0]
    if arguments[0] == "open" and len(arguments) == 2:
        return Path(arguments[1])
    return None


def answer_in_words(program: list[str | Path], design: Path) -> int:
    """Score a design and write its masks; return the first exit status that is not 0."""
    folder = Path.cwd() / MASK_FOLDER
    say(f"scoring {design}")
    status = run([*program, "score", design])
    if status == 0:
        say(f"writing its masks to {folder}")
        status = run([*program, "masks", design, "--out", folder])
    return status


if __name__ == "__main__":
    try:
        sys.exit(main(sys.argv[1:]))
    except SetUpError as error:
        sys.exit(f"sideloop: {error}")
    except KeyboardInterrupt:
        sys.exit(130)
