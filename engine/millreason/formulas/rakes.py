"""Rakes: from the axial and radial rake of the cutter to the rake and inclination of its edge, and back.

Signs follow ISO 3002-1. A radial rake is positive when the outer end of the edge leads the points further
in; an axial rake when the lower end leads the upper, which lifts the chip off the machined face; an
inclination when the nose leads. At kappa_r = 90 the orthogonal rake is the radial rake and the
inclination is the axial rake. The lead angle is the complement of kappa_r; only kappa_r is stored.
"""

from __future__ import annotations

import math

from millreason.formulas import _checks as check


def orthogonal_rake(radial_rake_deg: float, axial_rake_deg: float, kappa_deg: float) -> float:
    """Rake square to the edge: ``tan gamma_o = tan gamma_f sin kappa + tan gamma_p cos kappa``.

    Parameters
    ----------
    radial_rake_deg : float
        Radial rake gamma_f [deg].
    axial_rake_deg : float
        Axial rake gamma_p [deg].
    kappa_deg : float
        Cutting-edge angle kappa_r, not the lead angle [deg].

    Returns
    -------
    float
        Orthogonal rake gamma_o [deg].

    Raises
    ------
    OutOfRangeError
        If a rake is not between -90 and 90 degrees, or kappa_r not above 0 and at most 90.

    Notes
    -----
    With the lead angle in place of kappa_r sine and cosine change places, a slip found in print.

    Examples
    --------
    >>> round(orthogonal_rake(-7, 20, 45), 2)
    9.68

    References
    ----------
    iso-3002-2
    """
    radial, axial, kappa = _tangents("radial rake", radial_rake_deg, "axial rake", axial_rake_deg, kappa_deg)
    return math.degrees(math.atan(radial * math.sin(kappa) + axial * math.cos(kappa)))


def inclination(radial_rake_deg: float, axial_rake_deg: float, kappa_deg: float) -> float:
    """Inclination of the edge: ``tan lambda_s = tan gamma_p sin kappa - tan gamma_f cos kappa``.

    Parameters
    ----------
    radial_rake_deg : float
        Radial rake gamma_f [deg].
    axial_rake_deg : float
        Axial rake gamma_p [deg].
    kappa_deg : float
        Cutting-edge angle kappa_r, not the lead angle [deg].

    Returns
    -------
    float
        Inclination lambda_s, positive when the nose leads [deg].

    Raises
    ------
    OutOfRangeError
        If a rake is not between -90 and 90 degrees, or kappa_r not above 0 and at most 90.

    Notes
    -----
    Some older texts count the inclination with the opposite sign.

    Examples
    --------
    >>> round(inclination(-7, 20, 45), 2)
    18.99

    References
    ----------
    iso-3002-2
    """
    radial, axial, kappa = _tangents("radial rake", radial_rake_deg, "axial rake", axial_rake_deg, kappa_deg)
    return math.degrees(math.atan(axial * math.sin(kappa) - radial * math.cos(kappa)))


def normal_rake(orthogonal_rake_deg: float, inclination_deg: float) -> float:
    """Rake in the plane normal to the edge: ``tan gamma_n = tan gamma_o cos lambda_s``.

    Parameters
    ----------
    orthogonal_rake_deg : float
        Orthogonal rake gamma_o [deg].
    inclination_deg : float
        Inclination lambda_s [deg].

    Returns
    -------
    float
        Normal rake gamma_n [deg].

    Raises
    ------
    OutOfRangeError
        If an angle is not between -90 and 90 degrees.

    Notes
    -----
    Equal to the orthogonal rake where the inclination is zero.

    Examples
    --------
    >>> normal_rake(0, 15)
    0.0

    References
    ----------
    iso-3002-2
    """
    orthogonal = math.radians(check.rake("orthogonal rake", orthogonal_rake_deg))
    slope = math.cos(math.radians(check.rake("inclination", inclination_deg)))
    return math.degrees(math.atan(math.tan(orthogonal) * slope))


