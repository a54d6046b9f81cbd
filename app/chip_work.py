"""From a project to what the chip's drawing shows: everything is asked of ``core``."""

from __future__ import annotations

import time
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from app.drawing.chip_shown import ShownChip
from core.chip.build import chip_scene
from core.chip.chip_findings import chip_findings
from core.chip.fitting import packed
from core.chip.scene import BlockKind
from core.operating import OperatingPoint
from core.project.checks import project_findings

if TYPE_CHECKING:
    from collections.abc import Callable

    from app.drawing.chip_paths import BlockStore
    from core.chip.plan import ChipPlan
    from core.chip.scene import Block, Scene
    from core.fabrication.process import Process
    from core.findings import Finding
    from core.parameters import ChannelParameters
    from core.project import ChipProject

# So many stages are drawn and checked before the hand notices; a stepped series counts each of its chips.
_QUICK_STAGES = 150
_QUICK_S = 0.05  # what was drawn as fast as this the last time is so again


@dataclass(frozen=True, slots=True, kw_only=True)
class ChipTask:
    """What the drawing of a chip depends on.

    Attributes
    ----------
    project : ChipProject
        The project without what makes no difference to the drawing.
    """

    project: ChipProject

    @classmethod
    def of(cls, project: ChipProject) -> ChipTask:
        """Return the task for a project."""
        sets = tuple(replace(each, notes="") for each in project.sets)
        return cls(
            project=replace(project, sets=sets, operating=OperatingPoint(), lab="", author="", notes="", solved=())
        )

    @property
    def chip_name(self) -> str:
        """Name of the chip, for its lettering."""
        return self.project.name

    @property
    def plan(self) -> ChipPlan:
        """The plan as the document has it."""
        return self.project.plan

    @property
    def process(self) -> Process:
        """How the chip is made."""
        return self.project.process

    @property
    def channels(self) -> dict[str, ChannelParameters]:
        """The sets by name."""
        return {each.name: each.channel for each in self.project.sets}

    def is_quick(self, last: ChipOutcome | None) -> bool:
        """Whether it is done before the hand notices.

        Parameters
        ----------
        last : ChipOutcome or None
            What was drawn before.
        """
        if self._stages() <= _QUICK_STAGES:
            return True
        return last is not None and last.took_s < _QUICK_S and last.task._chips() == self._chips()

    def _chips(self) -> int:
        """Return how many different chips a stepped series can ask for."""
        chips = 1
        for series in self.plan.series if self.plan.plate != "single chip" else ():
            chips *= series.steps
        return chips

    def _stages(self) -> int:
        return self._chips() * sum(each.channel.stages for each in self.project.sets)


@dataclass(frozen=True, slots=True, kw_only=True)
class ChipOutcome:
    """The drawing of a chip, done.

    Attributes
    ----------
    task : ChipTask
        What was to be drawn.
    plan : ChipPlan
        The plan with the place of every channel, packed if nobody placed any.
    shown : ShownChip
        The chip as it is wanted, or the plate full of chips.
    findings : tuple of Finding
        What is wrong with the chip.
    took_s : float
        Processor time that it took [s].
    """

    task: ChipTask
    plan: ChipPlan
    shown: ShownChip
    findings: tuple[Finding, ...]
    took_s: float


def placed_plan(task: ChipTask) -> ChipPlan:
    """Return the plan with the place of every channel: as placed by hand, or packed.

    Raises
    ------
    CoreError
        If the channels cannot be packed.
    """
    return task.plan if task.plan.channels else packed(task.plan, task.channels, task.process, chip_name=task.chip_name)


def chip_outcome(
    task: ChipTask, report: Callable[[int, int, str], None] | None = None, *, older: BlockStore | None = None
) -> ChipOutcome:
    """Return the drawing and the findings of a chip.

    Parameters
    ----------
    task : ChipTask
        What is to be drawn.
    report : callable, optional
        Told step, number of steps and what is being done; whatever it raises ends the work.
    older : BlockStore, optional
        Paths of what was drawn before.

    Raises
    ------
    CoreError
        If nothing can be drawn, such as a plate on which no chip fits.
    """
    begun_s = time.thread_time()
    plan = placed_plan(task)
    scene = chip_scene(
        plan, task.channels, process=task.process, chip_name=task.chip_name, drawn=False, leave_out_impossible=True,
        report=report,
    )  # fmt: skip
    findings = (
        *chip_findings(task.plan, task.channels, process=task.process, chip_name=task.chip_name, report=report),
        *project_findings(task.project),
    )
    shown = ShownChip.of(scene, plan, _chips(scene), older=older)
    return ChipOutcome(task=task, plan=plan, shown=shown, findings=findings, took_s=time.thread_time() - begun_s)


def _chips(scene: Scene) -> tuple[tuple[Block, float, float], ...]:
    if scene.top.kind is BlockKind.CHIP:
        return ((scene.top, 0.0, 0.0),)
    chips = [placed for placed in scene.top.placed if placed.block.kind is BlockKind.CHIP]
    return tuple((placed.block, placed.dx_um, placed.dy_um) for placed in chips)
