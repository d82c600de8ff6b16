"""Words and numbers as a reader sees them: clean text, spelled-out options, values in the reader's units."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterable

from millreason.trace import Answer, BasisRecord, FactRecord, Origin, Plain
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
}
_PICKS = {
    "cutter_class": "cutter class", "diameter_mm": "diameter", "kappa_deg": "lead angle", "rake": "rake combination",
    "corner": "insert corner", "edge": "cutting edge", "pockets": "insert pockets", "spacing": "tooth spacing",
    "direction": "direction of cut", "fluid": "cutting fluid", "application": "ISO 513 band",
}  # fmt: skip
ORIGINS: dict[str, str] = {
    "given": "given", "looked_up": "looked up", "computed": "computed", "assumed": "assumed", "concluded": "concluded",
    "absent": "not known",
}  # fmt: skip
VERDICTS = {
    "recommend": "Recommended",
    "recommend_with_warnings": "Recommended, with warnings",
    "conditional": "Held back until a person confirms",
    "ask": "Questions first",
    "refuse": "Not possible as described",
}
_SUFFIXES = ("_mm_min", "_m_min", "_n_mm2", "_n_um", "_mm2", "_cm3_min", "_mm_m", "_mm", "_um", "_kg", "_kw", "_nm", "_rpm", "_hb", "_hrc",
             "_deg", "_min", "_n", "_per_h")  # fmt: skip


def clean(text: object) -> str:
    """Return a text on one line, without control or direction characters that could disturb a page or a terminal."""
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


def fact_words(name: str) -> str:
    """Return a fact's name as a label: 'machine.power_kw' is 'machine: power'."""
    group, _, rest = clean(name).partition(".")
    for suffix in _SUFFIXES:
        if rest.endswith(suffix) and rest != suffix:
            rest = rest.removesuffix(suffix)
            break
    return f"{group}: {rest.replace('_', ' ')}" if rest else group


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
    """Return the lead angle and the cutting-edge angle, always both, so that neither is taken for the other."""
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
    return {"facet": "corner facet with parallel land", "round": "round insert", "sharp": "sharp corner"}.get(corner, option(corner))


def origin_text(origin: Origin | str) -> str:
    """Return where a fact came from, in words."""
    return ORIGINS.get(origin, origin)


def basis_text(basis: BasisRecord | None) -> str:
    """Return what a statement rests on: the source and place, or 'common practice'; 'recalled' where it was not seen."""
    if basis is None:
        return ""
    place = ", ".join(clean(part) for part in (basis.source, basis.where) if part)
    lead = {"checked": "", "recalled": "recalled: ", "common_practice": "common practice: ", "derived": "derived: ",
            "invented": "invented: ", "shop": "the shop's own: "}.get(basis.kind, f"{clean(basis.kind)}: ")  # fmt: skip
    text = f"{lead}{place}" if place else lead.rstrip(": ")
    return f"{text} ({clean(basis.note)})" if basis.note else text


def listing(items: Iterable[str], last: str = "and") -> str:
    """Join words as in a sentence."""
    words = list(items)
    return words[0] if len(words) == 1 else f"{', '.join(words[:-1])} {last} {words[-1]}" if words else ""


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


def count(number: float) -> str:
    """Return a count or a small number without needless digits."""
    return plain(number, 2)
