"""Findings about the plate, the stepped series, marks and words of a chip."""

from __future__ import annotations

from dataclasses import replace
from functools import cache
from math import ceil, hypot
from typing import TYPE_CHECKING

from core.chip.build import furniture_of
from core.chip.lettering import THINNEST, drawable
from core.chip.marks import finest_um
from core.chip.plan import CHIP_FIELDS, CutLines, PlateKind
from core.chip.plate import MOST_CHIPS, distinct_steps, label_lines, plate_grid
from core.chip.ports import cut_shift_um
from core.findings import Finding, Severity
from core.units import UM_PER_MM

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator, Mapping

    from core.chip.plan import ChipPlan
    from core.fabrication.process import Process
    from core.fields import Value
    from core.parameters import ChannelParameters

_LARGER = (1.1, 1.25, 1.6, 2.2)  # how much larger a chip is tried to make room
_USUAL_STREET_UM = 200.0  # of a saw; common practice


def plate_findings(plan: ChipPlan, process: Process) -> Iterator[Finding]:
    """Yield what is wrong between a chip and its plate, and with its series."""
    if plan.plate == PlateKind.SINGLE:
        if plan.series:
            yield _warning(
                "series_unused", "plate", "a stepped series needs a wafer or a plate of chips; one chip has the values "
                "of its sets alone; set plate to wafer or plate, or take the series away",
                cure=_tried(plan, "plate", PlateKind.WAFER, lambda changed: len(plate_grid(changed)) > 1),
            )  # fmt: skip
        return
    count = len(plate_grid(plan))
    if count == 0:
        yield _no_chip_fits(plan)
        return
    if count > MOST_CHIPS:
        yield Finding(
            code="too_many_chips", severity=Severity.ERROR, field="chip_width_um",
            message=f"the {plan.plate} would hold {count} chips; allowed: {MOST_CHIPS}; raise chip_width_um, "
            "chip_height_um or street_um, or use a smaller plate",
        )  # fmt: skip
        return
    yield from _streets(plan, process)
    yield from _series(plan)


def _no_chip_fits(plan: ChipPlan) -> Finding:
    wide, high, rim = plan.chip_width_um, plan.chip_height_um, 2.0 * plan.edge_exclusion_um
    if plan.plate == PlateKind.WAFER:
        field, value, limit = "wafer_diameter_um", hypot(wide, high) + rim, plan.wafer_diameter_um
    elif wide + rim > plan.plate_width_um:
        field, value, limit = "plate_width_um", wide + rim, plan.plate_width_um
    else:
        field, value, limit = "plate_height_um", high + rim, plan.plate_height_um
    cure = _tried(plan, field, ceil(value / UM_PER_MM) * UM_PER_MM, lambda changed: len(plate_grid(changed)) > 0)
    return Finding(
        code="chip_larger_than_plate", severity=Severity.ERROR, field=field, value_um=value, limit_um=limit, cure=cure,
        message=f"not one chip of {wide:g} x {high:g} um fits on the {plan.plate}: with edge_exclusion_um "
        f"{plan.edge_exclusion_um:g} it would need {field} {value:.6g}, which is {limit:g}; make the chip smaller"
        + ("" if cure is None else f", or set {field} to {cure[1]:g}"),
        x_um=0.0, y_um=0.0,
    )  # fmt: skip


def _streets(plan: ChipPlan, process: Process) -> Iterator[Finding]:
    """Yield the finding of cutting lines of neighbouring chips that fall on one another."""
    grown = 2.0 * cut_shift_um(process) if plan.cut_lines == CutLines.OUTLINE else 0.0
    if plan.cut_lines == CutLines.NONE or plan.street_um > grown or len(plate_grid(plan)) == 1:
        return
    value = max(_USUAL_STREET_UM, ceil(grown + process.min_wall_um))
    yield Finding(
        code="cut_lines_doubled", severity=Severity.ERROR, field="street_um", value_um=plan.street_um, limit_um=grown,
        message=f"street_um is {plan.street_um:g}: cutting lines of neighbouring chips fall on one another and "
        f"would be cut twice; raise street_um to {value:g}, or set cut_lines to none",
        x_um=0.5 * plan.chip_width_um, y_um=0.0,
        cure=_tried(plan, "street_um", value, lambda changed: len(plate_grid(changed)) > 0),
    )  # fmt: skip


