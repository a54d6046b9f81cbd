"""Files against the design, as six independent readers see them.

Tolerances: a GDSII file against its nm-rounded source 1e-9 relative; the rounded source against
the ideal shape 1 nm and half a nanometre times the perimeter; a DXF file keeps full numbers.
"""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
import pytest
import shapely

from core.geometry.body import channel_body
from core.geometry.pieces import cut_pieces
from core.geometry.shape import build_shape
from core.masks.arcs import with_outermost_points
from core.masks.bare import bare_drawings
from core.masks.gdsii_cells import gdsii_cells, link_length_um
from core.masks.mask_set import write_mask_set
from core.masks.options import MaskOptions
from core.project.files import read_project
from tests.core.masks.readers import DXF_READERS, GDSII_READERS, exact_dxf_area_um2
from tests.core.masks.samples import (
    SETS,
    holes_in,
    ideal_area,
    random_shapes,
    shape_of,
)
from tests.core.masks.truth import covered

if TYPE_CHECKING:
    from collections.abc import Iterator

    from core.geometry.shape import ChannelShape

SAMPLES = Path(__file__).parents[3] / "sample_designs"
TOLERANCE_UM, FINE_UM = 0.02, 0.004  # of chords in the file, and of those the design is measured by
DXF_KINDS = [("R2000", "pieces"), ("R2000", "loops"), ("R12", "pieces"), ("R12", "loops")]


def written(
    folder: Path, shape: ChannelShape, *, dxf_version: str = "R2000", islands: str = "pieces"
) -> dict[str, Path]:
    options = MaskOptions(dxf_version=dxf_version, islands=islands, has_preview=False)
    report = write_mask_set([("Test", shape)], folder=folder, chip_name="Bench 7", options=options)
    return {file.name[-3:]: folder / file.name for file in report.files}


def check_gdsii(path: Path, shape: ChannelShape) -> None:
    fine = ideal_area(shape.outline, FINE_UM)
    for reader in GDSII_READERS:
        rings = reader(path, path.stem)["L1_CHAN"]
        area = covered({"L1_CHAN": rings})["L1_CHAN"]
        assert holes_in(area) == shape.parameters.stages
        assert sum(shapely.Polygon(ring).area for ring in rings) == pytest.approx(area.area, rel=1e-9)
        assert area.bounds == pytest.approx(shape.outline.bounds_um, abs=2e-3)
        assert area.area == pytest.approx(shape.outline.area_um2, abs=(TOLERANCE_UM + 1.5e-3) * fine.length)
        assert area.symmetric_difference(fine).area <= (TOLERANCE_UM + FINE_UM + 0.5e-3) * fine.length


def check_dxf(path: Path, shape: ChannelShape) -> None:
    outline = shape.outline
    assert exact_dxf_area_um2(path) == pytest.approx(outline.area_um2, rel=1e-11)
    for reader in DXF_READERS:
        area = covered(reader(path))["L1_CHAN"]
        assert holes_in(area) == shape.parameters.stages
        # chords of half a degree lose up to 1e-5 of the radius; one degree is measured at 1.2e-6 of the area
        reach = max(map(abs, outline.bounds_um))
        assert area.bounds == pytest.approx(outline.bounds_um, abs=1e-5 * reach)
        assert area.area == pytest.approx(outline.area_um2, rel=2e-5)


@pytest.mark.parametrize("name", SETS)
def test_three_readers_see_the_design_in_gdsii(tmp_path: Path, name: str) -> None:
    check_gdsii(written(tmp_path, shape_of(name))["gds"], shape_of(name))


@pytest.mark.parametrize(
    ("name", "dxf_version", "islands"),
    [*((name, *DXF_KINDS[0]) for name in SETS), *(("Long turn, blunt", *kind) for kind in DXF_KINDS[1:])],
)
def test_three_readers_see_the_design_in_dxf(tmp_path: Path, name: str, dxf_version: str, islands: str) -> None:
    check_dxf(written(tmp_path, shape_of(name), dxf_version=dxf_version, islands=islands)["dxf"], shape_of(name))


