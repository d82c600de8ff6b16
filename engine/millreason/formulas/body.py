"""Machine and body limits: diameters, mass and tip moment; speeds and loads from turning beside them."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from millreason.formulas import _checks as check
from millreason.formulas.motion import cutting_speed, removal_rate, spindle_speed, table_feed
from millreason.formulas.rotation import hoop_stress, insert_screw_load, permissible_unbalance

__all__ = [
    "Assembly",
    "body_mass",
    "combined_mass",
    "cutting_speed",
    "diameter_at_depth",
    "hoop_stress",
    "insert_screw_load",
    "outermost_diameter",
    "permissible_unbalance",
    "removal_rate",
    "spindle_speed",
    "table_feed",
    "tip_moment",
]

STANDARD_GRAVITY_M_S2 = 9.80665


@dataclass(frozen=True)
class Assembly:
    """Mass of tool and adapter together, and the distance of the centre of mass from the gauge line."""

    mass_kg: float
    centre_mm: float


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


def body_mass(diameter_mm: float, height_mm: float, bore_mm: float, density_kg_m3: float, fill: float) -> float:
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
