"""Scenes are painted to scale, whether from kept pictures, from pictures of another scale, or as they are.

Truth: rectangles of known place and size; the pixels that show their middles and those just beside them.
"""

from __future__ import annotations

import numpy as np
import pytest
from PySide6.QtCore import QRectF
from PySide6.QtGui import QColor, QImage, QPainter

from app.drawing import chip_painter
from app.drawing.camera import Camera
from app.drawing.chip_images import BlockImage, BlockImages
from app.drawing.chip_painter import ScenePainter
from app.drawing.chip_paths import BlockStore
from app.look import LIGHT
from core.chip.scene import Block, BlockKind, Figure, Layer, PlacedBlock, Scene
from tests.app.drawing.chip_scenes import channel_block, plate_scene, rectangle

WIDTH, HEIGHT = 600, 400
INK = QColor(LIGHT.ink_soft).rgb()
ROW = 21  # marks in a block, enough to be worth a picture


@pytest.fixture
def comb():
    """Return a row of marks 100 um wide and 400 um high, 300 um apart, placed twice."""
    marks = tuple(
        Figure(layer=Layer.MARKS, outline=rectangle(300.0 * n - 50.0, -200.0, 300.0 * n + 50.0, 200.0))
        for n in range(-(ROW // 2), ROW // 2 + 1)
    )
    block = Block(name="COMB", kind=BlockKind.MARKS, figures=marks)
    placed = (PlacedBlock(block=block, dy_um=1000.0), PlacedBlock(block=block, dx_um=40.0, dy_um=-1000.0))
    return Scene(top=Block(name="TOP", kind=BlockKind.CHIP, placed=placed))


def painted(painter, scene, camera, *, has_time=True, **how):
    image = QImage(WIDTH, HEIGHT, QImage.Format.Format_RGB32)
    image.fill(QColor("white"))
    with QPainter(image) as to:
        to.setRenderHint(QPainter.RenderHint.Antialiasing)
        is_complete = painter.paint(to, scene, camera, QRectF(image.rect()), has_time=has_time, **how)
    return image, is_complete


def camera_of(um_per_px):
    return Camera(left_um=-WIDTH / 2 * um_per_px, top_um=HEIGHT / 2 * um_per_px, um_per_px=um_per_px)


def assert_comb(image, camera):
    """Check that marks are where they belong and gaps between them, for all that can be seen."""
    seen = 0
    for shift_um, y_um in ((0.0, 1000.0), (40.0, -1000.0)):
        for n in range(-(ROW // 2), ROW // 2 + 1):
            for x_um, is_mark in ((300.0 * n + shift_um, True), (300.0 * n + shift_um + 150.0, False)):
                at = camera.to_px((x_um, y_um)).toPoint()
                if not image.rect().contains(at) or n == ROW // 2:
                    continue
                seen += 1
                assert (image.pixel(at) == INK) == is_mark, (n, y_um, is_mark)
    assert seen


@pytest.mark.parametrize("um_per_px", [15.0, 11.7, 7.3])
def test_from_kept_pictures(qapp, comb, um_per_px):
    painter, camera = ScenePainter(), camera_of(um_per_px)
    image, is_complete = painted(painter, comb, camera)
    assert is_complete
    assert_comb(image, camera)
    again, _ = painted(painter, comb, camera)
    assert again == image


@pytest.mark.parametrize("um_per_px", [2.0, 1.0])
def test_as_they_are(qapp, comb, um_per_px, monkeypatch):
    monkeypatch.setattr(chip_painter, "LARGEST_IMAGE_PX", 10.0)
    camera = camera_of(um_per_px).moved(0.0, 1000.0 / um_per_px)
    image, is_complete = painted(ScenePainter(), comb, camera)
    assert is_complete
    assert_comb(image, camera)


@pytest.mark.parametrize("factor", [0.6, 1.8])
def test_a_picture_of_another_scale_stands_in_at_the_right_size(qapp, comb, factor):
    painter = ScenePainter()
    painted(painter, comb, camera_of(11.0))
    camera = camera_of(11.0 * factor)
    image, is_complete = painted(painter, comb, camera, is_moving=True, has_time=False)
    assert not is_complete, "it is to be painted sharp as soon as the view rests"
    edge = camera.to_px((50.0, 1000.0))
    row = [QColor(image.pixel(round(edge.x()) + off, round(edge.y()))).lightness() for off in (-3, 3)]
    assert row[0] < 160 < row[1], "the mark's edge is where it belongs"


def test_what_has_no_time_is_framed_and_comes_later(qapp, monkeypatch):
    scene = plate_scene(copies_across=3, stages=4, channels=2, is_stepped=True)
    box = BlockStore().of(scene.top).bounds_um
    camera = Camera.fitting((box.left(), box.top(), box.right(), box.bottom()), QRectF(20, 20, WIDTH - 40, HEIGHT - 40))
    monkeypatch.setattr(chip_painter, "_FRAME_S", 0.0)
    painter = ScenePainter()
    image, is_complete = painted(painter, scene, camera, has_time=False)
    assert not is_complete
    assert not any(QColor(LIGHT.fluid).rgb() == image.pixel(x, y) for x in range(WIDTH) for y in range(0, HEIGHT, 3))
    sharp, is_complete = painted(painter, scene, camera)
    assert is_complete
    monkeypatch.setattr(chip_painter, "_FRAME_S", 0.002)
    other = ScenePainter()
    for _ in range(200):
        stepwise, is_complete = painted(other, scene, camera, has_time=False)
        if is_complete:
            break
    assert is_complete
    assert stepwise == sharp, "made frame by frame it is the same picture"


def test_out_of_view_nothing_is_painted(qapp, comb):
    image, is_complete = painted(ScenePainter(), comb, camera_of(3.0).moved(5000.0, 0.0))
    assert is_complete
    blank = QImage(image)
    blank.fill(QColor("white"))
    assert image == blank


def test_other_colours_are_not_taken_from_kept_pictures(qapp, comb):
    from app.look import DARK

    painter = ScenePainter()
    painted(painter, comb, camera_of(7.0))
    painter.use_palette(DARK)
    image, _ = painted(painter, comb, camera_of(7.0))
    at = camera_of(7.0).to_px((0.0, 1000.0)).toPoint()
    assert image.pixel(at) == QColor(DARK.ink_soft).rgb()


def test_islands_stay_open_and_overlaps_are_filled(qapp):
    """Truth: an island's middle is outside the channel by its own outline; two rectangles overlap in a square."""
    block = channel_block(4)
    camera = camera_of(9.0)
    image, _ = painted(ScenePainter(), Scene(top=block), camera)
    for island in block.body.outline.islands:
        at = camera.to_px(island.vertices_um.mean(axis=0)).toPoint()
        assert image.pixel(at) == QColor("white").rgb()
    cross = tuple(
        Figure(layer=Layer.MARKS, outline=rectangle(*box)) for box in ((-900, -90, 900, 90), (-90, -900, 90, 900))
    )
    image, _ = painted(ScenePainter(), Scene(top=Block(name="X", kind=BlockKind.MARKS, figures=cross)), camera)
    assert image.pixel(WIDTH // 2, HEIGHT // 2) == INK


def test_bounds_and_weight_of_blocks(qapp):
    """Truth: a block placed twice counts twice; bounds are those of what was placed where."""
    part = Block(
        name="PART", kind=BlockKind.MARKS, figures=(Figure(layer=Layer.MARKS, outline=rectangle(0, 0, 10, 20)),)
    )
    whole = Block(
        name="WHOLE",
        kind=BlockKind.CHIP,
        placed=(PlacedBlock(block=part, dx_um=-100.0), PlacedBlock(block=part, dx_um=50.0, dy_um=5.0)),
    )
    store = BlockStore()
    box = store.of(whole).bounds_um
    assert (box.left(), box.top(), box.right(), box.bottom()) == (-100.0, 0.0, 60.0, 25.0)
    assert store.of(whole).weight == 2 * store.of(part).weight
    assert store.of(Block(name="EMPTY", kind=BlockKind.MARKS)).bounds_um is None
    assert BlockStore([part, whole], store).of(part) is store.of(part), "what is known is not made again"


def test_kept_pictures_are_forgotten_oldest_first(qapp, monkeypatch):
    from app.drawing import chip_images

    monkeypatch.setattr(chip_images, "_MOST_BYTES", 3 * 40 * 40 * 4)
    images = BlockImages()
    blocks = [Block(name=str(n), kind=BlockKind.MARKS) for n in range(5)]
    for block in blocks:
        image = QImage(40, 40, QImage.Format.Format_ARGB32_Premultiplied)
        images.keep(BlockImage(block=block, image=image, corner_um=camera_of(1.0).to_px((0, 0)), um_per_px=2.0))
    assert [images.at(block, 2.0) is not None for block in blocks] == [False, False, True, True, True]
    assert images.near(blocks[4], 3.0) is images.at(blocks[4], 2.0)
    assert images.near(blocks[4], 30.0) is None
    images.clear()
    assert images.near(blocks[4], 3.0) is None


def test_painted_area_is_the_area(qapp):
    """Truth: the exact area of a channel against the covered pixels, walls' lines left out."""
    block = channel_block(6)
    camera = camera_of(20.0)
    image = QImage(WIDTH, HEIGHT, QImage.Format.Format_ARGB32_Premultiplied)
    image.fill(0)
    with QPainter(image) as to:
        to.setRenderHint(QPainter.RenderHint.Antialiasing)
        to.setTransform(camera.transform())
        to.fillPath(BlockStore().of(block).layers[Layer.CHANNELS], QColor("black"))
    alpha = np.frombuffer(image.constBits(), dtype=np.uint8).reshape(HEIGHT, WIDTH, 4)[..., 3]
    covered_um2 = alpha.sum() / 255.0 * camera.um_per_px**2
    assert covered_um2 == pytest.approx(block.body.outline.area_um2, rel=5e-3)
