"""Labels find free places. Truth everywhere: two texts on one another cannot be read."""

from __future__ import annotations

from itertools import combinations

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from PySide6.QtCore import QPointF, QRectF

from app.drawing.camera import Camera
from app.drawing.dimensions import dimensions_of
from app.drawing.labels import free_box, place_dimensions
from core.geometry.shape import build_shape
from core.parameters import CHANNEL_FIELDS, ChannelParameters

AREA = QRectF(0.0, 0.0, 1000.0, 600.0)


def placed_on(values, *, zoom=1.0, at=(500.0, 300.0), handled=None, taken=()):
    """Return the dimensions placed on a channel, None if there is no such channel."""
    shape = build_shape(ChannelParameters(**values))
    if shape.outline is None:
        return None
    camera = Camera.fitting(shape.outline.bounds_um, AREA.adjusted(88, 58, -88, -84)).zoomed(zoom, QPointF(*at))
    return place_dimensions(
        dimensions_of(shape, stage=0, unit="um"),
        camera=camera, area=AREA, taken=list(taken), walls=[], handled=handled,
    )  # fmt: skip


@settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(
    st.fixed_dictionaries(
        {
            "stages": st.integers(0, 8),
            "loop_angle_deg": st.integers(25, 80),
            "loop_radius_um": st.integers(150, 600),
            "stage_gap_um": st.integers(0, 1500),
            "sides": st.sampled_from(["alternate", "same"]),
            "return_length_um": st.integers(0, 200),
        }
    ),
    st.floats(0.3, 6.0),
    st.sampled_from([None, *CHANNEL_FIELDS]),
)
def test_labels_lie_apart_and_inside(qapp, values, zoom, handled):
    """No two labels overlap unless the user forces one by handling it; all are inside."""
    angle = values["loop_angle_deg"]
    placed = placed_on({**values, "run_bend_deg": min(45.0, angle)}, zoom=zoom, handled=handled) or []
    for one in placed:
        assert AREA.contains(one.box)
    for one, other in combinations([p for p in placed if not p.is_handled], 2):
        assert not one.box.intersects(other.box), (one.dimension.text, other.dimension.text)


@pytest.mark.parametrize("name", sorted(set(CHANNEL_FIELDS) - {"stages", "sides", "depth_um", "return_length_um"}))
def test_the_handled_one_is_always_there(qapp, name):
    """Also on a channel far too small on the screen for any unasked label, all places being taken."""
    placed = placed_on({}, zoom=0.05, handled=name, taken=[AREA])
    assert [p.dimension.field for p in placed] == [name]
    assert placed[0].is_handled


def test_small_drawings_are_not_littered(qapp):
    """At a twentieth of a fit nothing is written unasked."""
    assert placed_on({}, zoom=0.05) == []


def test_large_stage_tells_all(qapp):
    """One stage that fills the window has room for every measure of a stage."""
    words = {p.dimension.text.split(" ")[0] for p in placed_on({"stages": 1})}
    assert {"radius", "width", "loop", "angle", "leg", "lead", "overall"} <= words


def test_free_box_prefers_what_was_wanted_first():
    """Free and on no line beats free, free beats taken, and nothing is forced unless needed."""
    first, second, third = (QRectF(x, 0.0, 10.0, 10.0) for x in (0.0, 20.0, 40.0))
    line = (0.0, 5.0, 12.0, 5.0)
    assert free_box([first, second], taken=[]) == first
    assert free_box([first, second], taken=[first]) == second
    assert free_box([first, second], taken=[], avoided=([line],)) == second
    assert free_box([first], taken=[], avoided=([line],)) == first
    assert free_box([first, second], taken=[third], avoided=([], [line])) == second
    assert free_box([first], taken=[first]) is None
    assert free_box([first, second], taken=[first, second], is_needed=True) == first


@pytest.mark.parametrize(
    ("start", "end", "expected"),
    [((-5, 5), (15, 5), True), ((5, -5), (5, 15), True), ((-5, -1), (15, -1), False), ((-2, 8), (2, 12), True),
     ((-4, 8), (2, 14), False), ((11, 0), (11, 10), False), ((3, 3), (3, 3), True)],
)  # fmt: skip
def test_lines_under_boxes(start, end, expected):
    """Drawn on squared paper against the box (0, 0) to (10, 10)."""
    box, other = QRectF(0.0, 0.0, 10.0, 10.0), QRectF(100.0, 0.0, 10.0, 10.0)
    lines = [(*start, *end)]
    assert (free_box([box, other], taken=[], avoided=(lines,)) == other) is expected
