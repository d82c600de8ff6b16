"""The surface: what corner, land, run-out and tilt of the spindle leave on the floor."""

from __future__ import annotations

import math
from dataclasses import dataclass

from millreason.errors import OutOfRangeError
from millreason.formulas import _checks as check
from millreason.formulas.tilt import TiltWindow, pass_step, tilt_dish, tilt_window, trailing_lift

__all__ = [
    "Roughness",
    "RoughnessBounds",
    "TiltWindow",
    "facet_roughness",
    "land_against_feed",
    "land_needed",
    "pass_step",
    "peripheral_roughness",
    "radius_roughness",
    "roughness_with_runout",
    "runout_for_single_mark",
    "tilt_dish",
    "tilt_window",
    "tilted_land_roughness",
    "trailing_lift",
]


@dataclass(frozen=True)
class Roughness:
    """Ideal peak-to-valley height Rt and arithmetic mean Ra."""

    rt_um: float
    ra_um: float


@dataclass(frozen=True)
class RoughnessBounds:
    """Roughness with teeth in one plane, and the most that an axial run-out can make of it."""

    perfect: Roughness
    runout: Roughness


def radius_roughness(feed_mm: float, corner_radius_mm: float) -> Roughness:
    """Ideal roughness of a corner radius: ``Rt = f^2 / (8 r)``, ``Ra = f^2 / (32 r)``.

    Parameters
    ----------
    feed_mm : float
        Feed f: per tooth with teeth in one plane, per turn when one tooth marks alone [mm].
    corner_radius_mm : float
        Corner radius r [mm].

    Returns
    -------
    Roughness
        Rt and Ra [um].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or the feed exceeds the corner radius.

    Notes
    -----
    Parabola for the arc: Rt at most 7.2 % below the exact arc while the feed is within the radius. Ra after
    the textbook's 32; the exact mean of the parabola has 31.2 and is 2.6 % higher. Real surfaces are rougher.

    Examples
    --------
    >>> round(radius_roughness(0.25, 1.2).ra_um, 2)
    1.63

    References
    ----------
    groover-manufacturing, boothroyd-knight
    """
    radius = check.positive("corner radius [mm]", corner_radius_mm)
    feed = check.above_up_to("feed [mm]", feed_mm, 0.0, radius)
    return _parabola(feed, radius)


def roughness_with_runout(
    feed_per_tooth_mm: float, teeth: int, corner_radius_mm: float, runout_mm: float
) -> RoughnessBounds:
    """Both bounds of a corner radius with run-out: ``fz^2/8r`` and ``min(fn^2/8r, fz^2/8r + e)``.

    Parameters
    ----------
    feed_per_tooth_mm : float
        Feed per tooth fz [mm].
    teeth : int
        Number of effective teeth z [-].
    corner_radius_mm : float
        Corner radius r [mm].
    runout_mm : float
        Axial run-out e between the teeth [mm].

    Returns
    -------
    RoughnessBounds
        Rt and Ra with perfect teeth and with the run-out [um].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and in range, or the feed per tooth exceeds the corner radius.

    Notes
    -----
    The law with feed per turn alone overstates the height of many teeth several times. Ra of the upper bound
    is a quarter of its Rt, the share of a row of equal cusps; deeper single grooves give less.

    Examples
    --------
    >>> bounds = roughness_with_runout(0.15, 8, 0.8, 0.010)
    >>> round(bounds.perfect.rt_um, 1), round(bounds.runout.rt_um, 1)
    (3.5, 13.5)

    References
    ----------
    boothroyd-knight, own derivation
    """
    number = check.teeth(teeth)
    perfect = radius_roughness(feed_per_tooth_mm, corner_radius_mm)
    runout = check.not_negative("axial run-out [mm]", runout_mm) * 1000.0
    alone = _parabola(number * feed_per_tooth_mm, corner_radius_mm)
    highest = min(alone.rt_um, perfect.rt_um + runout)
    return RoughnessBounds(perfect, Roughness(highest, highest / 4.0))


def runout_for_single_mark(feed_per_tooth_mm: float, teeth: int, corner_radius_mm: float) -> float:
    """Run-out above which the lowest insert alone marks the floor: ``fn^2 / (8 r)`` at the most.

    The insert k places behind must stand higher by ``s (fn - s) / (2 r)`` with ``s = k fz``.

    Parameters
    ----------
    feed_per_tooth_mm : float
        Feed per tooth fz [mm].
    teeth : int
        Number of effective teeth z [-].
    corner_radius_mm : float
        Corner radius r [mm].

    Returns
    -------
    float
        Largest of the heights needed over the other inserts; zero for one tooth [mm].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero.

    Notes
    -----
    Parabola for the arc.

    Examples
    --------
    >>> round(runout_for_single_mark(0.2, 6, 0.8), 3)
    0.225

    References
    ----------
    own derivation
    """
    feed = check.positive("feed per tooth [mm]", feed_per_tooth_mm)
    number = check.teeth(teeth)
    half = number // 2
    radius = check.positive("corner radius [mm]", corner_radius_mm)
    return half * feed * (number - half) * feed / (2.0 * radius)


