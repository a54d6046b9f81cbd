"""Every rule for DXF masks, each proven by a file that breaks it and nothing else.

The files come from ezdxf, used here on its own, or from patched text.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import pytest
from ezdxf import appsettings

from core.errors import ExportError
from core.fabrication.choices import DxfVersion
from core.masks.read_dxf import read_dxf
from tests.core.masks.dxf_masks import BOUNDS, SQUARE, Mask

if TYPE_CHECKING:
    from collections.abc import Callable
    from pathlib import Path

    from ezdxf.document import Drawing
    from ezdxf.layouts import Modelspace


@pytest.fixture(params=["R2000", "R12"])
def mask(request: pytest.FixtureRequest) -> Mask:
    return Mask(request.param)


def test_a_sound_file_has_no_problems(mask: Mask, tmp_path: Path) -> None:
    assert mask.problems(tmp_path) == []


BROKEN_FIGURES = {
    "doubled vertex": [(2.0, 0.0), (3.0, 0.0), (3.0, 0.0), (3.0, 1.0)],
    "spur": [(2.0, 0.0), (3.0, 0.0), (3.0, 0.5), (3.0, 1.0), (3.0, 0.5), (2.0, 0.5)],
    "crosses or touches itself": [(2.0, 0.0), (3.0, 1.0), (3.0, 0.0), (2.0, 1.0)],
    "drawn twice": SQUARE,
    "overlap": [(0.5, 0.5), (3.0, 0.5), (3.0, 0.9), (0.5, 0.9)],
    "lie inside one another": [(0.4, 0.4), (0.6, 0.4), (0.6, 0.6), (0.4, 0.6)],
    "fewer than three corners": [(2.0, 0.0), (3.0, 1.0)],
    "arc of more than a quarter turn": [(2.0, 0.0, 1.1), (3.0, 0.0, 0.0), (2.5, 1.0, 0.0)],
}


@pytest.mark.parametrize("rule", BROKEN_FIGURES)
def test_a_broken_figure_is_named(mask: Mask, tmp_path: Path, rule: str) -> None:
    mask.add(BROKEN_FIGURES[rule])
    problems = mask.problems(tmp_path)
    assert len(problems) == 1
    assert rule in problems[0]


def test_the_first_corner_repeated_is_a_doubled_vertex(mask: Mask, tmp_path: Path) -> None:
    mask.add([(2.0, 0.0), (3.0, 0.0), (3.0, 1.0), (2.0, 0.0)])
    assert "doubled vertex" in mask.problems(tmp_path)[0]


def test_arcs_that_cross_are_found(mask: Mask, tmp_path: Path) -> None:
    # corners alone make a sound thin strip, its two arcs bulge into one another
    mask.add([(2.0, 0.0, -0.4), (4.0, 0.0, 0.0), (4.0, 0.05, -0.4), (2.0, 0.05, 0.0)])
    assert "crosses or touches itself" in mask.problems(tmp_path)[0]


def test_an_open_figure_is_named(mask: Mask, tmp_path: Path) -> None:
    mask.add([(2.0, 0.0), (3.0, 0.0), (3.0, 1.0), (2.0, 0.0)], close=False)
    assert mask.problems(tmp_path) == ["open figure"]


def constant_width(document: Drawing) -> None:
    if document.dxfversion == "AC1015":
        document.modelspace()[0].dxf.const_width = 0.1
    else:
        document.modelspace()[0].dxf.default_start_width = 0.1


def vertex_width(document: Drawing) -> None:
    first = document.modelspace()[0]
    if document.dxfversion == "AC1015":
        first.set_points([(x, y, 0.0, 0.1, 0.0) for x, y in SQUARE])
    else:
        first.vertices[1].dxf.end_width = 0.1


@pytest.mark.parametrize("widen", [constant_width, vertex_width])
def test_a_width_is_named(mask: Mask, tmp_path: Path, widen: Callable[[Drawing], None]) -> None:
    widen(mask.document)
    assert mask.problems(tmp_path) == ["polyline with a width of 0.1"]


def test_layer_0_and_strange_layers_are_named(mask: Mask, tmp_path: Path) -> None:
    mask.add([(2.0, 0.0), (3.0, 0.0), (3.0, 1.0)], layer="0")
    assert mask.problems(tmp_path) == ["figure on layer '0'; should be on L1_CHAN"]
    mask.add([(4.0, 0.0), (5.0, 0.0), (5.0, 1.0)], layer="lower case")
    assert any("'lower case'" in problem for problem in mask.problems(tmp_path))


def test_an_unused_layer_is_named(mask: Mask, tmp_path: Path) -> None:
    mask.document.layers.add("SPARE")
    assert mask.problems(tmp_path) == ["layer 'SPARE' is not used"]


@pytest.mark.parametrize(
    ("draw", "kind"),
    [
        (lambda space: space.add_line((0, 0), (1, 1)), "LINE"),
        (lambda space: space.add_point((0, 0)), "POINT"),
        (lambda space: space.add_circle((0, 0), 1.0), "CIRCLE"),
        (lambda space: space.add_text("note"), "TEXT"),
        (lambda space: space.doc.blocks.new("PIECE").add_line((0, 0), (1, 1)), "LINE in a block"),
    ],
)
def test_anything_but_polylines_is_named(
    mask: Mask, tmp_path: Path, draw: Callable[[Modelspace], object], kind: str
) -> None:
    draw(mask.space)
    assert f"entity {kind}; only closed polylines and inserts are allowed" in mask.problems(tmp_path)


@pytest.mark.parametrize(
    ("draw", "kind"),
    [
        (lambda space: space.add_spline([(0, 0), (1, 1), (2, 0)]), "SPLINE"),
        (lambda space: space.add_hatch(), "HATCH"),
        (lambda space: space.add_ellipse((0, 0)), "ELLIPSE"),
    ],
)
def test_curves_and_fills_of_newer_files_are_named(
    tmp_path: Path, draw: Callable[[Modelspace], object], kind: str
) -> None:
    mask = Mask("R2000")
    draw(mask.space)
    assert f"entity {kind}; only closed polylines and inserts are allowed" in mask.problems(tmp_path)


def test_paper_space_is_named(mask: Mask, tmp_path: Path) -> None:
    paper = mask.document.paperspace()
    add = paper.add_lwpolyline if mask.version is DxfVersion.R2000 else paper.add_polyline2d
    add(SQUARE, close=True, dxfattribs={"layer": "L1_CHAN"})
    assert "figure in paper space" in mask.problems(tmp_path)


@pytest.mark.parametrize("unit", [0, 1, 6, 13])
def test_other_units_are_named(tmp_path: Path, unit: int) -> None:
    mask = Mask("R2000")
    mask.document.units = unit
    assert mask.problems(tmp_path) == [f"$INSUNITS is ['{unit}'], should be 4 for millimetres"]


def test_another_version_is_named(mask: Mask, tmp_path: Path) -> None:
    other = {"AC1015": "AC1018", "AC1009": "AC1006"}[mask.document.dxfversion]
    problems = mask.problems(tmp_path, lambda text: text.replace(mask.document.dxfversion, other, 1))
    assert problems == [f"version is ['{other}'], should be {mask.document.dxfversion}"]


def test_wrong_extents_are_named(mask: Mask, tmp_path: Path) -> None:
    def without(text: str) -> str:
        return text.replace("$EXTMAX\n 10\n9.0", "$EXTMAX\n 10\n1e+20", 1)

    assert mask.problems(tmp_path, without) == ["the extents in the header are not those of the drawing"]


def test_a_wrong_vertex_count_is_named(tmp_path: Path) -> None:
    problems = Mask("R2000").problems(tmp_path, lambda text: text.replace(" 90\n4\n 70\n1\n", " 90\n5\n 70\n1\n", 1))
    assert problems == ["figure claims 5 vertices and has 4"]


def test_a_file_cut_short_is_named(mask: Mask, tmp_path: Path) -> None:
    assert "cut short" in mask.problems(tmp_path, lambda text: text[: text.rindex("EOF") - 4])[0]


def test_signs_beyond_ascii_are_named(mask: Mask, tmp_path: Path) -> None:
    problems = mask.problems(tmp_path, lambda text: "999\nWörter\n" + text)
    assert "other than plain ASCII" in problems[0]


@pytest.mark.parametrize("text", ["no tags at all\nhere\n", "  0\nSECTION\nx\ny\n", "\0\1\2\n\3\n"])
def test_what_is_no_dxf_is_one_clear_error(tmp_path: Path, text: str) -> None:
    path = tmp_path / "mask.dxf"
    path.write_text(text)
    with pytest.raises(ExportError, match=r"mask\.dxf is not a readable DXF file"):
        read_dxf(path)


def test_nothing_drawn_is_named(tmp_path: Path) -> None:
    mask = Mask("R2000")
    mask.space.delete_all_entities()
    assert mask.problems(tmp_path) == ["layer L1_CHAN: nothing is drawn on the layer"]


def test_ezdxf_agrees_on_the_extents_of_straight_figures(mask: Mask) -> None:
    box = appsettings.update_extents(mask.document)
    assert (box.extmin.x, box.extmin.y, box.extmax.x, box.extmax.y) == BOUNDS
