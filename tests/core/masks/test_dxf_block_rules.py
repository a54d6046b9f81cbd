"""Rules for blocks and for loops within loops in DXF masks, each proven by a file that breaks it and nothing else."""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest

from core.masks.dxf_rules import dxf_problems
from core.masks.read_dxf import read_dxf
from tests.core.masks.dxf_masks import BOUNDS, Mask

if TYPE_CHECKING:
    from pathlib import Path


@pytest.fixture(params=["R2000", "R12"])
def mask(request: pytest.FixtureRequest) -> Mask:
    return Mask(request.param)


def test_a_sound_insert_has_no_problems(mask: Mask, tmp_path: Path) -> None:
    mask.insert()
    assert mask.problems(tmp_path) == []


@pytest.mark.parametrize(
    ("values", "words"),
    [
        ({"xscale": 2.0}, "insert of PIECE that does more than shift"),
        ({"yscale": -1.0}, "insert of PIECE that does more than shift"),
        ({"rotation": 90.0}, "insert of PIECE that does more than shift"),
        ({"column_count": 2, "column_spacing": 5.0}, "insert of PIECE that does more than shift"),
        ({"layer": "0"}, "insert of PIECE on layer '0'; should be on L1_CHAN"),
        ({"name": "NOWHERE"}, "insert of block NOWHERE, which is not in the file"),
    ],
)
def test_an_insert_that_does_more_than_shift_is_named(
    mask: Mask, tmp_path: Path, values: dict[str, object], words: str
) -> None:
    mask.insert(**values)
    assert words in mask.problems(tmp_path)


@pytest.mark.parametrize(
    ("name", "words"),
    [("L1_CHAN", "block L1_CHAN has the name of a layer"), ("piece", "block name 'piece' is not safe everywhere")],
)
def test_a_bad_name_of_a_block_is_named(mask: Mask, tmp_path: Path, name: str, words: str) -> None:
    mask.insert(block=name)
    assert mask.problems(tmp_path) == [words]


def test_a_base_point_and_an_unused_block_are_named(mask: Mask, tmp_path: Path) -> None:
    mask.insert(base=(1.0, 0.0))
    mask.document.blocks.new("SPARE")
    assert mask.problems(tmp_path) == ["block PIECE has a base point of its own", "block SPARE is not used"]


def test_inserts_that_overlap_are_named(mask: Mask, tmp_path: Path) -> None:
    mask.insert()
    mask.space.add_blockref("PIECE", (4.5, 0.0), dxfattribs={"layer": "L1_CHAN"})
    assert mask.problems(tmp_path) == ["block TOP, layer L1_CHAN: PIECE and PIECE overlap"]


def test_inserts_that_never_end_are_named(mask: Mask, tmp_path: Path) -> None:
    mask.insert()
    block = mask.document.blocks.get("PIECE")
    path = tmp_path / "mask.dxf"
    block.add_blockref("PIECE", (0.0, 2.0), dxfattribs={"layer": "L1_CHAN"})
    mask.document.saveas(path)
    problems = dxf_problems(read_dxf(path), version=mask.version, layers=("L1_CHAN",), bounds_mm=BOUNDS)
    assert "inserts are more than 16 levels deep" in problems


NESTED = [(2.0, 0.0), (7.0, 0.0), (7.0, 1.0), (2.0, 1.0)]
INSIDE = [(3.0, 0.3), (4.0, 0.3), (4.0, 0.7), (3.0, 0.7)]


@pytest.mark.parametrize(
    ("rings", "words"),
    [
        ([INSIDE, NESTED], None),
        ([NESTED, INSIDE], "an outer loop comes before one that lies inside it"),
        ([INSIDE, NESTED, INSIDE[1:] + INSIDE[:1]], "1 figure drawn twice"),
        ([INSIDE, [(x + 1.0, y) for x, y in INSIDE], NESTED], "cross or touch one another"),
        ([INSIDE, [(x + 0.5, y + 0.1) for x, y in INSIDE], NESTED], "cross or touch one another"),
        ([[(3.2, 0.4), (3.8, 0.4), (3.8, 0.6)], INSIDE, NESTED], "a loop lies within a loop that lies within a loop"),
    ],
)
def test_loops_within_loops_for_cutting(
    mask: Mask, tmp_path: Path, rings: list[list[tuple[float, float]]], words: str | None
) -> None:
    mask.is_nested = True
    for ring in rings:
        mask.add(ring)
    problems = mask.problems(tmp_path)
    assert [words in problem for problem in problems] == [True] if words else problems == []
