"""Engagement: where a tooth enters and leaves the work, how many teeth cut.

Angles turn with the cutter and start at the perpendicular to the feed, on the up-milling side: 0 is the
flank where an up-milling tooth would start with no chip, 90 the front of the cutter, 180 the flank where
a climb-milling tooth leaves with no chip.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

from millreason.errors import OutOfRangeError
from millreason.formulas import _checks as check
from millreason.formulas.first_contact import FirstContact, first_contact

__all__ = [
    "Engagement",
    "FirstContact",
    "TeethInCut",
    "centred_arc",
    "engagement_arc",
    "exit_angle_from_centreline",
    "first_contact",
    "flush_arc",
    "in_exit_danger_band",
    "offset_arc",
    "teeth_in_cut",
]


@dataclass(frozen=True)
class Engagement:
    """Entry angle, exit angle and the arc between them, in degrees."""

    entry_deg: float
    exit_deg: float
    arc_deg: float


@dataclass(frozen=True)
class TeethInCut:
    """Fewest, mean and most teeth that cut at the same time during one turn."""

    least: int
    mean: float
    most: int


def engagement_arc(width_mm: float, diameter_mm: float, entry_gap_mm: float) -> Engagement:
    """Engagement at any position: ``cos phi1 = 1 - 2 U1/D``, ``cos phi2 = 1 - 2 (U1 + ae)/D``.

    Parameters
    ----------
    width_mm : float
        Width of cut ae [mm].
    diameter_mm : float
        Cutter diameter D [mm].
    entry_gap_mm : float
        Gap U1 from the cutter circle on the entry side to the work edge [mm].

    Returns
    -------
    Engagement
        Entry angle, exit angle and arc [deg].

    Raises
    ------
    OutOfRangeError
        If a value is not finite, or the width and the gap do not fit inside the diameter.

    Notes
    -----
    Plane geometry of a circle over a straight strip; the feed per tooth is small against the diameter.

    Examples
    --------
    >>> round(engagement_arc(50, 100, 25).arc_deg, 6)
    60.0

    References
    ----------
    tschaetsch-zerspantechnik, paucksch-zerspantechnik
    """
    diameter = check.positive("cutter diameter [mm]", diameter_mm)
    width = check.above_up_to("width of cut [mm]", width_mm, 0.0, diameter)
    room = diameter - width
    gap = check.between("entry gap [mm]", entry_gap_mm, 0.0, room) if room > 0 else _no_gap(entry_gap_mm)
    entry = _angle_at(gap / diameter)
    leave = _angle_at((gap + width) / diameter)
    return Engagement(entry, leave, leave - entry)


def centred_arc(width_mm: float, diameter_mm: float) -> Engagement:
    """Engagement with the cutter centred on the width: ``phi_s = 2 asin(ae/D)``.

    Parameters
    ----------
    width_mm : float
        Width of cut ae [mm].
    diameter_mm : float
        Cutter diameter D [mm].

    Returns
    -------
    Engagement
        Entry angle, exit angle and arc [deg], symmetric about 90.

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or the width exceeds the diameter.

    Notes
    -----
    Holds for the symmetric cut only; at two thirds of the diameter the one-sided arc is 31 % longer.

    Examples
    --------
    >>> round(centred_arc(2, 3).arc_deg, 1)
    83.6

    References
    ----------
    paucksch-zerspantechnik, tabellenbuch-metall
    """
    diameter = check.positive("cutter diameter [mm]", diameter_mm)
    width = check.above_up_to("width of cut [mm]", width_mm, 0.0, diameter)
    half = math.degrees(math.asin(width / diameter))
    return Engagement(90.0 - half, 90.0 + half, 2.0 * half)


def flush_arc(width_mm: float, diameter_mm: float, side: str = "exit") -> Engagement:
    """Engagement with one flank of the cutter on the work edge: ``cos phi_s = 1 - 2 ae/D``.

    Parameters
    ----------
    width_mm : float
        Width of cut ae [mm].
    diameter_mm : float
        Cutter diameter D [mm].
    side : str
        Flank that is flush [-]: ``exit`` (pure climb below half the diameter) or ``entry`` (conventional).

    Returns
    -------
    Engagement
        Entry angle, exit angle and arc [deg].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, the width exceeds the diameter, or the side is unknown.

    Notes
    -----
    The tooth leaves (``exit``) or starts (``entry``) with no chip thickness.

    Examples
    --------
    >>> round(flush_arc(2, 3).arc_deg, 1)
    109.5
    >>> flush_arc(50, 100, "entry").entry_deg, flush_arc(50, 100, "exit").exit_deg
    (0.0, 180.0)

    References
    ----------
    boothroyd-knight
    """
    check.choice("flush side", side, ("exit", "entry"))
    diameter = check.positive("cutter diameter [mm]", diameter_mm)
    width = check.above_up_to("width of cut [mm]", width_mm, 0.0, diameter)
    return engagement_arc(width, diameter, diameter - width if side == "exit" else 0.0)


def offset_arc(width_mm: float, diameter_mm: float, offset_mm: float) -> Engagement:
    """Engagement with the cutter centre beside the middle of the width: ``U1 = (D - ae)/2 + offset``.

    Parameters
    ----------
    width_mm : float
        Width of cut ae [mm].
    diameter_mm : float
        Cutter diameter D [mm].
    offset_mm : float
        Distance of the centres [mm]; above zero the teeth leave with the thinner chip.

    Returns
    -------
    Engagement
        Entry angle, exit angle and arc [deg].

    Raises
    ------
    OutOfRangeError
        If a value is not finite, or the offset leaves a strip of the width uncut.

    Notes
    -----
    The offset is at most half the difference of diameter and width, either way.

    Examples
    --------
    >>> offset_arc(50, 100, 25) == flush_arc(50, 100, "exit")
    True

    References
    ----------
    own derivation
    """
    diameter = check.positive("cutter diameter [mm]", diameter_mm)
    width = check.above_up_to("width of cut [mm]", width_mm, 0.0, diameter)
    room = (diameter - width) / 2.0
    offset = check.finite("offset of the cutter centre [mm]", offset_mm)
    if abs(offset) > room + check.ROUNDING * diameter:
        raise OutOfRangeError("offset of the cutter centre [mm]", offset_mm, f"from {-room:g} to {room:g}")
    return engagement_arc(width, diameter, min(max(room + offset, 0.0), 2.0 * room))


def teeth_in_cut(teeth: int, arc_deg: float) -> TeethInCut:
    """Teeth that cut together, equal spacing: ``zc = z phi_s / 360``, between its floor and its ceiling.

    Parameters
    ----------
    teeth : int
        Number of effective teeth z [-].
    arc_deg : float
        Arc of engagement phi_s [deg].

    Returns
    -------
    TeethInCut
        Least, mean and most [-].

    Raises
    ------
    OutOfRangeError
        If the number of teeth is not a whole number above zero, or the arc is not above 0 and at most 360.

    Notes
    -----
    For equally spaced teeth. The mean also holds for unequal spacing.

    Examples
    --------
    >>> teeth_in_cut(6, 90)
    TeethInCut(least=1, mean=1.5, most=2)

    References
    ----------
    kalpakjian-schmid
    """
    number = check.teeth(teeth)
    arc = check.above_up_to("arc of engagement [deg]", arc_deg, 0.0, 360.0)
    mean = number * arc / 360.0
    nearest = round(mean)
    if math.isclose(mean, nearest, rel_tol=check.ROUNDING):
        return TeethInCut(nearest, mean, nearest)
    return TeethInCut(math.floor(mean), mean, math.ceil(mean))


def exit_angle_from_centreline(exit_deg: float) -> float:
    """Angle between the exit point and the front of the cutter: ``phi2 - 90``.

    Parameters
    ----------
    exit_deg : float
        Exit angle phi2 [deg].

    Returns
    -------
    float
        Angle from the centreline along the feed [deg]; above zero the teeth leave behind the centreline.

    Raises
    ------
    OutOfRangeError
        If the exit angle is not above 0 and at most 180.

    Notes
    -----
    The offset of the work edge from the centreline is half the diameter times the sine of this angle.

    Examples
    --------
    >>> exit_angle_from_centreline(120)
    30.0

    References
    ----------
    pekelharing-1978
    """
    return check.above_up_to("exit angle [deg]", exit_deg, 0.0, 180.0) - 90.0


def in_exit_danger_band(exit_deg: float, half_band_deg: float) -> bool:
    """Whether the teeth leave the work with a thick chip: ``|phi2 - 90| < half band``.

    Parameters
    ----------
    exit_deg : float
        Exit angle phi2 [deg].
    half_band_deg : float
        Half width of the band about the centreline in which edges break at the exit [deg].

    Returns
    -------
    bool
        True inside the band [-]; its ends are outside.

    Raises
    ------
    OutOfRangeError
        If the exit angle is not above 0 and at most 180, or the band not above 0 and at most 90.

    Notes
    -----
    Published for sudden unloading of brittle edges; the width of the band is common practice, so it is given.

    Examples
    --------
    >>> in_exit_danger_band(95, 30), in_exit_danger_band(150, 30)
    (True, False)

    References
    ----------
    pekelharing-1978
    """
    band = check.above_up_to("half band of dangerous exit [deg]", half_band_deg, 0.0, 90.0)
    return abs(exit_angle_from_centreline(exit_deg)) < band - check.ROUNDING * band


def _angle_at(share_of_diameter: float) -> float:
    # The half-angle form keeps its digits at both flanks, where the cosine is flat.
    if share_of_diameter <= 0.5:
        return 2.0 * math.degrees(math.asin(math.sqrt(share_of_diameter)))
    return 180.0 - 2.0 * math.degrees(math.asin(math.sqrt(max(1.0 - share_of_diameter, 0.0))))


def _no_gap(entry_gap_mm: float) -> float:
    if check.finite("entry gap [mm]", entry_gap_mm) != 0.0:
        raise OutOfRangeError("entry gap [mm]", entry_gap_mm, "0 where the width equals the diameter")
    return 0.0
