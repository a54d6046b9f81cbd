"""Everything that speaks against ordering a project's chip: its sets, what is placed, and the files."""

from __future__ import annotations

import unicodedata
from dataclasses import replace
from typing import TYPE_CHECKING

from core.chip.chip_findings import chip_findings
from core.chip.plan import PlateKind
from core.chip.plate import distinct_steps, values_of
from core.errors import CoreError, shown
from core.fabrication.channel_findings import channel_findings
from core.fabrication.making import making_of
from core.findings import Finding, Severity
from core.geometry.shape import build_shape
from core.masks.names import safe_name
from core.project.folds import added_length_um, score_of_made
from core.project.text import LONGEST_NAME

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

    from core.project.chip import ChipProject, ParameterSet

FoundIn = tuple[str, Finding]


def order_findings(project: ChipProject) -> tuple[FoundIn, ...]:
    """Return all findings of a project.

    Parameters
    ----------
    project : ChipProject
        Any project.

    Returns
    -------
    tuple of (str, Finding)
        Name of the set, empty for the chip as a whole. First those of the sets, in their order; places of these lie
        on the set's own drawing, those of the chip's findings on the chip.
    """
    of_sets = [(each.name, finding) for each in project.sets for finding in set_findings(project, each)]
    of_sets += _series_findings(project, {(name, finding.code) for name, finding in of_sets})
    channels = {each.name: each.channel for each in project.sets}
    of_chip = [
        *chip_findings(project.plan, channels, process=project.process, chip_name=project.name),
        *project_findings(project),
    ]
    return (*of_sets, *(("", finding) for finding in of_chip))


def project_findings(project: ChipProject) -> tuple[Finding, ...]:
    """Return what only the whole project knows: sets of several depths on one mask, and names that files lose."""
    return (*_depth_findings(project), *_name_findings(project))


def set_findings(project: ChipProject, chosen: ParameterSet, *, with_cures: bool = True) -> tuple[Finding, ...]:
    """Return what speaks against one parameter set: its shape, and the process at the operating flow.

    Parameters
    ----------
    project : ChipProject
        Process, operating point and results of flow solves.
    chosen : ParameterSet
        Any set; it need not be one of the project.
    with_cures : bool
        False to leave out the search for cures, which takes most of the time.
    """
    shape = build_shape(chosen.channel)
    if not shape.is_usable:
        return shape.findings
    pressure_pa, pressure_at = highest_pressure(project, chosen)
    found = channel_findings(
        chosen.channel,
        project.process,
        pressure_pa=pressure_pa,
        pressure_at=pressure_at,
        with_cures=with_cures,
    )
    return (*shape.findings, *found)


def highest_pressure(project: ChipProject, chosen: ParameterSet) -> tuple[float | None, str]:
    """Return the highest pressure that a channel may have to hold at the operating flow.

    Parameters
    ----------
    project : ChipProject
        Process, operating point, results of flow solves, and how the set is folded on the chip.
    chosen : ParameterSet
        The channel as wanted.

    Returns
    -------
    tuple of (float or None, str)
        The larger of both directions' drops at the upper end of its band [Pa], from a flow solve of what is made if
        there is one, else from the estimate, None if there is neither; and in words how it was got. What folding adds
        is always estimated.
    """
    made, operating = making_of(chosen.channel, project.process).flow, project.operating
    where = f"at {operating.flow_ul_min:g} uL/min"
    added = added_length_um(project, chosen.name)
    try:
        plain = score_of_made(project, chosen.channel).highest_pressure_pa
        folded = score_of_made(project, chosen.channel, added_um=added).highest_pressure_pa if added else plain
    except CoreError:  # no such fluid, or what is made has no shape: told elsewhere
        return None, ""
    with_bends = ", with the bends of its rows" if added else ""
    for result in reversed(project.solved):
        if result.valid and result.belongs_to(made, operating) and result.highest_pressure_pa is not None:
            return result.highest_pressure_pa + folded - plain, f"{where}, flow solve with its band{with_bends}"
    return folded, f"{where}, estimate with its band{with_bends}"


