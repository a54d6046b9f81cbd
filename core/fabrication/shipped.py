"""Processes that come with the program: starting points, to be confirmed with the shop."""

from __future__ import annotations

from core.errors import DesignValueError, did_you_mean
from core.fabrication.choices import Allowance, CopyMode, IslandMode, ReadingSide, Tone
from core.fabrication.process import MASK_KINDS, MILLED_KINDS, Process, ProcessKind, tool_runs_of
from core.fabrication.shipped_values import VALUES

CONFIRM = "These values are starting points: confirm every one of them with the shop that makes the chip."

# where each number of each kind comes from: kind -> field -> words
SOURCES: dict[ProcessKind, dict[str, str]] = {
    kind: {name: source for name, (_, source) in rows.items()} for kind, rows in VALUES.items()
}

_ABOUT = {
    ProcessKind.CAST_FILM: "Silicone cast from a mould of thick resist, exposed through a plotted film.",
    ProcessKind.CAST_CHROME: "Silicone cast from a mould of thick resist, exposed through a chrome plate.",
    ProcessKind.WET_GLASS: "Glass etched by acid through a mask, as far sideways as down, and bonded to a lid.",
    ProcessKind.DRY_SILICON: "Silicon etched straight down by plasma through a mask, and bonded to glass.",
    ProcessKind.LASER_ACRYLIC: "A sheet of acrylic cut through along the walls by laser, between two other sheets.",
    ProcessKind.LASER_FILM: "A thin film or tape cut through along the walls by laser, between two other layers.",
    ProcessKind.MILLED_CHANNEL: "Channels milled straight into plastic by a small tool, closed by a lid.",
    ProcessKind.MILLED_MOULD: "Silicone cast from a mould whose raised channels are left standing by the mill.",
    ProcessKind.KNIFE_FILM: "A thin film or tape cut through along the walls by a plotter's knife, between two layers.",
}

_RESULTS = (
    "Results are design estimates: not for dosing, infusion, life support or any use where a wrong flow can hurt a "
    "person. A rectifier without moving parts always leaks backwards; it is no shut-off valve."
)
_LOCAL = "Local rules, the safety sheets of the materials and trained people come before anything said here."
_PRESSURE = (
    "Pressurised chips can burst or throw off their tubing: wear eye protection, use a regulator and a relief valve, "
    "try with liquid before gas, and stay below the weakest bond by a factor of at least 2."
)
_RESIST = (
    "Thick resist and its developer are flammable, irritate and can sensitise the skin: fume hood, gloves, no "
    "ignition sources, collect the waste. Protect eyes from the exposure lamp."
)
_PLASMA = "Plasma and corona make ozone and use high voltage: no solvents nearby."
_ACID = (
    "Hydrofluoric acid only in a laboratory equipped for it and by trained staff, never alone: face shield, suitable "
    "gloves and apron, calcium gluconate at hand. Burns may not hurt at first and poison the whole body."
)
_BEAM = (
    "Never laser-cut PVC, vinyl or other chlorinated plastics: the fumes attack lungs, optics and machine. Keep off "
    "fluoropolymers, ABS and polycarbonate too. Extract and filter the fumes of acrylic; never leave the laser alone."
)
_LOOSE = "Islands are cut free on all sides: keep them on a carrier sheet until they are bonded, or they drop out."
_SOLVENT = "Bonding solvents harm health and burn: ventilate and keep ignition sources away."
_CHIPS = "Milling throws dust and broken tools: wear eye protection."
_DRY = "Plasma etching uses poisonous gases and high voltage: on interlocked machines and by trained staff only."
_BLADE = "Knives cut fingers as well: unload the cutter before changing the blade."

_OWN_CAUTIONS: dict[ProcessKind, tuple[str, ...]] = {
    ProcessKind.CAST_FILM: (_RESIST, _PLASMA),
    ProcessKind.CAST_CHROME: (_RESIST, _PLASMA),
    ProcessKind.WET_GLASS: (_ACID, _RESIST),
    ProcessKind.DRY_SILICON: (_DRY, _RESIST),
    ProcessKind.LASER_ACRYLIC: (_BEAM, _LOOSE, _SOLVENT),
    ProcessKind.LASER_FILM: (_BEAM, _LOOSE),
    ProcessKind.MILLED_CHANNEL: (_CHIPS, _SOLVENT),
    ProcessKind.MILLED_MOULD: (_CHIPS, _PLASMA),
    ProcessKind.KNIFE_FILM: (_BLADE, _LOOSE),
}


def shipped_process(kind: ProcessKind | str) -> Process:
    """Return the starting values of a process.

    Parameters
    ----------
    kind : ProcessKind or str
        Which one.

    Returns
    -------
    Process
        To be copied and edited; where each number comes from is in ``SOURCES``.

    Raises
    ------
    DesignValueError
        If no such process is known.
    """
    kind = _known(kind)
    values: dict[str, object] = {name: value for name, (value, _) in VALUES[kind].items()}
    return Process(kind=str(kind), **values, **_words(kind))  # type: ignore[arg-type]  # the class checks them


def cautions_of(kind: ProcessKind | str) -> tuple[str, ...]:
    """Return what to take care of with a process, the most dangerous first, in general words.

    Raises
    ------
    DesignValueError
        If no such process is known.
    """
    return (*_OWN_CAUTIONS[_known(kind)], _PRESSURE, _RESULTS, _LOCAL)


def about(kind: ProcessKind | str) -> str:
    """Return one sentence on how a chip is made by a process.

    Raises
    ------
    DesignValueError
        If no such process is known.
    """
    return _ABOUT[_known(kind)]


def _known(kind: ProcessKind | str) -> ProcessKind:
    try:
        return ProcessKind(kind)
    except ValueError:
        kinds = tuple(map(str, ProcessKind))
        raise DesignValueError(
            field="kind", value=kind, limit=", ".join(kinds), way_out=did_you_mean(str(kind), kinds)
        ) from None


def _words(kind: ProcessKind) -> dict[str, str]:
    """Return the choices of a kind: who allows, tone, reading side and files."""
    if kind in MASK_KINDS:
        return {}
    return {
        "allowance": Allowance.BY_SHOP if kind in MILLED_KINDS else Allowance.IN_DRAWING,
        "tool_runs": tool_runs_of(kind),
        "tone": Tone.CUT,
        "reading": ReadingSide.TOOL_SIDE,
        "formats": "DXF",
        "islands": IslandMode.NESTED,
        "dxf_copies": CopyMode.FLAT,
    }
