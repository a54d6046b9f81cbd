"""Small drawings: right size, right colours, also of what cannot be made."""

from __future__ import annotations

import pytest

from app.drawing.thumbnail import set_thumbnail
from app.look import DARK, LIGHT
from core.geometry.shape import build_shape
from core.parameters import ChannelParameters
from tests.app.drawing.samples import GOOD, IMPOSSIBLE


def colours_in(pixmap):
    """Return the opaque colours of a picture."""
    image = pixmap.toImage()
    pixels = (image.pixelColor(x, y) for x in range(image.width()) for y in range(image.height()))
    return {pixel.name() for pixel in pixels if pixel.alpha() == 255}


@pytest.mark.parametrize("ratio", [1.0, 1.5, 2.0])
def test_size_in_pixels_of_the_screen(qapp, ratio):
    """Truth: device pixels are pixels times the ratio."""
    pixmap = set_thumbnail(GOOD, width_px=160, height_px=60, palette=LIGHT, pixel_ratio=ratio)
    assert (pixmap.width(), pixmap.height()) == (round(160 * ratio), round(60 * ratio))
    assert pixmap.deviceIndependentSize().toTuple() == pytest.approx((160.0, 60.0), abs=1.0)


@pytest.mark.parametrize("palette", [LIGHT, DARK], ids=lambda palette: palette.name)
@pytest.mark.parametrize("stages", [0, 1, 3])
def test_channel_is_filled(qapp, palette, stages):
    """Truth: the palette's colour of the fluid is there, and no sign of an error."""
    shape = build_shape(ChannelParameters(stages=stages))
    seen = colours_in(set_thumbnail(shape, width_px=160, height_px=60, palette=palette, pixel_ratio=2.0))
    assert palette.fluid in seen
    assert palette.error not in seen


def test_impossible_shape_has_lines_and_a_cross(qapp):
    """Truth: the error's colour, and no filled channel."""
    seen = colours_in(set_thumbnail(IMPOSSIBLE, width_px=160, height_px=60, palette=LIGHT, pixel_ratio=2.0))
    assert LIGHT.error in seen
    assert LIGHT.fluid not in seen


def test_longest_channel_is_still_seen(qapp):
    """Truth: 100 stages reach from side to side of a small picture."""
    shape = build_shape(ChannelParameters(stages=100))
    image = set_thumbnail(shape, width_px=160, height_px=60, palette=LIGHT, pixel_ratio=1.0).toImage()
    marked = [x for x in range(160) if any(image.pixelColor(x, y).alpha() > 60 for y in range(60))]
    assert marked[0] < 10
    assert marked[-1] > 150
    assert len(marked) > 130
