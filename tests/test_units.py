"""Quantities: every kind in inch and metric spelling, and errors that list what is allowed."""

from __future__ import annotations

import math

import pytest

from millreason.units import UNITS_ALLOWED, QuantityError, convert, parse_quantity, plain, show


def stored(text: str, unit: str) -> float:
    quantity = parse_quantity(text, unit)
    return convert(quantity.value, quantity.unit, unit)


# Exact definitions: international inch, pound, standard gravity, mechanical horsepower of 550 ft.lbf/s.
@pytest.mark.parametrize(
    ("text", "unit", "value"),
    [
        ("3 in", "mm", 76.2),
        ('3"', "mm", 76.2),
        ("3 inches", "mm", 76.2),
        ("5 thou", "mm", 0.127),
        ("2 ft", "mm", 609.6),
        ("2.5 cm", "mm", 25.0),
        ("0.4 m", "mm", 400.0),
        ("12 µm", "mm", 0.012),
        ("1-1/2 in", "mm", 38.1),
        ("1 1/2 in", "mm", 38.1),
        ("5/8 in", "mm", 15.875),
        ('3/16"', "mm", 4.7625),
        (".5 in", "mm", 12.7),
        ("63 uin", "um", 1.6002),
        ("63 µin", "um", 1.6002),
        ("3.2 um", "um", 3.2),
        ("3.2 microns", "um", 3.2),
        ("0.0032 mm", "um", 3.2),
        ("15 hp", "kW", 11.1854980737),
        ("15 PS", "kW", 11.03248125),
        ("1500 W", "kW", 1.5),
        ("70 lbf.ft", "N.m", 94.9072563820),
        ("70 ft-lb", "N.m", 94.9072563820),
        ("840 in-lb", "N.m", 94.9072563820),
        ("95 Nm", "N.m", 95.0),
        ("95 N·m", "N.m", 95.0),
        ("800 RPM", "rpm", 800.0),
        ("800 rev/min", "rpm", 800.0),
        ("600 sfm", "m/min", 182.88),
        ("600 ft/min", "m/min", 182.88),
        ("20 ipm", "mm/min", 508.0),
        ("20 in/min", "mm/min", 508.0),
        ("2 m/min", "mm/min", 2000.0),
        ("10 lb", "kg", 4.5359237),
        ("250 g", "kg", 0.25),
        ("1000 lbf", "N", 4448.2216152605),
        ("2 kN", "N", 2000.0),
        ("90 s", "min", 1.5),
        ("2 h", "min", 120.0),
        ("45 deg", "deg", 45.0),
        ("45°", "deg", 45.0),
        ("80 /h", "currency/h", 80.0),
        ("1e3 mm", "mm", 1000.0),
    ],
)
def test_a_quantity_is_read_in_every_spelling(text: str, unit: str, value: float) -> None:
    assert math.isclose(stored(text, unit), value, rel_tol=1e-9)


@pytest.mark.parametrize(("text", "scale"), [("160 HB", "HB"), ("160 HBW", "HB"), ("52 HRC", "HRC"), ("550 HV", "HV")])
def test_hardness_keeps_its_scale(text: str, scale: str) -> None:
    assert parse_quantity(text, "HB").unit == scale


@pytest.mark.parametrize("unit", sorted(set(UNITS_ALLOWED) - {"currency", "currency/h", "percent"}))
def test_a_bare_number_lists_the_units(unit: str) -> None:
    for bare in (3, 3.5, "3", "3.5 "):
        with pytest.raises(QuantityError) as caught:
            parse_quantity(bare, unit)
        assert "has no unit" in str(caught.value)
        assert ", ".join(UNITS_ALLOWED[unit]) in str(caught.value)


@pytest.mark.parametrize("unit", sorted(set(UNITS_ALLOWED) - {"currency", "currency/h", "percent", "HB"}))
def test_every_unit_that_is_allowed_converts_and_comes_back(unit: str) -> None:
    for other in UNITS_ALLOWED[unit]:
        there = stored(f"7 {other}", unit)
        assert there > 0
        assert math.isclose(convert(there, unit, parse_quantity(f"7 {other}", unit).unit), 7, rel_tol=1e-12)


@pytest.mark.parametrize(
    ("text", "unit", "words"),
    [
        ("3 kW", "mm", "'kW' is no unit for this. Allowed: mm, in"),
        ("3 inn", "mm", "Did you mean"),
        ("wide", "mm", "does not begin with a number"),
        ("3,5 mm", "mm", "decimal point"),
        ("1,000 mm", "mm", "decimal point"),
        ("1 000 mm", "mm", "decimal point"),
        ("1/0 in", "mm", "no unit for this"),
        ("1e999 mm", "mm", "too large"),
        (True, "mm", "is not a quantity"),
        ([3, "mm"], "mm", "is not a quantity"),
        ("3 mm mm", "mm", "no unit for this"),
        ("52 HRB", "HB", "Allowed: HB, HRC, HV"),
    ],
)
def test_what_is_no_quantity_says_what_is(text: object, unit: str, words: str) -> None:
    with pytest.raises(QuantityError) as caught:
        parse_quantity(text, unit)
    assert words in str(caught.value)


def test_numbers_are_printed_for_readers() -> None:
    assert show(76.2, "mm", "inch") == "3 in (76.2 mm)"
    assert show(76.2, "mm") == "76.2 mm"
    assert show(11.185, "kW", "inch") == "15 hp (11.19 kW)"
    assert show(3.2, "um", "inch") == "126 uin (3.2 um)"
    assert show(776.4, "rpm", "inch") == "776 rpm"
    assert plain(-0.0001) == "0"
    assert plain(1200.0, 0) == "1200"
