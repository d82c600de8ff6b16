"""The chip: its thickness at the edge, the feed that gives a thickness, its room in the gullet."""

from __future__ import annotations

import math

from millreason.formulas import _checks as check
from millreason.formulas.round_insert import (
    RoundInsertAngle,
    round_insert_angle,
    round_insert_effective_diameter,
)

__all__ = [
    "RoundInsertAngle",
    "chip_volume_per_tooth_pass",
    "feed_for_chip_thickness",
    "gullet_fill",
    "maximum_chip_thickness",
    "mean_chip_thickness",
    "minimum_chip_thickness",
    "peripheral_chip_thickness",
    "round_insert_angle",
    "round_insert_effective_diameter",
]


def maximum_chip_thickness(feed_per_tooth_mm: float, kappa_deg: float, entry_deg: float, exit_deg: float) -> float:
    """Thickest chip on the arc: ``fz sin kappa`` past the front, else with the larger of the end sines.

    Parameters
    ----------
    feed_per_tooth_mm : float
        Feed per tooth fz [mm].
    kappa_deg : float
        Cutting-edge angle kappa_r; for a round insert the angle at the top of the cut [deg].
    entry_deg : float
        Entry angle phi1 [deg].
    exit_deg : float
        Exit angle phi2 [deg].

    Returns
    -------
    float
        Maximum undeformed chip thickness [mm].

    Raises
    ------
    OutOfRangeError
        If a value is not finite, or the angles are not 0 <= phi1 < phi2 <= 180.

    Notes
    -----
    Circular tooth path, which holds while the feed per tooth is small against the diameter.

    Examples
    --------
    >>> round(maximum_chip_thickness(1.0, 90, 20, 60), 3)
    0.866

    References
    ----------
    altintas-automation, stephenson-agapiou
    """
    feed = check.positive("feed per tooth [mm]", feed_per_tooth_mm)
    return feed * _largest_sine(kappa_deg, entry_deg, exit_deg)


def mean_chip_thickness(
    feed_per_tooth_mm: float, kappa_deg: float, width_mm: float, diameter_mm: float, arc_deg: float
) -> float:
    """Chip thickness in the mean over the arc: ``hm = fz sin kappa (2 ae/D) / phi_s``, phi_s in radians.

    Parameters
    ----------
    feed_per_tooth_mm : float
        Feed per tooth fz [mm].
    kappa_deg : float
        Cutting-edge angle kappa_r; for a round insert the mean angle [deg].
    width_mm : float
        Width of cut ae [mm].
    diameter_mm : float
        Cutter diameter D [mm].
    arc_deg : float
        Arc of engagement phi_s at the cutter's real position [deg].

    Returns
    -------
    float
        Mean undeformed chip thickness [mm].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and in range, or the arc is impossible for this width and diameter.

    Notes
    -----
    Exact for every offset, because the cosines of entry and exit always differ by 2 ae/D.

    Examples
    --------
    >>> round(mean_chip_thickness(0.2, 45, 70, 100, 88.854), 4)
    0.1277

    References
    ----------
    tschaetsch-zerspantechnik, klocke-koenig-fertigungsverfahren-1
    """
    feed = check.positive("feed per tooth [mm]", feed_per_tooth_mm)
    kappa = math.radians(check.cutting_edge_angle(kappa_deg))
    diameter = check.positive("cutter diameter [mm]", diameter_mm)
    ratio = check.above_up_to("width of cut [mm]", width_mm, 0.0, diameter) / diameter
    centred = 2.0 * math.degrees(math.asin(ratio))
    flush = 2.0 * math.degrees(math.asin(math.sqrt(ratio)))
    # An arc copied from a printed page carries its rounding with it.
    printed = 1e-3
    arc = check.between("arc of engagement [deg]", arc_deg, centred * (1 - printed), flush * (1 + printed))
    return feed * math.sin(kappa) * 2.0 * ratio / math.radians(arc)


def feed_for_chip_thickness(chip_thickness_mm: float, kappa_deg: float, entry_deg: float, exit_deg: float) -> float:
    """Feed per tooth that gives a maximum chip thickness: the inverse of `maximum_chip_thickness`.

    Parameters
    ----------
    chip_thickness_mm : float
        Wanted maximum chip thickness [mm].
    kappa_deg : float
        Cutting-edge angle kappa_r; for a round insert the angle at the top of the cut [deg].
    entry_deg : float
        Entry angle phi1 [deg].
    exit_deg : float
        Exit angle phi2 [deg].

    Returns
    -------
    float
        Feed per tooth fz [mm].

    Raises
    ------
    OutOfRangeError
        If a value is not finite, or the angles are not 0 <= phi1 < phi2 <= 180.

    Notes
    -----
    Compensates both thinnings, of the edge angle and of an arc that does not reach the front.

    Examples
    --------
    >>> round(feed_for_chip_thickness(0.1, 45, 40, 140), 4)
    0.1414

    References
    ----------
    stephenson-agapiou, altintas-automation
    """
    thickness = check.positive("chip thickness [mm]", chip_thickness_mm)
    return thickness / _largest_sine(kappa_deg, entry_deg, exit_deg)


