"""The unit-power method, an independent check beside the force law, and bands of uncertain numbers."""

from __future__ import annotations

from dataclasses import dataclass

from millreason.formulas import _checks as check


@dataclass(frozen=True)
class Band:
    """A number known roughly: low, likely and high."""

    low: float
    likely: float
    high: float

    def holds(self, limit: float) -> str:
        """Say whether the band stays within a limit: ``all``, ``likely`` (not its high end) or ``none``."""
        if self.high <= limit:
            return "all"
        return "likely" if self.likely <= limit else "none"

    def overlaps(self, other: Band) -> bool:
        """Say whether two bands share a value."""
        return self.low <= other.high and other.low <= self.high


def unit_power_check(
    removal_rate_cm3_min: float, unit_power_j_mm3: float, feed_factor: float, wear_factor: float
) -> float:
    """Power at the cutter by unit power: ``P = Kp Q C W / 60``.

    Parameters
    ----------
    removal_rate_cm3_min : float
        Removal rate Q [cm3/min].
    unit_power_j_mm3 : float
        Power constant Kp, energy per volume with a sharp tool at the reference feed [J/mm3].
    feed_factor : float
        Factor C for the feed per tooth [-].
    wear_factor : float
        Factor W for the wear of the tool [-].

    Returns
    -------
    float
        Power at the cutter [kW].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero.

    Notes
    -----
    One joule per cubic millimetre is one kilowatt per cubic centimetre a second. Knows neither the
    cutting-edge angle nor the engagement, so it checks the force law and does not replace it.

    Examples
    --------
    >>> round(unit_power_check(108, 1.1, 1.0, 1.0), 2)
    1.98

    References
    ----------
    machinerys-handbook-31, kalpakjian-schmid
    """
    rate = check.positive("removal rate [cm3/min]", removal_rate_cm3_min) / 60.0
    constant = check.positive("unit power [J/mm3]", unit_power_j_mm3)
    factors = check.positive("feed factor", feed_factor) * check.positive("wear factor", wear_factor)
    return rate * constant * factors


def feed_factor(feed_per_tooth_mm: float, reference_mm: float, exponent: float) -> float:
    """Factor of the unit-power method for the feed: ``C = (f / f_ref)^-e``.

    Parameters
    ----------
    feed_per_tooth_mm : float
        Feed per tooth [mm].
    reference_mm : float
        Feed at which the power constants hold [mm].
    exponent : float
        Exponent e, above zero when a thin chip needs more [-].

    Returns
    -------
    float
        Factor on the power [-].

    Raises
    ------
    OutOfRangeError
        If a feed is not finite and above zero, or the exponent is not from 0 to below 1.

    Notes
    -----
    With 0.30 mm and 0.20 it is within 3 % of the printed table from 0.02 to 1.5 mm.

    Examples
    --------
    >>> round(feed_factor(0.10, 0.30, 0.20), 2)
    1.25

    References
    ----------
    machinerys-handbook-31
    """
    feed = check.positive("feed per tooth [mm]", feed_per_tooth_mm)
    ratio = feed / check.positive("reference feed [mm]", reference_mm)
    return check.power_of("feed per tooth [mm]", ratio, -check.kienzle_exponent(exponent))


def constant_band(likely: float, low_ratio: float, high_ratio: float) -> Band:
    """Band of a constant from the ratios of its ends to its likely value.

    Parameters
    ----------
    likely : float
        Likely value, in any unit [-].
    low_ratio : float
        Low end over the likely value [-].
    high_ratio : float
        High end over the likely value [-].

    Returns
    -------
    Band
        Low, likely and high, in the unit of the likely value [-].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or the ratios do not lie on both sides of one.

    Notes
    -----
    The ratios come with the data; nothing is assumed about a distribution between them.

    Examples
    --------
    >>> constant_band(2000, 0.75, 1.5)
    Band(low=1500.0, likely=2000.0, high=3000.0)

    References
    ----------
    own derivation
    """
    value = check.positive("likely value", likely)
    low = check.above_up_to("low ratio", low_ratio, 0.0, 1.0)
    high = check.at_least("high ratio", high_ratio, 1.0)
    return Band(value * low, value, value * high)


def power_band(power_kw: float, low_ratio: float, high_ratio: float, wear_factor: float) -> Band:
    """Band of a power: sharp edge with the low constant, sharp with the likely, worn with the high one.

    Parameters
    ----------
    power_kw : float
        Power with a sharp edge and the likely constant [kW].
    low_ratio : float
        Low end of the force constant over its likely value [-].
    high_ratio : float
        High end of the force constant over its likely value [-].
    wear_factor : float
        Force of a worn edge over that of a sharp edge [-].

    Returns
    -------
    Band
        Low, likely and high power [kW].

    Raises
    ------
    OutOfRangeError
        If a value is not finite and above zero, or a ratio lies on the wrong side of one.

    Notes
    -----
    Torque and force follow the same ratios.

    Examples
    --------
    >>> power_band(10, 0.8, 1.2, 1.25)
    Band(low=8.0, likely=10.0, high=15.0)

    References
    ----------
    own derivation
    """
    wear = check.at_least("wear factor", wear_factor, 1.0)
    sharp = constant_band(power_kw, low_ratio, high_ratio)
    return Band(sharp.low, sharp.likely, sharp.high * wear)
