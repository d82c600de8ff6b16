"""Holding and stiffness: lift and clamping, bending of tool, floor and wall, the depth that stays stable."""

from __future__ import annotations

import math
from dataclasses import dataclass

from millreason.formulas import _checks as check
from millreason.formulas.stiffness import (
    StableDepth,
    ToolDeflection,
    chatter_gain,
    floor_deflection,
    interface_separation_moment,
    stable_depth,
    tool_deflection,
    wall_deflection,
)

__all__ = [
    "AxialLoad",
    "StableDepth",
    "ToolDeflection",
    "chatter_gain",
    "clamp_factor",
    "clamp_force_needed",
    "floor_deflection",
    "interface_separation_moment",
    "lift_force",
    "slip_factor",
    "stable_depth",
    "tool_deflection",
    "vacuum_hold",
    "wall_deflection",
]

STANDARD_ATMOSPHERE_N_MM2 = 0.101325


@dataclass(frozen=True)
class AxialLoad:
    """Force on the work along the cutter axis: pressed down, pulled up, and what is left as lift."""

    press_n: float
    pull_n: float
    lift_n: float


def lift_force(tangential_n: float, edge_normal_n: float, kappa_deg: float, inclination_deg: float) -> AxialLoad:
    """Lift of the work: the pull of the inclined edge less the press of the edge-normal force.

    ``Ft tan lambda_s sin kappa - Fn cos kappa``.

    Parameters
    ----------
    tangential_n : float
        Tangential force Ft [N].
    edge_normal_n : float
        Force Fn square to the edge [N].
    kappa_deg : float
        Cutting-edge angle kappa_r; for a round insert the mean angle [deg].
    inclination_deg : float
        Inclination lambda_s, positive when the nose leads [deg].

    Returns
    -------
    AxialLoad
        Press, pull and lift left over, none below zero [N].

    Raises
    ------
    OutOfRangeError
        If a force is negative or not finite, or an angle out of range.

    Notes
    -----
    Rake face without friction; an estimate for the choice of holding, not for its limit. A negative
    inclination presses and adds to the press.

    Examples
    --------
    >>> load = lift_force(1000, 400, 90, 10)
    >>> round(load.press_n), round(load.lift_n)
    (0, 176)

    References
    ----------
    own derivation, cte-lead-2019
    """
    tangential = check.not_negative("tangential force [N]", tangential_n)
    normal = check.not_negative("edge-normal force [N]", edge_normal_n)
    angle = check.cutting_edge_angle(kappa_deg)
    press = 0.0 if angle == 90.0 else normal * math.cos(math.radians(angle))
    slope = math.tan(math.radians(check.rake("inclination", inclination_deg)))
    along = tangential * slope * math.sin(math.radians(angle))
    press, pull = press + max(-along, 0.0), max(along, 0.0)
    return AxialLoad(press, pull, max(pull - press, 0.0))


def clamp_factor(clamp_force_n: float, lift_n: float) -> float:
    """Clamping over lift: ``F_clamp / F_lift``.

    Parameters
    ----------
    clamp_force_n : float
        Force that holds the work down [N].
    lift_n : float
        Largest lift [N].

    Returns
    -------
    float
        Factor [-].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero.

    Notes
    -----
    Compare with the factor that practice asks for; without lift there is nothing to compare.

    Examples
    --------
    >>> clamp_factor(5000, 2000)
    2.5

    References
    ----------
    common practice
    """
    return check.positive("clamping force [N]", clamp_force_n) / check.positive("lift [N]", lift_n)


def clamp_force_needed(lift_n: float, factor: float) -> float:
    """Clamping that holds a lift with a factor: ``F_lift * factor``.

    Parameters
    ----------
    lift_n : float
        Largest lift [N].
    factor : float
        Factor that practice asks for, one or more [-].

    Returns
    -------
    float
        Clamping force [N].

    Raises
    ------
    OutOfRangeError
        If the lift is negative or not finite, or the factor below one.

    Notes
    -----
    Sideways holding is checked apart, see `slip_factor`.

    Examples
    --------
    >>> clamp_force_needed(800, 2.5)
    2000.0

    References
    ----------
    common practice
    """
    lift = check.not_negative("lift [N]", lift_n)
    return lift * check.at_least("clamping factor", factor, 1.0)


def slip_factor(hold_down_n: float, lift_n: float, friction: float, sideways_n: float) -> float:
    """Friction against the sideways force: ``mu (F_hold - F_lift) / F_side``.

    Parameters
    ----------
    hold_down_n : float
        Force that holds the work down [N].
    lift_n : float
        Lift of the cut [N].
    friction : float
        Coefficient of friction mu [-].
    sideways_n : float
        Force in the plane of the table [N].

    Returns
    -------
    float
        Factor; below one the work slides, zero once it is lifted [-].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and in range.

    Notes
    -----
    Without stops. Stops in the direction of the force are the first remedy.

    Examples
    --------
    >>> round(slip_factor(5000, 1000, 0.15, 400), 3)
    1.5

    References
    ----------
    own derivation
    """
    held = check.positive("hold-down force [N]", hold_down_n) - check.not_negative("lift [N]", lift_n)
    grip = max(held, 0.0) * check.positive("coefficient of friction", friction)
    return grip / check.positive("sideways force [N]", sideways_n)


def vacuum_hold(sealed_area_mm2: float, pressure_difference_n_mm2: float) -> float:
    """Most that a vacuum can hold: ``A dp``, never more than the atmosphere on the sealed area.

    Parameters
    ----------
    sealed_area_mm2 : float
        Area inside the seals A [mm2].
    pressure_difference_n_mm2 : float
        Pressure below the atmosphere dp [N/mm2].

    Returns
    -------
    float
        Holding force [N].

    Raises
    ------
    OutOfRangeError
        If the area is not finite and above zero, or the difference exceeds one standard atmosphere.

    Notes
    -----
    Holes cut through the work open the seal.

    Examples
    --------
    >>> vacuum_hold(40000, 0.08)
    3200.0

    References
    ----------
    own derivation
    """
    difference = check.above_up_to(
        "pressure difference [N/mm2]", pressure_difference_n_mm2, 0.0, STANDARD_ATMOSPHERE_N_MM2
    )
    area = check.positive("sealed area [mm2]", sealed_area_mm2)
    return area * difference
