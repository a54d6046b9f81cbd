"""Every rule for GDSII masks, each proven by a file that breaks it and nothing else.

The files come from gdstk, which writes what it is given without complaint, or from patched bytes.
"""

from __future__ import annotations

import struct
from datetime import datetime
from typing import TYPE_CHECKING

import gdstk
import numpy as np
import pytest

from core.errors import ExportError
from core.masks.found import found_in_gdsii
from core.masks.found_areas import FoundAreas
from core.masks.gdsii_rules import gdsii_problems
from core.masks.read_gdsii import read_gdsii
from tests.core.masks.judges import gdsii_objections

if TYPE_CHECKING:
    from collections.abc import Callable
    from pathlib import Path

SQUARE = [(0, 0), (10, 0), (10, 10), (0, 10)]
STAMP = datetime(2000, 1, 1)


class Mask:
    """A sound library of two cells, to be spoilt; the piece is part of the block on top."""

    blocks = ("TOP",)
    grid_nm = 1

    def __init__(self) -> None:
        self.library = gdstk.Library("MASK", unit=1e-6, precision=1e-9)
        self.piece = self.library.new_cell("PIECE")
        self.piece.add(gdstk.Polygon(SQUARE, layer=1))
        self.top = self.library.new_cell("TOP")
        self.top.add(gdstk.Reference(self.piece, (0, 0)), gdstk.Reference(self.piece, (10, 0)))

    def add(self, *points: tuple[float, float], layer: int = 1, datatype: int = 0) -> None:
        self.piece.add(gdstk.Polygon(points, layer=layer, datatype=datatype))

    def problems(self, folder: Path, patch: Callable[[bytes], bytes] = lambda data: data) -> list[str]:
        path = folder / "mask.gds"
        self.library.write_gds(path, max_points=0, timestamp=STAMP)
        path.write_bytes(patch(path.read_bytes()))
        read = read_gdsii(path)
        problems = gdsii_problems(read, top="TOP", layers=[1], grid_nm=self.grid_nm)
        if not problems:
            tree = found_in_gdsii(read, blocks=self.blocks)
            problems = FoundAreas(tree, is_nested=False).problems(grain_um=0.0)
        # a judge that shares nothing with these rules must come to the same verdict
        objections = gdsii_objections(path, top="TOP", layers=[1], grid_nm=self.grid_nm)
        assert bool(objections) == bool(problems), objections
        return problems


@pytest.fixture
def mask() -> Mask:
    return Mask()


def test_a_sound_file_has_no_problems(mask: Mask, tmp_path: Path) -> None:
    assert mask.problems(tmp_path) == []


def wheel(count: int) -> list[tuple[float, float]]:
    turn = 2.0 * np.pi * np.arange(count) / count
    return np.column_stack((500.0 * np.cos(turn), 500.0 * np.sin(turn) - 900.0)).tolist()


BROKEN_FIGURES = {
    "doubled vertex": [(20, 0), (30, 0), (30, 0.0001), (30, 10)],
    "spur": [(40, 0), (50, 0), (50, 10), (50, 20), (50, 10), (40, 10)],
    "crosses or touches itself": [(60, 0), (70, 10), (70, 0), (60, 10)],
    "drawn twice": SQUARE[2:] + SQUARE[:2],
    "overlap": [(5, 5), (6, 5), (6, 30), (5, 30)],
    "lie inside one another": [(4, 4), (6, 4), (6, 6), (4, 6)],
    "more than 200": wheel(200),
}


@pytest.mark.parametrize("rule", BROKEN_FIGURES)
def test_a_broken_figure_is_named(mask: Mask, tmp_path: Path, rule: str) -> None:
    mask.add(*BROKEN_FIGURES[rule])
    (problem,) = mask.problems(tmp_path)
    assert rule in problem


def test_199_vertices_are_the_most(mask: Mask, tmp_path: Path) -> None:
    mask.top.add(gdstk.Polygon(wheel(199), layer=1))
    assert mask.problems(tmp_path) == []


