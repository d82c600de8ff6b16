"""Words and numbers as a reader sees them: clean text, spelled-out options, values in the reader's units."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterable

from millreason.trace import Answer, BasisRecord, ConditionRecord, FactRecord, Origin, Picks, Plain
from millreason.units import plain, show

_OPTIONS = {
    "positive_negative": "positive axial with negative radial",
    "double_positive": "double positive",
    "double_negative": "double negative",
    "mixed_centred": "mixed (centred)",
    "shell_arbor": "shell-mill arbor",
    "integral_taper_shank": "integral taper shank",
    "screw_in_modular": "screw-in, modular",
    "straight_shank_collet": "straight shank in a collet",
    "mql": "minimum-quantity lubrication",
    "atc_diameter_neighbours": "tool diameter in the changer",
    "atc_mass": "tool mass in the changer",
    "atc_moment": "tipping moment in the changer",
    "bue": "built-up edge",
    "runout_axial": "axial run-out",
    "torque_low_rpm": "torque at low speed",
    "min_chip_thickness": "least chip thickness",
    "true_90_check": "check of the square angle",
    "dust_cast_iron": "dust of cast iron",
    "hydrogen_wet_mg": "hydrogen from wet magnesium",
}
_PICKS = {
    "cutter_class": "cutter class",
    "diameter_mm": "diameter",
    "kappa_deg": "lead angle",
    "rake": "rake combination",
    "corner": "insert corner",
    "edge": "cutting edge",
    "pockets": "insert pockets",
    "spacing": "tooth spacing",
    "direction": "direction of cut",
    "fluid": "cutting fluid",
    "application": "ISO 513 band",
}
# Fields of a job file that are not simply the fact's name without its unit.
_JOB_KEYS = {
    "require.finish_ra_um": "require.finish",
    "machine.spindle_tilt_mm_m": "machine.spindle_tilt_mm_m",
}
# The corners of the area on the insert that meets the work, as `formulas.first_contact` names them.
_CONTACT = {
    "S": "the nose",
    "T": "the main edge at full depth",
    "U": "the corner away from both edges",
    "V": "the minor edge",
}
ORIGINS: dict[str, str] = {
    "given": "given",
    "looked_up": "looked up",
    "computed": "computed",
    "assumed": "assumed",
    "concluded": "concluded",
    "absent": "not known",
}
VERDICTS = {
    "recommend": "Recommended",
    "recommend_with_warnings": "Recommended, with warnings",
    "conditional": "Held back until a person confirms",
    "ask": "Questions first",
    "refuse": "Not possible as described",
}
# The unit that the end of a fact's name states, and how it is stored; longer ends come first.
_ENDINGS = {
    "_cm3_min": "cm3/min",
    "_mm_min": "mm/min",
    "_m_min": "m/min",
    "_n_mm2": "N/mm2",
    "_n_um": "N/um",
    "_j_mm3": "J/mm3",
    "_mm_m": "mm/m",
    "_mm2": "mm2",
    "_per_h": "/h",
    "_hrc": "HRC",
    "_rpm": "rpm",
    "_deg": "deg",
    "_min": "min",
    "_mm": "mm",
    "_um": "um",
    "_kg": "kg",
    "_kw": "kW",
    "_nm": "N.m",
    "_hb": "HB",
    "_n": "N",
}


def clean(text: object) -> str:
    """Return a text on one line, without control or direction characters that could disturb a page."""
    kept = (" " if unicodedata.category(letter) in ("Cc", "Zl", "Zp") else letter for letter in str(text))
    return " ".join("".join(letter for letter in kept if unicodedata.category(letter) not in ("Cf", "Cs")).split())


def option(name: str) -> str:
    """Return an option of a pick in words."""
    if re.fullmatch(r"[a-z0-9_.]+", name):
        return _OPTIONS.get(name, name.replace("_", " "))
    return clean(name)


def pick_name(pick: str) -> str:
    """Return the name of a pick in words."""
    return _PICKS.get(pick, clean(pick).replace("_", " "))


def _split_unit(name: str) -> tuple[str, str]:
    """Return a fact's name without the unit at its end, and the unit."""
    for ending, unit in _ENDINGS.items():
        if name.endswith(ending) and name != ending:
            return name.removesuffix(ending), unit
    return name, ""


def fact_words(name: str) -> str:
    """Return a fact's name as a label: 'machine.power_kw' is 'machine: power'."""
    group, _, rest = clean(name).partition(".")
    if not rest:
        return _split_unit(group)[0].replace("_", " ")
    return f"{group}: {_split_unit(rest)[0].replace('_', ' ')}"


def job_key(fact_name: str) -> str:
    """Return the field of a job file that sets a fact: 'machine.power' for 'machine.power_kw'."""
    name = clean(fact_name)
    return _JOB_KEYS.get(name) or _split_unit(name)[0]


def number_words(name: str, value: float, system: str) -> str:
    """Return a number with the name and unit that its fact name states: 'time 5.4 min'."""
    words, unit = _split_unit(clean(name).removeprefix("plan."))
    return f"{words.replace('_', ' ')} {show(value, unit, system)}"


def pick_option(pick: str, name: str, system: str) -> str:
    """Return one option of a pick in words, with its unit where it is a number."""
    if pick == "corner":
        return corner_text(name, system)
    try:
        number = float(name)
    except ValueError:
        return option(name)
    if pick == "kappa_deg":
        return "round insert" if number == 0 else lead_text(90 - number, number)
    return show(number, "mm", system) if pick == "diameter_mm" else plain(number)


