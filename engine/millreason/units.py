"""Quantities at the edge: reading `3 in` or `15 hp`, and printing numbers in the reader's units."""

from __future__ import annotations

import math
import re
from dataclasses import dataclass
from functools import cache
from typing import TYPE_CHECKING

from millreason.errors import MillreasonError, did_you_mean

if TYPE_CHECKING:
    from pint import UnitRegistry

# A small registry of the trade's units: pint's own file of some thousand units would double the start-up time.
_DEFINITIONS = """
millimetre = [length] = mm
centimetre = 10 mm = cm
metre = 1000 mm = m
micrometre = 0.001 mm = um = micron
inch = 25.4 mm = in
foot = 12 in = ft
thou = 0.001 in = mil
microinch = 1e-6 in = uin
kilogram = [mass] = kg
gram = 0.001 kg = g
pound = 0.45359237 kg = lb
minute = [time] = min
second = minute / 60 = s
hour = 60 min = h
newton = [force] = N
kilonewton = 1000 N = kN
pound_force = 4.4482216152605 N = lbf
kilowatt = [power] = kW
watt = 0.001 kW = W
horsepower = 0.745699871582270 kW = hp
metric_horsepower = 0.73549875 kW = PS
revolution = [turn] = rev
rpm = rev / min
degree = [angle] = deg
sfm = ft / min
ipm = in / min
bar = 0.1 N / mm ** 2
megapascal = N / mm ** 2 = MPa
kilopascal = 0.001 MPa = kPa
psi = lbf / in ** 2
mm2 = mm ** 2
cm2 = cm ** 2
in2 = in ** 2
unity = [] = one
percent = 0.01 one = pct
"""

# What may be written for a fact stored in the unit on the left; the first is the one suggested.
UNITS_ALLOWED: dict[str, tuple[str, ...]] = {
    "mm": ("mm", "in", "um", "cm", "m", "ft", "thou"),
    "mm2": ("mm2", "cm2", "in2"),
    "um": ("um", "uin", "mm", "in", "thou"),
    "kg": ("kg", "lb", "g"),
    "N": ("N", "kN", "lbf"),
    "kW": ("kW", "hp", "W", "PS"),
    "N.m": ("N.m", "lbf.ft", "lbf.in"),
    "rpm": ("rpm", "rev/min"),
    "m/min": ("m/min", "sfm", "ft/min"),
    "mm/min": ("mm/min", "in/min", "ipm", "m/min"),
    "min": ("min", "s", "h"),
    "deg": ("deg",),
    "N/um": ("N/um", "lbf/thou"),
    "MPa": ("MPa", "N/mm2", "bar", "kPa", "psi"),
    "HB": ("HB", "HRC", "HV"),
    "currency/h": ("/h",),
    "currency": ("(a bare number)",),
    "percent": ("%",),
}

_SPELLINGS = {
    '"': "in", "inches": "in", "inch": "in", "µm": "um", "μm": "um", "micron": "um", "microns": "um",
    "Nm": "N.m", "N·m": "N.m", "N*m": "N.m", "ft.lb": "lbf.ft", "ft-lb": "lbf.ft", "ft.lbf": "lbf.ft",
    "lb.ft": "lbf.ft", "lb-ft": "lbf.ft", "in.lb": "lbf.in", "in-lb": "lbf.in", "lb.in": "lbf.in",
    "1/min": "rpm", "r/min": "rpm", "rev/min": "rpm", "RPM": "rpm", "°": "deg", "degrees": "deg",
    "lbs": "lb", "HP": "hp", "kw": "kW", "KW": "kW", "MM": "mm", "IN": "in", "µin": "uin", "sfpm": "sfm",
    "mins": "min", "minutes": "min", "sec": "s", "N/mm2": "MPa", "hours": "h", "thousandths": "thou",
    "HBW": "HB", "BHN": "HB", "hb": "HB", "hrc": "HRC", "Rc": "HRC", "hv": "HV", "HB30": "HB", "pct": "%",
}  # fmt: skip

_QUANTITY = re.compile(r"\s*([-+]?\d[\d ,_]*(?:[.,]\d+)?(?:[eE][-+]?\d+)?|[-+]?[.,]\d+)\s*(.*?)\s*\Z", re.DOTALL)
_FRACTION = re.compile(r"\s*(?:(\d+)[ -])?(\d+)/(\d+)\s*(in|inch|inches|\")\s*\Z")

HARDNESS_SCALES = ("HB", "HRC", "HV")
INCH_UNITS = frozenset(
    {
        "in",
        "ft",
        "thou",
        "uin",
        "lb",
        "lbf",
        "hp",
        "lbf.ft",
        "lbf.in",
        "sfm",
        "ft/min",
        "ipm",
        "in/min",
        "psi",
    }
)