def placed_sets(project: ChipProject) -> tuple[ParameterSet, ...]:
    """Return the sets that stand on the chip: all when none has been placed by hand."""
    placed = {each.set_name for each in project.plan.channels}
    return tuple(each for each in project.sets if not placed or each.name in placed)


def errors_in(findings: Sequence[FoundIn], project: ChipProject) -> tuple[FoundIn, ...]:
    """Return the findings that forbid an order: errors of the chip and of the sets that stand on it."""
    on_chip = {"", *(each.name for each in placed_sets(project))}
    return tuple(
        (name, finding) for name, finding in findings if finding.severity is Severity.ERROR and name in on_chip
    )


def _series_findings(project: ChipProject, known: set[tuple[str, str]]) -> Iterator[FoundIn]:
    """Tell what is found at the ends of a stepped series and not in the sets themselves.

    Limits are one-sided, so that chips between the ends are no worse than those at the ends.
    """
    plan = project.plan
    if plan.plate == PlateKind.SINGLE or not plan.series:
        return
    steps = distinct_steps(plan)
    ends = [(min(each), max(each)) for each in zip(*steps, strict=True)]
    corners = [each for each in steps if all(step in end for step, end in zip(each, ends, strict=True))]
    for chosen in placed_sets(project):
        for corner in corners:
            values = values_of(plan, corner)
            changed = replace(chosen, channel=chosen.channel.with_values(values))
            words = ", ".join(f"{name} {value:g}" for name, value in values.items())
            for finding in set_findings(project, changed, with_cures=False):
                if (chosen.name, finding.code) not in known:
                    known.add((chosen.name, finding.code))
                    message = f"on the chip with {words}: {finding.message}"
                    yield chosen.name, replace(finding, message=message, x_um=None, y_um=None, ends_um=None)


def _depth_findings(project: ChipProject) -> Iterator[Finding]:
    """Tell channels of several depths: a mask makes one depth only."""
    depths_um = sorted({each.channel.depth_um for each in placed_sets(project)})
    if len(depths_um) > 1:
        several = ", ".join(f"{depth:g}" for depth in depths_um)
        yield _depth_finding(
            f"the placed channels are {several} um deep, but one mask makes one depth; "
            "give all the same depth_um, or place those of one depth only",
            value_um=depths_um[-1],
            limit_um=depths_um[0],
        )
    if any(each.name == "depth_um" for each in project.plan.series):
        yield _depth_finding("depth_um is stepped over the plate, but one mask makes one depth; step another field")


def _depth_finding(message: str, *, value_um: float | None = None, limit_um: float | None = None) -> Finding:
    return Finding(
        code="depths_differ",
        severity=Severity.ERROR,
        message=message,
        field="depth_um",
        value_um=value_um,
        limit_um=limit_um,
    )


def _name_findings(project: ChipProject) -> Iterator[Finding]:
    """Tell the names of which mask files lose letters."""
    names = [("chip", project.name), *(("set", each.name) for each in placed_sets(project))]
    for what, name in names:
        if (held := held_name(name)) is not None:
            yield Finding(
                code="name_changed",
                severity=Severity.WARNING,
                message=f"mask files cannot hold the {what} name {shown(name)}, they will say {held}; "
                "use letters A to Z and digits to have it as it is",
                field="name",
            )


def held_name(name: str) -> str | None:
    """Return what mask files make of a name of which they cannot hold every letter and digit, else None.

    Accents, spaces, small letters and a long name's end are no loss worth telling.

    Examples
    --------
    >>> held_name("Spülchip Ω"), held_name("Spülchip 4")
    ('SPULCHIP', None)
    """
    whole = safe_name(name, longest=4 * LONGEST_NAME)
    letters = "".join(c for c in unicodedata.normalize("NFKD", name).upper() if c.isalnum())
    return None if whole.replace("_", "") == letters else whole
