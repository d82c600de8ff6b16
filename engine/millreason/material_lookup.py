"""The material of a job: from what the person wrote to facts, a hardness in Brinell, contradictions and a question."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from typing import Any

from millreason.errors import OutOfRangeError
from millreason.facts import basis_record
from millreason.hardness import hardness_as_hb, unit_power
from millreason.job import Given
from millreason.materials import Found, MaterialBook, find_contradictions, find_material, material_facts, speed_pick
from millreason.provenance import Basis
from millreason.trace import BasisRecord

# Words of the material text as the facts work.skin_words and work.form_words name them.
_SKIN_WORDS = {"mill_scale": "hot_rolled", "cast_skin": "casting", "forged_scale": "forging", "flame_cut_edge": "flame_cut", "weld": "weld", "none": "none"}
_FORM_WORDS = {"sand_casting": "casting"}


@dataclass(frozen=True)
class LookedUp:
    """One fact about the material and where it comes from."""

    name: str
    value: Any
    given: bool
    by: str
    text: str
    basis: BasisRecord | None


@dataclass
class MaterialLookup:
    """What could be found out about a job's material."""

    facts: list[LookedUp] = field(default_factory=list)
    contradictions: list[str] = field(default_factory=list)
    question: str | None = None
    notes: list[str] = field(default_factory=list)


def look_up_material(book: MaterialBook, written: str | None, condition: str | None, iso_group: Any, hardness: Given | None, options: Mapping[str, Any]) -> MaterialLookup:
    """Find the material; `options` holds the allowed words of work.skin_words and work.form_words."""
    result = MaterialLookup()
    if written is None:
        _give_hardness(result, hardness)
        return result
    text = f"{written}, {condition}" if condition else written
    hb = float(hardness.value) if hardness is not None and hardness.unit == "HB" and isinstance(hardness.value, int | float) else None
    found = find_material(book, text, iso_group, hb)
    if isinstance(found, Found) and hardness is not None and hardness.unit != "HB":
        hb = _in_brinell(book, found, hardness, result)
        found = find_material(book, text, iso_group, hb)
    result.contradictions = [f"{one.what}: {one.side_a}, but {one.side_b}" for one in find_contradictions(book, found, iso_group, hb)]
    _hint_facts(result, found, options)
    if not isinstance(found, Found):
        near = getattr(found, "near", ())
        result.question = getattr(found, "question", "") or f"No material is known by {written!r}. Near names: {', '.join(near) or 'none'}. Which grade is it?"
        _give_hardness(result, hardness)
        return result
    if hb is not None and hardness is not None:
        result.facts.append(LookedUp("work.hardness_hb", hb, True, "job", hardness.text, None))
    for name, value, basis in material_facts(book, found, hb):
        settled = tuple(value) if isinstance(value, list) else float(value) if isinstance(value, int) and not isinstance(value, bool) else value
        result.facts.append(LookedUp(name, settled, False, f"material {found.material.id}", "", _record(basis)))
    _extra_facts(result, book, found, hb)
    result.notes.extend(found.doubts)
    return result


def _in_brinell(book: MaterialBook, found: Found, hardness: Given, result: MaterialLookup) -> float | None:
    scale: Any = hardness.unit.lower()
    try:
        converted = hardness_as_hb(book.hardness, float(hardness.value), scale, book.family(found.material).table)  # type: ignore[arg-type]
    except OutOfRangeError as problem:
        result.contradictions.append(f"the hardness: {hardness.text} cannot be converted to Brinell: {problem}")
        return None
    result.notes.extend(converted.notes)
    if scale == "hrc":
        result.facts.append(LookedUp("work.hardness_hrc", float(hardness.value), True, "job", hardness.text, None))  # type: ignore[arg-type]
    return converted.value


def _give_hardness(result: MaterialLookup, hardness: Given | None) -> None:
    if hardness is not None and hardness.unit == "HB":
        result.facts.append(LookedUp("work.hardness_hb", hardness.value, True, "job", hardness.text, None))


def _hint_facts(result: MaterialLookup, found: Any, options: Mapping[str, Any]) -> None:
    hints = found.said.hints
    skins = [_SKIN_WORDS.get(hint.skin or "", hint.form) for hint in hints]
    skins += [hint.form for hint in hints if hint.form == "die_casting"]
    forms = [_FORM_WORDS.get(hint.form or "", hint.form) for hint in hints]
    for name, words in (("work.skin_words", skins), ("work.form_words", forms)):
        kept = tuple(dict.fromkeys(word for word in words if word in options[name]))
        if name == "work.skin_words" and not kept:
            kept = ("none",)
        if kept:
            said = ", ".join(hint.said for hint in hints)
            result.facts.append(LookedUp(name, kept, False, "words of the material text", said, None))


def _extra_facts(result: MaterialLookup, book: MaterialBook, found: Found, hb: float | None) -> None:
    hardness = hb if hb is not None else found.hardness_hb
    row, _ = book.forces[found.state.force]
    if row.follows in book.hardness.unit_power:
        power, basis = unit_power(book.hardness, row.follows, hardness if hardness is not None else found.state.hb_typical)
        result.facts.append(LookedUp("material.unit_power_j_mm3", power, False, f"unit power {row.follows}", "", _record(basis)))
    low, high = found.state.hb_min, found.state.hb_max
    if hardness is None:
        result.facts.append(LookedUp("material.hardness_low_hb", low, False, f"material {found.material.id}", "", _record(found.state.hb_basis)))
        result.facts.append(LookedUp("material.hardness_high_hb", high, False, f"material {found.material.id}", "", _record(found.state.hb_basis)))
        speeds = list(_open_speeds(book, found))
        if speeds and min(speeds) > 0:
            result.facts.append(LookedUp("material.speed_spread", max(speeds) / min(speeds), False, f"material {found.material.id}", "", None))


def _open_speeds(book: MaterialBook, found: Found) -> Iterator[float]:
    """Yield the start speed of every state that the text leaves open."""
    named = {name for _, names in found.said.state_words for name in names}
    states = [found.state] if named else list(found.material.states)
    yield from (speed_pick(book, state).speed[1] for state in states)


def _record(basis: Mapping[str, Any] | None) -> BasisRecord | None:
    return basis_record(Basis.model_validate(dict(basis))) if basis else None
