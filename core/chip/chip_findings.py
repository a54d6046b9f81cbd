"""Everything that is wrong with a chip as a whole: what is placed on it, its plate, its marks."""

from __future__ import annotations

from itertools import combinations
from typing import TYPE_CHECKING

from core.chip.bodies import changed_body, stance_of
from core.chip.fitting import packed
from core.chip.place_findings import Rules, edge_findings, pair_findings, pitch_findings
from core.chip.plate import distinct_steps, plate_grid
from core.chip.plate_findings import plate_findings, word_findings
from core.chip.stands import Stand, Unbuilt, stands_of
from core.errors import GeometryError, did_you_mean, shown
from core.fabrication.making import making_of
from core.findings import Finding, Severity

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping

    from core.chip.build import Report
    from core.chip.plan import ChipPlan
    from core.fabrication.process import Process
    from core.parameters import ChannelParameters

_WORST = ("channels_overlap", "wall_between_channels")  # two channels need not be looked at on further chips
MOST_PAIRS = 100  # findings between two channels; when all lie in a heap, more of them help nobody


def chip_findings(
    plan: ChipPlan,
    channels: Mapping[str, ChannelParameters],
    *,
    process: Process,
    chip_name: str = "",
    report: Report | None = None,
) -> tuple[Finding, ...]:
    """Return what is wrong or doubtful with a chip.

    Distances are measured on the true outlines of the channels as wanted, on every different chip of the plate;
    a finding that repeats from chip to chip is told once.

    Parameters
    ----------
    plan : ChipPlan
        What is placed where; where it places nothing, what packing makes of it is checked.
    channels : mapping
        Parameter sets by name.
    process : Process
        How the chip is made.
    chip_name : str
        Written on the chip where the plan has no label.

    report : callable (step, total, text), optional
        Told before every chip that differs from those before it; it may raise to stop the work.

    Returns
    -------
    tuple of Finding
        Places are on the chip, from its middle. What is wrong with a set by itself is not repeated here.
    """
    full = plan if plan.channels else packed(plan, channels, process, chip_name=chip_name)
    found = [*_unknown_sets(full, channels), *plate_findings(full, process)]
    if len(plate_grid(full)):
        found += _placed(full, channels, process, report)
        found += word_findings(full, channels, process, chip_name=chip_name)
    return tuple(found)


def _unknown_sets(plan: ChipPlan, channels: Mapping[str, ChannelParameters]) -> Iterator[Finding]:
    for entry in plan.channels:
        if entry.set_name not in channels:
            yield Finding(
                code="unknown_set", severity=Severity.ERROR, field="set_name",
                message=f"the chip places {shown(entry.set_name)}, and there is no such parameter set; "
                f"{did_you_mean(entry.set_name, channels)}",
                x_um=entry.x_um, y_um=entry.y_um,
            )  # fmt: skip


def _placed(
    plan: ChipPlan, channels: Mapping[str, ChannelParameters], process: Process, report: Report | None
) -> Iterator[Finding]:
    """Yield findings of everything placed, each kind once for each channel or pair."""
    rules = Rules(plan=plan, process=process)
    told: set[tuple[str, ...]] = set()
    pairs, total = 0, len(distinct_steps(plan))
    for step, chip in enumerate(stands_of(plan, channels, process)):
        if report is not None:
            report(step, total, "checking chips")
        for stand in chip:
            for finding in _alone(stand, rules):
                key = (finding.code, finding.field, str(stand.number))
                if key not in told:
                    told.add(key)
                    yield finding
        for first, second in combinations([each for each in chip if isinstance(each, Stand)], 2):
            pair = (str(first.number), str(second.number))
            if pairs > MOST_PAIRS or ("worst", *pair) in told:
                continue
            for finding in (*pair_findings(first, second, rules), *pitch_findings(first, second, rules)):
                if (finding.code, *pair) not in told:
                    told.add((finding.code, *pair))
                    pairs += 1
                    yield finding
                if finding.code in _WORST:
                    told.add(("worst", *pair))


def _alone(stand: Stand | Unbuilt, rules: Rules) -> Iterator[Finding]:
    """Yield what is wrong with one channel on the chip."""
    if isinstance(stand, Unbuilt):
        yield _impossible(stand.reason, stand)
        return
    yield from edge_findings(stand, rules)
    yield from pitch_findings(stand, stand, rules)
    if making_of(stand.channel, rules.process).findings:
        return  # told with the set itself
    entry = rules.plan.channels[stand.number]
    stance = stance_of(rules.plan, entry, stand.channel, rules.process)
    try:
        changed_body(stand.channel, stance, rules.process, title=stand.title, drawn=True)
    except GeometryError as error:
        yield _impossible(f"{error}{stand.values}", stand)


def _impossible(reason: str, stand: Stand | Unbuilt) -> Finding:
    x, y = stand.at_um
    return Finding(code="channel_impossible", severity=Severity.ERROR, field="channels", message=reason, x_um=x, y_um=y)
