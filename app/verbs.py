"""What each verb of the command line does: parsed arguments in, an ``Answer`` out.

Only what a verb needs is imported, inside it; Qt is loaded by ``open`` alone.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from app.plain_text import as_json, findings_text, masks_text, score_text
from app.progress_line import told_progress
from core.errors import CoreError, DesignRefusedError, shown
from core.fields import unknown_field
from core.findings import Severity
from core.operating import OPERATING_FIELDS
from core.parameters import CHANNEL_FIELDS
from core.project import read_project

if TYPE_CHECKING:
    import argparse
    from collections.abc import Iterable
    from pathlib import Path

    from core.findings import Finding
    from core.geometry.shape import ChannelShape
    from core.masks.report import MaskSetReport
    from core.parameters import ChannelParameters
    from core.project import ChipProject, ParameterSet

GOOD, REFUSED, BAD_INPUT = 0, 1, 2

_OVERRIDES = {**CHANNEL_FIELDS, **OPERATING_FIELDS}


class UsageError(CoreError):
    """The command line itself is wrong."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Answer:
    """What a verb has to say: text for standard output and the exit status."""

    text: str = ""
    status: int = GOOD


def open_verb(arguments: argparse.Namespace) -> Answer:
    """Open a chip project in the window; a file that cannot be opened is told before it appears."""
    read_project(arguments.file)
    return open_window(arguments.file)


def open_window(path: Path | None) -> Answer:
    """Open the window, on a project or empty; the answer comes when it is closed."""
    try:
        from app.opening import run_window
    except ImportError as error:
        way_out = "'python3 app/start.py' installs what it needs"
        raise UsageError(f"the window cannot open here ({error}); {way_out}") from None
    return Answer(status=run_window(path))


def score_verb(arguments: argparse.Namespace) -> Answer:
    """Estimate pressures and diodicity of what is made of one parameter set, at one flow or several."""
    import numpy as np

    from core.hydraulics.estimate import estimate

    project = _project(arguments)
    flows = _flows_ul_min(arguments, project)
    chosen = _chosen_set(project, arguments)
    fluid = project.operating.fluid_state()
    made, notes = _made(project, chosen)
    is_stiff = project.process.has_stiff_walls
    found = estimate(made, fluid=fluid, flows_ul_min=np.array(flows), has_stiff_walls=is_stiff)
    points = [_with_notes(found.score(index).as_dict(), notes) for index in range(len(flows))]
    if arguments.json:
        return Answer(text=as_json(points[0] if len(points) == 1 else {"points": points}))
    return Answer(text=score_text(points, title=_title(project, chosen), operating=project.operating, fluid=fluid))


def solve_verb(arguments: argparse.Namespace) -> Answer:
    """Solve the flow in what is made of one parameter set in both directions, at one flow or several."""
    from core.flow.channel import solve_channel

    project = _project(arguments)
    flows = _flows_ul_min(arguments, project)
    chosen = _chosen_set(project, arguments)
    fluid = project.operating.fluid_state()
    made, notes = _made(project, chosen)
    with told_progress() as report:
        found = solve_channel(
            made,
            fluid=fluid,
            flows_ul_min=flows,
            quality=arguments.quality,
            report=report,
            check_steady=arguments.quality == "fine",
            processes=2 if len(flows) > 1 else 1,  # forward and reverse side by side, where that pays
        )
    points = [_with_notes(point.as_dict(), notes) for point in found.points]
    if arguments.json:
        return Answer(text=as_json(points[0] if len(points) == 1 else {"points": points}))
    return Answer(text=score_text(points, title=_title(project, chosen), operating=project.operating, fluid=fluid))


def check_verb(arguments: argparse.Namespace) -> Answer:
    """Tell the findings of the whole chip, or of one parameter set."""
    from core.project.checks import order_findings, set_findings

    project = _project(arguments)
    if arguments.set is None:
        title, found = project.name, order_findings(project)
    else:
        chosen = _chosen_set(project, arguments)
        title = _title(project, chosen)
        found = tuple((chosen.name, finding) for finding in set_findings(project, chosen))
    if arguments.json:
        text = as_json({"findings": [{**finding.as_dict(), "set": name} for name, finding in found]})
    else:
        text = findings_text(found, title=title)
    return Answer(text=text, status=REFUSED if _errors_in(finding for _, finding in found) else GOOD)


def masks_verb(arguments: argparse.Namespace) -> Answer:
    """Write the mask set of the chip, or of bare channels when sets are asked for."""
    project = _project(arguments)
    if arguments.all_sets and arguments.set is not None:
        raise UsageError("--set and --all-sets exclude one another; give one of them")
    if not arguments.all_sets and arguments.set is None:
        return _chip_masks(project, arguments)
    return _bare_masks(project, arguments)


