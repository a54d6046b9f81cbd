"""A polyline as it was read from a DXF file: its area, bounds and chords, worked out from its bulges.

Complex numbers stand for points here, so that nothing is shared with the arcs of the drawing.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from math import atan, hypot, sin
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Iterator

    from numpy.typing import NDArray

    Floats = NDArray[np.float64]


@dataclass(slots=True)
class ReadLoop:
    """One polyline as it stands in the file.

    Attributes
    ----------
    layer : str
        Name of its layer.
    corners : list of [x, y, bulge]
        As written [drawing units].
    is_closed : bool
        Whether the closed flag is set.
    widest : float
        Largest width found on it; 0 for a line without width.
    declared_count : int
        Number of vertices it claims to have; -1 when it claims none.
    in_paper_space : bool
        Whether it is marked as paper space.
    """

    layer: str = "0"
    corners: list[list[float]] = field(default_factory=list)
    is_closed: bool = False
    widest: float = 0.0
    declared_count: int = -1
    in_paper_space: bool = False

    @property
    def area(self) -> float:
        """Exact signed area: shoelace plus circular segments [square drawing units]."""
        total = 0.0
        for (x0, y0, bulge), (x1, y1, _) in _edges(self.corners):
            total += 0.5 * ((x0 - self.corners[0][0]) * (y1 - y0) - (y0 - self.corners[0][1]) * (x1 - x0))
            if bulge:
                sweep = 4.0 * atan(abs(bulge))
                radius = hypot(x1 - x0, y1 - y0) / (2.0 * sin(sweep / 2.0))
                total += (1.0 if bulge > 0.0 else -1.0) * 0.5 * radius**2 * (sweep - sin(sweep))
        return total

    @property
    def bounds(self) -> tuple[float, float, float, float]:
        """(x_min, y_min, x_max, y_max), bellies of arcs included [drawing units]."""
        points = [complex(x, y) for x, y, _ in self.corners]
        for (x0, y0, bulge), (x1, y1, _) in _edges(self.corners):
            if bulge:
                points += _extremes(complex(x0, y0), complex(x1, y1), bulge)
        x, y = [point.real for point in points], [point.imag for point in points]
        return min(x), min(y), max(x), max(y)

    def chords(self, sagitta: float) -> Floats:
        """Return the loop with arcs as chords no further from them than ``sagitta``, shape (m, 2)."""
        points: list[complex] = []
        for (x0, y0, bulge), (x1, y1, _) in _edges(self.corners):
            start, end = complex(x0, y0), complex(x1, y1)
            points.append(start)
            if bulge and start != end:
                points += _on_arc(start, end, bulge, sagitta)
        return np.array([[point.real, point.imag] for point in points]).reshape(-1, 2)


def _edges(corners: list[list[float]]) -> Iterator[tuple[list[float], list[float]]]:
    return zip(corners, corners[1:] + corners[:1], strict=True)


def _centre(start: complex, end: complex, bulge: float) -> complex:
    return (start + end) / 2.0 + 1j * (end - start) * (1.0 - bulge**2) / (4.0 * bulge)


def _extremes(start: complex, end: complex, bulge: float) -> list[complex]:
    """Return the outermost points of the circle that lie on the arc: to the right of its chord if it turns left."""
    centre = _centre(start, end, bulge)
    radius = abs(start - centre)
    outermost = [centre + radius * direction for direction in (1, 1j, -1, -1j)]
    return [point for point in outermost if ((end - start).conjugate() * (point - start)).imag * bulge < 0.0]


def _on_arc(start: complex, end: complex, bulge: float, sagitta: float) -> list[complex]:
    """Return the points between two ends of an arc."""
    sweep = 4.0 * atan(bulge)
    centre = _centre(start, end, bulge)
    step = 2.0 * np.arccos(max(0.0, 1.0 - sagitta / abs(start - centre)))
    count = max(1, int(np.ceil(abs(sweep) / step)))
    return [centre + (start - centre) * np.exp(1j * sweep * k / count) for k in range(1, count)]
