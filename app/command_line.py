"""The command line: the same engine as the window, for scripts and for checking.

A new verb is a function in ``app.verbs`` and a line in ``VERBS``.

Exit status: 0 good, 1 the design has error findings, 2 bad input.
"""

from __future__ import annotations

import argparse
import contextlib
import logging
import os
import sys
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, NoReturn

from app.verbs import (
    BAD_INPUT,
    GOOD,
    REFUSED,
    Answer,
    UsageError,
    check_verb,
    masks_verb,
    open_verb,
    open_window,
    score_verb,
    solve_verb,
)
from core.errors import CoreError, DesignRefusedError, did_you_mean, shown

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

INTERRUPTED = 130
_logger = logging.getLogger(__name__)


@dataclass(frozen=True, slots=True, kw_only=True)
class Verb:
    """One word of the command line.

    Attributes
    ----------
    summary : str
        One line of help.
    options : tuple of str
        Names of the options it takes, keys of ``_OPTIONS``.
    run : callable
        Turns parsed arguments into the answer.
    """

    summary: str
    options: tuple[str, ...]
    run: Callable[[argparse.Namespace], Answer]


def main(arguments: Sequence[str] | None = None) -> int:
    """Answer one command line.

    Parameters
    ----------
    arguments : sequence of str or None
        Words after the program's name; those of the process when None.

    Returns
    -------
    int
        Exit status.
    """
    words = list(sys.argv[1:] if arguments is None else arguments)
    try:
        return _say(_answer(words))
    except SystemExit as done:  # argparse has printed help
        return GOOD if done.code is None else int(done.code)
    except DesignRefusedError as error:
        return _complain(str(error), REFUSED)
    except CoreError as error:
        return _complain(str(error), BAD_INPUT)
    except KeyboardInterrupt:
        return _complain("stopped", INTERRUPTED)
    except Exception as error:  # a defect of the program, but the user still gets one line
        _logger.debug("defect", exc_info=True)
        return _complain(
            f"an error of the program itself, not of your input: {type(error).__name__}: {error}", BAD_INPUT
        )


def _answer(words: list[str]) -> Answer:
    if not words:
        return open_window(None)
    name = words[0]
    if name not in VERBS and name not in ("-h", "--help"):
        raise UsageError(f"{shown(name)} is not something this program can do; {_verb_hint(name)}")
    parsed, unknown = _parser().parse_known_args(words)
    if unknown:
        raise UsageError(f"{shown(unknown[0])} is too much for {name}; {_option_hint(name, unknown[0])}")
    return VERBS[name].run(parsed)


def _verb_hint(word: str) -> str:
    if word.startswith("-"):
        return f"begin with one of: {', '.join(VERBS)}"
    return f"write 'open {word}'" if Path(word).suffix or os.path.sep in word else did_you_mean(word, VERBS)


def _option_hint(verb: str, word: str) -> str:
    if not word.startswith("-"):
        return "put names with spaces in quotes"
    return did_you_mean(word, ["--help", *(option for option in VERBS[verb].options if option.startswith("-"))])


def _say(answer: Answer) -> int:
    """Print the answer; a reader that has closed the pipe has seen enough."""
    if not answer.text:
        return answer.status
    with contextlib.suppress(AttributeError):  # replaced by something simpler, in tests and embeddings
        sys.stdout.reconfigure(errors="backslashreplace")  # type: ignore[union-attr]
    try:
        print(answer.text, flush=True)
    except BrokenPipeError:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())  # or Python flushes again at its end
    except OSError as error:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return _complain(f"standard output cannot be written: {error.strerror}", BAD_INPUT)
    return answer.status


def _complain(message: str, status: int) -> int:
    line = "".join(c if c.isprintable() else " " for c in message)
    with contextlib.suppress(OSError):
        print(f"sideloop: {line}", file=sys.stderr)
    return status


# --- the parser -------------------------------------------------------------------------------


class _Parser(argparse.ArgumentParser):
    """A parser whose complaints are one line like all others."""

    def error(self, message: str) -> NoReturn:
        raise UsageError(f"{message}; see 'python -m app --help'")


VERBS: dict[str, Verb] = {
    "open": Verb(summary="open a chip project in the window", options=("FILE",), run=open_verb),
    "score": Verb(
        summary="quick estimate of pressures and diodicity",
        options=("FILE", "--set", "--with", "--flow-ul-min", "--json"),
        run=score_verb,
    ),
    "solve": Verb(
        summary="flow solve in both directions: pressures, diodicity, loop shares",
        options=("FILE", "--set", "--with", "--flow-ul-min", "--quality", "--json"),
        run=solve_verb,
    ),
    "check": Verb(
        summary="findings: what is wrong with the chip or doubtful, in its shapes, for its process and on its masks",
        options=("FILE", "--set", "--with", "--json"),
        run=check_verb,
    ),
    "masks": Verb(
        summary="write the mask set of the chip, or bare channels of one set or all",
        options=("FILE", "--out", "--set", "--all-sets", "--with", "--force", "--json"),
        run=masks_verb,
    ),
}

_OPTIONS: dict[str, dict[str, object]] = {
    "FILE": {"metavar": "FILE", "type": Path, "help": "chip project (.sideloop)"},
    "--set": {
        "metavar": "NAME",
        "help": "which parameter set (default: the first for score and solve, the whole chip for check and masks)",
    },
    "--all-sets": {"action": "store_true", "help": "the bare channel of every parameter set, without the chip"},
    "--with": {
        "metavar": "FIELD=VALUE", "action": "append", "default": [], "dest": "overrides",
        "help": "use another value for a field, as named in the file; repeatable, the last one counts",
    },
    "--flow-ul-min": {"metavar": "Q[,Q...]", "help": "flow or flows [uL/min] (default: the project's)"},
    "--quality": {"metavar": "Q", "default": "normal", "help": "coarse, normal (default) or fine"},
    "--out": {"metavar": "DIR", "type": Path, "required": True, "help": "folder for the mask files"},
    "--force": {"action": "store_true", "help": "write although there are error findings; the order sheet says so"},
    "--json": {"action": "store_true", "help": "machine-readable answer"},
}  # fmt: skip


def _parser() -> _Parser:
    parser = _Parser(
        prog="python -m app",
        description="Design passive flow rectifiers for microfluidic chips. Without a verb the window opens.",
        epilog="Exit status: 0 good, 1 the design has error findings, 2 bad input.",
        allow_abbrev=False,
    )
    verbs = parser.add_subparsers(dest="verb", required=True, metavar="VERB", parser_class=_Parser)
    for name, verb in VERBS.items():
        under = verbs.add_parser(name, help=verb.summary, description=verb.summary, allow_abbrev=False)
        for option in verb.options:
            settings = dict(_OPTIONS[option])
            under.add_argument(option if option.startswith("-") else "file", **settings)  # type: ignore[arg-type]
    return parser
