"""The bytes of a GDSII file, record by record, against the published layout of the format."""

from __future__ import annotations

import struct

import numpy as np
import pytest

from core.errors import ExportError
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
    cells = [GdsiiCell(name="ODD", rings_nm=(SQUARE,)), GdsiiCell(name="TOP", references=(("ODD", -5, 7),))]
    stamp = struct.pack(">12h", *(2000, 1, 1, 0, 0, 0) * 2)
    outline = struct.pack(">10i", 0, 0, 1000, 0, 1000, -2, 0, 2_000_000_000, 0, 0)
    # 1e-3 and 1e-9 as 8-byte reals: values of the published table
    units = bytes.fromhex("3E4189374BC6A7F03944B82FA09B5A54")
    assert records(gdsii_bytes(cells, layer=5, library="TOP")) == [
        (0x00, 2, struct.pack(">h", 600)),
        (0x01, 2, stamp),
        (0x02, 6, b"TOP\0"),
        (0x03, 5, units),
        *[(0x05, 2, stamp), (0x06, 6, b"ODD\0")],
        *[(0x08, 0, b""), (0x0D, 2, b"\0\5"), (0x0E, 2, b"\0\0"), (0x10, 3, outline), (0x11, 0, b"")],
        (0x07, 0, b""),
        *[(0x05, 2, stamp), (0x06, 6, b"TOP\0")],
        *[(0x0A, 0, b""), (0x12, 6, b"ODD\0"), (0x10, 3, struct.pack(">2i", -5, 7)), (0x11, 0, b"")],
        (0x07, 0, b""),
        (0x04, 0, b""),
    ]


def test_what_does_not_fit_into_32_bits_is_an_error_and_never_wraps() -> None:
    with pytest.raises(ExportError, match=r"FAR reaches beyond 2\.1 m"):
        gdsii_bytes([GdsiiCell(name="FAR", rings_nm=(SQUARE * 2,))], layer=1, library="FAR")


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
    assert all(len(ring) <= 199 for cell in cells for ring in cell.rings_nm)


def test_links_are_short_enough_to_be_straight() -> None:
    tight = ChannelParameters(loop_radius_um=10.0, loop_width_um=19.0)
    outer = 10.0 + 9.5
    assert outer * (1.0 - np.cos(0.5 * link_length_um(tight) / 10.0)) <= 5.0001e-4
    assert link_length_um(ChannelParameters(loop_radius_um=2000.0)) == 1.0


def test_finer_chords_mean_more_vertices() -> None:
    counts = [
        sum(len(ring) for cell in gdsii_cells(drawing_of("One loop"), chord_tolerance_um=t) for ring in cell.rings_nm)
        for t in (1.0, 0.1, 0.01, MaskOptions.__dataclass_fields__["chord_tolerance_um"].default / 4)
    ]
    assert counts == sorted(set(counts))