def pick_words(pick: str, name: str, system: str) -> str:
    """Return a pick and its option as one phrase, without saying a word twice: 'pitch fine', 'face mill'."""
    told = pick_option(pick, name, system)
    return told if pick in ("kappa_deg", "corner", "cutter_class") else f"{pick_name(pick)} {told}"


def value_text(value: Plain, unit: str = "", system: str = "metric") -> str:
    """Return any recorded value for a reader."""
    if value is None:
        return "not known"
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, int | float):
        return show(float(value), unit, system)
    if isinstance(value, str):
        return option(value)
    return ", ".join(_item(item, unit, system) for item in value) or "none"


def _item(item: str | float | list[float], unit: str, system: str) -> str:
    if isinstance(item, list):
        return "(" + ", ".join(plain(float(number)) for number in item) + ")"
    return value_text(item, unit, system)


def fact_value(record: FactRecord, system: str) -> str:
    """Return the value of a fact, and in brackets how it was written where that says more."""
    shown = value_text(record.value, record.unit, system)
    written = clean(record.text)
    if record.origin == "given" and written and written.replace("_", " ") not in shown and shown not in written:
        return f"{shown} (written: {written})"
    return shown


def lead_text(lead_deg: float | None, kappa_deg: float, note: str = "") -> str:
    """Return lead angle and cutting-edge angle, always both, so that neither is taken for the other."""
    if lead_deg is None:
        return clean(note) or "follows the depth (round insert)"
    both = f"lead {plain(lead_deg, 1)} deg (kappa {plain(kappa_deg, 1)} deg)"
    return f"{both}, {clean(note)}" if note else both


def corner_size(corner: str) -> float | None:
    """Return the radius in an insert corner such as 'radius_0.8', or None for another corner."""
    match = re.fullmatch(r"radius_(\d+(?:\.\d+)?)", corner)
    return float(match.group(1)) if match else None


def corner_text(corner: str, units: str) -> str:
    """Return an insert corner in words: 'corner radius 0.8 mm', 'corner facet with parallel land'."""
    size = corner_size(corner)
    if size is not None:
        return f"corner radius {show(size, 'mm', units)}"
    return {"facet": "corner facet with parallel land", "round": "round insert", "sharp": "sharp corner"}.get(
        corner, option(corner)
    )


def origin_text(origin: Origin | str) -> str:
    """Return where a fact came from, in words."""
    return ORIGINS.get(origin, origin)


def basis_text(basis: BasisRecord | None) -> str:
    """Return what a statement rests on: source and place, or 'common practice'; 'recalled' if not seen."""
    if basis is None:
        return ""
    place = ", ".join(clean(part) for part in (basis.source, basis.where) if part)
    lead = {
        "checked": "",
        "recalled": "recalled: ",
        "common_practice": "common practice: ",
        "derived": "derived: ",
        "invented": "invented: ",
        "shop": "the shop's own: ",
    }.get(basis.kind, f"{clean(basis.kind)}: ")
    text = f"{lead}{place}" if place else lead.rstrip(": ")
    return f"{text} ({clean(basis.note)})" if basis.note else text


def condition_text(condition: ConditionRecord, system: str) -> str:
    """Return a condition of a rule with the value that met it and where that came from."""
    test, origin = clean(condition.test), origin_text(condition.origin)
    if condition.value is None:
        return f"{test} [{origin}]" if origin not in test else test
    unit = _split_unit(condition.fact)[1]
    shown = value_text(condition.value, unit, system)
    return f"{test} [{origin}]" if test.endswith(f" {shown}") else f"{test} [{origin}: {shown}]"


def listing(items: Iterable[str], last: str = "and") -> str:
    """Join words as in a sentence."""
    words = list(items)
    return words[0] if len(words) == 1 else f"{', '.join(words[:-1])} {last} {words[-1]}" if words else ""


def joined(*parts: str) -> str:
    """Join the parts that are not empty with commas."""
    return ", ".join(part for part in parts if part)


def rake_text(picks: Picks) -> str:
    """Return the rake combination with both angles: 'double negative: axial -5 deg, radial -7 deg'."""
    angles = f"axial {picks.axial_rake_deg:+g} deg, radial {picks.radial_rake_deg:+g} deg"
    return f"{option(picks.rake)}: {angles}"


def limit_number(value: Plain, system: str, unit: str = "") -> str:
    """Return a value or a limit; what is not known leaves its cell empty."""
    return "" if value is None else value_text(value, unit, system)


def recommends(answer: Answer) -> bool:
    """Whether the answer gives a cutter with its data, so that there is a setup sheet."""
    return answer.plan is not None and answer.verdict in ("recommend", "recommend_with_warnings")


def fact(answer: Answer, name: str) -> FactRecord | None:
    """Return one fact of the trace, or None."""
    return next((record for record in answer.trace.facts if record.name == name), None)


def fact_number(answer: Answer, name: str) -> float | None:
    """Return a numeric fact of the trace, or None."""
    record = fact(answer, name)
    if record is None or isinstance(record.value, bool) or not isinstance(record.value, int | float):
        return None
    return float(record.value)


def fact_shown(answer: Answer, name: str) -> str:
    """Return a fact's value for a reader, or the empty string where it is not known."""
    record = fact(answer, name)
    return "" if record is None else value_text(record.value, record.unit, answer.units)


def contact_text(points: str) -> str:
    """Return where the insert meets the work first, in words."""
    if not points or any(point not in _CONTACT for point in points):
        return option(points)
    return f"{listing(_CONTACT[point] for point in points)} ({points})"


def count(number: float) -> str:
    """Return a time or a count as finely as it is known: two or three digits."""
    size = abs(number)
    return plain(number, 0 if size >= 100 else 1 if size >= 10 else 2)
