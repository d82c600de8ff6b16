"""Travel at feed and its time, with the convention of approach and over-run in the name."""

from __future__ import annotations

import math

from millreason.formulas import _checks as check


def approach(diameter_mm: float, entry_deg: float, exit_deg: float) -> float:
    """Travel from first touch to full width at any position: ``R (max sin phi - min sin phi)`` on the arc.

    Parameters
    ----------
    diameter_mm : float
        Cutter diameter D [mm].
    entry_deg : float
        Entry angle phi1 [deg].
    exit_deg : float
        Exit angle phi2 [deg].

    Returns
    -------
    float
        Approach [mm].

    Raises
    ------
    OutOfRangeError
        If the diameter is not finite and above zero, or the angles are not 0 <= phi1 < phi2 <= 180.

    Notes
    -----
    Work with its end square to the feed. Gives `approach_centred` and `approach_flush` at their positions.

    Examples
    --------
    >>> round(approach(150, 66.42, 113.58), 2)
    6.26

    References
    ----------
    own derivation
    """
    radius = check.positive("cutter diameter [mm]", diameter_mm) / 2.0
    entry, leave = check.arc_ends(entry_deg, exit_deg)
    ends = [math.sin(math.radians(angle)) for angle in (entry, leave)]
    front = 1.0 if entry <= 90.0 <= leave else max(ends)
    return radius * (front - min(ends))


def approach_centred(width_mm: float, diameter_mm: float) -> float:
    """Approach with the cutter centred on the width: ``(D - sqrt(D^2 - ae^2)) / 2``.

    Parameters
    ----------
    width_mm : float
        Width of cut ae [mm].
    diameter_mm : float
        Cutter diameter D [mm].

    Returns
    -------
    float
        Approach [mm].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or the width exceeds the diameter.

    Notes
    -----
    Some older editions take half the diameter for any width.

    Examples
    --------
    >>> round(approach_centred(2, 3), 3)
    0.382

    References
    ----------
    groover-manufacturing, tabellenbuch-metall
    """
    diameter = check.positive("cutter diameter [mm]", diameter_mm)
    width = check.above_up_to("width of cut [mm]", width_mm, 0.0, diameter)
    return (diameter - math.sqrt(diameter**2 - width**2)) / 2.0


def approach_flush(width_mm: float, diameter_mm: float) -> float:
    """Approach with one flank on the work edge: ``sqrt(ae (D - ae))`` up to half the diameter, else ``D/2``.

    Parameters
    ----------
    width_mm : float
        Width of cut ae; for peripheral milling the depth across the axis [mm].
    diameter_mm : float
        Cutter diameter D [mm].

    Returns
    -------
    float
        Approach [mm].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or the width exceeds the diameter.

    Notes
    -----
    The root alone would fall again beyond half the diameter, where the front of the cutter touches first.

    Examples
    --------
    >>> approach_flush(0.25, 2.5)
    0.75

    References
    ----------
    groover-manufacturing, boothroyd-knight
    """
    diameter = check.positive("cutter diameter [mm]", diameter_mm)
    width = check.above_up_to("width of cut [mm]", width_mm, 0.0, diameter)
    return math.sqrt(width * (diameter - width)) if width <= diameter / 2.0 else diameter / 2.0


def feed_travel(length_mm: float, approach_mm: float, overrun_mm: float, clearance_mm: float = 0.0) -> float:
    """Travel at feed of one pass: ``L + approach + over-run + 2 clearance``.

    Parameters
    ----------
    length_mm : float
        Length L of the work [mm].
    approach_mm : float
        Approach by the convention in use [mm].
    overrun_mm : float
        Travel past the far end; zero when the pass stops as soon as the floor is cut [mm].
    clearance_mm : float
        Safe distance at each end [mm].

    Returns
    -------
    float
        Travel [mm].

    Raises
    ------
    OutOfRangeError
        If the length is not finite and above zero, or another value negative.

    Notes
    -----
    Books differ by the approach and over-run they take; name the convention with the time.

    Examples
    --------
    >>> round(feed_travel(200, 18.7, 0), 1)
    218.7

    References
    ----------
    groover-manufacturing
    """
    ends = check.not_negative("approach [mm]", approach_mm) + check.not_negative("over-run [mm]", overrun_mm)
    gaps = 2.0 * check.not_negative("clearance [mm]", clearance_mm)
    return check.positive("length of the work [mm]", length_mm) + ends + gaps


def full_overrun_travel(length_mm: float, diameter_mm: float, clearance_mm: float) -> float:
    """Travel at feed when the whole cutter clears both ends: ``L + D + 2 clearance``.

    Parameters
    ----------
    length_mm : float
        Length L of the work [mm].
    diameter_mm : float
        Cutter diameter D [mm].
    clearance_mm : float
        Safe distance at each end [mm].

    Returns
    -------
    float
        Travel [mm].

    Raises
    ------
    OutOfRangeError
        If length or diameter is not finite and above zero, or the clearance negative.

    Notes
    -----
    The convention for finishing passes, where the trailing edge must leave the floor too.

    Examples
    --------
    >>> full_overrun_travel(400, 80, 3)
    486.0

    References
    ----------
    tabellenbuch-metall
    """
    gaps = 2.0 * check.not_negative("clearance [mm]", clearance_mm)
    length = check.positive("length of the work [mm]", length_mm)
    return length + check.positive("cutter diameter [mm]", diameter_mm) + gaps


def roll_in_length(arc_radius_mm: float, arc_deg: float) -> float:
    """Path of the cutter centre on a roll-in arc: ``r alpha``, alpha in radians.

    Parameters
    ----------
    arc_radius_mm : float
        Radius r of the path of the centre [mm].
    arc_deg : float
        Angle alpha of the arc [deg].

    Returns
    -------
    float
        Path at feed before the straight cut [mm].

    Raises
    ------
    OutOfRangeError
        If the radius is not finite and above zero, or the angle not above 0 and at most 180.

    Notes
    -----
    An arc that turns into the line of cut lets the teeth leave with no chip thickness from the first turn.

    Examples
    --------
    >>> round(roll_in_length(40, 90), 2)
    62.83

    References
    ----------
    common practice
    """
    radius = check.positive("roll-in radius [mm]", arc_radius_mm)
    return radius * math.radians(check.above_up_to("roll-in arc [deg]", arc_deg, 0.0, 180.0))


def pass_time(travel_mm: float, table_feed_mm_min: float, passes: int, reposition_min: float) -> float:
    """Time of several equal passes: ``N travel / vf + (N - 1) reposition``.

    Parameters
    ----------
    travel_mm : float
        Travel at feed of one pass [mm].
    table_feed_mm_min : float
        Feed rate vf [mm/min].
    passes : int
        Number of passes N, across and in depth together [-].
    reposition_min : float
        Time between two passes [min].

    Returns
    -------
    float
        Time [min].

    Raises
    ------
    OutOfRangeError
        If travel or feed is not finite and above zero, or the time between passes negative.

    Notes
    -----
    Loading, tool change and measuring are not in it.

    Examples
    --------
    >>> pass_time(500, 1000, 4, 0.05)
    2.15

    References
    ----------
    groover-manufacturing
    """
    number = check.count("number of passes", passes)
    idle = (number - 1) * check.not_negative("time between passes [min]", reposition_min)
    feed = check.positive("feed rate [mm/min]", table_feed_mm_min)
    return number * check.positive("travel [mm]", travel_mm) / feed + idle
