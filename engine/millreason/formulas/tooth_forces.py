"""Forces tooth by tooth: the peak over a turn, and the split into radial, axial and feed components."""

from __future__ import annotations

import math
from dataclasses import dataclass

from millreason.formulas import _checks as check


@dataclass(frozen=True)
class PeakLoad:
    """Largest tangential force and torque during one turn, and how many teeth carry it."""

    tangential_force_n: float
    torque_nm: float
    teeth: int


@dataclass(frozen=True)
class ForceComponents:
    """Parts of the force square to the edge: along the radius and along the cutter axis."""

    radial_n: float
    axial_n: float


@dataclass(frozen=True)
class PlaneForces:
    """Force of the cutter on the work in the plane of the floor: along and across the feed."""

    feed_n: float
    cross_n: float


def peak_torque(
    teeth: int,
    entry_deg: float,
    exit_deg: float,
    depth_mm: float,
    feed_per_tooth_mm: float,
    kappa_deg: float,
    diameter_mm: float,
    kc11_n_mm2: float,
    exponent: float,
    factor: float = 1.0,
) -> PeakLoad:
    """Largest torque during one turn: ``max of sum kc1.1 b (fz sin kappa sin phi)^(1 - mc) D/2``.

    Parameters
    ----------
    teeth : int
        Number of effective teeth z, equally spaced [-].
    entry_deg : float
        Entry angle phi1 [deg].
    exit_deg : float
        Exit angle phi2 [deg].
    depth_mm : float
        Depth of cut ap [mm].
    feed_per_tooth_mm : float
        Feed per tooth fz [mm].
    kappa_deg : float
        Cutting-edge angle kappa_r; for a round insert the mean angle [deg].
    diameter_mm : float
        Diameter D at which the force acts [mm].
    kc11_n_mm2 : float
        Force per area at 1 mm thickness kc1.1 [N/mm2].
    exponent : float
        Exponent mc [-].
    factor : float
        Product of the corrections for rake, speed and wear [-].

    Returns
    -------
    PeakLoad
        Tangential force [N], torque [N.m] and teeth that carry it [-].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and in range.

    Notes
    -----
    Exact for the force law, no step of rotation: a group of equally spaced teeth loads most where its
    middle is as near to the front of the cutter as the arc allows, because the force of a tooth is a
    concave function of its angle. Run-out between teeth is left out.

    Examples
    --------
    >>> load = peak_torque(6, 45, 135, 3, 0.2, 45, 100, 1700, 0.25)
    >>> round(load.tangential_force_n), load.teeth
    (2986, 2)

    References
    ----------
    altintas-automation, own derivation
    """
    number = check.teeth(teeth)
    entry, leave = check.arc_ends(entry_deg, exit_deg)
    slope = check.kienzle_exponent(exponent)
    edge = _edge_force(depth_mm, feed_per_tooth_mm, kappa_deg, kc11_n_mm2, slope, factor)
    lever = check.positive("cutter diameter [mm]", diameter_mm) / 2000.0
    pitch = 360.0 / number
    # An arc of whole pitches does hold one tooth more for an instant, at its two ends.
    most = min(number, math.floor((leave - entry) / pitch * (1.0 + check.ROUNDING)) + 1)
    # Fewer than the whole pitches of the arc never cut together, so only the two largest groups compete.
    groups = range(max(1, most - 1), most + 1)
    share, carrying = max((_group_share(n, entry, leave, pitch, slope), n) for n in groups)
    return PeakLoad(edge * share, edge * share * lever, carrying)


def _edge_force(
    depth_mm: float, feed_mm: float, kappa_deg: float, kc11_n_mm2: float, slope: float, factor: float
) -> float:
    sine = math.sin(math.radians(check.cutting_edge_angle(kappa_deg)))
    thickest = check.positive("feed per tooth [mm]", feed_mm) * sine
    base = check.positive("kc1.1 [N/mm2]", kc11_n_mm2) * check.positive("correction factor", factor)
    edge = check.positive("depth of cut [mm]", depth_mm) / sine
    return base * edge * check.power_of("feed per tooth [mm]", thickest, 1.0 - slope)


def _group_share(teeth: int, entry: float, leave: float, pitch: float, slope: float) -> float:
    half = (teeth - 1) * pitch / 2.0
    middle = min(max(90.0, entry + half), max(leave - half, entry + half))
    angles = (middle + (index * pitch - half) for index in range(teeth))
    return math.fsum(max(math.sin(math.radians(angle)), 0.0) ** (1.0 - slope) for angle in angles)


