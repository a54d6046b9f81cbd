"""Reading mask files back and comparing them with the scene, before anyone is told they are done.

Each distinct block is compared with its own outlines once; where blocks stand is compared number by
number. A wafer of a hundred equal chips is proven as fast as one of them.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from core.errors import ExportError
from core.fabrication.choices import IslandMode
from core.masks.drawing import around
from core.masks.dxf_rules import dxf_problems, order_problems
from core.masks.found import SAME_PLACE_NM, found_in_dxf, found_in_flat_dxf, found_in_gdsii
from core.masks.found_areas import FoundAreas
from core.masks.gdsii_rules import gdsii_problems
from core.masks.layers import ISLAND_LAYER, LAYERS, WORKING_ORDER
from core.masks.read_dxf import read_dxf
from core.masks.read_gdsii import read_gdsii
from core.masks.same_blocks import Allowed, compared_blocks, place_problems
from core.units import NM_PER_UM, UM_PER_MM

if TYPE_CHECKING:
    from pathlib import Path

    from core.masks.drawing import Bounds, MaskDrawing
    from core.masks.found import FoundBlock
    from core.masks.options import MaskOptions

# A corner is rounded in its cell and once more where the cell is placed in its channel: twice half
# the diagonal of one step of the grid. The middle of a link lies half a step inside its arc.
GRID_ERROR_STEPS = 1.5
_EXACT_AREA = 1e-9  # relative, for files that hold arcs and full numbers
_EXACT_UM = 1e-6
_RULES_KEPT = (
    "Every figure is closed and without width; none crosses itself, has a doubled vertex or a spur, "
    "is drawn twice or overlaps another."
)


@dataclass(frozen=True, slots=True, kw_only=True)
class FileProof:
    """What reading a file back has shown.

    Attributes
    ----------
    area_um2 : float
        Area of the channels in the file, islands taken out, copies counted [um^2].
    bounds_um : tuple of float
        (x_min, y_min, x_max, y_max) in the file [um].
    island_count : int
        Number of islands in the file, copies counted.
    sentences : tuple of str
        The proof in words.
    """

    area_um2: float
    bounds_um: Bounds
    island_count: int
    sentences: tuple[str, ...]


def prove_gdsii(path: Path, drawing: MaskDrawing, options: MaskOptions) -> FileProof:
    """Read a GDSII mask back and prove that it is the drawing.

    Parameters
    ----------
    path : Path
        The file.
    drawing : MaskDrawing
        What it should hold.
    options : MaskOptions
        How it was written.

    Raises
    ------
    ExportError
        Naming every rule that is broken and every difference.
    """
    read = read_gdsii(path)
    numbers = [LAYERS[layer].gdsii_number for layer in drawing.layers]
    refuse(path, gdsii_problems(read, top=drawing.stem, layers=numbers, grid_nm=options.grid_nm))
    tree = found_in_gdsii(read, blocks={drawing.name_of(block) for block in drawing.blocks})
    step_um = options.grid_nm / NM_PER_UM
    corner_um = GRID_ERROR_STEPS * step_um
    allowed = Allowed(
        corner_um=corner_um,
        edge_um=options.chord_tolerance_um + corner_um,
        place_nm=0.0,
        bounds_um=2.0 * step_um,
        area_of_edge_um=options.chord_tolerance_um + corner_um,
    )
    return _proof(path, tree, drawing, options, allowed=allowed, is_nested=False, grain_um=0.0)


def prove_dxf(path: Path, drawing: MaskDrawing, options: MaskOptions) -> FileProof:
    """Read a DXF mask back and prove that it is the drawing.

    Parameters
    ----------
    path : Path
        The file.
    drawing : MaskDrawing
        What it should hold.
    options : MaskOptions
        How it was written.

    Raises
    ------
    ExportError
        Naming every rule that is broken and every difference.
    """
    read = read_dxf(path)
    sagitta_um = options.chord_tolerance_um
    layers = drawn_layers(drawing, options)
    x0, y0, x1, y1 = (value / UM_PER_MM for value in drawing.bounds_um)
    problems = dxf_problems(
        read, version=options.dxf_version, layers=layers, bounds_mm=(x0, y0, x1, y1), is_flat=options.is_flat
    )
    is_nested = options.islands is IslandMode.NESTED
    if is_nested and not problems:
        problems += order_problems(read, [LAYERS[layer].dxf_name for layer in WORKING_ORDER])
    refuse(path, problems)
    if options.is_flat:
        tree, problems = found_in_flat_dxf(read, drawing, options)
        refuse(path, problems)
    else:
        tree = found_in_dxf(read, top=drawing.stem, sagitta_um=sagitta_um)
    allowed = Allowed(
        corner_um=_EXACT_UM,
        edge_um=sagitta_um + _EXACT_UM,
        place_nm=SAME_PLACE_NM,
        bounds_um=_EXACT_UM,
        area_share=_EXACT_AREA,
    )
    return _proof(path, tree, drawing, options, allowed=allowed, is_nested=is_nested, grain_um=_EXACT_UM)


def drawn_layers(drawing: MaskDrawing, options: MaskOptions) -> tuple[str, ...]:
    """Return the DXF layers a mask is drawn on; that of the islands last, if there are any."""
    names = tuple(LAYERS[layer].dxf_name for layer in drawing.layers)
    has_islands = options.islands is IslandMode.LOOPS and drawing.island_count
    return (*names, ISLAND_LAYER.dxf_name) if has_islands else names


def refuse(path: Path, problems: list[str]) -> None:
    """Raise one line that names the first problems of a file, if there are any.

    Raises
    ------
    ExportError
        If there is a problem.
    """
    if not problems:
        return
    more = f" (and {len(problems) - 3} more)" if len(problems) > 3 else ""
    raise ExportError(
        f"{path.name} does not read back as the drawing: {'; '.join(problems[:3])}{more}; "
        "nothing was written; change the mask options or the design and try again"
    )


def _proof(
    path: Path,
    tree: dict[str, FoundBlock],
    drawing: MaskDrawing,
    options: MaskOptions,
    *,
    allowed: Allowed,
    is_nested: bool,
    grain_um: float,
) -> FileProof:
    refuse(path, place_problems(tree, drawing, place_nm=allowed.place_nm))
    areas = FoundAreas(tree, is_nested=is_nested)
    refuse(path, areas.problems(grain_um=grain_um))
    same = compared_blocks(areas, drawing, allowed=allowed, sagitta_um=options.chord_tolerance_um)
    refuse(path, same.problems)
    bounds = around(list(areas.boxes(drawing.stem).values()))
    off_um = max(abs(a - b) for a, b in zip(bounds, drawing.bounds_um, strict=True))
    refuse(path, [f"the bounds differ by {off_um:.6g} um"] if off_um > allowed.bounds_um else [])
    channels, islands, blocks = drawing.channel_count, same.island_count, len(drawing.blocks)
    placed = sum(len(block.placed) for block in drawing.blocks)
    sentences = (
        f"Read back: {channels} channel{'s' * (channels != 1)} with {islands} island{'s' * (islands != 1)}, as drawn; "
        f"{blocks} distinct block{'s' * (blocks != 1)} compared, {placed} place{'s' * (placed != 1)} as planned.",
        f"Area {same.area_um2 * 1e-6:.9g} mm2; the drawing with its true arcs has {drawing.area_um2 * 1e-6:.9g} mm2.",
        f"Every corner lies within {same.corner_error_um * NM_PER_UM:.2f} nm of the drawn lines and arcs, "
        f"the bounds within {off_um * NM_PER_UM:.2f} nm.",
        _RULES_KEPT,
    )
    return FileProof(area_um2=same.area_um2, bounds_um=bounds, island_count=islands, sentences=sentences)
