"""What the export dialog has done for it in the background: looking at what would be written, and writing it."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from typing import TYPE_CHECKING

from core.errors import CoreError
from core.geometry.shape import build_shape
from core.masks.mask_set import mask_summary, scene_summary, write_mask_set
from core.masks.options import options_of
from core.project.checks import errors_in, order_findings
from core.project.order import order_of, write_order

if TYPE_CHECKING:
    from collections.abc import Callable
    from datetime import date as Date
    from pathlib import Path

    from core.masks.options import MaskOptions
    from core.masks.report import MaskSetReport
    from core.project import ChipProject, ParameterSet
    from core.project.checks import FoundIn

    Report = Callable[[int, int, str], None]


class What(StrEnum):
    """What is written."""

    ORDER = "the chip, as an order"
    BARE = "bare channels"


@dataclass(frozen=True, slots=True, kw_only=True)
class ExportTask:
    """What the user has chosen.

    Attributes
    ----------
    project : ChipProject
        As it stood when the dialog opened.
    what : What
        The chip, or bare channels.
    names : tuple of str
        Sets to write as bare channels.
    bare : tuple of (str, object)
        Choices of ``MaskOptions`` for bare channels only.
    """

    project: ChipProject
    what: What
    names: tuple[str, ...] = ()
    bare: tuple[tuple[str, object], ...] = ()

    @property
    def sets(self) -> list[ParameterSet]:
        """The sets to write as bare channels."""
        return [each for each in self.project.sets if each.name in self.names]

    def options(self) -> MaskOptions:
        """Return the choices for the files: those of the process, and for bare channels the user's own.

        Raises
        ------
        DesignValueError
            If a number cannot be used.
        """
        options = options_of(self.project.process)
        return options.with_values(dict(self.bare)) if self.what is What.BARE else options


@dataclass(frozen=True, slots=True, kw_only=True)
class Prospect:
    """What would be written.

    Attributes
    ----------
    sentences : tuple of str
        Files, layers, sizes and counts; empty when there is an obstacle.
    findings : tuple of (str, Finding)
        Everything that speaks against it, with the name of the set or empty for the chip.
    errors : int
        How many of them forbid an order.
    obstacle : str
        Why nothing can be written, whatever is forced; empty when something can.
    """

    sentences: tuple[str, ...] = ()
    findings: tuple[FoundIn, ...] = ()
    errors: int = 0
    obstacle: str = ""


def prospect_of(task: ExportTask, *, day: Date, report: Report | None = None) -> Prospect:
    """Return what a task would write, without writing it.

    Parameters
    ----------
    task : ExportTask
        What is chosen.
    day : datetime.date
        Day of the order.
    report : callable, optional
        Told how far it is; whatever it raises ends the work.
    """
    project = task.project
    try:
        if task.what is What.BARE:
            shapes = [(each.name, build_shape(each.channel)) for each in task.sets]
            return Prospect(sentences=mask_summary(shapes, task.options(), chip_name=project.name).sentences)
        findings = order_findings(project)
    except CoreError as error:
        return Prospect(obstacle=str(error))
    errors = len(errors_in(findings, project))
    try:
        order = order_of(project, date=day, force=True, report=report)
        sentences = scene_summary(order.scene, stem=order.name, options=order.options).sentences
    except CoreError as error:
        return Prospect(findings=findings, errors=errors, obstacle=str(error))
    return Prospect(sentences=sentences, findings=findings, errors=errors)


def written(task: ExportTask, *, folder: Path, day: Date, is_forced: bool, report: Report) -> MaskSetReport:
    """Write the files, all or none.

    Parameters
    ----------
    task : ExportTask
        What is chosen.
    folder : Path
        Where to.
    day : datetime.date
        Day of the order, for its sheet.
    is_forced : bool
        Write an order in spite of error findings; its sheet says so.
    report : callable
        Told how far it is; whatever it raises ends the work and leaves nothing behind.

    Raises
    ------
    CoreError
        If it cannot be written, or does not read back as drawn.
    """
    if task.what is What.ORDER:
        return write_order(task.project, folder, date=day, force=is_forced, report=report)
    named = []
    for step, each in enumerate(task.sets):
        report(step, len(task.sets), f"Drawing {each.name}")
        named.append((each.name, build_shape(each.channel)))
    return write_mask_set(named, folder=folder, chip_name=task.project.name, options=task.options(), report=report)
