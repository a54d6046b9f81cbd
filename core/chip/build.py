"""The scene of a chip or of a plate full of chips, for the screen and for mask files."""

from __future__ import annotations

from dataclasses import replace
from functools import lru_cache
from typing import TYPE_CHECKING

from core.chip.bodies import changed_body, channel_of, stance_of, title_of, wanted_body
from core.chip.fitting import packed, wanted_stamps
from core.chip.free_space import Obstacle
from core.chip.furniture import Furniture, furnished
from core.chip.marks import words_stamp
from core.chip.plan import PlateKind
from core.chip.plate import checked_grid, distinct_steps, label_lines, steps_of, values_of
from core.chip.plate_marks import plate_blocks
from core.chip.ports import cut_shift_um, port_figures
from core.chip.scene import Block, BlockKind, Figure, PlacedBlock, Scene
from core.errors import CoreError, GeometryError
from core.fabrication.making import scale_of
from core.units import NM_PER_UM

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from core.chip.bodies import Stance
    from core.chip.plan import ChipPlan
    from core.fabrication.process import Process
    from core.parameters import ChannelParameters

    Report = Callable[[int, int, str], None]


def chip_scene(
    plan: ChipPlan,
    channels: Mapping[str, ChannelParameters],
    *,
    process: Process,
    chip_name: str,
    drawn: bool = True,
    leave_out_impossible: bool = False,
    report: Report | None = None,
) -> Scene:
    """Return everything that stands on a chip, or on a plate of chips.

    Parameters
    ----------
    plan : ChipPlan
        What is placed where; where it places nothing, every set is packed and the chip grows to hold them.
    channels : mapping
        Parameter sets by name, as wanted on the part.
    process : Process
        How the chip is made.
    chip_name : str
        Written on the chip where the plan has no label.
    drawn : bool
        True: what goes on the mask or to the tool: channels and holes that are cut compensated, and everything
        enlarged once, about the middle of the plate, by 1/(1 - shrinkage). False: what will be made of that, in
        its true size, for the screen. Marks and words are not compensated, the test bars are.
    leave_out_impossible : bool
        True: a channel that cannot be built is left out; ``PlacedBlock.channel`` tells which are there.
    report : callable (step, total, text), optional
        Told before every chip that differs from those before it; it may raise to stop the work.

    Returns
    -------
    Scene
        Top is the plate, or the chip itself when there is but one. A chip's block holds first its channels' own
        blocks in the order of the plan, then its marks, then the signs of its label. Equal chips, channels and
        signs share one block, and blocks that did not change are the same objects as in an earlier scene.

    Raises
    ------
    GeometryError
        If a channel cannot be built, no chip fits on the plate, or far too many would.
    DesignValueError
        If the plan names a set that is not there.
    """
    full = plan if plan.channels else packed(plan, channels, process, chip_name=chip_name)
    builder = _Builder(full, channels, process, chip_name, drawn=drawn, leave_out=leave_out_impossible)
    grid = checked_grid(full)
    steps = steps_of(full, grid)
    chips: dict[tuple[int, ...], Block] = {}
    distinct = dict.fromkeys(steps)
    for number, each in enumerate(distinct):
        if report is not None:
            report(number, len(distinct), "drawing chips")
        chips[each] = builder.chip(each)
    if full.plate == PlateKind.SINGLE:
        return Scene(top=chips[steps[0]], scale=builder.scale)
    pitch, first = map(builder.on_grid, grid.pitch_um), map(builder.on_grid, grid.offset_um)
    (px, py), (x0, y0) = pitch, first
    copies = [
        PlacedBlock(block=chips[each], dx_um=round(x0 + column * px, 3), dy_um=round(y0 + row * py, 3))
        for each, column, row in zip(steps, grid.columns.tolist(), grid.rows.tolist(), strict=True)
    ]
    marks = [builder.placed(each) for each in plate_blocks(full, process, chip_name=chip_name, scale=builder.scale)]
    title = f"{chip_name}: {full.plate} of {len(copies)} chips"
    return Scene(
        top=Block(name="PLATE", kind=BlockKind.PLATE, title=title, placed=(*copies, *marks)), scale=builder.scale
    )


