"""Choices: words are taken, everything else is refused in one line."""

from __future__ import annotations

import pytest

from core.errors import DesignValueError
from core.fabrication.choices import DxfVersion, IslandMode
from core.masks.layers import MaskLayer
from core.masks.options import MaskFormat, MaskOptions


def test_words_become_choices() -> None:
    options = MaskOptions(formats=("gdsii", "GDSII"), dxf_version="r12", islands="Loops", chord_tolerance_um="0.1")
    assert options.formats == (MaskFormat.GDSII,)
    assert options.dxf_version is DxfVersion.R12
    assert options.islands is IslandMode.LOOPS
    assert options.chord_tolerance_um == 0.1
    assert MaskOptions(formats="DXF").formats == (MaskFormat.DXF,)


@pytest.mark.parametrize(
    ("values", "words"),
    [
        ({"formats": ("GDS",)}, "did you mean 'GDSII'"),
        ({"formats": ()}, "choose at least one"),
        ({"dxf_version": "R13"}, "did you mean 'R12'"),
        ({"islands": 3}, "pieces, loops, nested"),
        ({"chord_tolerance_um": 0.0}, "raise it to at least 0.002"),
        ({"chord_tolerance_um": float("nan")}, "finite"),
        ({"clearance_um": 1.0}, "raise it to at least 10"),
        ({"chord_tolerence_um": 0.1}, "did you mean 'chord_tolerance_um'"),
        ({"grid_nm": 2.5}, "whole number"),
        ({"grid_nm": 0}, "raise it to at least 1"),
        ({"tone": "positive"}, "drawn shapes are CLEAR, drawn shapes are DARK"),
        ({"copies": "array"}, "inserts, flat"),
        ({"reading": "mirrored"}, "right-reading"),
    ],
)
def test_bad_choices_are_refused_with_a_way_out(values: dict[str, object], words: str) -> None:
    with pytest.raises(DesignValueError, match=words) as caught:
        MaskOptions().with_values(values)
    assert "\n" not in str(caught.value)


@pytest.mark.parametrize("name", ["0", "channel", "L1_CHANNEL", "1CHAN", "L1 CH", ""])
def test_layer_names_that_some_shop_refuses(name: str) -> None:
    # eight characters A-Z 0-9 _ - is the strictest published limit; layer 0 is not for geometry
    with pytest.raises(DesignValueError, match="dxf_layer"):
        MaskLayer(dxf_name=name, gdsii_number=1, meaning="")


@pytest.mark.parametrize("number", [0, 64, -1])
def test_layer_numbers_that_some_reader_refuses(number: int) -> None:
    with pytest.raises(DesignValueError, match="gdsii_layer"):
        MaskLayer(dxf_name="L1_CHAN", gdsii_number=number, meaning="")