def force_components(edge_normal_force_n: float, kappa_deg: float) -> ForceComponents:
    """Split of the force square to the edge: radial ``Fn sin kappa``, axial ``Fn cos kappa``.

    Parameters
    ----------
    edge_normal_force_n : float
        Force Fn square to the edge, in the plane through the cutter axis [N].
    kappa_deg : float
        Cutting-edge angle kappa_r; for a round insert the mean angle [deg].

    Returns
    -------
    ForceComponents
        Radial and axial part; the axial part presses on the floor [N].

    Raises
    ------
    OutOfRangeError
        If the force is negative or not finite, or kappa_r not above 0 and at most 90.

    Notes
    -----
    At 45 degrees half and half, at 90 all radial. The pull of an inclined edge is a separate force.

    Examples
    --------
    >>> force_components(1000, 90)
    ForceComponents(radial_n=1000.0, axial_n=0.0)

    References
    ----------
    cte-lead-2019
    """
    force = check.not_negative("edge-normal force [N]", edge_normal_force_n)
    kappa = check.cutting_edge_angle(kappa_deg)
    axial = 0.0 if kappa == 90.0 else force * math.cos(math.radians(kappa))
    return ForceComponents(force * math.sin(math.radians(kappa)), axial)


def plane_forces(tangential_n: float, radial_n: float, angle_deg: float) -> PlaneForces:
    """Force of one tooth on the work: along the feed ``Ft cos phi + Fr sin phi``, across it the rest.

    Parameters
    ----------
    tangential_n : float
        Tangential force Ft [N].
    radial_n : float
        Radial force Fr, outwards on the work [N].
    angle_deg : float
        Angle phi of the tooth [deg].

    Returns
    -------
    PlaneForces
        Along the feed of the cutter, and across it towards the entry side: ``Fr cos phi - Ft sin phi`` [N].

    Raises
    ------
    OutOfRangeError
        If a force is negative or not finite, or the angle not from 0 to 180.

    Notes
    -----
    Above zero the force along the feed resists the feed drive; below zero it pulls, as in climb milling.

    Examples
    --------
    >>> plane_forces(1000, 0, 180).feed_n
    -1000.0

    References
    ----------
    altintas-automation
    """
    tangential = check.not_negative("tangential force [N]", tangential_n)
    radial = check.not_negative("radial force [N]", radial_n)
    angle = math.radians(check.between("tooth angle [deg]", angle_deg, 0.0, 180.0))
    sine, cosine = math.sin(angle), math.cos(angle)
    return PlaneForces(tangential * cosine + radial * sine, radial * cosine - tangential * sine)


def mean_plane_forces(
    teeth: int,
    entry_deg: float,
    exit_deg: float,
    depth_mm: float,
    feed_per_tooth_mm: float,
    specific_force_n_mm2: float,
    radial_ratio: float,
) -> PlaneForces:
    """Force of all teeth on the work, mean over a turn: ``z ap fz kc / 2 pi`` times the arc's integrals.

    Parameters
    ----------
    teeth : int
        Number of effective teeth z [-].
    entry_deg : float
        Entry angle phi1 [deg].
    exit_deg : float
        Exit angle phi2 [deg].
    depth_mm : float
        Depth of cut ap [mm].
    feed_per_tooth_mm : float
        Feed per tooth fz [mm].
    specific_force_n_mm2 : float
        Specific cutting force kc at the mean chip thickness [N/mm2].
    radial_ratio : float
        Radial over tangential force, kappa_r already in it [-].

    Returns
    -------
    PlaneForces
        Along the feed of the cutter, and across it towards the entry side [N].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and in range.

    Notes
    -----
    Takes kc as constant over the arc. Against an integration with Kienzle's law either component differs by
    at most 8 % of the mean tangential and radial force together, for exponents up to 0.3.

    Examples
    --------
    >>> round(mean_plane_forces(6, 0, 90, 3, 0.2, 2500, 0).feed_n)
    716

    References
    ----------
    altintas-automation
    """
    number = check.teeth(teeth)
    first, last = (math.radians(angle) for angle in check.arc_ends(entry_deg, exit_deg))
    area = check.positive("depth of cut [mm]", depth_mm)
    area *= check.positive("feed per tooth [mm]", feed_per_tooth_mm)
    scale = number * area * check.positive("specific cutting force [N/mm2]", specific_force_n_mm2)
    ratio = check.not_negative("radial force ratio", radial_ratio)
    mixed = (math.sin(last) ** 2 - math.sin(first) ** 2) / 2.0
    squared = (last - first) / 2.0 - (math.sin(2.0 * last) - math.sin(2.0 * first)) / 4.0
    turn = scale / (2.0 * math.pi)
    return PlaneForces(turn * (mixed + ratio * squared), turn * (ratio * mixed - squared))
