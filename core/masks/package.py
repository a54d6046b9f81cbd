"""Checksums of a mask set, and the one archive that holds it all."""

from __future__ import annotations

import hashlib
from io import BytesIO
from typing import TYPE_CHECKING
from zipfile import ZIP_DEFLATED, BadZipFile, ZipFile, ZipInfo

from core.errors import ExportError

if TYPE_CHECKING:
    from collections.abc import Sequence
    from pathlib import Path

    from core.masks.report import MaskFile

_STAMP = (1980, 1, 1, 0, 0, 0)  # the earliest that the format knows: the same files, the same bytes
_PLAIN_FILE = 0o644 << 16
_UNIX = 3


def checksum_list(files: Sequence[MaskFile]) -> str:
    """Return the SHA-256 list of files, as the usual tools read and check it.

    Parameters
    ----------
    files : sequence of MaskFile
        Files of one folder.
    """
    return "".join(f"{file.sha256}  {file.name}\n" for file in files)


def archive_bytes(folder: Path, names: Sequence[str]) -> bytes:
    """Return a ZIP archive of files, the same for the same files.

    Parameters
    ----------
    folder : Path
        Where they are.
    names : sequence of str
        Their names, in the order of the archive.
    """
    stream = BytesIO()
    with ZipFile(stream, "w") as archive:
        for name in names:
            entry = ZipInfo(name, _STAMP)
            entry.compress_type, entry.external_attr, entry.create_system = ZIP_DEFLATED, _PLAIN_FILE, _UNIX
            archive.writestr(entry, (folder / name).read_bytes())
    return stream.getvalue()


def prove_archive(path: Path, files: Sequence[MaskFile]) -> None:
    """Read an archive back and compare the checksum of every member.

    Parameters
    ----------
    path : Path
        The archive.
    files : sequence of MaskFile
        What it should hold, in order.

    Raises
    ------
    ExportError
        If it cannot be read or holds anything else.
    """
    try:
        with ZipFile(path) as archive:
            found = [(info.filename, hashlib.sha256(archive.read(info)).hexdigest()) for info in archive.infolist()]
    except (BadZipFile, EOFError, ValueError) as error:
        raise ExportError(f"{path.name} does not read back: {error}; nothing was written; try again") from error
    if found != [(file.name, file.sha256) for file in files]:
        raise ExportError(f"{path.name} does not hold the files of the mask set; nothing was written; try again")
