"""All checks of one channel under one process, in the order in which they are told."""

from __future__ import annotations

from typing import TYPE_CHECKING

from core.fabrication.depth_checks import check_bond, check_depth, check_leaning, check_sagging
from core.fabrication.length_checks import (
    check_drawn_gap,
    check_drawn_widths,
    check_existence,
    check_gap,
    check_grid,
    check_radii,
    check_shapes,
    check_widths,
)

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator

    from core.fabrication.channel_case import ChannelCase
    from core.fabrication.objection import Objection

    Check = Callable[[ChannelCase], Iterator[Objection]]

CHECKS: tuple[Check, ...] = (
    check_existence, check_shapes, check_widths, check_gap, check_drawn_widths, check_drawn_gap, check_radii,
    check_depth, check_leaning, check_sagging, check_bond, check_grid,
)  # fmt: skip
