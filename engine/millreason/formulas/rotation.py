"""Loads that come from turning: on the insert screw, in the rim, from unbalance."""

from __future__ import annotations

import math

from millreason.formulas import _checks as check


def insert_screw_load(insert_mass_kg: float, radius_mm: float, spindle_speed_rpm: float) -> float:
    """Outward load of a rotating insert: ``F = m omega^2 r``.

    Parameters
    ----------
    insert_mass_kg : float
        Mass of the insert, with a cartridge where there is one [kg].
    radius_mm : float
        Radius of its centre of mass [mm].
    spindle_speed_rpm : float
        Spindle speed n [1/min].

    Returns
    -------
    float
        Load on screw or wedge [N].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero.

    Notes
    -----
    Grows with the square of the speed; the limit marked on the body decides.

    Examples
    --------
    >>> round(insert_screw_load(0.010, 80, 6000))
    316

    References
    ----------
    own derivation
    """
    turn = 2.0 * math.pi * check.positive("spindle speed [1/min]", spindle_speed_rpm) / 60.0
    mass = check.positive("insert mass [kg]", insert_mass_kg)
    return mass * turn**2 * check.positive("radius [mm]", radius_mm) / 1000.0


def hoop_stress(density_kg_m3: float, rim_speed_m_min: float) -> float:
    """Stress in a thin rotating ring: ``sigma = rho v^2``.

    Parameters
    ----------
    density_kg_m3 : float
        Density of the body [kg/m3].
    rim_speed_m_min : float
        Speed of the rim [m/min].

    Returns
    -------
    float
        Hoop stress [N/mm2].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero.

    Notes
    -----
    Lower estimate for a body: pockets concentrate stress.

    Examples
    --------
    >>> round(hoop_stress(7850, 3000), 1)
    19.6

    References
    ----------
    own derivation
    """
    rim = check.positive("rim speed [m/min]", rim_speed_m_min) / 60.0
    return check.positive("density [kg/m3]", density_kg_m3) * rim**2 / 1e6


def permissible_unbalance(grade_mm_s: float, spindle_speed_rpm: float) -> float:
    """Unbalance per mass that a balance grade allows: ``e = 1000 G / omega``.

    Parameters
    ----------
    grade_mm_s : float
        Balance grade G [mm/s].
    spindle_speed_rpm : float
        Spindle speed n [1/min].

    Returns
    -------
    float
        Residual unbalance per mass [g.mm/kg].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero.

    Notes
    -----
    The same number is the offset of the centre of mass in micrometres.

    Examples
    --------
    >>> round(permissible_unbalance(2.5, 8000), 2)
    2.98

    References
    ----------
    iso-21940-11
    """
    turn = 2.0 * math.pi * check.positive("spindle speed [1/min]", spindle_speed_rpm) / 60.0
    return 1000.0 * check.positive("balance grade [mm/s]", grade_mm_s) / turn