def minimum_chip_thickness(edge_radius_mm: float, ratio: float) -> float:
    """Thinnest chip that forms rather than rubs: ``h_min = c r_n``.

    Parameters
    ----------
    edge_radius_mm : float
        Radius of the cutting edge r_n [mm].
    ratio : float
        Ratio c of the smallest thickness to the radius, from tests with the material [-].

    Returns
    -------
    float
        Smallest chip thickness [mm].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero.

    Notes
    -----
    The ratio depends on material and friction and is known roughly; practice stays well above the result.

    Examples
    --------
    >>> minimum_chip_thickness(0.04, 0.25)
    0.01

    References
    ----------
    common practice
    """
    return check.positive("edge radius [mm]", edge_radius_mm) * check.positive("thickness ratio", ratio)


def chip_volume_per_tooth_pass(depth_mm: float, width_mm: float, feed_per_tooth_mm: float) -> float:
    """Solid volume that one tooth cuts in one pass through the arc: ``V = ap ae fz``.

    Parameters
    ----------
    depth_mm : float
        Depth of cut ap [mm].
    width_mm : float
        Width of cut ae [mm].
    feed_per_tooth_mm : float
        Feed per tooth fz [mm].

    Returns
    -------
    float
        Volume of metal [mm3].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero.

    Notes
    -----
    Holds for any cutting-edge angle and any offset.

    Examples
    --------
    >>> chip_volume_per_tooth_pass(3, 50, 0.2)
    30.0

    References
    ----------
    own derivation
    """
    depth = check.positive("depth of cut [mm]", depth_mm)
    width = check.positive("width of cut [mm]", width_mm)
    return depth * width * check.positive("feed per tooth [mm]", feed_per_tooth_mm)


def gullet_fill(chip_volume_mm3: float, chip_form_ratio: float, gullet_volume_mm3: float) -> float:
    """Share of the gullet that the chip of one tooth pass takes: ``V R / V_gullet``.

    Parameters
    ----------
    chip_volume_mm3 : float
        Solid volume of one tooth pass [mm3].
    chip_form_ratio : float
        Room taken by loose chips over their solid volume R [-].
    gullet_volume_mm3 : float
        Free volume in front of one tooth [mm3].

    Returns
    -------
    float
        Share filled [-].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or the ratio is below one.

    Notes
    -----
    The chip stays in the gullet until the tooth leaves the work, so one pass counts, not the mean flow.

    Examples
    --------
    >>> gullet_fill(30, 10, 1500)
    0.2

    References
    ----------
    sep-1178, klocke-koenig-fertigungsverfahren-1
    """
    volume = check.positive("chip volume [mm3]", chip_volume_mm3)
    ratio = check.at_least("chip form ratio", chip_form_ratio, 1.0)
    return volume * ratio / check.positive("gullet volume [mm3]", gullet_volume_mm3)


def peripheral_chip_thickness(feed_per_tooth_mm: float, depth_mm: float, diameter_mm: float) -> float:
    """Maximum chip thickness of shallow peripheral milling, as handbooks print it: ``2 fz sqrt(d/D)``.

    Parameters
    ----------
    feed_per_tooth_mm : float
        Feed per tooth fz [mm].
    depth_mm : float
        Depth d across the cutter axis [mm].
    diameter_mm : float
        Cutter diameter D [mm].

    Returns
    -------
    float
        Maximum chip thickness [mm]; the mean is half of it.

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or the depth exceeds half the diameter.

    Notes
    -----
    Above the exact `maximum_chip_thickness` by the factor ``1/sqrt(1 - d/D)``; not for a face mill's width.

    Examples
    --------
    >>> round(peripheral_chip_thickness(0.016667, 2, 70), 4)
    0.0056

    References
    ----------
    ghosh-mallik
    """
    diameter = check.positive("cutter diameter [mm]", diameter_mm)
    depth = check.above_up_to("depth across the axis [mm]", depth_mm, 0.0, diameter / 2.0)
    return 2.0 * check.positive("feed per tooth [mm]", feed_per_tooth_mm) * math.sqrt(depth / diameter)


def _largest_sine(kappa_deg: float, entry_deg: float, exit_deg: float) -> float:
    kappa = math.radians(check.cutting_edge_angle(kappa_deg))
    entry, leave = check.arc_ends(entry_deg, exit_deg)
    front = 1.0 if entry <= 90.0 <= leave else max(math.sin(math.radians(a)) for a in (entry, leave))
    return math.sin(kappa) * front
