"""Replace a file in one step, so that a crash, a full disk or a kill leaves the old or the new one."""

from __future__ import annotations

import contextlib
import os
import secrets
import stat
import time
from pathlib import Path

from core.errors import ProjectFileError, shown

_LEFT_OVER = ".sideloop-*.saving"
_LEFT_OVER_AGE_S = 600.0


def save_bytes(content: bytes, path: Path) -> None:
    """Write bytes to a file in one step.

    The bytes go to a temporary file in the same folder, are flushed to the disk, and the
    temporary file then takes the place of the old one.

    Parameters
    ----------
    content : bytes
        All of the new file.
    path : Path
        The file; a link is followed.

    Raises
    ------
    ProjectFileError
        If the disk, the folder or the file does not allow it; the old file is untouched.
    """
    try:
        target = Path(os.path.realpath(path))
        _refuse_unwritable(target)
        _sweep(target.parent)
        temporary = target.parent / f".sideloop-{secrets.token_hex(8)}.saving"
        try:
            _write_flushed(content, temporary, like=target)
            os.replace(temporary, target)  # noqa: PTH105 - one name for the call that matters
        except BaseException:
            with contextlib.suppress(OSError):
                temporary.unlink(missing_ok=True)
            raise
        _flush_folder(target.parent)
    except (OSError, ValueError) as error:  # ValueError: a path no file can have
        reason = (error.strerror or str(error)) if isinstance(error, OSError) else str(error)
        way_out = "free some space, or save it in another place"
        raise ProjectFileError(f"{reason}; {way_out}; nothing was changed on the disk") from None


def _refuse_unwritable(target: Path) -> None:
    if not target.parent.is_dir():
        raise ProjectFileError(f"the folder {shown(str(target.parent), 200)} is not there; choose another folder")
    if target.is_dir():
        raise ProjectFileError("there is a folder of that name; choose another name")
    if target.exists() and not os.access(target, os.W_OK):
        raise ProjectFileError("the file is write-protected; choose another name or lift the protection")


def _write_flushed(content: bytes, temporary: Path, *, like: Path) -> None:
    with temporary.open("xb") as file:
        if like.exists():
            temporary.chmod(stat.S_IMODE(like.stat().st_mode))
        file.write(content)
        file.flush()
        os.fsync(file.fileno())


def _flush_folder(folder: Path) -> None:
    """Make the new name last through a power cut, on systems that let a folder be flushed."""
    with contextlib.suppress(OSError):
        handle = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)


def _sweep(folder: Path) -> None:
    """Remove what killed saves left behind; young files may belong to a save under way."""
    for file in folder.glob(_LEFT_OVER):
        with contextlib.suppress(OSError):
            if time.time() - file.stat().st_mtime > _LEFT_OVER_AGE_S:
                file.unlink()
