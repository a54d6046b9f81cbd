"""Recovery copies: the unsaved project of every running window, for the day after a crash.

Each process keeps one copy, beside a lock file that the system frees when the process ends, however
it ends. A copy whose lock is free was left by a process that is gone.
"""

from __future__ import annotations

import contextlib
import json
import os
import secrets
import sys
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING, BinaryIO

from core.errors import CoreError
from core.project.layout import project_data, project_from_data
from core.project.safe_save import save_bytes
from core.project.strict_json import parsed_json

if TYPE_CHECKING:
    from core.project.chip import ChipProject

_FORMAT = "sideloop recovery copy"
_COPY_SUFFIX = ".recovery"
_LOCK_SUFFIX = ".lock"


@dataclass(frozen=True, slots=True, kw_only=True)
class RecoveryOutcome:
    """Whether a copy was kept or discarded; true in a condition when it was.

    Attributes
    ----------
    is_done : bool
        False if the disk did not allow it.
    message : str
        Why not, in one line; empty when done.
    """

    is_done: bool
    message: str = ""

    def __bool__(self) -> bool:
        """Return whether it was done."""
        return self.is_done


@dataclass(frozen=True, slots=True, kw_only=True)
class RecoveryOffer:
    """An unsaved project left by a process that is gone.

    Attributes
    ----------
    project : ChipProject
        The project as it was last kept.
    original_path : Path or None
        Its file, if it ever had one.
    kept_at : datetime
        When the copy was made, in universal time.
    file : Path
        The copy itself.
    """

    project: ChipProject
    original_path: Path | None
    kept_at: datetime
    file: Path


class RecoveryStore:
    """The recovery copies in one folder; this process owns one of them.

    Nothing in here raises for a disk that fails: a recovery copy is a second safety, and must
    never stop the work it is there for.

    Parameters
    ----------
    folder : Path
        Where copies are kept; made when the first one is.
    """

    def __init__(self, folder: Path) -> None:
        self._folder = Path(folder)
        self._copy = self._folder / f"{os.getpid()}-{secrets.token_hex(4)}{_COPY_SUFFIX}"
        self._lock: BinaryIO | None = None

    def keep(self, project: ChipProject, original_path: Path | None = None) -> RecoveryOutcome:
        """Keep the unsaved project in place of what this process kept before.

        Parameters
        ----------
        project : ChipProject
            The project as it stands.
        original_path : Path or None
            The file it came from, if any.

        Returns
        -------
        RecoveryOutcome
            False with a message if it could not be kept.
        """
        data = {
            "format": _FORMAT,
            "original_path": None if original_path is None else str(original_path),
            "kept_at": datetime.now(UTC).isoformat(),
            "project": project_data(project),
        }
        try:
            self._own()
            save_bytes(json.dumps(data, indent=2, allow_nan=False).encode(), self._copy)
        except (OSError, CoreError) as error:
            return RecoveryOutcome(is_done=False, message=f"no recovery copy could be kept: {error}")
        return RecoveryOutcome(is_done=True)

    def offers(self) -> tuple[RecoveryOffer, ...]:
        """Return what processes that are gone left behind, the newest first.

        Copies that cannot be read are passed over and left where they are.
        """
        found = []
        with contextlib.suppress(OSError):
            for copy in sorted(self._folder.glob(f"*{_COPY_SUFFIX}")):
                if not _is_owned(copy.with_suffix(_LOCK_SUFFIX)):
                    with contextlib.suppress(OSError, CoreError, ValueError, KeyError, TypeError):
                        found.append(_offer(copy))
        return tuple(sorted(found, key=lambda offer: offer.kept_at, reverse=True))

    def discard(self, offer: RecoveryOffer | None = None) -> RecoveryOutcome:
        """Remove a copy: the offered one, or this process's own when its work is saved or given up.

        Returns
        -------
        RecoveryOutcome
            False with a message if it could not be removed.
        """
        if offer is None and self._lock is None:
            return RecoveryOutcome(is_done=True)  # nothing was ever kept
        copy = self._copy if offer is None else offer.file
        try:
            copy.unlink(missing_ok=True)
            if offer is None and self._lock is not None:
                self._lock.close()
                self._lock = None
            copy.with_suffix(_LOCK_SUFFIX).unlink(missing_ok=True)
        except OSError as error:
            return RecoveryOutcome(is_done=False, message=f"the recovery copy could not be removed: {error}")
        return RecoveryOutcome(is_done=True)

    def _own(self) -> None:
        if self._lock is None:
            self._folder.mkdir(parents=True, exist_ok=True)
            lock = self._copy.with_suffix(_LOCK_SUFFIX).open("wb")
            if not _try_lock(lock):
                lock.close()
                raise BlockingIOError(0, "another process uses the same recovery file")
            self._lock = lock


def _offer(copy: Path) -> RecoveryOffer:
    data, problems = parsed_json(copy.read_bytes())
    if not isinstance(data, dict) or data["format"] != _FORMAT:
        raise ValueError(copy)
    path = data["original_path"]
    return RecoveryOffer(
        project=project_from_data(data["project"], problems=problems),
        original_path=None if path is None else Path(path),
        kept_at=datetime.fromisoformat(data["kept_at"]).astimezone(UTC),
        file=copy,
    )


def _is_owned(lock: Path) -> bool:
    """Return whether a living process holds the lock."""
    try:
        with lock.open("r+b") as file:
            return not _try_lock(file)
    except FileNotFoundError:
        return False
    except OSError:
        return True


def _try_lock(file: BinaryIO) -> bool:
    """Lock an open file until it is closed; False if another owner has it."""
    try:
        if sys.platform == "win32":
            import msvcrt

            msvcrt.locking(file.fileno(), msvcrt.LK_NBLCK, 1)
        else:
            import fcntl

            fcntl.flock(file, fcntl.LOCK_EX | fcntl.LOCK_NB)
    except OSError:
        return False
    return True
