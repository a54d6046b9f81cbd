"""One order for a shop: the chip of a project as a mask set, with a sheet that says all that files cannot."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from core.chip.build import chip_scene
from core.chip.plan import ChipChannel
from core.chip.scene import BlockKind
from core.errors import DesignRefusedError, shown
from core.fabrication.making import making_of
from core.fabrication.shipped import cautions_of
from core.masks.mask_set import write_scene
from core.masks.options import options_of
from core.masks.order_facts import SheetFacts, process_facts
from core.project.checks import errors_in, held_name, order_findings, placed_sets
from core.project.folds import fold_notes

if TYPE_CHECKING:
    import os
    from collections.abc import Callable, Sequence
    from datetime import date as Date

    from core.chip.scene import Scene
    from core.masks.options import MaskOptions
    from core.masks.report import MaskSetReport
    from core.project.checks import FoundIn
    from core.project.chip import ChipProject

    Report = Callable[[int, int, str], None]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Order:
    """What is sent to a shop, before it is written.

    Attributes
    ----------
    name : str
        Name of the chip, from which files are named.
    scene : Scene
        What goes on the mask.
    options : MaskOptions
        How the files shall be.
    facts : SheetFacts
        What the sheet says besides the drawing.
    left_out : tuple of str
        Names of the sets that are on the chip and could not be drawn.
    """

    name: str
    scene: Scene
    options: MaskOptions
    facts: SheetFacts
    left_out: tuple[str, ...] = ()

    def write(self, folder: str | os.PathLike[str], *, report: Report | None = None) -> MaskSetReport:
        """Write files, order sheet and previews; all of them or none.

        Parameters
        ----------
        folder : path
            Where the files go; made if missing.
        report : callable, optional
            Called with step, number of steps and what is being done. Whatever it raises ends the work and leaves
            no file.

        Returns
        -------
        MaskSetReport
            Files with sizes, checksums and proofs.

        Raises
        ------
        ExportError
            If a file cannot be written, or one does not read back as drawn. The folder is then as it was before.
        """
        return write_scene(
            self.scene, folder=folder, stem=self.name, options=self.options, facts=self.facts, report=report
        )


def order_of(project: ChipProject, *, date: Date, force: bool = False, report: Report | None = None) -> Order:
    """Return the order for a project's chip.

    Parameters
    ----------
    project : ChipProject
        The chip, its sets and its process.
    date : datetime.date
        Day of the order, for the sheet; the same input gives the same bytes.
    force : bool
        True: in spite of error findings. They stand on the sheet, and channels that cannot be drawn are left out.
    report : callable, optional
        As for ``Order.write``.

    Raises
    ------
    DesignRefusedError
        If there are error findings and ``force`` is not given, or nothing is there that could be drawn.
    """
    errors = errors_in(order_findings(project), project)
    if errors and not force:
        raise DesignRefusedError(_refusal(project, errors))
    scene = chip_scene(
        project.plan,
        {each.name: each.channel for each in project.sets},
        process=project.process,
        chip_name=project.name,
        leave_out_impossible=force,
        report=report,
    )
    left_out = _left_out(project, scene)
    facts = order_facts(project, date=date, forced=errors, left_out=left_out)
    return Order(name=project.name, scene=scene, options=options_of(project.process), facts=facts, left_out=left_out)


def write_order(
    project: ChipProject,
    folder: str | os.PathLike[str],
    *,
    date: Date,
    force: bool = False,
    report: Report | None = None,
) -> MaskSetReport:
    """Write the mask set of a project's chip: ``order_of`` and ``Order.write`` in one."""
    return order_of(project, date=date, force=force, report=report).write(folder, report=report)


def order_facts(
    project: ChipProject, *, date: Date, forced: Sequence[FoundIn] = (), left_out: Sequence[str] = ()
) -> SheetFacts:
    """Return what the order sheet says besides the drawing.

    Parameters
    ----------
    project : ChipProject
        The chip, its lab, and its process.
    date : datetime.date
        Day of the order.
    forced : sequence of (str, Finding)
        Error findings in spite of which the files are written.
    left_out : sequence of str
        Names of sets that could not be drawn.
    """
    missing = (f"set {shown(name)} cannot be drawn and is left out" for name in left_out)
    return SheetFacts(
        chip_title=project.name,
        lab=project.lab,
        author=project.author,
        date=date.isoformat(),
        cautions=cautions_of(project.process.kind),
        notes=(*_making_notes(project), *fold_notes(project), *_name_notes(project)),
        forced=(*map(_told, forced), *missing),
        **process_facts(project.process),  # type: ignore[arg-type]
    )


def _left_out(project: ChipProject, scene: Scene) -> tuple[str, ...]:
    """Return the names of the sets that are missing on some chip of a scene.

    Raises
    ------
    DesignRefusedError
        If no channel is left at all.
    """
    entries = project.plan.channels or tuple(ChipChannel(set_name=each.name) for each in project.sets)
    chips = [block for block in scene.blocks() if block.kind is BlockKind.CHIP]
    drawn = [{placed.channel for placed in chip.placed} for chip in chips]
    missing = [each.set_name for number, each in enumerate(entries) if any(number not in chip for chip in drawn)]
    names = tuple(dict.fromkeys(missing))
    if not any(number in chip for chip in drawn for number in range(len(entries))):
        raise DesignRefusedError(
            f"nothing to write: {', '.join(map(shown, names))} cannot be drawn; see 'check' for what to change"
        )
    return names


def _refusal(project: ChipProject, errors: Sequence[FoundIn]) -> str:
    more = f" (and {len(errors) - 1} more, see 'check')" if len(errors) > 1 else ""
    what = f"chip {shown(project.name)} cannot be made: {_told(errors[0])}{more}"
    return f"{what}; cure {'it' if len(errors) == 1 else 'them'}, or add --force"


def _told(found: FoundIn) -> str:
    name, finding = found
    return f"set {shown(name)}: {finding.message}" if name else finding.message


def _making_notes(project: ChipProject) -> list[str]:
    """Return what was done to the drawing of each set, in the words of the process."""
    notes = (note for each in placed_sets(project) for note in making_of(each.channel, project.process).notes)
    return list(dict.fromkeys(notes))


def _name_notes(project: ChipProject) -> list[str]:
    names = [project.name, *(each.name for each in placed_sets(project))]
    return [f"Files say {held} for {shown(name)}." for name in names if (held := held_name(name)) is not None]
