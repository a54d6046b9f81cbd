"""Putting a set of files into a folder: all of them or none."""

from __future__ import annotations

import errno
import os
import shutil
import tempfile
from contextlib import contextmanager, suppress
from pathlib import Path
from typing import TYPE_CHECKING

from core.errors import ExportError

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

_NEW, _OLD = "new", "old"
_REASONS = {
    errno.ENOSPC: ("the disk is full", "free some space or choose another folder"),
    errno.EDQUOT: ("the disk quota is used up", "free some space or choose another folder"),
    errno.EFBIG: ("it takes no file of that size", "choose another folder"),
    errno.ENOENT: ("it has gone while the files were written", "make it again or choose another folder"),
    errno.EBUSY: ("another program holds it", "close that program or choose another folder"),
    errno.EACCES: ("it may not be written to", "choose a folder of your own"),
    errno.EPERM: ("it may not be written to", "choose a folder of your own"),
    errno.EROFS: ("it is on a read-only disk", "choose another folder"),
    errno.ENOTDIR: ("a file stands where the folder should be", "choose another folder"),
    errno.EEXIST: ("a file stands where the folder should be", "choose another folder"),
    errno.ENAMETOOLONG: ("its name is too long", "choose a shorter name"),
}


@contextmanager
def told_plainly(folder: Path) -> Iterator[None]:
    """Turn what the operating system refuses into one line with a way out.

    Raises
    ------
    ExportError
        For every ``OSError``.
    """
    try:
        yield
    except OSError as error:
        reason, way_out = _REASONS.get(
            error.errno or 0, (error.strerror or "it cannot be used", "choose another folder")
        )
        raise ExportError(f"mask files cannot be written to {folder}: {reason}; {way_out}") from error


@contextmanager
def workshop(folder: Path) -> Iterator[Path]:
    """Give a temporary folder inside the target folder, on the same disk, and clear it away after.

    A target folder that had to be made is taken away again if nothing came to stand in it.

    Parameters
    ----------
    folder : Path
        Where files are to go in the end.
    """
    missing = [place for place in (folder, *folder.parents) if not place.exists()]
    place: Path | None = None
    try:
        folder.mkdir(parents=True, exist_ok=True)
        place = Path(tempfile.mkdtemp(prefix=".masks-", dir=folder))
        (place / _NEW).mkdir()
        (place / _OLD).mkdir()
        yield place / _NEW
    finally:
        if place is not None:
            shutil.rmtree(place, ignore_errors=True)
        for made in missing:  # innermost first; rmdir refuses as soon as something is inside
            with suppress(OSError):
                made.rmdir()


def write_durably(path: Path, data: bytes) -> None:
    """Write a file and wait until the disk has it."""
    with path.open("wb") as stream:
        stream.write(data)
        stream.flush()
        os.fsync(stream.fileno())


def put_in_place(new: Path, folder: Path, names: Sequence[str]) -> None:
    """Move finished files from a workshop into the target folder, replacing all of that name or none.

    Parameters
    ----------
    new : Path
        The folder given by ``workshop``.
    folder : Path
        Target folder.
    names : sequence of str
        File names.

    Raises
    ------
    ExportError
        If something other than a file has one of the names.
    OSError
        If a move is refused; everything is as before then.
    """
    for name in names:
        target = folder / name
        if target.is_symlink() or (target.exists() and not target.is_file()):
            raise ExportError(f"{target} is not a plain file and is not replaced; move it away or rename the set")
    old = new.parent / _OLD
    try:
        for name in names:
            if (folder / name).exists():
                (folder / name).replace(old / name)
            (new / name).replace(folder / name)
    except OSError:
        for name in names:
            with suppress(OSError):  # one that cannot go back must not keep the others from it
                if not (new / name).exists():
                    (folder / name).replace(new / name)
                if (old / name).exists():
                    (old / name).replace(folder / name)
        raise
