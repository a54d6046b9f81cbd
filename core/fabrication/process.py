"""The process that makes a chip: its limits, what it does to a drawing, and how its files should be.

Every value is a starting point, to be confirmed with the shop that makes the chip.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from typing import TYPE_CHECKING, NoReturn

from core.errors import DesignValueError
from core.fabrication.choices import Allowance, CopyMode, DxfVersion, IslandMode, ReadingSide, Tone, ToolRuns
from core.fields import CheckedValues, Field, choice_field, length_field, table_of

if TYPE_CHECKING:
    from collections.abc import Mapping

LIMITS, DEPTHS, CHANGES, STRENGTH, FILES = (
    "Smallest features", "Depth", "What making changes", "Bond", "Drawing and files",
)  # fmt: skip


class ProcessKind(StrEnum):
    """Ways of making a chip that are known here; the value is the word used in files."""

    CAST_FILM = "cast, film mask"
    CAST_CHROME = "cast, chrome mask"
    WET_GLASS = "wet-etched glass"
    DRY_SILICON = "dry-etched silicon"
    LASER_ACRYLIC = "laser-cut acrylic"
    LASER_FILM = "laser-cut film"
    MILLED_CHANNEL = "milled channel"
    MILLED_MOULD = "milled mould"
    KNIFE_FILM = "knife-cut film"


MASK_KINDS = frozenset({ProcessKind.CAST_FILM, ProcessKind.CAST_CHROME, ProcessKind.WET_GLASS, ProcessKind.DRY_SILICON})
ETCHED_KINDS = frozenset({ProcessKind.WET_GLASS, ProcessKind.DRY_SILICON})
MILLED_KINDS = frozenset({ProcessKind.MILLED_CHANNEL, ProcessKind.MILLED_MOULD})
STIFF_KINDS = ETCHED_KINDS | {ProcessKind.LASER_ACRYLIC, ProcessKind.MILLED_CHANNEL}
CUT_KINDS = frozenset({ProcessKind.LASER_ACRYLIC, ProcessKind.LASER_FILM, ProcessKind.KNIFE_FILM})


def tool_runs_of(kind: ProcessKind) -> ToolRuns:
    """Return where a tool runs: round the channels of a raised mould, else in the channel itself."""
    return ToolRuns.OUTSIDE_CHANNEL if kind is ProcessKind.MILLED_MOULD else ToolRuns.IN_CHANNEL


PROCESS_FIELDS: dict[str, Field] = table_of(
    choice_field("kind", "Process", LIMITS, ProcessKind, "How the chip is made."),
    length_field("min_width_um", "Smallest width", LIMITS, 50.0, (0.1, 5000.0), 5.0,
                 "Narrowest channel that comes out reliably."),
    length_field("min_gap_um", "Smallest gap", LIMITS, 50.0, (0.1, 5000.0), 5.0,
                 "Narrowest solid between two walls of one channel, an island's neck for instance."),
    length_field("min_wall_um", "Smallest wall", LIMITS, 200.0, (0.1, 10000.0), 50.0,
                 "Narrowest solid between two channels, or between a channel and a foreign port, that keeps tight."),
    length_field("min_drawn_um", "Smallest drawn feature", LIMITS, 48.0, (0.1, 5000.0), 5.0,
                 "Narrowest line or gap on the mask or tool path itself, after all compensation."),
    length_field("min_radius_um", "Smallest radius", LIMITS, 8.0, (0.0, 5000.0), 1.0,
                 "Corners come out at least this round, whatever is drawn."),
    length_field("min_depth_um", "Smallest depth", DEPTHS, 5.0, (0.1, 10000.0), 5.0, "Shallowest channel."),
    length_field("max_depth_um", "Largest depth", DEPTHS, 200.0, (0.1, 10000.0), 10.0, "Deepest channel."),
    Field(name="max_depth_to_width", label="Depth to width at most", group=DEPTHS, default=2.0, unit="",
          minimum=0.01, maximum=100.0, step=0.1,
          help="Channels deeper, or solids taller, than this many times their width lean, break off or stay closed."),
    Field(name="max_width_to_depth", label="Width to depth, careful", group=DEPTHS, default=10.0, unit="",
          minimum=0.1, maximum=1000.0, step=1.0,
          help="Wider channels than this many times their depth may sag: a warning."),
    Field(name="collapse_width_to_depth", label="Width to depth at most", group=DEPTHS, default=20.0, unit="",
          minimum=0.1, maximum=1000.0, step=1.0,
          help="Wider channels than this many times their depth close: an error."),
    length_field("bias_um", "Edge bias", CHANGES, 0.0, (-500.0, 500.0), 0.5,
                 "How far every wall moves outwards from the drawing to the part; negative where channels narrow."),
    Field(name="undercut_ratio", label="Undercut", group=CHANGES, default=0.0, unit="",
          minimum=0.0, maximum=3.0, step=0.05,
          help="Sideways etching on each side, as a part of the depth; 1 for isotropic etching."),
    length_field("kerf_um", "Kerf", CHANGES, 0.0, (0.0, 3000.0), 10.0,
                 "Width that the beam or blade takes away, centred on the drawn line."),
    length_field("tool_diameter_um", "Tool diameter", CHANGES, 0.0, (0.0, 6000.0), 50.0,
                 "Diameter of the smallest tool that runs along the walls; 0 for none."),
    choice_field("tool_runs", "Tool runs", CHANGES, ToolRuns,
                 "In the channel when it is milled straight into the part; outside when a raised mould is milled."),
    choice_field("allowance", "Allowance", CHANGES, Allowance,
                 "Who allows for bias, undercut, kerf and tool: the drawing, the shop, or nobody. Never both."),
    Field(name="shrink_percent", label="Shrinkage", group=CHANGES, default=1.5, unit="%",
          minimum=0.0, maximum=20.0, step=0.1,
          help="How much smaller the part comes out than its mould, along the plane."),
    Field(name="wall_lean_deg", label="Wall lean", group=CHANGES, default=0.0, unit="deg",
          minimum=0.0, maximum=60.0, step=0.5,
          help="How far each wall leans from upright, so that the channel is narrower at its floor."),
    Field(name="bond_limit_kpa", label="Bond holds", group=STRENGTH, default=200.0, unit="kPa",
          minimum=0.1, maximum=100000.0, step=10.0, help="Pressure at which the weakest bond of the chip may fail."),
    Field(name="safety_factor", label="Safety factor", group=STRENGTH, default=2.0, unit="",
          minimum=1.0, maximum=20.0, step=0.5,
          help="The bond's limit is divided by this before the pressure in the channel is compared with it."),
    Field(name="grid_nm", label="Drawing grid", group=FILES, default=1, unit="nm", minimum=1, maximum=10000, step=1,
          whole=True, help="Every corner of a mask lies on a multiple of this. The writer's address unit, if known."),
    choice_field("tone", "Tone", FILES, Tone, "What the drawn shapes become on the mask."),
    choice_field("reading", "Reading side", FILES, ReadingSide,
                 "From which side the drawing reads correctly. Files are never mirrored."),
    choice_field("formats", "Formats", FILES, ("DXF and GDSII", "DXF", "GDSII"), "Which files are written."),
    choice_field("dxf_version", "DXF version", FILES, DxfVersion, "R12 for the oldest readers only."),
    choice_field("islands", "Islands", FILES, IslandMode,
                 "Pieces: butting shapes without holes. Loops: islands on a layer of their own, combined by NOT. "
                 "Nested: plain loops within loops, inner ones first, for cutting."),
    choice_field("dxf_copies", "Copies in DXF", FILES, CopyMode,
                 "Repeated shapes as inserts of a block, or everything written out."),
    length_field("chord_tolerance_um", "Chord tolerance", FILES, 0.02, (0.002, 5.0), 0.01,
                 "Largest distance between an arc and the straight edges that stand for it in GDSII files."),
)  # fmt: skip


@dataclass(frozen=True, slots=True, kw_only=True)
class Process(CheckedValues):
    """One checked process; every field is described in ``PROCESS_FIELDS``.

    Raises
    ------
    DesignValueError
        If a value has the wrong kind or lies out of bounds, or two values contradict each other.
    """

    kind: str = str(ProcessKind.CAST_FILM)
    min_width_um: float = 50.0
    min_gap_um: float = 50.0
    min_wall_um: float = 200.0
    min_drawn_um: float = 48.0
    min_radius_um: float = 8.0
    min_depth_um: float = 5.0
    max_depth_um: float = 200.0
    max_depth_to_width: float = 2.0
    max_width_to_depth: float = 10.0
    collapse_width_to_depth: float = 20.0
    bias_um: float = 0.0
    undercut_ratio: float = 0.0
    kerf_um: float = 0.0
    tool_diameter_um: float = 0.0
    tool_runs: str = str(ToolRuns.IN_CHANNEL)
    allowance: str = str(Allowance.IN_DRAWING)
    shrink_percent: float = 1.5
    wall_lean_deg: float = 0.0
    bond_limit_kpa: float = 200.0
    safety_factor: float = 2.0
    grid_nm: int = 1
    tone: str = str(Tone.CLEAR)
    reading: str = str(ReadingSide.LAYER_DOWN)
    formats: str = "DXF and GDSII"
    dxf_version: str = str(DxfVersion.R2000)
    islands: str = str(IslandMode.PIECES)
    dxf_copies: str = str(CopyMode.INSERTS)
    chord_tolerance_um: float = 0.02

    @classmethod
    def table(cls) -> Mapping[str, Field]:
        """Return the table that describes the fields."""
        return PROCESS_FIELDS

    @property
    def has_stiff_walls(self) -> bool:
        """Whether the chip is of glass, silicon or hard plastic, which do not bulge under the pressure of a bond."""
        return self.kind in STIFF_KINDS

    def __post_init__(self) -> None:
        """Check every value, and those that must go together."""
        CheckedValues.__post_init__(self)
        self._in_order("min_depth_um", "max_depth_um")
        self._in_order("max_width_to_depth", "collapse_width_to_depth")
        if self.max_depth_to_width * self.max_width_to_depth < 1.0:
            limit = 1.0 / self.max_width_to_depth
            self._refuse("max_depth_to_width", f"at least {limit:g}, which is 1/max_width_to_depth",
                         "raise it or max_width_to_depth, or no section at all passes both")  # fmt: skip
        self._changes_suit_the_kind()
        self._files_suit_the_kind()

    def _changes_suit_the_kind(self) -> None:
        """Refuse changes by means that this kind of making does not use."""
        kind = ProcessKind(self.kind)
        for name, kinds in (
            ("undercut_ratio", ETCHED_KINDS),
            ("kerf_um", CUT_KINDS),
            ("tool_diameter_um", MILLED_KINDS),
        ):
            if getattr(self, name) > 0.0 and kind not in kinds:
                self._refuse(name, f"0 for {kind}", f"set it to 0, or choose one of {', '.join(sorted(kinds))}")
        if self.wall_lean_deg > 0.0 and kind is ProcessKind.WET_GLASS and self.undercut_ratio > 0.0:
            self._refuse("wall_lean_deg", f"0 for {kind}, whose walls are round",
                         "set it to 0, or undercut_ratio to 0 and give the shift as bias_um")  # fmt: skip
        if kind in MILLED_KINDS:
            self._must_be("tool_runs", (tool_runs_of(kind),))

    def _files_suit_the_kind(self) -> None:
        """Refuse words for a mask where lines are cut or milled, and the other way round."""
        choices = {name: PROCESS_FIELDS[name].choices for name in ("tone", "reading", "islands")}
        if self.kind in MASK_KINDS:
            self._must_be("tone", tuple(word for word in choices["tone"] if word != Tone.CUT))
            self._must_be("reading", tuple(word for word in choices["reading"] if word != ReadingSide.TOOL_SIDE))
            self._must_be("islands", tuple(word for word in choices["islands"] if word != IslandMode.NESTED))
            return
        self._must_be("tone", (Tone.CUT,))
        self._must_be("reading", (ReadingSide.TOOL_SIDE,))
        self._must_be("islands", (IslandMode.NESTED,))
        self._must_be("formats", ("DXF",))

    def _must_be(self, name: str, words: tuple[str, ...]) -> None:
        if getattr(self, name) not in words:
            self._refuse(name, f"for {self.kind}: {' or '.join(words)}", f"choose {words[0]}, or another kind")

    def _in_order(self, low: str, high: str) -> None:
        if getattr(self, low) > getattr(self, high):
            self._refuse(low, f"at most {high}, which is {getattr(self, high):g}", f"lower {low} or raise {high}")

    def _refuse(self, name: str, limit: str, way_out: str) -> NoReturn:
        raise DesignValueError(field=name, value=getattr(self, name), limit=limit, way_out=way_out)