def test_a_corner_off_the_grid_is_named(mask: Mask, tmp_path: Path) -> None:
    mask.grid_nm = 5
    assert mask.problems(tmp_path) == []
    mask.add((20, 0), (30, 0), (30.002, 10))
    assert mask.problems(tmp_path) == ["cell PIECE: BOUNDARY with a corner or place off the grid of 5 nm"]


def test_a_place_off_the_grid_is_named(mask: Mask, tmp_path: Path) -> None:
    mask.grid_nm = 5
    mask.top.add(gdstk.Reference(mask.piece, (50.001, 0)))
    assert mask.problems(tmp_path) == ["cell TOP: SREF with a corner or place off the grid of 5 nm"]


@pytest.mark.parametrize(
    ("place", "is_bad"),
    [((10, 0), True), ((15, 5), True), ((20, 0), False), ((20, 10), False)],
)
def test_blocks_that_cover_one_another_are_named(
    mask: Mask, tmp_path: Path, place: tuple[float, float], is_bad: bool
) -> None:
    # squares of 10 um at 0 and 10; only edges and corners may be shared
    mask.blocks = ("TOP", "PIECE")
    mask.top.add(gdstk.Reference(mask.piece, place))
    assert mask.problems(tmp_path) == ["block TOP, layer L1_CHAN: PIECE and PIECE overlap"] * is_bad


KEYHOLE = [
    *[(0, 40), (40, 40), (40, 80), (0, 80), (0, 60), (10, 60)],
    *[(10, 70), (30, 70), (30, 50), (10, 50), (10, 60), (0, 60)],
]


def test_a_keyhole_is_not_a_valid_piece(mask: Mask, tmp_path: Path) -> None:
    mask.add(*KEYHOLE)
    assert any("crosses or touches" in problem for problem in mask.problems(tmp_path))


@pytest.mark.parametrize(
    ("layer", "datatype", "words"),
    [(2, 0, "layer 2, data type 0"), (1, 3, "layer 1, data type 3"), (40000, 0, "layer -25536")],
)
def test_a_wrong_layer_is_named(mask: Mask, tmp_path: Path, layer: int, datatype: int, words: str) -> None:
    mask.add((20, 0), (30, 0), (30, 10), layer=layer, datatype=datatype)
    assert words in mask.problems(tmp_path)[0]


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ({"rotation": np.pi / 6}, "ANGLE"),
        ({"magnification": 2.0}, "MAG"),
        ({"x_reflection": True}, "STRANS"),
        ({"columns": 3, "rows": 2, "spacing": (20, 20)}, "AREF"),
    ],
)
def test_only_plain_references_are_allowed(mask: Mask, tmp_path: Path, change: dict[str, object], words: str) -> None:
    mask.top.add(gdstk.Reference(mask.piece, (100, 100), **change))
    assert any(words in problem for problem in mask.problems(tmp_path))


def test_a_dangling_reference_is_named(mask: Mask, tmp_path: Path) -> None:
    mask.top.add(gdstk.Reference("NOWHERE", (0, 0)))
    assert any("NOWHERE, which is not in the file" in problem for problem in mask.problems(tmp_path))


def test_a_second_top_cell_is_named(mask: Mask, tmp_path: Path) -> None:
    mask.library.new_cell("OTHER").add(gdstk.Polygon(SQUARE, layer=1))
    assert mask.problems(tmp_path) == ["top cells are TOP, OTHER; should be TOP alone"]


@pytest.mark.parametrize("name", ["lower", "A" * 28, "A B", "A$"])
def test_an_unsafe_cell_name_is_named(mask: Mask, tmp_path: Path, name: str) -> None:
    mask.library.rename_cell(mask.piece, name)
    assert any("is not safe everywhere" in problem for problem in mask.problems(tmp_path))


