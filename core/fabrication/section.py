"""The section across a channel: its area, and the upright walls that stand in for round or leaning ones."""

from __future__ import annotations

from math import pi, radians, tan

from core.fabrication.process import Process, ProcessKind

# Relative error in the flow, in percent, of a rectangle of equal depth and area, over (depth / mean width) and the
# square of the undercut or of the wall's slope. Bounds of a two-dimensional Poisson solve of the real section at
# depth / mean width 0.1 to 1; tests/core/fabrication/test_section.py solves it anew.
_ROUND_PERCENT, _LEANING_PERCENT = 12.0, 40.0
DEEPEST_WORKED_OUT = 1.0  # depth / mean width


def has_round_sides(process: Process) -> bool:
    """Return whether the walls are quarter ellipses, as wet etching under a mask makes them."""
    return process.kind == ProcessKind.WET_GLASS and process.undercut_ratio > 0.0


def side_loss_um(process: Process, *, depth_um: float) -> float:
    """Return how much narrower the channel is on average over its depth than at its widest.

    Formula: round sides 2 u h (1 - pi/4), leaning walls h tan(lean), with undercut u and depth h.

    Parameters
    ----------
    process : Process
        Any.
    depth_um : float
        Depth [um].

    Returns
    -------
    float
        Widest width less mean width [um].

    Notes
    -----
    The section area is depth times mean width. Isotropic etching (undercut 1) under a mask opening of width w gives
    w h + pi h^2 / 2, so the sides are quarter circles; for other undercuts quarter ellipses are assumed (common
    practice, no source).

    Examples
    --------
    An opening of 20 um, etched 50 um deep, is 120 um wide at the top; its area [um^2]:

    >>> glass = Process(kind="wet-etched glass", undercut_ratio=1.0, shrink_percent=0.0)
    >>> round(50.0 * (120.0 - side_loss_um(glass, depth_um=50.0)), 3)
    4926.991
    """
    if has_round_sides(process):
        return 2.0 * process.undercut_ratio * depth_um * (1.0 - 0.25 * pi)
    return depth_um * tan(radians(process.wall_lean_deg))


def floor_width_um(process: Process, *, width_um: float, depth_um: float) -> float:
    """Return the width at the floor of a channel whose widest width is given; negative where walls meet before [um]."""
    if has_round_sides(process):
        return width_um - 2.0 * process.undercut_ratio * depth_um
    return width_um - 2.0 * depth_um * tan(radians(process.wall_lean_deg))


def stand_in_error_percent(process: Process, *, mean_width_um: float, depth_um: float) -> float:
    """Return a bound of the error of reckoning with a rectangle of equal depth and area.

    Parameters
    ----------
    process : Process
        Tells the shape of the walls.
    mean_width_um : float
        Section area over depth [um].
    depth_um : float
        Depth [um].

    Returns
    -------
    float
        Largest error of the flow at a given pressure in a long straight channel [%]; 0 for upright walls.

    Notes
    -----
    Validity: depth up to ``DEEPEST_WORKED_OUT`` times the mean width. Derived here, from a Poisson solve.
    """
    slenderness = depth_um / mean_width_um
    if has_round_sides(process):
        return _ROUND_PERCENT * slenderness * max(1.0, process.undercut_ratio**2)
    return _LEANING_PERCENT * slenderness * tan(radians(process.wall_lean_deg)) ** 2


def stand_in_note(process: Process, *, mean_width_um: float, depth_um: float) -> str | None:
    """Return in words what stands in for walls that are not upright; None for upright ones.

    Parameters
    ----------
    process : Process
        Tells the shape of the walls.
    mean_width_um : float
        Section area over depth [um].
    depth_um : float
        Depth [um].
    """
    if side_loss_um(process, depth_um=depth_um) == 0.0:
        return None
    what = "etched round" if has_round_sides(process) else f"leaning by {process.wall_lean_deg:g} deg"
    said = f"walls are {what}: estimate and flow solve use upright walls with the same section area and depth"
    if depth_um > DEEPEST_WORKED_OUT * mean_width_um:
        return f"{said}; what that costs was not worked out for channels deeper than wide"
    error = stand_in_error_percent(process, mean_width_um=mean_width_um, depth_um=depth_um)
    return f"{said}, good to {max(error, 0.1):.2g} % of the flow in a straight channel"
