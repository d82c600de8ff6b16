"""The drive: power and torque that a machine really has at a speed, its gears, steps, duty and losses."""

from __future__ import annotations

import math
from collections.abc import Sequence

from millreason.errors import OutOfRangeError
from millreason.formulas import _checks as check
from millreason.formulas.drive_curve import (
    GearChoice,
    available_power,
    available_torque,
    base_speed,
    best_gear,
    drive_curve,
    geared_curve,
)

__all__ = [
    "GearChoice",
    "available_power",
    "available_torque",
    "base_speed",
    "best_gear",
    "drive_curve",
    "duty_factor",
    "geared_curve",
    "motor_power",
    "net_power_limit",
    "speed_at_or_below",
]


def duty_factor(duty_share: float) -> float:
    """Continuous rating over a part-time rating, by equal heating: ``sqrt(share of time)``.

    Parameters
    ----------
    duty_share : float
        Share of the time under load for which the rating is given [-].

    Returns
    -------
    float
        Factor on power and torque [-].

    Raises
    ------
    OutOfRangeError
        If the share is not above 0 and at most 1.

    Notes
    -----
    Losses taken as the square of the load; an estimate for plates that show the part-time rating only.

    Examples
    --------
    >>> round(duty_factor(0.4), 3)
    0.632

    References
    ----------
    own derivation
    """
    return math.sqrt(check.above_up_to("duty share", duty_share, 0.0, 1.0))


def motor_power(net_kw: float, efficiency: float) -> float:
    """Power at the motor: ``P_mot = Pc / eta``.

    Parameters
    ----------
    net_kw : float
        Net power at the cutter [kW].
    efficiency : float
        Efficiency of the drive [-].

    Returns
    -------
    float
        Motor power [kW].

    Raises
    ------
    OutOfRangeError
        If the power is not finite and above zero, or the efficiency not above 0 and at most 1.

    Notes
    -----
    Idling losses are inside the efficiency.

    Examples
    --------
    >>> round(motor_power(8, 0.8), 6)
    10.0

    References
    ----------
    machinerys-handbook-27
    """
    return check.positive("net power [kW]", net_kw) / check.above_up_to("efficiency", efficiency, 0.0, 1.0)


def net_power_limit(motor_kw: float, efficiency: float, torque_nm: float, speed_rpm: float) -> float:
    """Net power that a plate with power and spindle torque allows: ``min(P eta, pi M n / 30000)``.

    Parameters
    ----------
    motor_kw : float
        Motor power [kW].
    efficiency : float
        Efficiency of the drive [-].
    torque_nm : float
        Torque at the spindle [N.m].
    speed_rpm : float
        Spindle speed n [1/min].

    Returns
    -------
    float
        Largest net power at that speed [kW].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or the efficiency exceeds 1.

    Notes
    -----
    A torque stated at the motor is multiplied by reduction and efficiency first.

    Examples
    --------
    >>> round(net_power_limit(11, 0.8, 95, 875), 2)
    8.7

    References
    ----------
    own derivation
    """
    share = check.above_up_to("efficiency", efficiency, 0.0, 1.0)
    turn = math.pi * check.positive("spindle speed [1/min]", speed_rpm) / 30000.0
    by_torque = check.positive("torque [N.m]", torque_nm) * turn
    return min(check.positive("motor power [kW]", motor_kw) * share, by_torque)


def speed_at_or_below(steps: Sequence[float], wanted_rpm: float) -> float:
    """Highest spindle step that does not exceed the wanted speed.

    Parameters
    ----------
    steps : sequence of float
        Speeds that the machine has [1/min], in any order.
    wanted_rpm : float
        Wanted spindle speed [1/min].

    Returns
    -------
    float
        Step to set [1/min]; speed, feed and power are computed again with it.

    Raises
    ------
    OutOfRangeError
        If every step is above the wanted speed, or a value is not finite and above zero.

    Notes
    -----
    A step above the wanted speed would shorten the life of the edge.

    Examples
    --------
    >>> speed_at_or_below([80, 325, 660, 1115], 700)
    660.0

    References
    ----------
    common practice
    """
    wanted = check.positive("wanted spindle speed [1/min]", wanted_rpm)
    speeds = sorted(check.positive("spindle step [1/min]", step) for step in steps)
    usable = [speed for speed in speeds if speed <= wanted * (1.0 + check.ROUNDING)]
    if not usable:
        allowed = f"at least the lowest step, {speeds[0]:g}" if speeds else "matched by a list of steps"
        raise OutOfRangeError("wanted spindle speed [1/min]", wanted_rpm, allowed)
    return usable[-1]
