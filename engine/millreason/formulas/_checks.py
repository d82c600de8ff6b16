"""Range checks shared by all formulas; each returns the value as a float or raises OutOfRangeError."""

from __future__ import annotations

import math
from collections.abc import Sequence

from millreason.errors import OutOfRangeError

# Limits of the arithmetic, not of the trade: inside them no product of a formula's inputs overflows.
SMALLEST = 1e-12
LARGEST = 1e12

# A sum over the teeth stays short.
MOST_TEETH = 10_000

# Rounding in the last digits must not turn a width equal to the diameter into an error.
ROUNDING = 1e-9


def finite(quantity: str, value: float) -> float:
    """Return a finite number of a size that the arithmetic carries."""
    number = _as_number(quantity, value)
    if abs(number) > LARGEST:
        raise OutOfRangeError(quantity, value, f"a finite number, at most {LARGEST:g} in size")
    return number


def positive(quantity: str, value: float) -> float:
    """Return a finite number above zero."""
    number = _as_number(quantity, value)
    if not SMALLEST <= number <= LARGEST:
        raise OutOfRangeError(quantity, value, f"a finite number above zero ({SMALLEST:g} to {LARGEST:g})")
    return number


def not_negative(quantity: str, value: float) -> float:
    """Return a finite number of zero or more."""
    number = _as_number(quantity, value)
    if not 0.0 <= number <= LARGEST:
        raise OutOfRangeError(quantity, value, f"a finite number from zero to {LARGEST:g}")
    return number


def between(quantity: str, value: float, low: float, high: float) -> float:
    """Return a finite number in a closed range; a rounding error beyond an end becomes the end."""
    number = _as_number(quantity, value)
    slack = ROUNDING * max(abs(low), abs(high))
    if not low - slack <= number <= high + slack:
        raise OutOfRangeError(quantity, value, f"from {low:g} to {high:g}")
    return min(max(number, low), high)


def at_least(quantity: str, value: float, low: float) -> float:
    """Return a finite number not below ``low``."""
    number = finite(quantity, value)
    if number < low:
        raise OutOfRangeError(quantity, value, f"a finite number, at least {low:g}")
    return number


def inside(quantity: str, value: float, low: float, high: float) -> float:
    """Return a finite number strictly between two ends."""
    number = _as_number(quantity, value)
    if not low < number < high:
        raise OutOfRangeError(quantity, value, f"above {low:g} and below {high:g}")
    return number


def above_up_to(quantity: str, value: float, low: float, high: float) -> float:
    """Return a finite number above ``low`` and not above ``high``."""
    number = positive(quantity, value) if low == 0.0 else _as_number(quantity, value)
    if number <= low or number > high + ROUNDING * abs(high):
        raise OutOfRangeError(quantity, value, f"above {low:g} and at most {high:g}")
    return min(number, high)


def count(quantity: str, value: float) -> int:
    """Return a whole number of one or more."""
    number = positive(quantity, value)
    if number < 1 or number != math.floor(number):
        raise OutOfRangeError(quantity, value, "a whole number of one or more")
    return int(number)


def teeth(value: float) -> int:
    """Return a number of teeth, small enough for a sum over them."""
    return int(between("number of teeth", count("number of teeth", value), 1, MOST_TEETH))


def cutting_edge_angle(value: float) -> float:
    """Return a cutting-edge angle kappa_r above 0 and at most 90 degrees."""
    return above_up_to("cutting-edge angle kappa_r [deg]", value, 0.0, 90.0)


def rake(quantity: str, value: float) -> float:
    """Return a rake or inclination strictly between -90 and 90 degrees."""
    return inside(f"{quantity} [deg]", value, -90.0, 90.0)


def kienzle_exponent(value: float) -> float:
    """Return the exponent mc of a force law, from zero to below one."""
    slope = not_negative("exponent mc", value)
    return slope and inside("exponent mc", slope, 0.0, 1.0)


def taylor_exponent(value: float) -> float:
    """Return the exponent n of a tool-life law, above zero and below one."""
    return inside("Taylor exponent n", positive("Taylor exponent n", value), 0.0, 1.0)


def arc_ends(entry_deg: float, exit_deg: float) -> tuple[float, float]:
    """Return entry and exit angle, with 0 <= entry < exit <= 180 degrees."""
    leave = above_up_to("exit angle [deg]", exit_deg, 0.0, 180.0)
    entry = between("entry angle [deg]", entry_deg, 0.0, 180.0)
    if entry >= leave:
        raise OutOfRangeError("entry angle [deg]", entry_deg, f"below the exit angle of {leave:g}")
    return entry, leave


def choice(quantity: str, value: str, allowed: Sequence[str]) -> str:
    """Return one of the allowed words."""
    if value not in allowed:
        raise OutOfRangeError(quantity, value, f"one of {', '.join(allowed)}")
    return value


def power_of(quantity: str, base: float, exponent: float) -> float:
    """Return ``base ** exponent``, or say which quantity left the range of sound numbers."""
    try:
        result = float(base**exponent)
    except (OverflowError, ZeroDivisionError):
        result = math.inf
    if not SMALLEST**2 <= result <= LARGEST**2:
        raise OutOfRangeError(quantity, f"{base:g} to the power {exponent:g}", "a sound number")
    return result


def _as_number(quantity: str, value: float) -> float:
    try:
        number = float(value)
    except (TypeError, ValueError, OverflowError):
        number = math.nan
    if isinstance(value, bool | str) or not math.isfinite(number):
        raise OutOfRangeError(quantity, value, "a finite number")
    return number