def radial_rake(orthogonal_rake_deg: float, inclination_deg: float, kappa_deg: float) -> float:
    """Radial rake from the edge: ``tan gamma_f = tan gamma_o sin kappa - tan lambda_s cos kappa``.

    Parameters
    ----------
    orthogonal_rake_deg : float
        Orthogonal rake gamma_o [deg].
    inclination_deg : float
        Inclination lambda_s [deg].
    kappa_deg : float
        Cutting-edge angle kappa_r [deg].

    Returns
    -------
    float
        Radial rake gamma_f [deg].

    Raises
    ------
    OutOfRangeError
        If a rake is not between -90 and 90 degrees, or kappa_r not above 0 and at most 90.

    Notes
    -----
    Inverse of `orthogonal_rake` and `inclination` together with `axial_rake`.

    Examples
    --------
    >>> round(radial_rake(9.68, 18.99, 45), 1)
    -7.0

    References
    ----------
    iso-3002-2
    """
    across, along, kappa = _tangents("orthogonal rake", orthogonal_rake_deg, "inclination", inclination_deg, kappa_deg)
    return math.degrees(math.atan(across * math.sin(kappa) - along * math.cos(kappa)))


def axial_rake(orthogonal_rake_deg: float, inclination_deg: float, kappa_deg: float) -> float:
    """Axial rake from the edge: ``tan gamma_p = tan gamma_o cos kappa + tan lambda_s sin kappa``.

    Parameters
    ----------
    orthogonal_rake_deg : float
        Orthogonal rake gamma_o [deg].
    inclination_deg : float
        Inclination lambda_s [deg].
    kappa_deg : float
        Cutting-edge angle kappa_r [deg].

    Returns
    -------
    float
        Axial rake gamma_p [deg].

    Raises
    ------
    OutOfRangeError
        If a rake is not between -90 and 90 degrees, or kappa_r not above 0 and at most 90.

    Notes
    -----
    Inverse of `orthogonal_rake` and `inclination` together with `radial_rake`.

    Examples
    --------
    >>> round(axial_rake(9.68, 18.99, 45), 1)
    20.0

    References
    ----------
    iso-3002-2
    """
    across, along, kappa = _tangents("orthogonal rake", orthogonal_rake_deg, "inclination", inclination_deg, kappa_deg)
    return math.degrees(math.atan(across * math.cos(kappa) + along * math.sin(kappa)))


def lead_angle(kappa_deg: float) -> float:
    """Lead angle that belongs to a cutting-edge angle: ``psi = 90 - kappa``.

    Parameters
    ----------
    kappa_deg : float
        Cutting-edge angle kappa_r [deg].

    Returns
    -------
    float
        Lead angle psi_r [deg].

    Raises
    ------
    OutOfRangeError
        If kappa_r is not above 0 and at most 90.

    Notes
    -----
    For printing beside kappa_r only; nothing is computed from it.

    Examples
    --------
    >>> lead_angle(75)
    15.0

    References
    ----------
    iso-3002-1
    """
    return 90.0 - check.cutting_edge_angle(kappa_deg)


def kappa_from_lead(lead_deg: float) -> float:
    """Cutting-edge angle that belongs to a lead angle: ``kappa = 90 - psi``.

    Parameters
    ----------
    lead_deg : float
        Lead angle psi_r, stated to be one [deg].

    Returns
    -------
    float
        Cutting-edge angle kappa_r [deg].

    Raises
    ------
    OutOfRangeError
        If the lead angle is not from 0 to below 90.

    Notes
    -----
    Ask first what was meant: many texts say lead for kappa_r. See `lead_is_ambiguous`.

    Examples
    --------
    >>> kappa_from_lead(15)
    75.0

    References
    ----------
    iso-3002-1
    """
    lead = check.not_negative("lead angle [deg]", lead_deg)
    return check.cutting_edge_angle(90.0 - check.between("lead angle [deg]", lead, 0.0, 90.0))


def lead_is_ambiguous(angle_deg: float) -> bool:
    """Whether an angle called lead, with no convention, could mean two tools: ``psi != 90 - psi``.

    Parameters
    ----------
    angle_deg : float
        Angle as given [deg].

    Returns
    -------
    bool
        False only at the half right angle, where lead and kappa_r are the same [-].

    Raises
    ------
    OutOfRangeError
        If the angle is not from 0 to 90.

    Notes
    -----
    Trade texts use the word for either angle.

    Examples
    --------
    >>> lead_is_ambiguous(15), lead_is_ambiguous(45)
    (True, False)

    References
    ----------
    cte-lead-2019
    """
    angle = check.between("lead angle [deg]", angle_deg, 0.0, 90.0)
    return not math.isclose(angle, 90.0 - angle, rel_tol=check.ROUNDING)


def _tangents(
    first: str, first_deg: float, second: str, second_deg: float, kappa_deg: float
) -> tuple[float, float, float]:
    kappa = math.radians(check.cutting_edge_angle(kappa_deg))
    one = math.tan(math.radians(check.rake(first, first_deg)))
    return one, math.tan(math.radians(check.rake(second, second_deg))), kappa
