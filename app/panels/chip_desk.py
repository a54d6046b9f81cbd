"""What the user does to placed channels: move, turn, level, fold, remove, add, pack; each one step."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from app.chip_work import ChipTask, placed_plan
from app.drawing.chip_shown import NONE
from app.panels.chip_drawer import ChipDrawer
from core.chip.adding import added
from core.chip.bodies import channel_of, level_turn, title_of
from core.chip.fitting import folded, packed, too_large
from core.errors import CoreError, DesignValueError, GeometryError

if TYPE_CHECKING:
    from collections.abc import Callable

    from PySide6.QtCore import QObject

    from app.arrangement import Arrangement
    from app.document import Document
    from app.findings_desk import FindingsDesk
    from app.settings import Settings
    from core.chip.plan import ChipChannel, ChipPlan

_QUARTER_DEG = 90.0


class ChipDesk(ChipDrawer):
    """Changes the chip's plan as the hand asks in drawing, table and menu.

    Parameters
    ----------
    document, parts, settings, findings, parent
        As for ``ChipDrawer``.
    refuse : callable
        Told of a ``CoreError`` when a change cannot be used.
    """

    def __init__(
        self,
        document: Document,
        *,
        parts: Arrangement,
        settings: Settings,
        findings: FindingsDesk,
        refuse: Callable[[CoreError], object],
        parent: QObject,
    ) -> None:
        super().__init__(document, parts=parts, settings=settings, findings=findings, parent=parent)
        self._refuse = refuse
        self._gesture: int | None = None
        parts.chip_view.move_requested.connect(self._on_move_requested)
        parts.chip_view.remove_requested.connect(self.remove)
        parts.places.model.place_requested.connect(lambda row, name, value: self._change(row, {name: value}))
        parts.places.model.refused.connect(refuse)

    @property
    def chosen(self) -> int:
        """The placed channel in hand, -1 for none."""
        return self._parts.chip_view.selected

    def _plan(self) -> ChipPlan:
        """Return the plan with the place of every channel; raises ``CoreError`` when they cannot be packed."""
        return placed_plan(ChipTask.of(self._document.project))

    def _try(self, change: Callable[[ChipPlan], tuple[ChipPlan, str]], *, gesture: int | None = None) -> bool:
        """Put the plan in place that a change makes of the present one, as one step; return whether it was done."""
        try:
            self._document.change_plan(*change(self._plan()), gesture=gesture)
        except CoreError as error:
            self._refuse(error)
            return False
        return True

    def _change(
        self, index: int, values: dict[str, object], *, gesture: int | None = None, verb: str = "Place"
    ) -> None:
        def change(plan: ChipPlan) -> tuple[ChipPlan, str]:
            channel = _channel(plan, index)
            return _with_channel(plan, index, channel.with_values(values)), f"{verb} '{title_of(channel)}'"

        self._try(change, gesture=gesture)

    def _change_chosen(self, verb: str, values: Callable[[ChipPlan, ChipChannel], dict[str, object]]) -> None:
        index = self.chosen
        if index == NONE:
            return

        def change(plan: ChipPlan) -> tuple[ChipPlan, str]:
            channel = _channel(plan, index)
            changed = channel.with_values(values(plan, channel))
            return _with_channel(plan, index, changed), f"{verb} '{title_of(channel)}'"

        self._try(change)

    def _on_move_requested(self, index: int, x_um: float, y_um: float, is_held: bool) -> None:
        if not is_held or self._gesture is None:
            self._gesture = self._document.new_gesture()
        self._change(index, {"x_um": x_um, "y_um": y_um}, gesture=self._gesture, verb="Move")
        self.draw()  # a held key goes on from where the channel is now

    def add(self, *, is_control: bool) -> None:
        """Place the set in hand once more, or the plain channel to measure it against."""
        task, name = ChipTask.of(self._document.project), self._document.current_set.name
        what = f"Place a control of '{name}'" if is_control else f"Place '{name}'"
        if self._try(
            lambda plan: (added(plan, task.channels, task.process, set_name=name, is_control=is_control), what)
        ):
            self._to_select = len(self._document.plan.channels) - 1
            self.draw()

    def pack(self) -> None:
        """Pack all that is placed anew."""
        task = ChipTask.of(self._document.project)
        self._try(lambda plan: (packed(plan, task.channels, task.process, chip_name=task.chip_name), "Pack the chip"))

    def fold_to_fit(self) -> None:
        """Fold what is longer than the chip into the fewest rows that fit, and pack; tell what fits in no way."""
        task = ChipTask.of(self._document.project)

        def change(_plan: ChipPlan) -> tuple[ChipPlan, str]:
            # not the packed plan, whose chip has grown to hold every channel unfolded
            plan = folded(task.plan, task.channels, task.process, chip_name=task.chip_name)
            large.extend(too_large(plan, task.channels, task.process))
            if {title_of(entry) for entry in plan.channels} <= set(large):
                raise _too_large(large)
            return plan, "Fold to fit"

        large: list[str] = []
        if self._try(change) and large:
            self._refuse(_too_large(large))

    def turn(self) -> None:
        """Turn the channel in hand by a quarter."""
        self._change_chosen("Turn", lambda _plan, channel: {"turn_deg": (channel.turn_deg + _QUARTER_DEG) % 360.0})

    def level(self) -> None:
        """Turn the channel in hand so that both its ports stand at one height."""
        task = ChipTask.of(self._document.project)

        def values(plan: ChipPlan, channel: ChipChannel) -> dict[str, object]:
            shape = channel_of(channel, task.channels)
            return {"turn_deg": level_turn(plan, channel, shape, task.process)}

        self._change_chosen("Level", values)

    def fold(self, rows: int) -> None:
        """Fold the channel in hand into more or fewer rows."""
        self._change_chosen("Fold" if rows > 0 else "Unfold", lambda _plan, channel: {"rows": channel.rows + rows})

    def remove(self, index: int | None = None) -> None:
        """Take a channel off the chip; the last one cannot go."""
        gone = self.chosen if index is None else index
        if gone == NONE:
            return

        def change(plan: ChipPlan) -> tuple[ChipPlan, str]:
            channel = _channel(plan, gone)
            kept = plan.channels[:gone] + plan.channels[gone + 1 :]
            if not kept:
                raise _last_one()
            return replace(plan, channels=kept), f"Remove '{title_of(channel)}' from the chip"

        self._try(change)


def _channel(plan: ChipPlan, index: int) -> ChipChannel:
    """Return a placed channel; it may have gone while a slow drawing still shows it."""
    if not 0 <= index < len(plan.channels):
        raise DesignValueError(
            field="channel",
            value=index + 1,
            limit=f"1 to {len(plan.channels)}",
            way_out="wait until the chip is drawn anew",
        )
    return plan.channels[index]


def _with_channel(plan: ChipPlan, index: int, channel: ChipChannel) -> ChipPlan:
    return replace(plan, channels=(*plan.channels[:index], channel, *plan.channels[index + 1 :]))


def _too_large(titles: list[str]) -> GeometryError:
    names = ", ".join(f"'{title}'" for title in titles)
    verb = "fits" if len(titles) == 1 else "fit"
    return GeometryError(f"{names} {verb} this chip in no number of rows; enlarge the chip, or take fewer stages.")


def _last_one() -> DesignValueError:
    return DesignValueError(
        field="channels",
        value="nothing",
        limit="at least one placed channel, since an empty chip is packed with every set",
        way_out="add another channel first",
    )
