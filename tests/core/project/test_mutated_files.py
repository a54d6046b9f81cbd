"""Damaged project files: each opens, or gives exactly one clear error, and does so fast."""

from __future__ import annotations

import copy
import json
import random

import pytest

from core.errors import ProjectFileError
from core.project import ChipProject
from core.project.files import project_bytes, project_from_bytes
from core.project.layout import project_data
from tests.core.project.builders import rinse_project

ODD_VALUES = [
    None, True, False, 0, -1, 1, 2, 1e308, -1e308, 10**300, 0.5, float("nan"), float("inf"), "", "45", "water", "NaN",
    "\ud800", "\0", "x" * 100_000, [], {}, [[]], [{}], {"name": "x"}, {"a": {"b": {"c": {}}}}, [None] * 1000,
]  # fmt: skip
ODD_KEYS = ["", "schema", "Name", "loop_angle_deg", "stage", "sets", "\n", "x" * 10_000, "\ud800"]
ODD_BYTES = [
    b"",
    b"\0",
    b"{",
    b"}",
    b"[",
    b"]",
    b'"',
    b",",
    b":",
    b"\\",
    b"\\u",
    b"\xff",
    b"\xef\xbb\xbf",
    b"e9",
    b"-",
    b"1" * 50,
]


def containers(data):
    """Return every object and list in data, the outermost first."""
    found = [data]
    for each in found:
        inner = each.values() if isinstance(each, dict) else each
        found.extend(item for item in inner if isinstance(item, dict | list))
    return found


def with_other_structure(chance: random.Random) -> bytes:
    data = project_data(rinse_project())
    for _ in range(chance.randint(1, 3)):
        place = chance.choice([each for each in containers(data) if each] or [data])
        key = chance.choice(list(place)) if isinstance(place, dict) else chance.randrange(len(place))
        action = chance.randrange(5)
        if action == 0:
            place[key] = copy.deepcopy(chance.choice(ODD_VALUES))
        elif action == 1:
            del place[key]
        elif action == 2 and isinstance(place, dict):
            place[chance.choice(ODD_KEYS)] = place.pop(key)
        elif action == 3:
            place[key] = copy.deepcopy(chance.choice(containers(data)))
        elif isinstance(place, list):
            place.append(copy.deepcopy(place[key]))
        if not isinstance(data, dict) or not data:
            break
    return json.dumps(data).encode()


def with_other_bytes(chance: random.Random) -> bytes:
    content = bytearray(project_bytes(rinse_project()))
    for _ in range(chance.randint(1, 4)):
        start = chance.randrange(len(content) + 1)
        stop = min(len(content), start + chance.choice([0, 1, 1, 2, 20, 500]))
        action = chance.randrange(4)
        if action == 0:
            content[start:stop] = chance.choice(ODD_BYTES)
        elif action == 1:
            content[start:stop] = chance.randbytes(stop - start)
        elif action == 2:
            content[start:start] = content[start:stop]
        else:
            content[stop : stop + 1] = bytes([chance.randrange(32, 127)])
        if not content:
            break
    return bytes(content[: chance.randrange(len(content) + 1)] if chance.random() < 0.05 else content)


@pytest.mark.parametrize("mutate", [with_other_structure, with_other_bytes])
def test_mutated_files(mutate):
    chance = random.Random(20_240)
    answers = [answer_to(mutate(chance)) for _ in range(2_500)]
    messages = [answer for answer in answers if isinstance(answer, str)]
    projects = [answer for answer in answers if isinstance(answer, ChipProject)]
    for message in messages:
        assert message.isprintable()
        assert 10 < len(message) < 2_000
    for project in projects:
        assert project_from_bytes(project_bytes(project)) == project
    assert min(len(messages), len(projects)) > 50  # the mutations reach both sides


def answer_to(content: bytes) -> ChipProject | str:
    """Return the project, or the one error; anything else that is raised fails the test."""
    try:
        return project_from_bytes(content)
    except ProjectFileError as error:
        return str(error)