def facet_roughness(feed_mm: float, kappa_deg: float, minor_kappa_deg: float) -> Roughness:
    """Ideal roughness of a sharp corner: ``Rt = f / (cot kappa + cot kappa')``, ``Ra = Rt / 4``.

    Parameters
    ----------
    feed_mm : float
        Feed f: per tooth with teeth in one plane, per turn when one tooth marks alone [mm].
    kappa_deg : float
        Cutting-edge angle kappa_r [deg].
    minor_kappa_deg : float
        Angle kappa_r' of the minor edge to the floor [deg].

    Returns
    -------
    Roughness
        Rt and Ra [um].

    Raises
    ------
    OutOfRangeError
        If the feed is not finite and above zero, or an angle not above 0 and at most 90, or both are 90.

    Notes
    -----
    Both cotangents are of angles to the floor. With a side cutting-edge angle, which is a lead angle,
    the first term is its tangent; that form is misprinted in places.

    Examples
    --------
    >>> round(facet_roughness(0.2, 75, 5).rt_um, 1)
    17.1

    References
    ----------
    boothroyd-knight
    """
    feed = check.positive("feed [mm]", feed_mm)
    flanks = [
        check.cutting_edge_angle(kappa_deg),
        check.above_up_to("minor angle [deg]", minor_kappa_deg, 0, 90),
    ]
    slopes = sum(0.0 if angle == 90.0 else 1.0 / math.tan(math.radians(angle)) for angle in flanks)
    if slopes == 0.0:
        raise OutOfRangeError("minor angle [deg]", minor_kappa_deg, "below 90 where kappa_r is 90")
    height = 1000.0 * feed / slopes
    return Roughness(height, height / 4.0)


def land_against_feed(land_mm: float, feed_per_turn_mm: float) -> float:
    """Parallel land over feed per turn: ``bs / fn``; from one upwards a single land covers the floor.

    Parameters
    ----------
    land_mm : float
        Length of the parallel land bs [mm].
    feed_per_turn_mm : float
        Feed per turn fn [mm].

    Returns
    -------
    float
        Ratio [-].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero.

    Notes
    -----
    Practice keeps some overlap; between feed per tooth and feed per turn the run-out shows in the floor.

    Examples
    --------
    >>> land_against_feed(1.5, 2.0)
    0.75

    References
    ----------
    own derivation
    """
    return check.positive("land [mm]", land_mm) / check.positive("feed per turn [mm]", feed_per_turn_mm)


def land_needed(feed_per_turn_mm: float, overlap: float) -> float:
    """Land that covers a feed per turn with an overlap: ``bs = fn * overlap``.

    Parameters
    ----------
    feed_per_turn_mm : float
        Feed per turn fn [mm].
    overlap : float
        Wanted ratio of land to feed, one or more [-].

    Returns
    -------
    float
        Length of land [mm].

    Raises
    ------
    OutOfRangeError
        If the feed is not finite and above zero, or the overlap below one.

    Notes
    -----
    Too long a land pushes and chatters.

    Examples
    --------
    >>> land_needed(2.0, 1.25)
    2.5

    References
    ----------
    common practice
    """
    feed = check.positive("feed per turn [mm]", feed_per_turn_mm)
    return feed * check.at_least("overlap of the land", overlap, 1.0)


def tilted_land_roughness(feed_mm: float, tilt_deg: float) -> float:
    """Height of the saw-tooth that a tilted land leaves: ``Rt = f tan delta``.

    Parameters
    ----------
    feed_mm : float
        Feed f: per turn when one land marks alone [mm].
    tilt_deg : float
        Angle delta between land and floor [deg].

    Returns
    -------
    float
        Rt [um].

    Raises
    ------
    OutOfRangeError
        If the feed is not finite and above zero, or the tilt not from 0 to below 90.

    Notes
    -----
    For a land longer than the feed.

    Examples
    --------
    >>> round(tilted_land_roughness(2, 10 / 60), 1)
    5.8

    References
    ----------
    own derivation
    """
    tilt = check.inside("tilt of the land [deg]", check.not_negative("tilt of the land [deg]", tilt_deg), -1, 90)
    return 1000.0 * check.positive("feed [mm]", feed_mm) * math.tan(math.radians(tilt))


def peripheral_roughness(feed_per_tooth_mm: float, diameter_mm: float) -> float:
    """Height of the waves that the circumference of a cutter leaves: ``Rt = fz^2 / (4 D)``.

    Parameters
    ----------
    feed_per_tooth_mm : float
        Feed per tooth fz [mm].
    diameter_mm : float
        Cutter diameter D [mm].

    Returns
    -------
    float
        Rt of a wall [um]; never that of the floor.

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or the feed exceeds the radius.

    Notes
    -----
    For the wall that a shoulder cutter leaves with perfect teeth; run-out makes one tooth mark alone.

    Examples
    --------
    >>> round(peripheral_roughness(25 / 720, 100), 5)
    0.00301

    References
    ----------
    ghosh-mallik
    """
    diameter = check.positive("cutter diameter [mm]", diameter_mm)
    feed = check.above_up_to("feed per tooth [mm]", feed_per_tooth_mm, 0.0, diameter / 2.0)
    return 1000.0 * feed**2 / (4.0 * diameter)


def _parabola(feed_mm: float, radius_mm: float) -> Roughness:
    height = 1000.0 * feed_mm**2 / (8.0 * radius_mm)
    return Roughness(height, height / 4.0)
