"""Shapes shared by the mask tests, and formulas to measure them by."""

from __future__ import annotations

from math import atan, hypot, sin
from typing import TYPE_CHECKING

import numpy as np
import shapely

from core.errors import GeometryError
from core.geometry.shape import build_shape
from core.masks.bare import bare_drawings
from core.masks.options import MaskOptions
from core.parameters import ChannelParameters

if TYPE_CHECKING:
    from collections.abc import Iterator

    from core.geometry.contour import Outline
    from core.geometry.shape import ChannelShape
    from core.masks.drawing import MaskDrawing

# every kind of chain: none, one, both senses, sharp, blunt, long turn, return, uneven widths, long
SETS: dict[str, dict[str, object]] = {
    "Control": {"stages": 0},
    "One loop": {"stages": 1},
    "Two, sharp": {"stages": 2, "nose_radius_um": 0.0, "corner_radius_um": 0.0},
    "Five on one side": {"stages": 5, "sides": "same", "run_bend_deg": 20.0},
    "Six in turn": {"stages": 6, "loop_angle_deg": 37.3, "run_bend_deg": 11.7, "loop_radius_um": 311.7},
    "Long turn, blunt": {
        "stages": 3, "loop_turn_deg": 205.0, "return_length_um": 150.0, "nose_radius_um": 30.0,
        "corner_radius_um": 25.0, "loop_width_um": 120.0, "stage_gap_um": 1500.0,
    },
    "Narrow": {
        "stages": 4, "loop_radius_um": 40.0, "loop_width_um": 20.0, "channel_width_um": 25.0, "stage_gap_um": 60.0,
        "nose_radius_um": 2.0, "corner_radius_um": 1.0,
    },
}  # fmt: skip


def shape_of(name: str) -> ChannelShape:
    """Return a shape of the table above."""
    shape = build_shape(ChannelParameters(**SETS[name]))
    assert shape.outline is not None, shape.findings
    return shape


def drawing_of(name: str, **options: object) -> MaskDrawing:
    """Return the mask drawing of one shape."""
    return bare_drawings([(name, shape_of(name))], chip_name="Bench 7", options=MaskOptions(**options))[0]


def random_shapes(count: int, *, seed: int) -> Iterator[ChannelShape]:
    """Yield usable shapes from parameters spread over three decades of size."""
    rng = np.random.default_rng(seed)
    while count:
        angle, radius = rng.uniform(20.0, 90.0), 10.0 ** rng.uniform(1.3, 3.4)
        width = min(radius * rng.uniform(0.1, 1.2), 1900.0)
        values = {
            "loop_angle_deg": angle,
            "run_bend_deg": rng.uniform(0.0, angle),
            "loop_turn_deg": rng.uniform(100.0, 250.0),
            "loop_radius_um": radius,
            "return_length_um": radius * rng.choice([0.0, rng.uniform(0.0, 1.0)]),
            "loop_width_um": max(5.0, width),
            "channel_width_um": max(5.0, width * rng.uniform(0.5, 1.5)),
            "stages": int(rng.integers(0, 9)),
            "sides": str(rng.choice(["same", "alternate"])),
            "stage_gap_um": radius * rng.uniform(0.0, 6.0),
            "lead_in_um": radius * rng.uniform(3.0, 6.0),
            "lead_out_um": radius * rng.uniform(3.0, 6.0),
            "nose_radius_um": width * rng.choice([0.0, rng.uniform(0.0, 0.2)]),
            "corner_radius_um": width * rng.choice([0.0, rng.uniform(0.0, 0.2)]),
        }
        shape = build_shape(ChannelParameters(**values))
        if shape.outline is not None:
            count -= 1
            yield shape


def holes_in(area: shapely.Geometry) -> int:
    """Return the number of holes of an area that must be one piece."""
    if area.geom_type != "Polygon":
        raise GeometryError(f"not one area but {area.geom_type}")
    return len(area.interiors)


def ideal_area(outline: Outline, sagitta_um: float) -> shapely.Polygon:
    """Return an outline as a polygon, straight from its rings."""
    rings = [contour.chords(sagitta_um=sagitta_um) for contour in outline.contours]
    return shapely.Polygon(rings[0], rings[1:])


def area_with_bulges(corners: list[tuple[float, float]], bulges: list[float]) -> float:
    """Return the exact signed area of a ring of lines and arcs."""
    ox, oy = corners[0]
    total = 0.0
    for (x0, y0), (x1, y1), bulge in zip(corners, corners[1:] + corners[:1], bulges, strict=True):
        total += 0.5 * ((x0 - ox) * (y1 - oy) - (x1 - ox) * (y0 - oy))
        if bulge:
            theta = 4.0 * atan(bulge)
            radius = hypot(x1 - x0, y1 - y0) / (2.0 * sin(abs(theta) / 2.0))
            total += 0.5 * radius**2 * (theta - sin(theta))
    return total