def test_paths_and_texts_are_refused(mask: Mask, tmp_path: Path) -> None:
    path = gdstk.FlexPath([(0, 50), (50, 50)], 2.0, simple_path=True, layer=1)
    mask.piece.add(path, gdstk.Label("note", (0, 0)))
    problems = mask.problems(tmp_path)
    assert any("PATH" in problem for problem in problems)
    assert any("TEXT" in problem for problem in problems)


def test_another_grid_is_named(tmp_path: Path) -> None:
    mask = Mask()
    mask.library.precision = 5e-9
    assert any("should be 1 nm grid" in problem for problem in mask.problems(tmp_path))


def test_a_figure_beyond_2_m_is_named(mask: Mask, tmp_path: Path) -> None:
    mask.add((2.1e6, 0), (2.1e6 + 5, 0), (2.1e6, 5))
    assert "further than 2 m" in mask.problems(tmp_path)[0]


def test_deep_references_are_named(mask: Mask, tmp_path: Path) -> None:
    inner = mask.piece
    for level in range(16):
        cell = mask.library.new_cell(f"L{level}")
        cell.add(gdstk.Reference(inner, (0, 50 * 2**level)))
        inner = cell
    mask.top.add(gdstk.Reference(inner, (0, 0)))
    assert "levels deep" in mask.problems(tmp_path)[0]


def xy_record(data: bytes) -> int:
    return data.index(struct.pack(">HBB", 4 + 5 * 8, 0x10, 3))


def opened(data: bytes) -> bytes:
    end = xy_record(data) + 4 + 4 * 8
    return data[:end] + struct.pack(">2i", 77, 77) + data[end + 8 :]


def boxed(data: bytes) -> bytes:
    return data.replace(b"\x00\x04\x08\x00", b"\x00\x04\x2d\x00", 1)


def renamed(data: bytes) -> bytes:
    return data.replace(b"\x00\x08\x06\x06TOP\x00", b"\x00\x08\x06\x06MID\x00", 1)


def other_version(data: bytes) -> bytes:
    return data[:4] + struct.pack(">h", 3) + data[6:]


def without_date(data: bytes) -> bytes:
    return data[:6] + data[6 + 28 :]


@pytest.mark.parametrize(
    ("patch", "words"),
    [
        (opened, "open figure"),
        (boxed, "BOX"),
        (renamed, "top cells are MID"),
        (other_version, "version is 3"),
        (without_date, "does not open with"),
    ],
)
def test_a_patched_file_is_named(mask: Mask, tmp_path: Path, patch: Callable[[bytes], bytes], words: str) -> None:
    assert any(words in problem for problem in mask.problems(tmp_path, patch))


def cut_short(data: bytes) -> bytes:
    return data[:-4]


def odd_length(data: bytes) -> bytes:
    return data[:1] + b"\x07" + data[2:]


def endless(data: bytes) -> bytes:
    return data + b"more"


@pytest.mark.parametrize("patch", [cut_short, odd_length, endless, lambda data: b"", lambda data: b"\0" * 64])
def test_broken_records_are_one_clear_error(mask: Mask, tmp_path: Path, patch: Callable[[bytes], bytes]) -> None:
    with pytest.raises(ExportError, match=r"mask\.gds is not a readable GDSII file"):
        mask.problems(tmp_path, patch)


def test_cells_that_refer_to_each_other_do_not_hang(mask: Mask, tmp_path: Path) -> None:
    mask.piece.add(gdstk.Reference("TOP", (0, 0)))
    assert any("top cells are none" in problem for problem in mask.problems(tmp_path))


def test_a_cell_defined_twice_is_named(mask: Mask, tmp_path: Path) -> None:
    mask.library.add(gdstk.Cell("PIECE"))
    assert any("defined twice" in problem for problem in mask.problems(tmp_path))


def test_padding_after_the_end_is_legal(mask: Mask, tmp_path: Path) -> None:
    assert mask.problems(tmp_path, lambda data: data + b"\0" * 2044) == []