# Units that readers in inches and in millimetres write alike.
SHARED_UNITS = frozenset({"rpm", "rev/min", "deg", "min", "s", "h", "/h", "%"})


class QuantityError(MillreasonError):
    """A text is not a quantity in a unit that is allowed here; the message says what is."""


@dataclass(frozen=True)
class Quantity:
    """A number as a person wrote it: value and unit (already in the program's spelling)."""

    value: float
    unit: str


@cache
def registry() -> UnitRegistry[float]:
    """Return the registry of the trade's units."""
    from pint import UnitRegistry as Registry

    units: UnitRegistry[float] = Registry(None)
    units.load_definitions([line for line in _DEFINITIONS.splitlines() if line])
    return units


def parse_quantity(text: object, stored_unit: str) -> Quantity:
    """Read a quantity such as '3 in' for a fact that is stored in `stored_unit`.

    Raises
    ------
    QuantityError
        for a bare number, an unknown unit or a unit of another kind, listing the units allowed.
    """
    allowed = UNITS_ALLOWED.get(stored_unit, (stored_unit,))
    listed = ", ".join(allowed)
    if isinstance(text, int | float) and not isinstance(text, bool):
        raise QuantityError(f"{text} has no unit. Write the unit behind the number: {listed}.")
    if not isinstance(text, str):
        raise QuantityError(f"{text!r} is not a quantity. Write a number and its unit, one of {listed}.")
    if fraction := _FRACTION.match(text):
        whole, upper, lower = (float(part or 0) for part in fraction.groups()[:3])
        if lower:
            return Quantity(whole + upper / lower, "in")
    match = _QUANTITY.match(text)
    if not match:
        raise QuantityError(f"{text!r} does not begin with a number. Write a number and its unit, one of {listed}.")
    number = _number(match.group(1), text)
    written = match.group(2)
    unit = _SPELLINGS.get(written, written)
    if not unit:
        raise QuantityError(f"{text!r} has no unit. Write the unit behind the number: {listed}.")
    if unit not in allowed:
        raise QuantityError(f"{written!r} is no unit for this. Allowed: {listed}.{did_you_mean(unit, allowed)}")
    return Quantity(number, unit)


def _number(digits: str, text: str) -> float:
    if "," in digits or " " in digits.strip() or "_" in digits:
        raise QuantityError(f"{text!r}: write the number with digits and a decimal point only, such as 1234.5.")
    number = float(digits)
    if not math.isfinite(number):
        raise QuantityError(f"{text!r} is too large for a number.")
    return number


def convert(value: float, unit: str, target: str) -> float:
    """Convert a value between two units of the program's spelling."""
    if unit == target:
        return value
    if target == "currency/h":
        return value
    units = registry()
    return float(units.Quantity(value, _expression(unit)).to(_expression(target)).magnitude)


def _expression(unit: str) -> str:
    return unit.replace("N.m", "N*m").replace("lbf.ft", "lbf*ft").replace("lbf.in", "lbf*in").replace("%", "percent")


# How a stored unit is shown to a reader who works in inches: unit and decimals; metric decimals beside it.
INCH_SHOWN = {
    "mm": ("in", 4), "um": ("uin", 0), "kg": ("lb", 1), "N": ("lbf", 0), "kW": ("hp", 2), "N.m": ("lbf.ft", 1),
    "m/min": ("sfm", 0), "mm/min": ("in/min", 1), "cm3/min": ("in3/min", 2), "MPa": ("psi", 0),
}  # fmt: skip
_DECIMALS = {
    "mm": 3,
    "um": 2,
    "kg": 2,
    "N": 0,
    "kW": 2,
    "N.m": 1,
    "rpm": 0,
    "m/min": 0,
    "mm/min": 0,
    "min": 2,
    "deg": 1,
}
_CUBIC_INCH_IN_CM3 = 16.387064


def plain(value: float, decimals: int = 3) -> str:
    """Return a number rounded for a reader: so many decimals, four figures from one upwards, no needless zeros."""
    if abs(value) >= 1:
        decimals = min(decimals, max(0, 3 - int(math.log10(abs(value)))))
    text = f"{value:.{decimals}f}"
    if "." in text:
        text = text.rstrip("0").rstrip(".")
    return "0" if text in ("-0", "") else text


def show(value: float, unit: str, system: str = "metric") -> str:
    """Return a value with its unit, and for a reader in inches the inch value first, metric in brackets."""
    metric = f"{plain(value, _DECIMALS.get(unit, 3))}{'%' if unit == 'percent' else f' {unit}' if unit else ''}"
    if system != "inch" or unit not in INCH_SHOWN:
        return metric
    other, decimals = INCH_SHOWN[unit]
    converted = value / _CUBIC_INCH_IN_CM3 if unit == "cm3/min" else convert(value, unit, other)
    return f"{plain(converted, decimals)} {other} ({metric})"
