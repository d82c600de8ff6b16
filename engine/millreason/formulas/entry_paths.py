"""Ramp and helix: how a cutter that does not cut at its centre may go down into the work."""

from __future__ import annotations

import math
from dataclasses import dataclass

from millreason.errors import OutOfRangeError
from millreason.formulas import _checks as check


@dataclass(frozen=True)
class HelixPath:
    """Helix of the cutter centre: its diameter, pitch and length, and the feed of the centre."""

    diameter_mm: float
    pitch_mm: float
    length_mm: float
    centre_feed_mm_min: float


@dataclass(frozen=True)
class HoleWindow:
    """Least and largest hole in which a helix leaves a flat floor with neither boss nor core."""

    least_mm: float
    largest_mm: float


def ramp_length(depth_mm: float, ramp_deg: float) -> float:
    """Travel along the floor of a straight ramp: ``L = ap / tan alpha``.

    Parameters
    ----------
    depth_mm : float
        Depth to reach ap [mm].
    ramp_deg : float
        Ramp angle alpha [deg].

    Returns
    -------
    float
        Length along the floor [mm].

    Raises
    ------
    OutOfRangeError
        If the depth is not finite and above zero, or the angle not between 0 and 90.

    Notes
    -----
    The angle stays within the cutter's own limit, see `ramp_limit_angle`.

    Examples
    --------
    >>> round(ramp_length(2, 2), 1)
    57.3

    References
    ----------
    own derivation
    """
    angle = check.inside("ramp angle [deg]", check.positive("ramp angle [deg]", ramp_deg), 0.0, 90.0)
    return check.positive("depth [mm]", depth_mm) / math.tan(math.radians(angle))


def ramp_limit_angle(body_clearance_mm: float, diameter_mm: float, floor_edge_mm: float) -> float:
    """Steepest ramp before the underside of the body touches: ``tan alpha = h / (D - 2 l)``.

    Parameters
    ----------
    body_clearance_mm : float
        Gap h along the axis from the lowest edge to the underside of the body [mm].
    diameter_mm : float
        Cutter diameter D at the floor [mm].
    floor_edge_mm : float
        Length l of edge on the floor, from the diameter inwards [mm].

    Returns
    -------
    float
        Largest ramp angle [deg].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or the floor edges reach the centre.

    Notes
    -----
    Edges that reach the centre have no such limit. The maker's figure on the cutter's record goes first.

    Examples
    --------
    >>> round(ramp_limit_angle(1.5, 63, 6), 2)
    1.68

    References
    ----------
    own derivation
    """
    gap = check.positive("body clearance [mm]", body_clearance_mm)
    diameter = check.positive("cutter diameter [mm]", diameter_mm)
    edge = check.inside("floor edge [mm]", check.positive("floor edge [mm]", floor_edge_mm), 0, diameter / 2)
    return math.degrees(math.atan(gap / (diameter - 2.0 * edge)))


def helix_path(
    hole_diameter_mm: float,
    outermost_diameter_mm: float,
    ramp_deg: float,
    depth_mm: float,
    edge_feed_mm_min: float,
) -> HelixPath:
    """Helix into a hole: path ``Dh - DCX``, pitch ``pi Dp tan alpha``, feed of the centre ``vf Dp / Dh``.

    Parameters
    ----------
    hole_diameter_mm : float
        Hole diameter Dh [mm].
    outermost_diameter_mm : float
        Outermost cutter diameter DCX [mm].
    ramp_deg : float
        Ramp angle alpha along the path [deg].
    depth_mm : float
        Depth to reach [mm].
    edge_feed_mm_min : float
        Feed rate vf at the wall of the hole [mm/min].

    Returns
    -------
    HelixPath
        Path diameter, pitch and length [mm], feed of the centre [mm/min].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, the cutter fills the hole, or the angle is not below 90.

    Notes
    -----
    The pitch must not exceed the usable depth of the edge. A full turn on the floor comes on top.

    Examples
    --------
    >>> path = helix_path(100, 63, 1.5, 6, 1000)
    >>> round(path.diameter_mm, 1), round(path.pitch_mm, 2), round(path.centre_feed_mm_min)
    (37.0, 3.04, 370)

    References
    ----------
    own derivation
    """
    hole = check.positive("hole diameter [mm]", hole_diameter_mm)
    cutter = check.inside("outermost diameter [mm]", outermost_diameter_mm, 0.0, hole)
    path = hole - check.positive("outermost diameter [mm]", cutter)
    angle = check.inside("ramp angle [deg]", check.positive("ramp angle [deg]", ramp_deg), 0.0, 90.0)
    length = check.positive("depth [mm]", depth_mm) / math.sin(math.radians(angle))
    feed = check.positive("feed rate [mm/min]", edge_feed_mm_min) * path / hole
    return HelixPath(path, math.pi * path * math.tan(math.radians(angle)), length, feed)


def flat_floor_hole_window(diameter_mm: float, corner_radius_mm: float, land_mm: float) -> HoleWindow:
    """Holes with a flat floor for a 90 degree cutter: ``2 (D - r - bs) <= Dh <= 2 (D - r)``.

    Parameters
    ----------
    diameter_mm : float
        Cutter diameter D [mm].
    corner_radius_mm : float
        Corner radius r; zero for a sharp corner [mm].
    land_mm : float
        Length of edge on the floor bs [mm].

    Returns
    -------
    HoleWindow
        Least and largest hole diameter [mm].

    Raises
    ------
    OutOfRangeError
        If the diameter is not finite and above zero, or corner and land reach the centre.

    Notes
    -----
    One circle, no clearing of the middle. A larger hole keeps a core, a smaller one a boss.

    Examples
    --------
    >>> flat_floor_hole_window(50, 0.8, 1.2)
    HoleWindow(least_mm=96.0, largest_mm=98.4)

    References
    ----------
    own derivation
    """
    diameter = check.positive("cutter diameter [mm]", diameter_mm)
    radius = check.not_negative("corner radius [mm]", corner_radius_mm)
    land = check.positive("land [mm]", land_mm)
    if radius + land >= diameter / 2.0:
        raise OutOfRangeError("corner radius and land [mm]", radius + land, f"below {diameter / 2.0:g}")
    return HoleWindow(2.0 * (diameter - radius - land), 2.0 * (diameter - radius))
