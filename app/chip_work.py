"""From a project to what the chip's drawing shows: everything is asked of ``core``."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from app.drawing.chip_shown import ShownChip
from core.chip.build import chip_scene
from core.chip.chip_findings import chip_findings
from core.chip.fitting import packed
from core.chip.scene import BlockKind

if TYPE_CHECKING:
    from collections.abc import Callable

    from app.drawing.chip_paths import BlockStore
    from core.chip.plan import ChipPlan
    from core.chip.scene import Block, Scene
    from core.fabrication.process import Process
    from core.findings import Finding
    from core.parameters import ChannelParameters
    from core.project import ChipProject

# A stepped series draws each chip anew, and that much is done beside the window.
_QUICK_STAGES = 1500


@dataclass(frozen=True, slots=True, kw_only=True)
class ChipTask:
    """What the drawing of a chip depends on, and nothing else.

    Attributes
    ----------
    chip_name : str
        Name of the chip, for its lettering.
    plan : ChipPlan
        As the document has it.
    process : Process
        How the chip is made.
    named : tuple of (str, ChannelParameters)
        The sets.
    """

    chip_name: str
    plan: ChipPlan
    process: Process
    named: tuple[tuple[str, ChannelParameters], ...]

    @classmethod
    def of(cls, project: ChipProject) -> ChipTask:
        """Return the task for a project."""
        named = tuple((each.name, each.channel) for each in project.sets)
        return cls(chip_name=project.name, plan=project.plan, process=project.process, named=named)

    @property
    def channels(self) -> dict[str, ChannelParameters]:
        """The sets by name."""
        return dict(self.named)

    @property
    def is_quick(self) -> bool:
        """Whether it is done before the hand notices."""
        if self.plan.plate == "single chip" or not self.plan.series:
            return True
        chips = 1
        for series in self.plan.series:
            chips *= series.steps
        stages = sum(channel.stages for _, channel in self.named)
        return chips * max(stages, 1) <= _QUICK_STAGES


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
    """

    task: ChipTask
    plan: ChipPlan
    shown: ShownChip
    findings: tuple[Finding, ...]


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
    plan = placed_plan(task)
    scene = chip_scene(
        plan, task.channels, process=task.process, chip_name=task.chip_name, drawn=False, leave_out_impossible=True,
        report=report,
    )  # fmt: skip
    findings = chip_findings(task.plan, task.channels, process=task.process, chip_name=task.chip_name)
    shown = ShownChip.of(scene, plan, _chips(scene), older=older)
    return ChipOutcome(task=task, plan=plan, shown=shown, findings=findings)


def _chips(scene: Scene) -> tuple[tuple[Block, float, float], ...]:
    if scene.top.kind is BlockKind.CHIP:
        return ((scene.top, 0.0, 0.0),)
    chips = [placed for placed in scene.top.placed if placed.block.kind is BlockKind.CHIP]
    return tuple((placed.block, placed.dx_um, placed.dy_um) for placed in chips)
