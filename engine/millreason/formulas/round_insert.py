"""Round inserts: the cutting-edge angle and the diameter that follow from the depth of cut."""

from __future__ import annotations

import math
from dataclasses import dataclass

from millreason.formulas import _checks as check


@dataclass(frozen=True)
class RoundInsertAngle:
    """Cutting-edge angle of a round insert at the top of the cut, and in the mean over the depth."""

    top_deg: float
    mean_deg: float


def round_insert_angle(depth_mm: float, insert_diameter_mm: float) -> RoundInsertAngle:
    """Cutting-edge angle of a round insert: ``cos top = 1 - 2 ap/d``; the mean angle is half of it.

    Parameters
    ----------
    depth_mm : float
        Depth of cut ap [mm].
    insert_diameter_mm : float
        Insert diameter d [mm].

    Returns
    -------
    RoundInsertAngle
        Angle at the top of the cut and mean angle [deg].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or the depth exceeds half the insert diameter.

    Notes
    -----
    The top angle serves the maximum chip thickness and the feed, the mean angle (sine ``sqrt(ap/d)``) the
    mean thickness and the split of the force. Practice uses far less than half the insert.

    Examples
    --------
    >>> angle = round_insert_angle(2, 12)
    >>> round(angle.top_deg, 1), round(angle.mean_deg, 1)
    (48.2, 24.1)

    References
    ----------
    own derivation
    """
    insert = check.positive("insert diameter [mm]", insert_diameter_mm)
    depth = check.above_up_to("depth of cut [mm]", depth_mm, 0.0, insert / 2.0)
    top = math.degrees(math.acos(1.0 - 2.0 * depth / insert))
    return RoundInsertAngle(top, top / 2.0)


def round_insert_effective_diameter(outside_diameter_mm: float, insert_diameter_mm: float, depth_mm: float) -> float:
    """Diameter at the top of the cut with round inserts: ``De = D_out - d + 2 sqrt(ap (d - ap))``.

    Parameters
    ----------
    outside_diameter_mm : float
        Diameter over the inserts D_out [mm]; the diameter at the floor plus one insert diameter.
    insert_diameter_mm : float
        Insert diameter d [mm].
    depth_mm : float
        Depth of cut ap [mm].

    Returns
    -------
    float
        Effective cutting diameter [mm].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, the insert is as large as the cutter, or the depth
        exceeds half the insert diameter.

    Notes
    -----
    Cutting speed and engagement at the shoulder use this diameter.

    Examples
    --------
    >>> round(round_insert_effective_diameter(50, 17, 3), 2)
    45.96

    References
    ----------
    stephenson-agapiou
    """
    outside = check.positive("diameter over the inserts [mm]", outside_diameter_mm)
    insert = check.inside("insert diameter [mm]", insert_diameter_mm, 0.0, outside)
    depth = check.above_up_to("depth of cut [mm]", depth_mm, 0.0, insert / 2.0)
    return outside - insert + 2.0 * math.sqrt(depth * (insert - depth))
