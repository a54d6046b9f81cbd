"""Chip projects on disk: read with every problem told, saved so that nothing is lost."""

from __future__ import annotations

import json
import stat
from pathlib import Path
from typing import TYPE_CHECKING

from core.errors import ProjectFileError, did_you_mean, shown
from core.project.layout import project_data, project_from_data
from core.project.safe_save import save_bytes
from core.project.strict_json import LARGEST_FILE_BYTES, parsed_json

if TYPE_CHECKING:
    import os

    from core.project.chip import ChipProject

PROJECT_SUFFIX = ".sideloop"


def read_project(path: str | os.PathLike[str]) -> ChipProject:
    """Return the project in a file.

    Parameters
    ----------
    path : path
        A project file; any suffix.

    Returns
    -------
    ChipProject
        The checked project; fields that the file leaves out have their defaults.

    Raises
    ------
    ProjectFileError
        If the file cannot be read or is no usable project: every problem in one error.
    """
    path = Path(path)
    try:
        return project_from_bytes(_content(path))
    except ProjectFileError as error:
        raise _told(path, "opened", error) from None


def write_project(project: ChipProject, path: str | os.PathLike[str]) -> None:
    """Save a project; the file holds either the old or the new version, whatever happens.

    The bytes are made in memory and read back before anything is written.

    Parameters
    ----------
    project : ChipProject
        What to save.
    path : path
        Where; an existing file is replaced, a link is followed.

    Raises
    ------
    ProjectFileError
        If the file cannot be saved; an older version is then still in place.
    """
    path = Path(path)
    try:
        content = project_bytes(project)
        if project_from_bytes(content) != project:
            raise ProjectFileError("it does not read back as it is; keep the window open and save under another name")
        save_bytes(content, path)
    except ProjectFileError as error:
        raise _told(path, "saved", error) from None


def project_bytes(project: ChipProject) -> bytes:
    """Return the content of a project's file: readable JSON in UTF-8."""
    return (json.dumps(project_data(project), indent=2, ensure_ascii=False, allow_nan=False) + "\n").encode()


def project_from_bytes(content: bytes) -> ChipProject:
    """Return the project that the content of a file describes.

    Raises
    ------
    ProjectFileError
        With every problem of the content.
    """
    data, problems = parsed_json(content)
    return project_from_data(data, problems=problems)


def _told(path: Path, done: str, error: ProjectFileError) -> ProjectFileError:
    return ProjectFileError(f"{shown(path.name)} cannot be {done}: {error}", error.problems or (str(error),))


def _content(path: Path) -> bytes:
    try:
        if not stat.S_ISREG(path.stat().st_mode):
            kind = "a folder" if path.is_dir() else "no ordinary file"
            raise ProjectFileError(f"it is {kind}; choose a project file")
        with path.open("rb") as file:
            return file.read(LARGEST_FILE_BYTES + 1)
    except FileNotFoundError:
        folder = shown(str(path.parent.absolute()), 200)
        raise ProjectFileError(f"no such file in {folder}; {_neighbours(path)}") from None
    except (OSError, ValueError) as error:  # ValueError: a path no file can have
        reason = error.strerror if isinstance(error, OSError) else str(error)
        raise ProjectFileError(f"{reason}; choose a file that this account may read") from None


def _neighbours(path: Path) -> str:
    """Return a hint at the project files that are there."""
    try:
        names = sorted(each.name for each in path.parent.glob(f"*{PROJECT_SUFFIX}"))
    except (OSError, ValueError):
        names = []
    return did_you_mean(path.name, names) if names else "check the path"