def _chip_masks(project: ChipProject, arguments: argparse.Namespace) -> Answer:
    from datetime import date

    from core.project.order import order_of

    with told_progress() as report:
        order = order_of(project, date=date.today(), force=arguments.force, report=report)
        done = order.write(arguments.out, report=report)
    return _masks_answer(done, project, arguments, left_out=list(order.left_out))


def _bare_masks(project: ChipProject, arguments: argparse.Namespace) -> Answer:
    from core.geometry.shape import build_shape
    from core.masks.mask_set import write_mask_set

    chosen = project.sets if arguments.all_sets else (_chosen_set(project, arguments),)
    shapes = [(each, build_shape(each.channel)) for each in chosen]
    if not arguments.force:
        for each, shape in shapes:
            _refuse_errors(each, shape, _way_out(shape, has_others=len(shapes) > 1))
    usable = [(each.name, shape) for each, shape in shapes if shape.outline is not None]
    left_out = [each.name for each, shape in shapes if shape.outline is None]
    if not usable:
        raise DesignRefusedError(f"nothing to write: no outline for {', '.join(map(shown, left_out))}; see 'check'")
    report = write_mask_set(usable, folder=arguments.out, chip_name=project.name)
    return _masks_answer(report, project, arguments, left_out=left_out)


def _masks_answer(
    report: MaskSetReport, project: ChipProject, arguments: argparse.Namespace, *, left_out: list[str]
) -> Answer:
    if arguments.json:
        return Answer(text=as_json({**report.as_dict(), "left_out": left_out}))
    return Answer(text=masks_text(report, title=project.name, left_out=left_out))


# --- what the verbs share ---------------------------------------------------------------------


def _project(arguments: argparse.Namespace) -> ChipProject:
    """Return the project of the file, its fields replaced as the command line says."""
    project = read_project(arguments.file)
    values = dict(_override(word) for word in arguments.overrides)
    operating = {name: value for name, value in values.items() if name in OPERATING_FIELDS}
    channel = {name: value for name, value in values.items() if name in CHANNEL_FIELDS}
    return replace(
        project,
        operating=project.operating.with_values(operating),
        sets=tuple(replace(each, channel=each.channel.with_values(channel)) for each in project.sets),
    )


def _override(word: str) -> tuple[str, object]:
    name, equals, value = (part.strip() for part in word.partition("="))
    if not equals:
        raise UsageError(f"--with {shown(word)} has no value; write --with FIELD=VALUE, for example --with stages=6")
    if name not in _OVERRIDES:
        raise unknown_field(name, value, _OVERRIDES)
    return name, value


def _chosen_set(project: ChipProject, arguments: argparse.Namespace) -> ParameterSet:
    return project.sets[0] if arguments.set is None else project.set_named(arguments.set)


def _flows_ul_min(arguments: argparse.Namespace, project: ChipProject) -> list[float]:
    if arguments.flow_ul_min is None:
        return [project.operating.flow_ul_min]
    field = OPERATING_FIELDS["flow_ul_min"]
    return [float(field.checked(word.strip())) for word in arguments.flow_ul_min.split(",")]


def _made(project: ChipProject, chosen: ParameterSet) -> tuple[ChannelParameters, list[str]]:
    """Return what the process makes of a set, and what is to be said when that is not what is wanted."""
    from core.fabrication.making import making_of
    from core.geometry.shape import build_shape

    _refuse_errors(chosen, build_shape(chosen.channel), "cure it first")
    making = making_of(chosen.channel, project.process)
    if making.flow == chosen.channel:
        return chosen.channel, [finding.message for finding in making.findings]
    _refuse_errors(
        chosen, build_shape(making.flow), f"that is what '{project.process.kind}' makes of it; cure it first"
    )
    return making.flow, list(making.notes)


def _with_notes(point: dict[str, object], notes: list[str]) -> dict[str, object]:
    return {**point, "notes": [*notes, *point["notes"]]}  # type: ignore[misc]


def _refuse_errors(chosen: ParameterSet, shape: ChannelShape, way_out: str) -> None:
    if errors := _errors_in(shape.findings):
        more = f" (and {len(errors) - 1} more, see 'check')" if len(errors) > 1 else ""
        raise DesignRefusedError(f"set {shown(chosen.name)} cannot be made: {errors[0].message}{more}; {way_out}")


def _way_out(shape: ChannelShape, *, has_others: bool) -> str:
    """Return what a user can do about a set whose masks are refused."""
    if shape.outline is not None:
        return "cure it, or add --force to write it all the same"
    return "cure it, or add --force to leave it out" if has_others else "cure it first"


def _errors_in(findings: Iterable[Finding]) -> list[Finding]:
    return [finding for finding in findings if finding.severity is Severity.ERROR]


def _title(project: ChipProject, chosen: ParameterSet) -> str:
    return f"{project.name}, set {shown(chosen.name)}"
