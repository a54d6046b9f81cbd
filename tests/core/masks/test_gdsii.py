"""The bytes of a GDSII file, record by record, against the published layout of the format."""

from __future__ import annotations

import struct

import numpy as np
import pytest

from core.errors import ExportError
from core.geometry.body import channel_body
from core.masks.gdsii import gdsii_bytes
from core.masks.gdsii_cells import GdsiiCell, gdsii_cells, link_length_um
from core.masks.options import MaskOptions
from core.parameters import ChannelParameters
from tests.core.masks.samples import SETS, drawing_of

SQUARE = np.array([[0, 0], [1000, 0], [1000, -2], [0, 2_000_000_000]])


def records(data: bytes) -> list[tuple[int, int, bytes]]:
    found, place = [], 0
    while place < len(data):
        length, kind, form = struct.unpack_from(">HBB", data, place)
        assert length % 2 == 0
        found.append((kind, form, data[place + 4 : place + length]))
        place += length
    return found


def test_every_record_of_a_small_file() -> None:
    odd = GdsiiCell(name="ODD", rings_nm=((5, SQUARE), (63, -SQUARE)))
    cells = [odd, GdsiiCell(name="TOP", references=(("ODD", -5, 7),))]
    stamp = struct.pack(">12h", *(2000, 1, 1, 0, 0, 0) * 2)
    outline = struct.pack(">10i", 0, 0, 1000, 0, 1000, -2, 0, 2_000_000_000, 0, 0)
    other = struct.pack(">10i", 0, 0, -1000, 0, -1000, 2, 0, -2_000_000_000, 0, 0)
    # 1e-3 and 1e-9 as 8-byte reals: values of the published table
    units = bytes.fromhex("3E4189374BC6A7F03944B82FA09B5A54")
    assert records(gdsii_bytes(cells, library="TOP")) == [
        (0x00, 2, struct.pack(">h", 600)),
        (0x01, 2, stamp),
        (0x02, 6, b"TOP\0"),
        (0x03, 5, units),
        *[(0x05, 2, stamp), (0x06, 6, b"ODD\0")],
        *[(0x08, 0, b""), (0x0D, 2, b"\0\5"), (0x0E, 2, b"\0\0"), (0x10, 3, outline), (0x11, 0, b"")],
        *[(0x08, 0, b""), (0x0D, 2, b"\0\x3f"), (0x0E, 2, b"\0\0"), (0x10, 3, other), (0x11, 0, b"")],
        (0x07, 0, b""),
        *[(0x05, 2, stamp), (0x06, 6, b"TOP\0")],
        *[(0x0A, 0, b""), (0x12, 6, b"ODD\0"), (0x10, 3, struct.pack(">2i", -5, 7)), (0x11, 0, b"")],
        (0x07, 0, b""),
        (0x04, 0, b""),
    ]


def test_what_does_not_fit_into_32_bits_is_an_error_and_never_wraps() -> None:
    with pytest.raises(ExportError, match=r"FAR reaches beyond 2\.1 m"):
        gdsii_bytes([GdsiiCell(name="FAR", rings_nm=((1, SQUARE * 2),))], library="FAR")


@pytest.mark.parametrize("name", SETS)
def test_one_cell_for_each_distinct_piece(name: str) -> None:
    cells = gdsii_cells(drawing_of(name), chord_tolerance_um=0.02)
    stages = SETS[name]["stages"]
    sides = 1 if SETS[name].get("sides") == "same" else 2
    kinds = {0: 1, 1: 2}.get(stages, 2 + min(stages - 1, sides))
    assert len(cells) == kinds + 2  # pieces, the channel, the top
    channel, top = cells[-2:]
    assert len(channel.references) == stages + 1
    assert len(channel.rings_nm) == 2 * stages  # the links, across bypass and loop
    assert top.references == ((channel.name, 0, 0),)
    assert not top.rings_nm
    assert all(len(ring) <= 199 for cell in cells for _, ring in cell.rings_nm)


def test_links_are_short_enough_to_be_straight() -> None:
    tight = channel_body(
        ChannelParameters(loop_radius_um=30.0, loop_width_um=40.0, channel_width_um=40.0, nose_radius_um=1.0)
    )
    outer = 30.0 + 20.0
    for grid_nm, half_step_um in ((1, 5e-4), (50, 2.5e-2)):
        link_um = link_length_um(tight, grid_nm=grid_nm)
        assert outer * (1.0 - np.cos(0.5 * link_um / 30.0)) <= 1.0001 * half_step_um
    wide = channel_body(ChannelParameters(loop_radius_um=2000.0, lead_in_um=5000.0, lead_out_um=5000.0))
    assert link_length_um(wide) == 1.0


def test_finer_chords_mean_more_vertices() -> None:
    counts = [
        sum(len(r) for cell in gdsii_cells(drawing_of("One loop"), chord_tolerance_um=t) for _, r in cell.rings_nm)
        for t in (1.0, 0.1, 0.01, MaskOptions.__dataclass_fields__["chord_tolerance_um"].default / 4)
    ]
    assert counts == sorted(set(counts))
