"""Machine and body limits: diameters, speeds and feeds, mass and tip moment, loads from rotation."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from millreason.formulas import _checks as check

STANDARD_GRAVITY_M_S2 = 9.80665


@dataclass(frozen=True)
class Assembly:
    """Mass of tool and adapter together, and the distance of the centre of mass from the gauge line."""

    mass_kg: float
    centre_mm: float


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
    feed = check.positive("feed per tooth [mm]", feed_per_tooth_mm) * check.count("number of teeth", teeth)
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


def diameter_at_depth(diameter_mm: float, depth_mm: float, kappa_deg: float) -> float:
    """Diameter of a straight edge at a height above the floor: ``D + 2 ap / tan kappa``.

    Parameters
    ----------
    diameter_mm : float
        Diameter D at the floor [mm].
    depth_mm : float
        Height above the floor [mm].
    kappa_deg : float
        Cutting-edge angle kappa_r [deg].

    Returns
    -------
    float
        Diameter at that height [mm].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or kappa_r exceeds 90.

    Notes
    -----
    The floor diameter sets the width per pass, this one the cutting speed at the shoulder.

    Examples
    --------
    >>> round(diameter_at_depth(100, 3, 45), 6)
    106.0

    References
    ----------
    iso-13399, own derivation
    """
    diameter = check.positive("cutter diameter [mm]", diameter_mm)
    kappa = math.radians(check.cutting_edge_angle(kappa_deg))
    height = check.positive("depth of cut [mm]", depth_mm)
    return diameter + 2.0 * height * math.cos(kappa) / math.sin(kappa)


def outermost_diameter(diameter_mm: float, usable_depth_mm: float, kappa_deg: float) -> float:
    """Diameter over straight-edged inserts: ``DCX = D + 2 apmax / tan kappa``.

    Parameters
    ----------
    diameter_mm : float
        Diameter D at the floor [mm].
    usable_depth_mm : float
        Largest usable depth of cut [mm].
    kappa_deg : float
        Cutting-edge angle kappa_r [deg].

    Returns
    -------
    float
        Outermost diameter, which meets walls, clamps and changer pockets [mm].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or kappa_r exceeds 90.

    Notes
    -----
    A round-insert cutter measures its floor diameter plus one insert diameter instead.

    Examples
    --------
    >>> round(outermost_diameter(80, 6, 45), 6)
    92.0

    References
    ----------
    iso-13399, own derivation
    """
    return diameter_at_depth(diameter_mm, usable_depth_mm, kappa_deg)


def body_mass(
    diameter_mm: float, height_mm: float, bore_mm: float, density_kg_m3: float, fill: float
) -> float:
    """Mass of a cutter body: ``rho pi/4 (D^2 - d^2) H`` times the share that pockets leave.

    Parameters
    ----------
    diameter_mm : float
        Body diameter D [mm].
    height_mm : float
        Body height H [mm].
    bore_mm : float
        Bore d; zero for none [mm].
    density_kg_m3 : float
        Density of the body [kg/m3].
    fill : float
        Share of the ring that is metal [-].

    Returns
    -------
    float
        Mass without adapter [kg].

    Raises
    ------
    OutOfRangeError
        If a value is not finite, the bore reaches the diameter, or the fill is not above 0 and at most 1.

    Notes
    -----
    An estimate; the fill of a pocketed body is common practice.

    Examples
    --------
    >>> round(body_mass(100, 50, 32, 7850, 0.65), 1)
    1.8

    References
    ----------
    own derivation, common practice
    """
    diameter = check.positive("body diameter [mm]", diameter_mm)
    height = check.positive("body height [mm]", height_mm)
    bore = check.not_negative("bore [mm]", bore_mm)
    bore = bore and check.inside("bore [mm]", bore, 0.0, diameter)
    density = check.positive("density [kg/m3]", density_kg_m3) * 1e-9
    share = check.above_up_to("fill of the body", fill, 0.0, 1.0)
    return density * math.pi / 4.0 * (diameter**2 - bore**2) * height * share


def combined_mass(parts: Sequence[tuple[float, float]]) -> Assembly:
    """Mass and centre of mass of cutter and adapter: ``sum m`` and ``sum m L / sum m``.

    Parameters
    ----------
    parts : sequence of (float, float)
        Mass [kg] and distance of its centre from the gauge line [mm] of each part.

    Returns
    -------
    Assembly
        Mass [kg] and centre [mm].

    Raises
    ------
    OutOfRangeError
        If there is no part, or a value is not finite and in range.

    Notes
    -----
    Distances count from the gauge line towards the cutting edge; inside the spindle they are negative.

    Examples
    --------
    >>> combined_mass([(2, 30), (3, 80)])
    Assembly(mass_kg=5.0, centre_mm=60.0)

    References
    ----------
    own derivation
    """
    check.count("number of parts", len(parts))
    masses = [check.positive("mass [kg]", mass) for mass, _ in parts]
    levers = [check.finite("centre of mass [mm]", centre) for _, centre in parts]
    total = math.fsum(masses)
    return Assembly(total, math.fsum(m * lever for m, lever in zip(masses, levers, strict=True)) / total)


def tip_moment(mass_kg: float, centre_mm: float) -> float:
    """Moment that a tool held level puts on the gauge line: ``M = m g L``.

    Parameters
    ----------
    mass_kg : float
        Mass of tool and adapter [kg].
    centre_mm : float
        Distance of the centre of mass from the gauge line [mm].

    Returns
    -------
    float
        Moment [N.m].

    Raises
    ------
    OutOfRangeError
        If the mass is not finite and above zero, or the distance negative.

    Notes
    -----
    At rest; the arm adds acceleration.

    Examples
    --------
    >>> round(tip_moment(6, 100), 2)
    5.88

    References
    ----------
    own derivation
    """
    lever = check.not_negative("centre of mass [mm]", centre_mm) / 1000.0
    return check.positive("mass [kg]", mass_kg) * STANDARD_GRAVITY_M_S2 * lever


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
