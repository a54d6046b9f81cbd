"""Reading mask files back and comparing them with the outline, before anyone is told they are done."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from core.errors import ExportError
from core.masks.comparison import Agreement, compared
from core.masks.dxf_rules import dxf_problems
from core.masks.figure_rules import united
from core.masks.gdsii_rules import gdsii_problems
from core.masks.grid import NM_PER_UM
from core.masks.options import IslandMode
from core.masks.read_dxf import read_dxf
from core.masks.read_gdsii import read_gdsii

if TYPE_CHECKING:
    from pathlib import Path

    from shapely.geometry.base import BaseGeometry

    from core.masks.drawing import MaskDrawing
    from core.masks.options import MaskOptions
    from core.masks.read_dxf import ReadDxf

UM_PER_MM = 1000.0
# A corner is rounded in its cell and once more where the cell is placed: twice half the diagonal
# of a 1 nm square. The middle of a link lies half a nanometre inside its arc.
GRID_ERROR_UM = 1.5e-3
BOUNDS_ERROR_UM = 2e-3
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
        Area of the channels in the file [um^2].
    bounds_um : tuple of float
        (x_min, y_min, x_max, y_max) in the file [um].
    island_count : int
        Number of islands in the file.
    sentences : tuple of str
        The proof in words.
    """

    area_um2: float
    bounds_um: tuple[float, float, float, float]
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
    import shapely

    read = read_gdsii(path)
    _refuse(path, gdsii_problems(read, top=drawing.stem, layer=options.channel_layer.gdsii_number))
    area = united([shapely.Polygon(ring / NM_PER_UM) for ring in read.figures(drawing.stem)])
    agreement = compared(area, drawing, sagitta_um=options.chord_tolerance_um)
    edge_um = options.chord_tolerance_um + GRID_ERROR_UM
    allowed = _Allowed(
        corner_um=GRID_ERROR_UM, edge_um=edge_um, bounds_um=BOUNDS_ERROR_UM, area_um2=edge_um * agreement.edge_length_um
    )
    return _proof(path, agreement, drawing, allowed)


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
    problems = dxf_problems(
        read,
        version=options.dxf_version,
        layers=layers,
        bounds_mm=tuple(value / UM_PER_MM for value in drawing.bounds_um),  # type: ignore[arg-type]  # four numbers
        sagitta_mm=sagitta_um / UM_PER_MM,
    )
    _refuse(path, problems)
    agreement = compared(_dxf_area(read, layers, sagitta_um), drawing, sagitta_um=sagitta_um)
    agreement = replace(agreement, area_um2=_exact_area_um2(read, layers), bounds_um=_exact_bounds_um(read))
    allowed = _Allowed(
        corner_um=_EXACT_UM,
        edge_um=sagitta_um + _EXACT_UM,
        bounds_um=_EXACT_UM,
        area_um2=_EXACT_AREA * drawing.area_um2,
    )
    return _proof(path, agreement, drawing, allowed)


def _dxf_area(read: ReadDxf, layers: tuple[str, ...], sagitta_um: float) -> BaseGeometry:
    """Return the area as a mask writer would expose it, islands taken out, arcs as chords [um]."""
    import shapely

    channel, *islands = (
        united(
            [
                shapely.Polygon(loop.chords(sagitta_um / UM_PER_MM) * UM_PER_MM)
                for loop in read.loops
                if loop.layer == layer
            ]
        )
        for layer in layers
    )
    return channel.difference(islands[0]) if islands else channel


def _exact_area_um2(read: ReadDxf, layers: tuple[str, ...]) -> float:
    signs = dict(zip(layers, (1.0, -1.0), strict=False))
    return UM_PER_MM**2 * sum(signs[loop.layer] * abs(loop.area) for loop in read.loops)


def _exact_bounds_um(read: ReadDxf) -> tuple[float, float, float, float]:
    x0, y0, x1, y1 = zip(*(loop.bounds for loop in read.loops), strict=True)
    return min(x0) * UM_PER_MM, min(y0) * UM_PER_MM, max(x1) * UM_PER_MM, max(y1) * UM_PER_MM


def drawn_layers(drawing: MaskDrawing, options: MaskOptions) -> tuple[str, ...]:
    """Return the DXF layers a mask is drawn on: the channel's, and the islands' if there are any."""
    if options.islands is IslandMode.LOOPS and drawing.island_count:
        return options.channel_layer.dxf_name, options.island_layer.dxf_name
    return (options.channel_layer.dxf_name,)


@dataclass(frozen=True, slots=True, kw_only=True)
class _Allowed:
    """Largest differences that are no mistake."""

    corner_um: float
    edge_um: float
    bounds_um: float
    area_um2: float


def _proof(path: Path, agreement: Agreement, drawing: MaskDrawing, allowed: _Allowed) -> FileProof:
    _refuse(path, _differences(agreement, drawing, allowed))
    channels, islands = agreement.channel_count, agreement.island_count
    sentences = (
        f"Read back: {channels} channel{'s' * (channels != 1)} with {islands} island{'s' * (islands != 1)}, as drawn.",
        f"Area {agreement.area_um2 * 1e-6:.9g} mm2; the drawing with its true arcs has "
        f"{drawing.area_um2 * 1e-6:.9g} mm2.",
        f"Every corner lies within {agreement.corner_error_um * NM_PER_UM:.2f} nm of the drawn lines and arcs, "
        f"the bounds within {_bounds_error_um(agreement, drawing) * NM_PER_UM:.2f} nm.",
        _RULES_KEPT,
    )
    return FileProof(
        area_um2=agreement.area_um2, bounds_um=agreement.bounds_um, island_count=islands, sentences=sentences
    )


def _bounds_error_um(agreement: Agreement, drawing: MaskDrawing) -> float:
    return max(abs(a - b) for a, b in zip(agreement.bounds_um, drawing.bounds_um, strict=True))


def _differences(agreement: Agreement, drawing: MaskDrawing, allowed: _Allowed) -> list[str]:
    problems = []
    if agreement.channel_count != len(drawing.channels):
        problems.append(f"{agreement.channel_count} separate areas, should be {len(drawing.channels)}")
    if agreement.island_count != drawing.island_count:
        problems.append(f"{agreement.island_count} islands, should be {drawing.island_count}")
    for what, value, limit, unit in (
        ("the area differs by", abs(agreement.area_um2 - drawing.area_um2), allowed.area_um2, "um2"),
        ("the bounds differ by", _bounds_error_um(agreement, drawing), allowed.bounds_um, "um"),
        ("a corner is off the drawing by", agreement.corner_error_um, allowed.corner_um, "um"),
        ("an edge is off the drawing by", agreement.gap_um, allowed.edge_um, "um"),
    ):
        if not value <= limit:
            problems.append(f"{what} {value:.6g} {unit}, allowed {limit:.6g}")
    return problems


def _refuse(path: Path, problems: list[str]) -> None:
    if not problems:
        return
    more = f" (and {len(problems) - 3} more)" if len(problems) > 3 else ""
    raise ExportError(
        f"{path.name} does not read back as the drawing: {'; '.join(problems[:3])}{more}; "
        "nothing was written; change the mask options or the design and try again"
    )
