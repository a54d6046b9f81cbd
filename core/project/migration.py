"""Project files of older versions are brought up to date, one small step per version.

To change the layout of the file: raise ``SCHEMA`` by one and register in ``STEPS``, under the
number that files had before, a function that turns such data into data of the next number.
A step sees data as it came from the file, so it must pass on what it does not understand;
the checks that follow will name it.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from core.errors import ProjectFileError, shown

if TYPE_CHECKING:
    from collections.abc import Callable

SCHEMA = 3

Data = dict[str, object]

# schema of the data given -> function that returns data of the next schema
STEPS: dict[int, Callable[[Data], Data]] = {
    # each added a part that older programs do not know, and that a file may lack
    1: lambda data: data,  # 2: results of flow solves under "solved"
    2: lambda data: data,  # 3: "process" and "chip"; without them they are those of a new chip
}


def migrated(data: Data) -> Data:
    """Return project data in the present layout.

    Parameters
    ----------
    data : dict
        Project data with its ``schema`` number.

    Returns
    -------
    dict
        Data whose ``schema`` is ``SCHEMA``.

    Raises
    ------
    ProjectFileError
        If the number is missing, no whole number from 1, or newer than this program.
    """
    schema = data.get("schema")
    if not isinstance(schema, int) or isinstance(schema, bool) or schema < 1:
        found = f"schema is {shown(schema)}" if "schema" in data else "schema is missing"
        raise ProjectFileError(f"{found}; allowed: 1 to {SCHEMA}; give the number of the file's layout")
    if schema > SCHEMA:
        raise ProjectFileError(
            f"saved by a newer Sideloop (schema {schema}; this one knows up to {SCHEMA}); update Sideloop to open it"
        )
    for number in range(schema, SCHEMA):
        data = {**STEPS[number](data), "schema": number + 1}
    return data
