"""First contact: the corner of the insert that meets the work first, and by how much it leads."""

from __future__ import annotations

import math
from dataclasses import dataclass

from millreason.formulas import _checks as check


@dataclass(frozen=True)
class FirstContact:
    """Point or points of the insert that touch the work first, and by how much they lead the next."""

    points: str
    margin_mm: float


def first_contact(
    depth_mm: float,
    feed_per_tooth_mm: float,
    kappa_deg: float,
    entry_deg: float,
    radial_rake_deg: float,
    axial_rake_deg: float,
) -> FirstContact:
    """Point of the insert that meets the work first: the largest lead of the corners S, T, U and V.

    ``lead = d (cos phi1 - tan gamma_f sin phi1) - z tan gamma_p sin phi1``, with d inwards and z upwards.

    Parameters
    ----------
    depth_mm : float
        Depth of cut ap [mm].
    feed_per_tooth_mm : float
        Feed per tooth fz [mm].
    kappa_deg : float
        Cutting-edge angle kappa_r [deg].
    entry_deg : float
        Entry angle phi1 [deg].
    radial_rake_deg : float
        Effective radial rake gamma_f [deg].
    axial_rake_deg : float
        Effective axial rake gamma_p [deg].

    Returns
    -------
    FirstContact
        Points in the order STUV (several for a line or face contact) and the margin to the next [mm].

    Raises
    ------
    OutOfRangeError
        If a value is not finite or lies outside its range.

    Notes
    -----
    S is the nose, T the main edge at full depth, V the minor edge at the feed, U the corner across from
    the nose. Straight edge, no corner radius; the entry face of the work stands along the feed.

    Examples
    --------
    >>> first_contact(3, 0.2, 90, 60, -7, -7).points
    'U'
    >>> first_contact(3, 0.2, 45, 60, -7, -7).points
    'V'

    References
    ----------
    opitz-beckhaus-1970, own derivation
    """
    leads = _corner_leads(depth_mm, feed_per_tooth_mm, kappa_deg, entry_deg, radial_rake_deg, axial_rake_deg)
    best = max(leads.values())
    tie = check.ROUNDING * (depth_mm + feed_per_tooth_mm)
    points = "".join(name for name, lead in leads.items() if best - lead <= tie)
    behind = [best - lead for name, lead in leads.items() if name not in points]
    return FirstContact(points, min(behind, default=0.0))


def _corner_leads(
    depth_mm: float, feed_mm: float, kappa_deg: float, entry_deg: float, radial_deg: float, axial_deg: float
) -> dict[str, float]:
    depth = check.positive("depth of cut [mm]", depth_mm)
    feed = check.positive("feed per tooth [mm]", feed_mm)
    kappa = math.radians(check.cutting_edge_angle(kappa_deg))
    entry = math.radians(check.between("entry angle [deg]", entry_deg, 0.0, 180.0))
    radial = math.tan(math.radians(check.rake("radial rake", radial_deg)))
    axial = math.tan(math.radians(check.rake("axial rake", axial_deg)))
    chip = feed * math.sin(entry)
    outwards = depth * math.cos(kappa) / math.sin(kappa)
    corners = {"S": (0.0, 0.0), "T": (-outwards, depth), "U": (chip - outwards, depth), "V": (chip, 0.0)}
    inward_lead = math.cos(entry) - radial * math.sin(entry)
    upward_lead = -axial * math.sin(entry)
    return {name: inward * inward_lead + up * upward_lead for name, (inward, up) in corners.items()}
