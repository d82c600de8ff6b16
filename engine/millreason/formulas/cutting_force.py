"""Cutting force and power after Kienzle, with the factors published for it, in the mean over the cut."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from millreason.errors import OutOfRangeError
from millreason.formulas import _checks as check
from millreason.formulas.tooth_forces import (
    ForceComponents,
    PeakLoad,
    PlaneForces,
    force_components,
    mean_plane_forces,
    peak_torque,
    plane_forces,
)
from millreason.formulas.unit_power import Band, constant_band, feed_factor, power_band, unit_power_check

__all__ = [
    "Band",
    "ForceComponents",
    "PeakLoad",
    "PlaneForces",
    "SpeedBranch",
    "constant_band",
    "feed_factor",
    "force_components",
    "mean_plane_forces",
    "mean_tangential_force",
    "mean_tooth_force",
    "net_power",
    "peak_torque",
    "plane_forces",
    "power_band",
    "rake_factor",
    "specific_cutting_force",
    "specific_force_with_edge",
    "speed_factor",
    "torque_from_power",
    "unit_power_check",
]


@dataclass(frozen=True)
class SpeedBranch:
    """One published branch of a speed factor: ``coefficient * vc ** -exponent`` between two speeds."""

    low_m_min: float
    high_m_min: float
    coefficient: float
    exponent: float


def specific_cutting_force(kc11_n_mm2: float, exponent: float, chip_thickness_mm: float, factor: float = 1.0) -> float:
    """Cutting force per area of chip: ``kc = kc1.1 h^-mc K``.

    Parameters
    ----------
    kc11_n_mm2 : float
        Force per area at 1 mm thickness kc1.1 [N/mm2].
    exponent : float
        Exponent mc, from the same set of data [-].
    chip_thickness_mm : float
        Chip thickness h; the mean over the arc for mean power [mm].
    factor : float
        Product of the corrections for rake, speed and wear [-].

    Returns
    -------
    float
        Specific cutting force [N/mm2].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or the exponent is not from 0 to below 1.

    Notes
    -----
    Fitted to thicknesses of about 0.05 to 2.5 mm; thinner chips need more. Tests were turned with sharp
    tools. Using the mean thickness of the arc overstates mean power by at most 5 % for an exponent up to
    0.3 and by at most 6.5 % up to 0.45.

    Examples
    --------
    >>> round(specific_cutting_force(1400, 0.4, 0.0430331), 0)
    4927.0

    References
    ----------
    kienzle-victor-1957, german-wikipedia-schnittkraft
    """
    base = check.positive("kc1.1 [N/mm2]", kc11_n_mm2) * check.positive("correction factor", factor)
    slope = check.kienzle_exponent(exponent)
    thickness = check.positive("chip thickness [mm]", chip_thickness_mm)
    return base * check.power_of("chip thickness [mm]", thickness, -slope)


def specific_force_with_edge(cutting_n_mm2: float, edge_n_mm: float, chip_thickness_mm: float) -> float:
    """Cutting force per area with a separate force of the edge: ``kc = Ktc + Kte / h``.

    Parameters
    ----------
    cutting_n_mm2 : float
        Coefficient of shearing Ktc [N/mm2].
    edge_n_mm : float
        Force per length of edge Kte [N/mm].
    chip_thickness_mm : float
        Chip thickness h [mm].

    Returns
    -------
    float
        Specific cutting force [N/mm2].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero; the edge force may be zero.

    Notes
    -----
    With the mean thickness of the arc the mean power is exact, because the force is linear in thickness.

    Examples
    --------
    >>> specific_force_with_edge(1825, 29.7, 0.1)
    2122.0

    References
    ----------
    altintas-automation
    """
    edge = check.not_negative("edge force [N/mm]", edge_n_mm)
    cutting = check.positive("cutting coefficient [N/mm2]", cutting_n_mm2)
    return cutting + edge / check.positive("chip thickness [mm]", chip_thickness_mm)


def rake_factor(rake_deg: float, reference_rake_deg: float, change_per_degree: float) -> float:
    """Correction for the rake: ``K = 1 - (gamma_o - gamma_0) c``.

    Parameters
    ----------
    rake_deg : float
        Orthogonal rake gamma_o, never the radial rake alone [deg].
    reference_rake_deg : float
        Rake gamma_0 of the tests behind the force data [deg].
    change_per_degree : float
        Share of force c lost with each degree more positive [1/deg].

    Returns
    -------
    float
        Factor on the force [-].

    Raises
    ------
    OutOfRangeError
        If a rake is not between -90 and 90 degrees, the change negative, or the factor not above zero.

    Notes
    -----
    Linear, published for rakes of about -10 to 30 degrees.

    Examples
    --------
    >>> round(rake_factor(-1, -7, 0.015), 2)
    0.91

    References
    ----------
    tschaetsch-zerspantechnik
    """
    steeper = check.rake("orthogonal rake", rake_deg) - check.rake("reference rake", reference_rake_deg)
    factor = 1.0 - steeper * check.not_negative("change per degree [1/deg]", change_per_degree)
    if factor <= 0.0:
        raise OutOfRangeError("orthogonal rake [deg]", rake_deg, "low enough for a rake factor above zero")
    return factor


def speed_factor(cutting_speed_m_min: float, branches: Sequence[SpeedBranch]) -> float:
    """Correction for the cutting speed: ``K = a vc^-b`` with the a and b of the branch that holds.

    Parameters
    ----------
    cutting_speed_m_min : float
        Cutting speed vc [m/min].
    branches : sequence of SpeedBranch
        Published branches with their ranges of speed [m/min].

    Returns
    -------
    float
        Factor on the force [-].

    Raises
    ------
    OutOfRangeError
        If no branch covers the speed, or a value is not finite and above zero.

    Notes
    -----
    Where two branches meet the first one listed is used.

    Examples
    --------
    >>> round(speed_factor(200, [SpeedBranch(100, 600, 1.38, 0.07)]), 3)
    0.952

    References
    ----------
    tschaetsch-zerspantechnik
    """
    speed = check.positive("cutting speed [m/min]", cutting_speed_m_min)
    for branch in branches:
        if branch.low_m_min <= speed <= branch.high_m_min:
            base = check.positive("coefficient of the speed factor", branch.coefficient)
            slope = check.not_negative("exponent of the speed factor", branch.exponent)
            return base * check.power_of("cutting speed [m/min]", speed, -slope)
    ranges = ", ".join(f"{b.low_m_min:g} to {b.high_m_min:g}" for b in branches) or "covered by a branch"
    raise OutOfRangeError("cutting speed [m/min]", cutting_speed_m_min, ranges)


def net_power(depth_mm: float, width_mm: float, table_feed_mm_min: float, specific_force_n_mm2: float) -> float:
    """Mean power at the cutter: ``Pc = ap ae vf kc / 60e6``.

    Parameters
    ----------
    depth_mm : float
        Depth of cut ap [mm].
    width_mm : float
        Width of cut ae [mm].
    table_feed_mm_min : float
        Feed rate vf [mm/min].
    specific_force_n_mm2 : float
        Specific cutting force kc at the mean chip thickness [N/mm2].

    Returns
    -------
    float
        Net power [kW].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero.

    Notes
    -----
    At the edge; losses of the drive come on top. Equal to mean teeth in cut, mean tooth force and cutting
    speed multiplied.

    Examples
    --------
    >>> net_power(5, 20, 25, 3300)
    0.1375

    References
    ----------
    tschaetsch-zerspantechnik, ghosh-mallik
    """
    area = check.positive("depth of cut [mm]", depth_mm) * check.positive("width of cut [mm]", width_mm)
    feed = check.positive("feed rate [mm/min]", table_feed_mm_min)
    return area * feed * check.positive("specific cutting force [N/mm2]", specific_force_n_mm2) / 60e6


def torque_from_power(power_kw: float, speed_rpm: float) -> float:
    """Torque that a power means at a speed: ``M = 30000 P / (pi n)``, about ``9549 P / n``.

    Parameters
    ----------
    power_kw : float
        Power [kW].
    speed_rpm : float
        Spindle speed n [1/min].

    Returns
    -------
    float
        Torque [N.m].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero.

    Notes
    -----
    Mean torque from mean power; few teeth in the cut peak far above it, see `peak_torque`.

    Examples
    --------
    >>> round(torque_from_power(8, 100))
    764

    References
    ----------
    kalpakjian-schmid
    """
    power = check.positive("power [kW]", power_kw)
    return 30000.0 * power / (math.pi * check.positive("spindle speed [1/min]", speed_rpm))


def mean_tangential_force(power_kw: float, cutting_speed_m_min: float) -> float:
    """Tangential force of all teeth together, mean over time: ``F = 60000 P / vc``.

    Parameters
    ----------
    power_kw : float
        Net power at the cutter [kW].
    cutting_speed_m_min : float
        Cutting speed vc [m/min].

    Returns
    -------
    float
        Mean tangential force [N].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero.

    Notes
    -----
    Divide by the mean number of teeth in the cut for one tooth.

    Examples
    --------
    >>> round(mean_tangential_force(6, 180))
    2000

    References
    ----------
    groover-manufacturing
    """
    power = check.positive("power [kW]", power_kw)
    return 60000.0 * power / check.positive("cutting speed [m/min]", cutting_speed_m_min)


def mean_tooth_force(depth_mm: float, kappa_deg: float, chip_thickness_mm: float, specific_force_n_mm2: float) -> float:
    """Tangential force on one tooth, mean over its arc: ``F = ap / sin kappa * hm * kc``.

    Parameters
    ----------
    depth_mm : float
        Depth of cut ap [mm].
    kappa_deg : float
        Cutting-edge angle kappa_r; for a round insert the mean angle [deg].
    chip_thickness_mm : float
        Mean chip thickness hm [mm].
    specific_force_n_mm2 : float
        Specific cutting force kc at that thickness [N/mm2].

    Returns
    -------
    float
        Mean force on one tooth [N].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or kappa_r exceeds 90.

    Notes
    -----
    The largest force on the arc belongs to the maximum chip thickness.

    Examples
    --------
    >>> round(mean_tooth_force(1, 90, 0.2, 2602.6), 1)
    520.5

    References
    ----------
    tabellenbuch-metall
    """
    edge = check.positive("depth of cut [mm]", depth_mm) / math.sin(math.radians(check.cutting_edge_angle(kappa_deg)))
    thickness = check.positive("chip thickness [mm]", chip_thickness_mm)
    return edge * thickness * check.positive("specific cutting force [N/mm2]", specific_force_n_mm2)
