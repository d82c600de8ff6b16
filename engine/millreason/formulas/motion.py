"""Speeds, feeds and the volume they remove."""

from __future__ import annotations

import math

from millreason.formulas import _checks as check


def spindle_speed(cutting_speed_m_min: float, diameter_mm: float) -> float:
    """Spindle speed for a cutting speed: ``n = 1000 vc / (pi D)``.

    Parameters
    ----------
    cutting_speed_m_min : float
        Cutting speed vc [m/min].
    diameter_mm : float
        Diameter D that cuts [mm].

    Returns
    -------
    float
        Spindle speed [1/min].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero.

    Notes
    -----
    Exact; shop rules with rounded constants come out 0.5 to 5 % higher.

    Examples
    --------
    >>> round(spindle_speed(30, 75), 1)
    127.3

    References
    ----------
    groover-manufacturing, machinerys-handbook-27
    """
    speed = check.positive("cutting speed [m/min]", cutting_speed_m_min)
    return 1000.0 * speed / (math.pi * check.positive("cutter diameter [mm]", diameter_mm))


def cutting_speed(spindle_speed_rpm: float, diameter_mm: float) -> float:
    """Cutting speed at a spindle speed: ``vc = pi D n / 1000``.

    Parameters
    ----------
    spindle_speed_rpm : float
        Spindle speed n [1/min].
    diameter_mm : float
        Diameter D that cuts [mm].

    Returns
    -------
    float
        Cutting speed [m/min].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero.

    Notes
    -----
    The feed motion is neglected.

    Examples
    --------
    >>> round(cutting_speed(660, 63), 1)
    130.6

    References
    ----------
    groover-manufacturing
    """
    speed = check.positive("spindle speed [1/min]", spindle_speed_rpm)
    return math.pi * check.positive("cutter diameter [mm]", diameter_mm) * speed / 1000.0


def table_feed(feed_per_tooth_mm: float, teeth: int, spindle_speed_rpm: float) -> float:
    """Feed rate of the table: ``vf = fz z n``.

    Parameters
    ----------
    feed_per_tooth_mm : float
        Feed per tooth fz [mm].
    teeth : int
        Number of effective teeth z [-].
    spindle_speed_rpm : float
        Spindle speed n [1/min].

    Returns
    -------
    float
        Feed rate [mm/min].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or the teeth are not a whole number.

    Notes
    -----
    Count effective edges, not inserts.

    Examples
    --------
    >>> round(table_feed(0.15, 6, 1000), 6)
    900.0

    References
    ----------
    groover-manufacturing
    """
    feed = check.positive("feed per tooth [mm]", feed_per_tooth_mm) * check.teeth(teeth)
    return feed * check.positive("spindle speed [1/min]", spindle_speed_rpm)


def removal_rate(depth_mm: float, width_mm: float, table_feed_mm_min: float) -> float:
    """Volume removed in unit time: ``Q = ap ae vf / 1000``.

    Parameters
    ----------
    depth_mm : float
        Depth of cut ap [mm].
    width_mm : float
        Width of cut ae [mm].
    table_feed_mm_min : float
        Feed rate vf [mm/min].

    Returns
    -------
    float
        Removal rate [cm3/min].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero.

    Notes
    -----
    At full width; entry and exit remove less.

    Examples
    --------
    >>> removal_rate(3, 60, 600)
    108.0

    References
    ----------
    kalpakjian-schmid
    """
    area = check.positive("depth of cut [mm]", depth_mm) * check.positive("width of cut [mm]", width_mm)
    return area * check.positive("feed rate [mm/min]", table_feed_mm_min) / 1000.0