class _Builder:
    """Makes the blocks of one plan."""

    def __init__(
        self,
        plan: ChipPlan,
        channels: Mapping[str, ChannelParameters],
        process: Process,
        chip_name: str,
        *,
        drawn: bool,
        leave_out: bool,
    ) -> None:
        self.plan, self.channels, self.process, self.chip_name = plan, channels, process, chip_name
        self.drawn, self.leave_out = drawn, leave_out
        self.scale = scale_of(process) if drawn else 1.0
        self.furniture = furniture_of(plan, channels, process, chip_name=chip_name, drawn=drawn)
        marks = Block(
            name="MARKS", kind=BlockKind.MARKS, title="Marks of the chip", placed=self.furniture.placed,
            figures=self.furniture.figures,
        )  # fmt: skip
        has_marks = bool(marks.placed or marks.figures)
        self.marks = (self.placed(PlacedBlock(block=marks)),) if has_marks else ()

    def chip(self, steps: tuple[int, ...]) -> Block:
        """Return the chip of given steps of the series."""
        placed: list[PlacedBlock] = []
        values = values_of(self.plan, steps)
        for number, entry in enumerate(self.plan.channels):
            channel = channel_of(entry, self.channels, values)
            stance = stance_of(self.plan, entry, channel, self.process)
            diameter = self.plan.port_diameter_um
            try:
                block = _channel_block(title_of(entry), channel, stance, self.process, diameter, self.drawn)
            except GeometryError:
                if not self.leave_out:
                    raise
                continue
            at = PlacedBlock(
                block=block, dx_um=self.on_grid(entry.x_um), dy_um=self.on_grid(entry.y_um), channel=number
            )
            placed.append(at)
        placed += self.marks
        lines = label_lines(self.plan, self.chip_name, steps)
        if self.furniture.label_at_um is not None:
            label = words_stamp(lines, height_um=self.plan.text_height_um).block
            x, y = self.furniture.label_at_um
            signs = [replace(sign, dx_um=sign.dx_um + x, dy_um=sign.dy_um + y) for sign in label.placed]
            placed += [self.placed(sign) for sign in signs]
        return Block(name="CHIP", kind=BlockKind.CHIP, title=", ".join(lines), placed=tuple(placed))

    def placed(self, small: PlacedBlock) -> PlacedBlock:
        """Return a block of unscaled figures at its place in the scene."""
        return _enlarged_place(small, self.scale, self.process.grid_nm)

    def on_grid(self, length_um: float) -> float:
        """Return an enlarged length as a multiple of the drawing grid [um]."""
        return _on_grid(length_um * self.scale, self.process.grid_nm)


def furniture_of(
    plan: ChipPlan, channels: Mapping[str, ChannelParameters], process: Process, *, chip_name: str, drawn: bool = True
) -> Furniture:
    """Return the marks of a chip at places that are free on every copy, unscaled.

    Parameters
    ----------
    plan : ChipPlan
        With channels.
    channels, process, chip_name, drawn
        As for ``chip_scene``.
    """
    stamps = wanted_stamps(plan, channels, process, chip_name=chip_name, drawn=drawn)
    if stamps is None:
        return Furniture()
    obstacles = obstacles_of(plan, channels, process)
    return furnished(plan, stamps, obstacles, cut_shift_um=cut_shift_um(process) if drawn else 0.0)


def obstacles_of(plan: ChipPlan, channels: Mapping[str, ChannelParameters], process: Process) -> tuple[Obstacle, ...]:
    """Return every channel of every copy of the chip at its place; those that cannot be built are left out.

    Parameters
    ----------
    plan : ChipPlan
        With channels.
    channels, process
        As for ``chip_scene``.
    """
    found: dict[tuple[int, ChannelParameters], Obstacle] = {}
    for steps in distinct_steps(plan):
        for number, entry in enumerate(plan.channels):
            try:
                channel = channel_of(entry, channels, values_of(plan, steps))
                if (number, channel) not in found:
                    outline = wanted_body(plan, entry, channel, process).outline
                    found[number, channel] = Obstacle(outline=outline, shift_um=(entry.x_um, entry.y_um))
            except CoreError:
                continue
    return tuple(found.values())


def _on_grid(length_um: float, grid_nm: int) -> float:
    return round(round(length_um * NM_PER_UM / grid_nm) * grid_nm / NM_PER_UM, 3)


@lru_cache(maxsize=1024)
def _channel_block(
    title: str,
    channel: ChannelParameters,
    stance: Stance,
    process: Process,
    port_diameter_um: float,
    drawn: bool,
) -> Block:
    """Return the block of one channel with its ports, enlarged, the middle of its bounds at the origin."""
    scale = scale_of(process) if drawn else 1.0
    body = changed_body(channel, stance, process, title=title, drawn=drawn)
    ports = port_figures(body.pads, port_diameter_um=port_diameter_um, process=process, drawn=drawn)
    return Block(
        name=title, kind=BlockKind.CHANNEL, title=title, body=body if scale == 1.0 else body.scaled(scale),
        figures=tuple(_enlarged_figure(figure, scale) for figure in ports),
    )  # fmt: skip


def _enlarged_place(small: PlacedBlock, scale: float, grid_nm: int) -> PlacedBlock:
    return replace(
        small, block=_enlarged_block(small.block, scale, grid_nm),
        dx_um=_on_grid(scale * small.dx_um, grid_nm), dy_um=_on_grid(scale * small.dy_um, grid_nm),
    )  # fmt: skip


@lru_cache(maxsize=2048)
def _enlarged_block(block: Block, scale: float, grid_nm: int) -> Block:
    return replace(
        block, figures=tuple(_enlarged_figure(figure, scale) for figure in block.figures),
        placed=tuple(_enlarged_place(each, scale, grid_nm) for each in block.placed),
    )  # fmt: skip


def _enlarged_figure(figure: Figure, scale: float) -> Figure:
    return figure if scale == 1.0 else replace(figure, outline=figure.outline.scaled(scale))
