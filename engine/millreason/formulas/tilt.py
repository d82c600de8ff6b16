"""Tilt of the spindle: the dish it leaves, the lift of the trailing edge, the step between passes."""

from __future__ import annotations

import math
from dataclasses import dataclass

from millreason.errors import OutOfRangeError
from millreason.formulas import _checks as check


@dataclass(frozen=True)
class TiltWindow:
    """Least tilt that keeps the back of the cutter clear and largest that the flatness allows."""

    least_mm_m: float
    largest_mm_m: float | None

    @property
    def is_open(self) -> bool:
        """Whether any tilt satisfies both."""
        return self.largest_mm_m is None or self.least_mm_m <= self.largest_mm_m


def tilt_dish(tilt_mm_m: float, diameter_mm: float, width_mm: float, entry_gap_mm: float | None = None) -> float:
    """Depth of the dish that a tilt along the feed leaves.

    ``sin theta (sqrt(R^2 - y_min^2) - sqrt(R^2 - y_max^2))``.

    Parameters
    ----------
    tilt_mm_m : float
        Tilt along the feed, leading edge low [mm/m].
    diameter_mm : float
        Diameter D of the points that make the floor [mm].
    width_mm : float
        Width of cut ae [mm].
    entry_gap_mm : float, optional
        Gap from the cutter circle on the entry side to the work edge; centred when left out [mm].

    Returns
    -------
    float
        Depth over the width of the pass [mm].

    Raises
    ------
    OutOfRangeError
        If the tilt is negative or not finite, or width and gap do not fit inside the diameter.

    Notes
    -----
    The distances y from the centre are the nearest and the farthest inside the width. Stiff machine.

    Examples
    --------
    >>> round(tilt_dish(0.1, 125, 100) * 1000, 1)
    2.5

    References
    ----------
    own derivation
    """
    return _sine(check.not_negative("tilt [mm/m]", tilt_mm_m)) * _arc_depth(diameter_mm, width_mm, entry_gap_mm)


def trailing_lift(tilt_mm_m: float, diameter_mm: float) -> float:
    """Clearance of the trailing edge on the centre line: ``D sin theta``.

    Parameters
    ----------
    tilt_mm_m : float
        Tilt along the feed, leading edge low [mm/m].
    diameter_mm : float
        Diameter D of the points that make the floor [mm].

    Returns
    -------
    float
        Lift [mm].

    Raises
    ------
    OutOfRangeError
        If the tilt is negative or not finite, or the diameter not above zero.

    Notes
    -----
    To stop cutting at the back it exceeds axial run-out and deflection together.

    Examples
    --------
    >>> round(trailing_lift(0.1, 125) * 1000, 1)
    12.5

    References
    ----------
    own derivation
    """
    tilt = check.not_negative("tilt [mm/m]", tilt_mm_m)
    return check.positive("cutter diameter [mm]", diameter_mm) * _sine(tilt)


def tilt_window(
    diameter_mm: float,
    width_mm: float,
    dish_allowed_mm: float,
    lift_needed_mm: float,
    entry_gap_mm: float | None = None,
) -> TiltWindow:
    """Tilts between enough lift at the back and too deep a dish: ``lift = D sin``, ``dish = a sin``.

    Parameters
    ----------
    diameter_mm : float
        Diameter D of the points that make the floor [mm].
    width_mm : float
        Width of cut ae [mm].
    dish_allowed_mm : float
        Largest dish that the flatness leaves [mm].
    lift_needed_mm : float
        Axial run-out and deflection together [mm].
    entry_gap_mm : float, optional
        Gap from the cutter circle on the entry side to the work edge; centred when left out [mm].

    Returns
    -------
    TiltWindow
        Least and largest tilt [mm/m], the largest None where no tilt dishes that deep; closed when the
        least exceeds the largest.

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or does not fit the diameter.

    Notes
    -----
    The two aims oppose each other: a wide cut needs a large cutter, a small run-out, or a rougher finish.

    Examples
    --------
    >>> window = tilt_window(125, 100, 0.0025, 0.005)
    >>> round(window.least_mm_m, 3), round(window.largest_mm_m or 0, 3), window.is_open
    (0.04, 0.1, True)

    References
    ----------
    own derivation
    """
    diameter = check.positive("cutter diameter [mm]", diameter_mm)
    depth = _arc_depth(diameter, width_mm, entry_gap_mm)
    lift = check.inside("lift needed [mm]", check.positive("lift needed [mm]", lift_needed_mm), 0.0, diameter)
    dish = check.positive("dish allowed [mm]", dish_allowed_mm)
    largest = None if dish >= depth else 1000.0 * math.tan(math.asin(dish / depth))
    return TiltWindow(1000.0 * math.tan(math.asin(lift / diameter)), largest)


def pass_step(stepover_mm: float, lateral_tilt_mm_m: float) -> float:
    """Step between passes side by side under a tilt across the feed: ``stepover * tan theta``.

    Parameters
    ----------
    stepover_mm : float
        Distance between the lines of the passes [mm].
    lateral_tilt_mm_m : float
        Tilt across the feed [mm/m].

    Returns
    -------
    float
        Step [mm].

    Raises
    ------
    OutOfRangeError
        If the distance is not finite and above zero, or the tilt negative.

    Notes
    -----
    Each pass is straight across but sloped; worn inserts and re-positioning add to the step.

    Examples
    --------
    >>> round(pass_step(50, 0.1) * 1000, 1)
    5.0

    References
    ----------
    own derivation
    """
    tilt = check.not_negative("tilt across the feed [mm/m]", lateral_tilt_mm_m)
    return check.positive("stepover [mm]", stepover_mm) * tilt / 1000.0


def _sine(tilt_mm_m: float) -> float:
    return math.sin(math.atan(tilt_mm_m / 1000.0))


def _arc_depth(diameter_mm: float, width_mm: float, entry_gap_mm: float | None) -> float:
    diameter = check.positive("cutter diameter [mm]", diameter_mm)
    width = check.above_up_to("width of cut [mm]", width_mm, 0.0, diameter)
    room = diameter - width
    gap = room / 2.0 if entry_gap_mm is None else check.not_negative("entry gap [mm]", entry_gap_mm)
    if gap > room + check.ROUNDING * diameter:
        raise OutOfRangeError("entry gap [mm]", entry_gap_mm, f"from 0 to {room:g}")
    radius = diameter / 2.0
    ends = (radius - gap, radius - gap - width)
    nearest = 0.0 if ends[1] < 0.0 < ends[0] else min(abs(end) for end in ends)
    farthest = min(max(abs(end) for end in ends), radius)
    return math.sqrt(radius**2 - nearest**2) - math.sqrt(radius**2 - farthest**2)
