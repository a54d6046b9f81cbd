"""What an order says besides the drawing: facts that only the user, the process or the project know."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from core.fabrication.choices import Allowance
from core.fabrication.process import PROCESS_FIELDS, ProcessKind

if TYPE_CHECKING:
    from core.fabrication.process import Process

TO_FILL_IN = "______________________"
_SUBSTRATES = {
    ProcessKind.CAST_FILM: "photoplotted film",
    ProcessKind.CAST_CHROME: "chrome on soda-lime glass",
    ProcessKind.WET_GLASS: "chrome on soda-lime glass",
    ProcessKind.DRY_SILICON: "chrome on soda-lime glass",
    ProcessKind.LASER_ACRYLIC: "acrylic sheet",
    ProcessKind.LASER_FILM: "film",
    ProcessKind.MILLED_CHANNEL: "plate to be milled",
    ProcessKind.MILLED_MOULD: "mould plate to be milled",
    ProcessKind.KNIFE_FILM: "film",
}
_CHANGES = {
    "bias_um": "edge bias",
    "undercut_ratio": "undercut",
    "kerf_um": "kerf",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class CriticalDimension:
    """The smallest dimension that must come out right.

    Attributes
    ----------
    what : str
        In words, ``channel width`` for instance.
    value_um : float
        As drawn on the mask [um].
    x_um, y_um : float
        Where, in the coordinates of the files' top [um].
    is_drawn : bool
        True: a drawn shape of that width. False: a gap between drawn shapes.
    tolerance_um : float or None
        What is still good, to either side [um]; None for the usual one of its size.
    """

    what: str
    value_um: float
    x_um: float
    y_um: float
    is_drawn: bool = True
    tolerance_um: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class SheetFacts:
    """Facts for the order sheet; what is empty is left on it as a line to be filled in.

    Attributes
    ----------
    chip_title : str
        Name of the chip as the user typed it.
    lab, author, revision : str
        Who orders, who drew it, and which revision it is.
    date : str
        Day of the order, ``2031-05-17``; passed in, so that the same input gives the same bytes.
    process_name : str
        How the chip is made.
    process_values : tuple of (str, str)
        Label and value of every number used.
    allowance : tuple of str
        Sentences: who allows for bias, undercut, kerf and tool; never both.
    scale_words : str
        By whom the scale factor was applied; the factor itself comes from the scene.
    substrate, quantity, defect_level : str
        Words of the order.
    critical : CriticalDimension or None
        None: it is measured on the drawing.
    cautions : tuple of str
        Cautions of the process.
    notes : tuple of str
        The user's own words to the shop.
    forced : tuple of str
        Messages of the error findings in spite of which the files were written.
    """

    chip_title: str
    lab: str = ""
    author: str = ""
    revision: str = ""
    date: str = ""
    process_name: str = ""
    process_values: tuple[tuple[str, str], ...] = ()
    allowance: tuple[str, ...] = ()
    scale_words: str = ""
    substrate: str = ""
    quantity: str = ""
    defect_level: str = ""
    critical: CriticalDimension | None = None
    cautions: tuple[str, ...] = ()
    notes: tuple[str, ...] = ()
    forced: tuple[str, ...] = ()


def process_facts(process: Process) -> dict[str, object]:
    """Return what a process says on the sheet, as fields of ``SheetFacts``.

    Parameters
    ----------
    process : Process
        The process of the project.

    Returns
    -------
    dict
        ``process_name``, ``process_values``, ``allowance``, ``scale_words`` and ``substrate``, for
        ``SheetFacts(chip_title=..., **process_facts(process))``.
    """
    shown = [field for field in PROCESS_FIELDS.values() if field.name != "kind"]
    return {
        "process_name": process.kind,
        "process_values": tuple((field.label, _valued(getattr(process, field.name), field.unit)) for field in shown),
        "allowance": _allowance_sentences(process),
        "scale_words": f"The part comes out {process.shrink_percent:g} % smaller than its mould."
        if process.shrink_percent
        else "",
        "substrate": _SUBSTRATES[ProcessKind(process.kind)],
    }


def _valued(value: float | str, unit: str) -> str:
    number = value if isinstance(value, str) else f"{value:g}"
    return f"{number} {unit}".strip()


def _allowance_sentences(process: Process) -> tuple[str, ...]:
    values = [
        f"{words} {_valued(getattr(process, name), PROCESS_FIELDS[name].unit)}"
        for name, words in _CHANGES.items()
        if getattr(process, name)
    ]
    what = ", ".join(values)
    tool = (
        (f"A tool of {process.tool_diameter_um:g} um runs {process.tool_runs}; its radius is offset by the shop's tool "
         "path, not in the drawing.",)
        if process.tool_diameter_um
        else ()
    )  # fmt: skip
    if not what:
        return ("No edge bias, undercut or kerf is to be allowed for.", *tool)
    who = {
        Allowance.IN_DRAWING: f"Already allowed for IN THE DRAWING: {what}. The shop must not allow for it again.",
        Allowance.BY_SHOP: f"NOT in the drawing: {what}. The SHOP is asked to allow for it, once.",
        Allowance.NOT_AT_ALL: f"Allowed for by NOBODY: {what}. The drawing has the nominal size, "
        "and the shop changes nothing.",
    }
    return (who[Allowance(process.allowance)], *tool)
