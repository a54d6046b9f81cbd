"""Shipped processes: every number has its source, and those that are printed somewhere are as printed."""

from __future__ import annotations

import pytest

from core.errors import DesignValueError
from core.fabrication.making import making_of
from core.fabrication.process import CUT_KINDS, PROCESS_FIELDS, ProcessKind
from core.fabrication.shipped import CONFIRM, SOURCES, about, cautions_of, shipped_process
from core.parameters import ChannelParameters

NUMBERS = {name for name, field in PROCESS_FIELDS.items() if not field.choices}
CAST = (ProcessKind.CAST_FILM, ProcessKind.CAST_CHROME, ProcessKind.MILLED_MOULD)
LASERS = (ProcessKind.LASER_ACRYLIC, ProcessKind.LASER_FILM)

# (kinds, field, least, most): printed or remembered ranges of the trade
RANGES = [
    ((ProcessKind.CAST_FILM,), "min_drawn_um", 40, 48),  # a film supplier's rule for 10 000 dpi
    ((ProcessKind.CAST_FILM,), "min_radius_um", 2.54, 7.62 + 0.5),  # 1-3 dots of 25 400/10 000 um
    ((ProcessKind.CAST_CHROME,), "min_drawn_um", 1, 6),  # chrome by laser writer, published
    ((ProcessKind.CAST_FILM, ProcessKind.CAST_CHROME), "max_depth_um", 200, 500),  # spinning 0.5-200 um; 500 by volume
    (CAST, "max_depth_to_width", 2, 2),  # Delamarche et al. 1997: 0.2-2 (from memory)
    (CAST, "max_width_to_depth", 10, 10),  # careful, from memory
    (CAST, "collapse_width_to_depth", 20, 20),  # absolute, from memory
    (CAST, "shrink_percent", 1.06, 1.94),  # Lee and Lee 2008 (from memory); a foundry's rule is 1.5
    (CAST, "bond_limit_kpa", 200, 500),  # plasma bond bursts at 200-500 kPa (from memory)
    (LASERS, "kerf_um", 80, 450),  # published range 0.08-0.45 mm
    (LASERS, "wall_lean_deg", 1, 3),  # taper on each side (from memory)
    ((ProcessKind.LASER_ACRYLIC,), "min_drawn_um", 500, 500),  # cuts at least 0.5 mm apart, published
    ((ProcessKind.LASER_ACRYLIC,), "min_gap_um", 1000, 1000),  # webs at least 1 mm, published
    ((ProcessKind.MILLED_CHANNEL, ProcessKind.MILLED_MOULD), "tool_diameter_um", 100, 500),  # common tools
    ((ProcessKind.MILLED_CHANNEL,), "max_depth_to_width", 2, 3),  # depth of cut over diameter (from memory)
    ((ProcessKind.WET_GLASS,), "undercut_ratio", 1, 1),  # isotropic
    ((ProcessKind.KNIFE_FILM,), "min_width_um", 200, 300),  # everyday craft cutters (from memory)
    (tuple(ProcessKind), "safety_factor", 2, 20),  # at least 2
]


@pytest.mark.parametrize("kind", ProcessKind)
def test_every_number_has_a_source(kind: ProcessKind) -> None:
    assert set(SOURCES[kind]) == NUMBERS
    assert all(len(source) > 8 for source in SOURCES[kind].values())
    assert all("\n" not in source for source in SOURCES[kind].values())


@pytest.mark.parametrize(("kinds", "field", "least", "most"), RANGES)
def test_numbers_lie_in_the_printed_ranges(
    kinds: tuple[ProcessKind, ...], field: str, least: float, most: float
) -> None:
    for kind in kinds:
        assert least <= getattr(shipped_process(kind), field) <= most


@pytest.mark.parametrize("kind", ProcessKind)
def test_limits_of_one_process_suit_each_other(kind: ProcessKind) -> None:
    process = shipped_process(kind)
    opening = process.min_width_um - process.kerf_um - 2 * process.bias_um
    if kind is not ProcessKind.WET_GLASS:  # there the depth decides
        assert opening >= process.min_drawn_um - 1.0 or process.tool_diameter_um >= process.min_drawn_um / 2
    assert process.min_wall_um >= process.min_gap_um
    assert process.min_depth_um <= process.min_width_um * process.max_depth_to_width


@pytest.mark.parametrize("kind", ProcessKind)
def test_words_suit_the_kind(kind: ProcessKind) -> None:
    process = shipped_process(kind)
    is_mask = "mask" in kind or "etched" in kind
    assert process.tone == ("drawn shapes are CLEAR" if is_mask else "drawn lines are CUT")
    assert process.islands == ("pieces" if is_mask else "nested")
    assert about(kind).endswith(".")
    assert process == shipped_process(str(kind))


# words that must be said, by the general cautions of the trade (common practice)
CAUTIONS = {
    "wet-etched glass": ("fluoric", "calcium gluconate", "never alone"),
    "laser-cut acrylic": ("PVC", "polycarbonate", "never leave"),
    "laser-cut film": ("PVC", "fumes"),
    "cast, film mask": ("developer", "lamp", "ozone"),
    "milled channel": ("eye protection", "solvents"),
    "knife-cut film": ("blade",),
}


@pytest.mark.parametrize("kind", ProcessKind)
def test_cautions(kind: ProcessKind) -> None:
    said = " ".join(cautions_of(kind))
    for words in CAUTIONS.get(str(kind), ()):
        assert words in said
    for words in ("burst", "factor of at least 2", "not for dosing", "no shut-off valve", "Local rules"):
        assert words in said
    assert ("drop out" in said) == (kind in CUT_KINDS)


def test_the_user_is_asked_to_confirm() -> None:
    assert "starting points" in CONFIRM
    assert "confirm" in CONFIRM


def test_an_unknown_kind_is_refused() -> None:
    for call in (shipped_process, about, cautions_of):
        with pytest.raises(DesignValueError, match=r"did you mean 'milled mould'\?"):
            call("milled mold")


def test_the_first_channel_of_all_can_be_made_by_the_first_process() -> None:
    making = making_of(ChannelParameters(), shipped_process("cast, film mask"))
    assert making.findings == ()
    assert making.made == making.wanted
