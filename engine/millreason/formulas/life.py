"""Tool life after Taylor, both directions, with its extended form and a band; each law has a stated basis.

A constant and an exponent hold for one pair of edge and material, one wear limit and the feed and depth
of their test. Life is time in the cut, counted as feed time of the cutter.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from millreason.errors import OutOfRangeError
from millreason.formulas import _checks as check
from millreason.formulas.economics import (
    PartCost,
    cost_per_part,
    economic_life,
    edges_per_batch,
    tool_change_cost,
    tool_change_share,
)
from millreason.formulas.unit_power import Band

__all__ = [
    "Band",
    "PartCost",
    "TaylorLaw",
    "break_even_speed",
    "cost_per_part",
    "economic_life",
    "edges_per_batch",
    "extended_constant",
    "life_band",
    "speed_for_life",
    "taylor_fit",
    "tool_change_cost",
    "tool_change_share",
    "tool_life",
]


@dataclass(frozen=True)
class TaylorLaw:
    """A life law ``vc T^n = C``: the exponent n and the constant C, the speed for one minute."""

    exponent: float
    constant_m_min: float


def tool_life(cutting_speed_m_min: float, constant_m_min: float, exponent: float) -> float:
    """Life of the edge at a speed: ``T = (C / vc)^(1/n)``.

    Parameters
    ----------
    cutting_speed_m_min : float
        Cutting speed vc [m/min].
    constant_m_min : float
        Constant C, the speed for a life of one minute [m/min].
    exponent : float
        Exponent n [-].

    Returns
    -------
    float
        Life [min].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, the exponent not below 1, or the life past computing.

    Notes
    -----
    Holds between the speeds of the test; at low speed a built-up edge shortens the life instead.

    Examples
    --------
    >>> round(tool_life(80, 192.8, 0.2851), 1)
    21.9

    References
    ----------
    groover-manufacturing
    """
    ratio = check.positive("Taylor constant [m/min]", constant_m_min) / check.positive(
        "cutting speed [m/min]", cutting_speed_m_min
    )
    return check.power_of("tool life [min]", ratio, 1.0 / check.taylor_exponent(exponent))


def speed_for_life(life_min: float, constant_m_min: float, exponent: float) -> float:
    """Cutting speed that gives a life: ``vc = C / T^n``.

    Parameters
    ----------
    life_min : float
        Life T [min].
    constant_m_min : float
        Constant C, the speed for a life of one minute [m/min].
    exponent : float
        Exponent n [-].

    Returns
    -------
    float
        Cutting speed [m/min].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or the exponent not below 1.

    Notes
    -----
    With `economic_life` it gives the economic speed.

    Examples
    --------
    >>> round(speed_for_life(56, 70, 0.125), 1)
    42.3

    References
    ----------
    groover-manufacturing
    """
    constant = check.positive("Taylor constant [m/min]", constant_m_min)
    life = check.positive("tool life [min]", life_min)
    return constant * check.power_of("cutting speed [m/min]", life, -check.taylor_exponent(exponent))


def taylor_fit(speed_1_m_min: float, life_1_min: float, speed_2_m_min: float, life_2_min: float) -> TaylorLaw:
    """Law through two measured lives: ``n = ln(v2 / v1) / ln(T1 / T2)``, ``C = v1 T1^n``.

    Parameters
    ----------
    speed_1_m_min : float
        First cutting speed [m/min].
    life_1_min : float
        Life at the first speed [min].
    speed_2_m_min : float
        Second cutting speed [m/min].
    life_2_min : float
        Life at the second speed [min].

    Returns
    -------
    TaylorLaw
        Exponent [-] and constant [m/min].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or the faster speed does not have the clearly shorter life.

    Notes
    -----
    Two points have no scatter to show; use it between them.

    Examples
    --------
    >>> law = taylor_fit(60, 81, 90, 36)
    >>> round(law.exponent, 6), round(law.constant_m_min, 6)
    (0.5, 540.0)

    References
    ----------
    groover-manufacturing
    """
    speeds = [check.positive("cutting speed [m/min]", v) for v in (speed_1_m_min, speed_2_m_min)]
    lives = [check.positive("tool life [min]", life) for life in (life_1_min, life_2_min)]
    faster, longer = math.log(speeds[1] / speeds[0]), math.log(lives[0] / lives[1])
    if longer == 0.0 or not 0.0 < faster / longer < 1.0:
        raise OutOfRangeError("tool life [min]", life_2_min, "shorter at the faster speed, by more than speed")
    slope = faster / longer
    return TaylorLaw(slope, speeds[0] * lives[0] ** slope)


def extended_constant(
    constant_m_min: float,
    feed_mm: float,
    feed_exponent: float,
    depth_mm: float = 1.0,
    depth_exponent: float = 0.0,
) -> float:
    """Constant of the plain law inside the extended one, ``vc T^n f^a d^b = K``: ``C = K / (f^a d^b)``.

    Parameters
    ----------
    constant_m_min : float
        Constant K, the speed for one minute at unit feed and depth [m/min].
    feed_mm : float
        Feed f of the law [mm].
    feed_exponent : float
        Exponent a [-].
    depth_mm : float
        Depth d of the law [mm].
    depth_exponent : float
        Exponent b; zero leaves the depth out [-].

    Returns
    -------
    float
        Constant C for this feed and depth [m/min].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and in range.

    Notes
    -----
    The exponents belong to one published test.

    Examples
    --------
    >>> round(extended_constant(500, 0.5, 0.5), 1)
    707.1

    References
    ----------
    groover-manufacturing, stephenson-agapiou
    """
    constant = check.positive("constant of the extended law [m/min]", constant_m_min)
    by_feed = check.not_negative("exponent of the feed", feed_exponent)
    by_depth = check.not_negative("exponent of the depth", depth_exponent)
    feed = check.power_of("feed [mm]", check.positive("feed [mm]", feed_mm), -by_feed)
    depth = check.power_of("depth of cut [mm]", check.positive("depth of cut [mm]", depth_mm), -by_depth)
    return check.positive("Taylor constant [m/min]", constant * feed * depth)


def break_even_speed(first: TaylorLaw, second: TaylorLaw) -> float:
    """Speed at which two grades live equally long: ``ln v = (n2 ln C1 - n1 ln C2) / (n2 - n1)``.

    Parameters
    ----------
    first : TaylorLaw
        Law of the first grade [m/min].
    second : TaylorLaw
        Law of the second grade [m/min].

    Returns
    -------
    float
        Cutting speed; above it the grade with the larger exponent lives longer [m/min].

    Raises
    ------
    OutOfRangeError
        If a law is unsound or both exponents are the same.

    Notes
    -----
    Both laws need the same wear limit and feed.

    Examples
    --------
    >>> round(break_even_speed(TaylorLaw(0.1, 150), TaylorLaw(0.3, 300)), 2)
    106.07

    References
    ----------
    groover-manufacturing
    """
    slopes = [check.taylor_exponent(law.exponent) for law in (first, second)]
    logs = [math.log(check.positive("Taylor constant [m/min]", law.constant_m_min)) for law in (first, second)]
    if slopes[0] == slopes[1]:
        raise OutOfRangeError("Taylor exponent", slopes[1], "different from the other grade's")
    exponent = (slopes[1] * logs[0] - slopes[0] * logs[1]) / (slopes[1] - slopes[0])
    return check.power_of("cutting speed [m/min]", math.e, exponent)


def life_band(cutting_speed_m_min: float, reference_speed_m_min: float, reference_life: Band, exponent: Band) -> Band:
    """Life away from a reference: ``T = T_ref (v_ref / vc)^(1/n)``, over the bands of T_ref and n.

    Parameters
    ----------
    cutting_speed_m_min : float
        Cutting speed vc [m/min].
    reference_speed_m_min : float
        Speed of the stated basis [m/min].
    reference_life : Band
        Life at that speed [min].
    exponent : Band
        Exponent n of Taylor's law [-].

    Returns
    -------
    Band
        Low, likely and high life [min].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, an exponent not below 1, or the life past computing.

    Notes
    -----
    Corner values of both bands, so the band opens with the distance from the reference speed.

    Examples
    --------
    >>> life_band(200, 200, Band(30, 45, 60), Band(0.2, 0.25, 0.35))
    Band(low=30.0, likely=45.0, high=60.0)

    References
    ----------
    groover-manufacturing, own derivation
    """
    slower = check.positive("reference speed [m/min]", reference_speed_m_min)
    ratio = slower / check.positive("cutting speed [m/min]", cutting_speed_m_min)
    slopes = [1.0 / check.taylor_exponent(n) for n in (exponent.low, exponent.likely, exponent.high)]
    scale = [check.power_of("tool life [min]", ratio, slope) for slope in slopes]
    lives = [
        check.positive("reference life [min]", life)
        for life in (reference_life.low, reference_life.likely, reference_life.high)
    ]
    return Band(lives[0] * min(scale), lives[1] * scale[1], lives[2] * max(scale))