@pytest.mark.slow
@pytest.mark.parametrize("sample", sorted(SAMPLES.glob("*.sideloop")), ids=lambda path: path.stem)
def test_every_sample_design(tmp_path: Path, sample: Path) -> None:
    for number, parameter_set in enumerate(read_project(sample).sets):
        shape = build_shape(parameter_set.channel)
        version, islands = DXF_KINDS[number % 4]
        files = written(tmp_path / str(number), shape, dxf_version=version, islands=islands)
        check_gdsii(files["gds"], shape)
        check_dxf(files["dxf"], shape)


def test_there_are_samples() -> None:
    assert len(list(SAMPLES.glob("*.sideloop"))) >= 4


@pytest.mark.slow
@pytest.mark.parametrize("part", range(4))
def test_random_designs(tmp_path: Path, part: int) -> None:
    for number, shape in enumerate(random_shapes(4, seed=1000 + part)):
        files = written(tmp_path, shape, dxf_version=DXF_KINDS[number % 4][0], islands=DXF_KINDS[number % 4][1])
        check_gdsii(files["gds"], shape)
        check_dxf(files["dxf"], shape)


def pieces_nm(shape: ChannelShape) -> Iterator[tuple[str, np.ndarray, np.ndarray]]:
    """Yield every placed piece: its name, its exact chords in its cell, and the cell's exact place [nm].

    The origin of a cell is free within the grid: it is set so that the first place is a whole number.
    """
    parts = cut_pieces(shape, link_um=link_length_um(channel_body(shape.parameters)))
    rests: dict[int, np.ndarray] = {}
    for placed in parts.placed:
        piece, place = parts.pieces[placed.piece], np.array([placed.dx_um, placed.dy_um]) * 1000.0
        rest = rests.setdefault(placed.piece, place - np.rint(place))
        yield (
            piece.name,
            with_outermost_points(piece.contour).chords(sagitta_um=TOLERANCE_UM) * 1000.0 + rest,
            place - rest,
        )


@pytest.mark.parametrize("name", SETS)
def test_file_is_the_rounded_source_to_1e_9(tmp_path: Path, name: str) -> None:
    # the source is built here: chords first, then the grid, then whole shifts
    shape = shape_of(name)
    path = written(tmp_path, shape)["gds"]
    source = [shapely.Polygon(np.rint(chords) + np.rint(place)) for _, chords, place in pieces_nm(shape)]
    total = sum(piece.area for piece in source)
    cuts = [chord for piece in cut_pieces(shape, link_um=0.0).pieces for chord in piece.exit]
    widest = max((np.hypot(*(chord[1] - chord[0])) for chord in cuts), default=0.0) * 1000.0
    for reader in GDSII_READERS:
        seen = shapely.transform(covered(reader(path, path.stem))["L1_CHAN"], lambda points: np.rint(points * 1000.0))
        assert sum(seen.intersection(piece).area for piece in source) == pytest.approx(total, rel=1e-9)
        # what the file holds beyond the pieces are the links: two to a stage, about 1 um long at most
        assert -1e-9 * total <= seen.area - total <= 2 * shape.parameters.stages * 2000.0 * widest + 1e-9 * total


@pytest.mark.parametrize("name", SETS)
def test_rounded_pieces_are_within_the_grid_of_the_ideal(name: str) -> None:
    # a cell is rounded once: half the diagonal of a square nanometre; a copy whose place is no
    # whole number of nanometres is moved by as much again
    drawing = bare_drawings([("Test", shape_of(name))], chip_name="Bench 7", options=MaskOptions())[0]
    cells = {cell.name: cell for cell in gdsii_cells(drawing, chord_tolerance_um=TOLERANCE_UM)}
    for piece, chords, place in pieces_nm(shape_of(name)):
        rounded = shapely.union_all([shapely.Polygon(ring) for _, ring in cells[f"TEST__{piece}"].rings_nm])
        in_cell = shapely.Polygon(chords)
        assert in_cell.exterior.hausdorff_distance(rounded.exterior) <= np.sqrt(0.5)
        assert in_cell.symmetric_difference(rounded).area <= 0.5 * in_cell.length
        on_mask = shapely.Polygon(chords + (place - np.rint(place)))
        assert on_mask.exterior.hausdorff_distance(rounded.exterior) <= np.sqrt(2.0)
