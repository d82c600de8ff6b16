"""Money and edges: economic life, cost of a part, edges for a batch, share of time lost to tool changes."""

from __future__ import annotations

import math
from dataclasses import dataclass

from millreason.errors import OutOfRangeError
from millreason.formulas import _checks as check


@dataclass(frozen=True)
class PartCost:
    """Cost of one part and its shares, the parts from one set of edges, and how parts were counted."""

    handling: float
    cutting: float
    tool_change: float
    edges: float
    total: float
    parts_per_set: float
    cycle_min: float
    counting: str


def economic_life(exponent: float, change_min: float, edge_cost: float = 0.0, rate_per_min: float = 1.0) -> float:
    """Life with the least cost: ``T = (1/n - 1) (t_change + cost / rate)``; without cost, the most output.

    Parameters
    ----------
    exponent : float
        Exponent n of Taylor's law [-].
    change_min : float
        Time to change the edges; zero when the cost holds it already [min].
    edge_cost : float
        Cost of one set of edges; zero for the life with the most output [money].
    rate_per_min : float
        Cost of machine and operator in a minute [money/min].

    Returns
    -------
    float
        Economic life [min].

    Raises
    ------
    OutOfRangeError
        If the exponent is not above 0 and below 1, a value negative, or nothing is lost in a change.

    Notes
    -----
    Does not depend on the constant of the law. `speed_for_life` turns it into a speed.

    Examples
    --------
    >>> economic_life(0.125, 2), economic_life(0.125, 2, 3, 0.5)
    (14.0, 56.0)

    References
    ----------
    groover-manufacturing, ghosh-mallik
    """
    slope = 1.0 / check.taylor_exponent(exponent) - 1.0
    cost = check.not_negative("cost of a set of edges", edge_cost)
    lost = check.not_negative("time to change [min]", change_min)
    lost += cost / check.positive("rate per minute", rate_per_min)
    if lost <= 0.0:
        raise OutOfRangeError("time to change [min]", change_min, "above zero where the edges cost nothing")
    return slope * lost


def tool_change_cost(change_min: float, regrind_min: float, rate_per_min: float, depreciation: float) -> float:
    """Cost of one tool change: ``(t_change + t_regrind) rate + depreciation``.

    Parameters
    ----------
    change_min : float
        Time to change the edges [min].
    regrind_min : float
        Time to sharpen; zero for inserts [min].
    rate_per_min : float
        Cost of machine and operator in a minute [money/min].
    depreciation : float
        Value lost with one set of edges [money].

    Returns
    -------
    float
        Cost of one change [money].

    Raises
    ------
    OutOfRangeError
        If the rate is not finite and above zero, or another value negative.

    Notes
    -----
    One rate for both; with two rates, add two results.

    Examples
    --------
    >>> round(tool_change_cost(8, 5, 5 / 60, 0.3), 2)
    1.38

    References
    ----------
    sharma-production
    """
    labour = check.not_negative("time to change [min]", change_min)
    labour += check.not_negative("time to sharpen [min]", regrind_min)
    lost = check.not_negative("depreciation", depreciation)
    return labour * check.positive("rate per minute", rate_per_min) + lost


def cost_per_part(
    handling_min: float,
    cutting_min: float,
    change_min: float,
    edge_cost: float,
    rate_per_min: float,
    life_min: float,
    counting: str,
) -> PartCost:
    """Cost of one part: ``rate (t_handling + t_cutting + t_change / N) + cost / N``, N parts from a set.

    Parameters
    ----------
    handling_min : float
        Time to load and unload [min].
    cutting_min : float
        Time of the cut [min].
    change_min : float
        Time to change a set of edges [min].
    edge_cost : float
        Cost of a set of edges [money].
    rate_per_min : float
        Cost of machine and operator in a minute [money/min].
    life_min : float
        Life of the edges in time of cut [min].
    counting : str
        ``whole`` parts (edges changed between parts) or ``fractional`` parts (during a part) [-].

    Returns
    -------
    PartCost
        Shares and total [money], parts from a set [-], cycle time [min] and the counting used [-].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and in range, the counting unknown, or a set does not last one whole part.

    Notes
    -----
    Books count either way; whole parts cost a few per cent more.

    Examples
    --------
    >>> round(cost_per_part(5, 12.566, 2, 3, 0.5, 14.76, "whole").total, 2)
    12.78

    References
    ----------
    groover-manufacturing
    """
    check.choice("counting of parts", counting, ("whole", "fractional"))
    cutting = check.positive("time of cut [min]", cutting_min)
    parts = check.positive("tool life [min]", life_min) / cutting
    if counting == "whole":
        parts = float(math.floor(parts * (1.0 + check.ROUNDING)))
        if parts < 1.0:
            raise OutOfRangeError("tool life [min]", life_min, f"at least one part, {cutting:g} min of cut")
    rate = check.positive("rate per minute", rate_per_min)
    handling = check.not_negative("handling time [min]", handling_min)
    change = check.not_negative("time to change [min]", change_min) / parts
    edges = check.not_negative("cost of a set of edges", edge_cost) / parts
    cycle = handling + cutting + change
    shares = (rate * handling, rate * cutting, rate * change, edges)
    return PartCost(*shares, math.fsum(shares), parts, cycle, counting)


def edges_per_batch(cutting_min: float, quantity: int, life_min: float, teeth: int) -> int:
    """Edges that a batch uses up: ``z ceil(N t_cutting / T)``.

    Parameters
    ----------
    cutting_min : float
        Time of cut of one part [min].
    quantity : int
        Parts in the batch N [-].
    life_min : float
        Life of the edges in time of cut T [min].
    teeth : int
        Number of inserts changed together z [-].

    Returns
    -------
    int
        Cutting edges [-]; divide by the edges on an insert for inserts.

    Raises
    ------
    OutOfRangeError
        If a time is not finite and above zero, or a count not a whole number above zero.

    Notes
    -----
    All inserts of the cutter are turned together, and an edge may be changed during a part.

    Examples
    --------
    >>> edges_per_batch(2.6, 50, 45, 6)
    18

    References
    ----------
    common practice
    """
    total = check.positive("time of cut [min]", cutting_min) * check.count("quantity", quantity)
    sets = check.finite("sets of edges", total / check.positive("tool life [min]", life_min))
    return max(1, math.ceil(sets * (1.0 - check.ROUNDING))) * check.teeth(teeth)


def tool_change_share(cutting_min: float, handling_min: float, change_min: float, life_min: float) -> float:
    """Share of the time at the machine that tool changes take: ``t_change / N`` over the cycle.

    Parameters
    ----------
    cutting_min : float
        Time of cut of one part [min].
    handling_min : float
        Time to load and unload [min].
    change_min : float
        Time to change a set of edges [min].
    life_min : float
        Life of the edges in time of cut [min].

    Returns
    -------
    float
        Share [-].

    Raises
    ------
    OutOfRangeError
        If cut or life is not finite and above zero, or another time negative.

    Notes
    -----
    Counts fractional parts from a set of edges.

    Examples
    --------
    >>> round(tool_change_share(10, 5, 6, 30), 3)
    0.118

    References
    ----------
    own derivation
    """
    cutting = check.positive("time of cut [min]", cutting_min)
    change = check.not_negative("time to change [min]", change_min)
    change *= cutting / check.positive("tool life [min]", life_min)
    return change / (check.not_negative("handling time [min]", handling_min) + cutting + change)
