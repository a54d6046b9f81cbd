"""Walls as drawn and as made beside the wanted ones.

Truth: pixels on a wall that is elsewhere than the wanted one, on a straight piece of known width.
"""

from __future__ import annotations

import pytest
from PySide6.QtGui import QColor

from app.drawing.beside import Beside, Walls
from app.look import DARK, LIGHT
from core.geometry.shape import build_shape
from core.parameters import ChannelParameters

WANTED = build_shape(ChannelParameters(stages=0))  # 2000 um long, walls at y = +-100
DRAWN = build_shape(ChannelParameters(stages=0, channel_width_um=120.0))
MADE = build_shape(ChannelParameters(stages=0, channel_width_um=280.0))


@pytest.fixture(params=[LIGHT, DARK])
def palette(request, view):
    view.use_palette(request.param)
    view.show_shape(WANTED)
    view.set_dimensions_shown(False)
    view.clearFocus()
    view.fit(animated=False)
    return request.param


def share_on_wall(view, y_um, colour):
    """Return how much of a wall along x is painted in a colour."""
    image = view.grab().toImage()
    (left, y), (right, _) = view.camera.to_px((200.0, y_um)).toTuple(), view.camera.to_px((1800.0, y_um)).toTuple()
    span = range(round(left), round(right))
    hits = sum(
        any(image.pixelColor(x, round(y) + off).name() == QColor(colour).name() for off in (-1, 0, 1)) for x in span
    )
    return hits / len(span)


def test_dashes_for_drawn_and_dots_for_made(view, palette):
    view.show_beside({Walls.DRAWN: DRAWN, Walls.MADE: MADE})
    drawn, made = share_on_wall(view, 60.0, palette.accent), share_on_wall(view, 140.0, palette.ink)
    assert 0.5 < drawn < 0.85, "seven on, three and a half off"
    assert 0.15 < made < 0.6, "dots, further apart than long"
    assert share_on_wall(view, 140.0, palette.accent) == 0.0


def test_nothing_beside_leaves_the_drawing_as_it_was(view, palette):
    before = view.grab().toImage()
    view.show_beside({Walls.MADE: MADE})
    assert view.grab().toImage() != before
    view.show_beside({})
    assert view.grab().toImage() == before


def test_only_what_is_new_asks_for_paint():
    beside = Beside()
    assert beside.show({Walls.MADE: MADE})
    assert not beside.show({Walls.MADE: MADE})
    assert beside.is_shown
    assert beside.show({})
    assert not beside.is_shown


def test_walls_that_are_none_are_not_drawn():
    beside = Beside()
    beside.show({Walls.MADE: build_shape(ChannelParameters(loop_radius_um=20.0))})
    assert not beside.is_shown
