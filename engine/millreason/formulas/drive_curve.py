"""Power and torque against speed: curves of points, base speed and gears."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

from millreason.errors import OutOfRangeError
from millreason.formulas import _checks as check

Curve = Sequence[tuple[float, float]]


@dataclass(frozen=True)
class GearChoice:
    """Gear with the most power at a speed, and that power."""

    gear: int
    power_kw: float


def available_power(points: Curve, speed_rpm: float) -> float:
    """Power at a speed on a curve of points: straight between them, ``P = P1 n / n1`` below the first.

    Parameters
    ----------
    points : sequence of (float, float)
        Speed [1/min] and power [kW] of each corner of the curve, by rising speed.
    speed_rpm : float
        Spindle speed n [1/min].

    Returns
    -------
    float
        Power [kW].

    Raises
    ------
    OutOfRangeError
        If the speed is above the last point, or the points are none, not rising, or not above zero.

    Notes
    -----
    Straight lines are exact for constant torque (a line through zero) and for constant power. Below the
    first point the torque stays what it is there, so a large cutter turned slowly has little power.

    Examples
    --------
    >>> round(available_power([(1500, 11), (8000, 11)], 750), 2)
    5.5

    References
    ----------
    own derivation
    """
    curve = _checked_curve(points)
    top = curve[-1][0]
    speed = check.above_up_to("spindle speed [1/min]", speed_rpm, 0.0, top)
    left = (0.0, 0.0)
    for right in curve:
        if speed <= right[0]:
            return left[1] + (right[1] - left[1]) * (speed - left[0]) / (right[0] - left[0])
        left = right
    return curve[-1][1]


def available_torque(points: Curve, speed_rpm: float) -> float:
    """Torque at a speed on a curve of points: ``M = 30000 P / (pi n)``.

    Parameters
    ----------
    points : sequence of (float, float)
        Speed [1/min] and power [kW] of each corner of the curve, by rising speed.
    speed_rpm : float
        Spindle speed n [1/min].

    Returns
    -------
    float
        Torque [N.m].

    Raises
    ------
    OutOfRangeError
        If the speed is above the last point, or the points are none, not rising, or not above zero.

    Notes
    -----
    Constant below the first point.

    Examples
    --------
    >>> round(available_torque([(1500, 11), (8000, 11)], 300), 1)
    70.0

    References
    ----------
    own derivation
    """
    return 30000.0 * available_power(points, speed_rpm) / (math.pi * speed_rpm)


def base_speed(power_kw: float, torque_nm: float) -> float:
    """Speed at which full torque makes full power: ``n = 30000 P / (pi M)``.

    Parameters
    ----------
    power_kw : float
        Rated power [kW].
    torque_nm : float
        Rated torque [N.m].

    Returns
    -------
    float
        Base speed [1/min].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero.

    Notes
    -----
    Power and torque must belong to the same duty and to the same shaft.

    Examples
    --------
    >>> round(base_speed(11, 95))
    1106

    References
    ----------
    own derivation
    """
    power = check.positive("power [kW]", power_kw)
    return 30000.0 * power / (math.pi * check.positive("torque [N.m]", torque_nm))


def drive_curve(power_kw: float, base_speed_rpm: float, speed_max_rpm: float) -> tuple[tuple[float, float], ...]:
    """Curve of a drive with constant torque up to its base speed and constant power above it.

    ``P(n) = P_rated min(1, n / n_base)``.

    Parameters
    ----------
    power_kw : float
        Rated power [kW].
    base_speed_rpm : float
        Base speed [1/min]; see `base_speed` when the torque is known instead.
    speed_max_rpm : float
        Highest speed [1/min].

    Returns
    -------
    tuple of (float, float)
        Points of speed [1/min] and power [kW] for `available_power`.

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero.

    Notes
    -----
    A base speed above the highest speed leaves constant torque throughout.

    Examples
    --------
    >>> drive_curve(11, 1500, 8000)
    ((1500.0, 11.0), (8000.0, 11.0))

    References
    ----------
    own derivation
    """
    power = check.positive("power [kW]", power_kw)
    base = check.positive("base speed [1/min]", base_speed_rpm)
    top = check.positive("highest speed [1/min]", speed_max_rpm)
    if base >= top:
        return ((top, power * top / base),)
    return ((base, power), (top, power))


def geared_curve(points: Curve, reduction: float) -> tuple[tuple[float, float], ...]:
    """Curve of the spindle behind a gear: speeds divided by the reduction, power kept.

    Parameters
    ----------
    points : sequence of (float, float)
        Speed [1/min] and power [kW] of each corner of the motor's curve.
    reduction : float
        Motor speed over spindle speed [-].

    Returns
    -------
    tuple of (float, float)
        Points of speed [1/min] and power [kW] at the spindle, losses apart.

    Raises
    ------
    OutOfRangeError
        If the points are none, not rising, or not above zero, or the reduction is not above zero.

    Notes
    -----
    Torque grows by the reduction. Losses belong to the drive's efficiency.

    Examples
    --------
    >>> geared_curve([(1500, 11), (6000, 11)], 4)
    ((375.0, 11.0), (1500.0, 11.0))

    References
    ----------
    own derivation
    """
    ratio = check.positive("reduction", reduction)
    return tuple((speed / ratio, power) for speed, power in _checked_curve(points))


def best_gear(curves: Sequence[Curve], speed_rpm: float) -> GearChoice:
    """Gear with the most power at a speed, the first of equals.

    Parameters
    ----------
    curves : sequence of curves
        Curve of the spindle in each gear, speed [1/min] and power [kW].
    speed_rpm : float
        Spindle speed n [1/min].

    Returns
    -------
    GearChoice
        Position of the gear in the list [-] and its power [kW].

    Raises
    ------
    OutOfRangeError
        If no gear reaches the speed, or a curve is unsound.

    Notes
    -----
    List the gears in the order in which equal ones are preferred.

    Examples
    --------
    >>> best_gear([((375, 11), (1500, 11)), ((1500, 11), (6000, 11))], 750)
    GearChoice(gear=0, power_kw=11.0)

    References
    ----------
    own derivation
    """
    speed = check.positive("spindle speed [1/min]", speed_rpm)
    tops = [_checked_curve(curve)[-1][0] for curve in curves]
    reached = [index for index, top in enumerate(tops) if speed <= top]
    if not reached:
        highest = f"at most {max(tops):g}" if tops else "within a gear, and there is none"
        raise OutOfRangeError("spindle speed [1/min]", speed_rpm, highest)
    powers = {index: available_power(curves[index], speed) for index in reached}
    gear = max(powers, key=lambda index: (powers[index], -index))
    return GearChoice(gear, powers[gear])


def _checked_curve(points: Curve) -> list[tuple[float, float]]:
    curve = [(check.positive("speed on the curve [1/min]", n), check.positive("power [kW]", p)) for n, p in points]
    if not curve:
        raise OutOfRangeError("points of the power curve", "none", "one or more")
    for (slower, _), (faster, _) in pairwise(curve):
        if faster <= slower:
            raise OutOfRangeError("speed on the curve [1/min]", faster, f"above the one before, {slower:g}")
    return curve