def _series(plan: ChipPlan) -> Iterator[Finding]:
    grid = plate_grid(plan)
    for series, place, way in zip(plan.series, (grid.columns, grid.rows), ("columns", "rows"), strict=False):
        there = int(place.max()) + 1
        if there < series.steps:
            yield _warning(
                "series_cut_short", "plate",
                f"the series of {series.name} has {series.steps} steps, and the {plan.plate} only {there} {way} of "
                f"chips: its last values are not made; lower it to {max(there, 2)} steps, or make chips smaller",
            )  # fmt: skip


def word_findings(
    plan: ChipPlan, channels: Mapping[str, ChannelParameters], process: Process, *, chip_name: str
) -> Iterator[Finding]:
    """Yield what is wrong with the words and marks of a chip.

    Parameters
    ----------
    plan : ChipPlan
        With channels.
    channels : mapping
        Parameter sets by name, as wanted.
    process : Process
        How the chip is made.
    chip_name : str
        Written on the chip where the plan has no label.
    """
    _, unknown = drawable(" ".join(label_lines(plan, chip_name, distinct_steps(plan)[0])))
    if unknown:
        yield _warning(
            "signs_unknown", "label", f"the lettering has no {' '.join(unknown)}: a question mark stands for each; "
            "write the label in letters, digits and common signs",
        )  # fmt: skip
    yield from _too_fine(plan, channels, process)
    yield from _no_room(plan, channels, process, chip_name)


def _too_fine(plan: ChipPlan, channels: Mapping[str, ChannelParameters], process: Process) -> Iterator[Finding]:
    """Yield the finding of lettering whose strokes or gaps the process does not bring out."""
    used = [channels[entry.set_name].depth_um for entry in plan.channels if entry.set_name in channels]
    least = finest_um(process, depth_um=max(used, default=0.0))
    if _brings_out(plan, least):
        return
    finest = THINNEST * plan.text_height_um
    value = ceil(least / THINNEST / 10.0 - 1e-9) * 10.0
    cure = _tried(plan, "text_height_um", value, lambda changed: _brings_out(changed, least))
    change = f"raise text_height_um to {value:g}" if cure else "letter the part by hand"
    yield replace(
        _warning(
            "lettering_too_fine", "text_height_um",
            f"the finest strokes and gaps of the lettering are {finest:.4g} um, and would need {least:g} um to come "
            f"out with this process; {change}", cure=cure,
        ),
        value_um=finest, limit_um=least,
    )  # fmt: skip


def _brings_out(plan: ChipPlan, least_um: float) -> bool:
    return THINNEST * plan.text_height_um >= least_um * (1.0 - 1e-9)


def _no_room(
    plan: ChipPlan, channels: Mapping[str, ChannelParameters], process: Process, chip_name: str
) -> Iterator[Finding]:
    """Yield the finding of every mark that was left out, with a larger chip as its cure where that helps."""
    names = ("chip_height_um", "chip_width_um")
    trials = [(name, ceil(factor * getattr(plan, name) / 100.0) * 100.0) for factor in _LARGER for name in names]

    @cache
    def left_out(field: str, value: float) -> frozenset[str]:
        changed = plan.with_values({field: value})
        return frozenset(each.what for each in furniture_of(changed, channels, process, chip_name=chip_name).missing)

    missing = furniture_of(plan, channels, process, chip_name=chip_name).missing
    for each in {each.what: each for each in missing}.values():
        fitting = (
            (name, value) for name, value in trials
            if value <= CHIP_FIELDS[name].maximum and each.what not in left_out(name, value)
        )  # fmt: skip
        cure = next(fitting, None)
        larger = "" if cure is None else f" (set {cure[0]} to {cure[1]:g}, say)"
        warning = _warning(
            "no_room", each.field, f"there is no room for the {each.what} beside the channels: left out; make the chip "
            f"larger{larger}, move channels, or change {each.field}", cure=cure,
        )  # fmt: skip
        yield replace(warning, x_um=each.x_um, y_um=each.y_um)


def _warning(code: str, field: str, message: str, *, cure: tuple[str, Value] | None = None) -> Finding:
    return Finding(code=code, severity=Severity.WARNING, message=message, field=field, cure=cure)


def _tried(plan: ChipPlan, field: str, value: Value, is_cured: Callable[[ChipPlan], bool]) -> tuple[str, Value] | None:
    """Return a change of the plan if it is allowed and takes the finding away."""
    spec = CHIP_FIELDS[field]
    if not spec.choices and not spec.minimum <= float(value) <= spec.maximum:
        return None
    return (field, value) if is_cured(plan.with_values({field: value})) else None
