"""The picture of a mask, read by a parser of its own: areas from its lines and arcs."""

from __future__ import annotations

import re
from math import asin, hypot, sin
from xml.etree import ElementTree

import pytest

from core.fabrication.choices import Tone
from core.masks.bare import bare_drawings
from core.masks.drawing import MaskDrawing
from core.masks.options import MaskOptions
from core.masks.preview import preview_svg
from tests.core.masks.chips import plate, plate_drawing, two_channel_chip
from tests.core.masks.samples import SETS, drawing_of, shape_of

SVG = "{http://www.w3.org/2000/svg}"
NUMBER = r"(-?[\d.]+)"
STEP = re.compile(rf"M{NUMBER} {NUMBER}|L{NUMBER} {NUMBER}|A{NUMBER} {NUMBER} 0 0 ([01]) {NUMBER} {NUMBER}|Z")


def ring_areas(path: str) -> list[float]:
    """Return the signed area of each ring; y points down, so that a ring that turns left is negative."""
    areas: list[float] = []
    x = y = 0.0
    for step in STEP.finditer(path):
        if step[0] == "Z":
            continue
        if step[0][0] == "M":
            areas.append(0.0)
            x, y = float(step[1]), float(step[2])
            continue
        nx, ny = (float(step[3]), float(step[4])) if step[0][0] == "L" else (float(step[8]), float(step[9]))
        areas[-1] += 0.5 * (x * ny - nx * y)
        if step[0][0] == "A":
            radius = float(step[5])
            turn = 2.0 * asin(min(1.0, hypot(nx - x, ny - y) / (2.0 * radius)))
            areas[-1] += (1.0 if step[7] == "1" else -1.0) * 0.5 * radius**2 * (turn - sin(turn))
        x, y = nx, ny
    return areas


@pytest.mark.parametrize("name", SETS)
def test_the_picture_is_the_outline(name: str) -> None:
    drawing = drawing_of(name)
    root = ElementTree.fromstring(preview_svg(drawing, Tone.CLEAR))
    (path,) = root.iter(f"{SVG}path")
    assert path.get("fill-rule") == "evenodd"
    areas = ring_areas(path.get("d"))
    assert len(areas) == 1 + drawing.island_count
    assert -sum(areas) == pytest.approx(drawing.area_um2, rel=1e-4)  # written to a nanometre
    left, top, width, height = map(float, root.get("viewBox").split())
    x0, y0, x1, y1 = drawing.bounds_um
    assert left < x0 < x1 < left + width
    assert top < -y1 < -y0 < top + height


def test_each_channel_is_drawn_and_the_bar_is_labelled() -> None:
    shapes = [(name, shape_of(name)) for name in SETS]
    (drawing,) = bare_drawings(shapes, chip_name="Bench 7", options=MaskOptions(one_file_per_set=False))
    root = ElementTree.fromstring(preview_svg(drawing, Tone.CLEAR))
    assert len(list(root.iter(f"{SVG}path"))) == len(list(root.iter(f"{SVG}use"))) == len(SETS)
    (bar,) = (rect for rect in root.findall(f"{SVG}rect") if rect.get("id") == "bar")
    assert float(bar.get("width")) == 2000.0
    assert root.find(f"{SVG}text").text == "2 mm"


def clear_share(tone: Tone, words: dict[str, str]) -> float:
    """Return how much of the plate is light in the picture, from fills and areas alone."""
    root = ElementTree.fromstring(preview_svg(plate_drawing(), tone))
    (plate,) = (rect for rect in root.findall(f"{SVG}rect") if rect.get("id") == "plate")
    words["title"] = root.find(f"{SVG}title").text
    groups = {group.get("id"): group for group in root.iter(f"{SVG}g")}

    def drawn(group: ElementTree.Element) -> float:
        area = sum(abs(sum(ring_areas(p.get("d")))) for p in group.findall(f"{SVG}path") if p.get("fill") != "none")
        return area + sum(drawn(groups[use.get("href")[1:]]) for use in group.findall(f"{SVG}use"))

    total = float(plate.get("width")) * float(plate.get("height"))
    fills = {path.get("fill") for path in root.iter(f"{SVG}path")} - {"none"}
    lightness = {fill: int(fill[1:3], 16) / 255.0 for fill in (*fills, plate.get("fill"))}
    assert all(abs(lightness[fill] - lightness[plate.get("fill")]) > 0.5 for fill in fills)  # seen at a glance
    share = drawn(groups[None]) / total
    return 1.0 - share if lightness[plate.get("fill")] > 0.5 else share


def test_the_tone_is_what_the_picture_shows() -> None:
    # two words for one plate: what is clear in the one is dark in the other, and both say so
    words: dict[str, str] = {}
    clear = clear_share(Tone.CLEAR, words)
    assert "CLEAR (light here), all else is dark" in words["title"]
    dark = clear_share(Tone.DARK, words)
    assert "DARK (dark here), all else is clear" in words["title"]
    assert clear + dark == pytest.approx(1.0, rel=1e-9)
    assert 0.001 < clear < 0.5
    # lines to be cut fill nothing
    assert clear_share(Tone.CUT, words) == 1.0


def test_a_plate_is_drawn_by_use_of_its_chips() -> None:
    few, many = (plate(two_channel_chip(), columns=n, rows=n) for n in (2, 10))
    sizes = [len(preview_svg(MaskDrawing(scene, stem="Plate"), Tone.CLEAR)) for scene in (few, many)]
    assert sizes[1] - sizes[0] < 96 * 60
