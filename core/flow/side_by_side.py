"""A flow curve shared out over child processes, with progress and a prompt stop."""

from __future__ import annotations

import multiprocessing
from multiprocessing.connection import wait
from typing import TYPE_CHECKING, Any

from core.errors import SolveError
from core.flow.newton import FlowStopped

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence
    from multiprocessing.connection import Connection

    from core.flow.domain import FlowDomain
    from core.flow.result import FlowResult

_POLL_S = 0.2


def solve_in_processes(
    solve_share: Callable[..., list[FlowResult]],
    domain: FlowDomain,
    flows_m3_s: Sequence[float],
    liquid: dict[str, Any],
    processes: int,
    *,
    memory_limit_mb: float,
    report: Callable[[int, int, str], None] | None,
    should_stop: Callable[[], bool] | None,
) -> list[FlowResult]:
    """Return the results of a flow curve, its flows dealt out over processes.

    Parameters
    ----------
    solve_share : callable
        What each child does with its flows: ``solve_curve``.
    domain : FlowDomain
    flows_m3_s : sequence of float
        Volume flows [m^3/s].
    liquid : dict
        Further keyword arguments of ``solve_curve``.
    processes : int
        At most this many children.
    memory_limit_mb, report, should_stop
        As for ``solve_curve``.

    Returns
    -------
    list of FlowResult
        In the order of ``flows_m3_s``.

    Raises
    ------
    SolveError
        If a child fails or dies.
    FlowStopped
        If ``should_stop`` answered True; the children are ended first.
    """
    ascending = sorted(set(flows_m3_s))
    hands = [ascending[i::processes] for i in range(min(processes, len(ascending)))]
    arguments = liquid | {"memory_limit_mb": memory_limit_mb / len(hands)}
    context = multiprocessing.get_context("spawn")
    children, links = [], []
    try:
        for hand in hands:
            ours, theirs = context.Pipe(duplex=False)
            child = context.Process(target=_work, args=(theirs, solve_share, domain, hand, arguments), daemon=True)
            child.start()
            theirs.close()
            children.append(child)
            links.append(ours)
        solved = _gather(links, report, should_stop)
    finally:
        for child in children:
            if child.is_alive():
                child.terminate()
            child.join()
        for link in links:
            link.close()
    return [solved[q] for q in flows_m3_s]


def _gather(
    links: list[Any], report: Callable[[int, int, str], None] | None, should_stop: Callable[[], bool] | None
) -> dict[float, FlowResult]:
    """Take messages from all children until each has delivered."""
    solved: dict[float, FlowResult] = {}
    steps, open_links = dict.fromkeys(links, (0, 1)), list(links)
    while open_links:
        if should_stop is not None and should_stop():
            raise FlowStopped("the flow solve was stopped")
        ready: list[Any] = wait(open_links, timeout=_POLL_S)
        for link in ready:
            try:
                kind, content = link.recv()
            except EOFError as error:
                raise SolveError("a process of the flow curve died; memory may have run out") from error
            if kind == "error":
                raise SolveError(content)
            if kind == "done":
                solved.update(content)
                open_links.remove(link)
            elif report is not None:
                steps[link] = content[:2]
                report(sum(s for s, _ in steps.values()), sum(t for _, t in steps.values()), content[2])
    return solved


def _work(
    link: Connection,
    solve_share: Callable[..., list[FlowResult]],
    domain: FlowDomain,
    flows_m3_s: list[float],
    arguments: dict[str, Any],
) -> None:
    """Run in a child: solve a share of the flows and send what happens."""

    def tell(step: int, total: int, text: str) -> None:
        link.send(("step", (step, total, text)))

    try:
        results = solve_share(domain, flows_m3_s=flows_m3_s, report=tell, **arguments)
    except SolveError as error:
        link.send(("error", str(error)))
    else:
        link.send(("done", dict(zip(flows_m3_s, results, strict=True))))
    finally:
        link.close()
