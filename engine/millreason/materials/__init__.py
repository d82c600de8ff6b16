"""The materials as the rest of the program sees them: look one up for a job, list, search and show."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field, fields
from pathlib import Path
from typing import Any, cast

from millreason.errors import OutOfRangeError
from millreason.materials.book import Material, MaterialBook, State, load_book
from millreason.materials.conflicts import Contradiction, find_contradictions
from millreason.materials.facts import MaterialFact, SpeedPick, facts_of_state, notes_of_state, speed_pick
from millreason.materials.hardness import Converted, Scale, basis_text, convert_hardness, hardness_as_hb
from millreason.materials.records import Group
from millreason.materials.search import Ambiguous, Found, Hint, Result, Unknown, find_material
from millreason.materials.text import key_of
from millreason.provenance import Basis, Source

__all__ = [
    "Ambiguous",
    "Contradiction",
    "Found",
    "LookUp",
    "LookUpFact",
    "Material",
    "MaterialBook",
    "MaterialFact",
    "Materials",
    "SpeedPick",
    "State",
    "Unknown",
    "find_contradictions",
    "find_material",
    "load_materials",
    "material_facts",
    "speed_pick",
]

# Said once for the entry, not for each of its states.
_OF_ENTRY = ("material.id", "material.name")
# The skin a word names, as the fact work.skin_words has it.
_SKIN_WORDS = {
    "mill_scale": "hot_rolled",
    "cast_skin": "casting",
    "forged_scale": "forging",
    "flame_cut_edge": "flame_cut",
    "weld": "weld",
}
_WORDS_BY = "words of the material"


@dataclass(frozen=True)
class LookUpFact:
    """A fact for the situation: looked up, or given in the words of the material."""

    name: str
    value: Any
    by: str
    text: str = ""
    basis: Basis | None = None
    given: bool = False
    from_shop: bool = False


@dataclass
class LookUp:
    """What the name, group, hardness and condition of a material lead to."""

    facts: list[LookUpFact] = field(default_factory=list)
    contradictions: list[str] = field(default_factory=list)
    question: str | None = None
    notes: list[str] = field(default_factory=list)
    near: tuple[str, ...] = ()


def material_facts(book: MaterialBook, found: Found, hardness_hb: float | None = None) -> list[MaterialFact]:
    """Return every fact of the material found as (attribute, value, basis).

    A hardness, given here or read in the text, moves force and speed; without one the middle of the
    range of the state holds. A basis of None means a shop's own record.
    """
    hb = hardness_hb if hardness_hb is not None else found.hardness_hb
    facts = facts_of_state(book, found.material, found.state, hb)
    if hb is None:
        typical = round(found.state.hb_typical)
        facts.append(MaterialFact("work.hardness_hb", typical, _typical_basis(found.state)))
    return facts


def _typical_basis(state: State) -> Basis:
    span = f"middle of {state.hb_min:g} to {state.hb_max:g} HB for the state {state.id.replace('_', ' ')}"
    return Basis(derived=f"{span}; {basis_text(state.hb_basis)}")


class Materials(MaterialBook):
    """All materials, with a shop's own laid over the shipped ones, and what one asks of them."""

    @property
    def book(self) -> MaterialBook:
        """The knowledge itself."""
        return self

    def look_up(
        self,
        written: str | None,
        iso_group: Group | None = None,
        hardness: tuple[float, str] | None = None,
        condition: str | None = None,
    ) -> LookUp:
        """Return facts, contradictions and, where the name does not settle it, the question to ask.

        The hardness is a figure and its scale, such as (52, "HRC").
        """
        result = LookUp()
        text = ", ".join(part for part in (written, condition) if part)
        found = find_material(self, text, iso_group)
        given = self._in_brinell(hardness, found, result)
        if given is not None:
            found = find_material(self, text, iso_group, given.value)
        result.facts += _blank_facts(found.said.hints) if text else []
        if isinstance(found, Found):
            self._add_found(found, given.value if given else None, result)
        elif isinstance(found, Unknown) and found.kind == "non_metal":
            basis = Basis(common_practice=found.why)
            result.facts.append(LookUpFact("material.kind", "non_metal", "words of the material", text, basis))
        elif written:
            self._add_question(found, result)
        hb = given.value if given else None
        result.contradictions += [str(one) for one in find_contradictions(self, found, iso_group, hb)]
        return result

    def _in_brinell(self, hardness: tuple[float, str] | None, found: Result, result: LookUp) -> Converted | None:
        """Add the given hardness in Brinell; what a table does not cover becomes a note."""
        if hardness is None:
            return None
        value, unit = hardness
        scale = cast(Scale, unit.casefold())
        kind = self.family(found.material).table if isinstance(found, Found) else "steel"
        said = f"{value:g} {unit}"
        if scale == "hrc":
            result.facts.append(LookUpFact("work.hardness_hrc", value, "job", said, given=True))
        try:
            converted = hardness_as_hb(self.hardness, value, scale, kind)
        except OutOfRangeError as problem:
            result.notes.append(f"The hardness {said} is left aside: {problem}")
            return None
        result.notes += converted.notes
        basis = None if scale == "hb" else converted.basis
        by = "job" if scale == "hb" else converted.table
        result.facts.append(LookUpFact("work.hardness_hb", converted.value, by, said, basis, given=True))
        return converted

    def _add_found(self, found: Found, given_hb: float | None, result: LookUp) -> None:
        material, state = found.material, found.state
        hb = given_hb if given_hb is not None else found.hardness_hb
        by = f"material {material.id}, {state.id.replace('_', ' ')}"
        if given_hb is None and found.hardness and found.said.reading:
            said, origin = found.said.reading.said, found.hardness
            fact = LookUpFact("work.hardness_hb", origin.value, _WORDS_BY, said, origin.basis, given=True)
            result.facts.append(fact)
            result.notes += origin.notes
        for name, value, basis in material_facts(self, found, given_hb):
            said = ", ".join(found.said.matched) if name == "material.id" else ""
            result.facts.append(LookUpFact(name, value, by, said, basis, from_shop=material.from_shop))
        if hb is None:
            result.facts += self._open_facts(found, by)
        if not any(fact.name == "work.hardness_hrc" for fact in result.facts):
            result.facts += self._rockwell(material, state.hb_typical if hb is None else hb)
        result.notes += [*found.doubts, *notes_of_state(self, material, state, hb)]

    def _open_facts(self, found: Found, by: str) -> Iterator[LookUpFact]:
        """Yield what stays open while no hardness is known: its range, and how far start speeds differ."""
        state, shop = found.state, found.material.from_shop
        states = [state] if found.state_said else list(found.material.states)
        for name, value in (("low", state.hb_min), ("high", state.hb_max)):
            yield LookUpFact(f"material.hardness_{name}_hb", value, by, "", state.hb_basis, from_shop=shop)
        yield self._spread(states, by)

    def _add_question(self, found: Ambiguous | Unknown, result: LookUp) -> None:
        if isinstance(found, Ambiguous):
            result.near = tuple(material.name for material in found.candidates)
            result.question = f"{found.why} {found.question}"
            states = [state for material in found.candidates for state in material.states]
            result.facts.append(self._spread(states, "candidates"))
        else:
            result.near = found.near
            near = f" Near: {', '.join(found.near)}." if found.near else ""
            result.question = f"{found.why}{near} Which material is it?"

    def _spread(self, states: Sequence[State], by: str) -> LookUpFact:
        speeds = [speed_pick(self, state).speed[1] for state in states]
        basis = Basis(derived="fastest over slowest start speed of what the name leaves open")
        return LookUpFact("material.speed_spread", round(max(speeds) / min(speeds), 3), by, "", basis)

    def _rockwell(self, material: Material, hb: float) -> Iterator[LookUpFact]:
        kind = self.family(material).table
        try:
            converted = convert_hardness(self.hardness, hb, "hb", "hrc", kind)
        except OutOfRangeError:
            return
        yield LookUpFact("work.hardness_hrc", converted.value, converted.table, basis=converted.basis)

    def entries(self, group: Group | None = None, family: str | None = None) -> list[Material]:
        """Return the entries, all or of one group or family, in the order of the files."""
        return [
            material
            for material in self.materials.values()
            if (group is None or group in self.groups(material)) and (family is None or material.family == family)
        ]

    def search(self, text: str) -> list[Material]:
        """Return the entries with a name, family or id that holds the text."""
        wanted = key_of(text)
        return [entry for entry in self.entries() if wanted and any(wanted in key for key in self._keys(entry))]

    def _keys(self, material: Material) -> Iterator[str]:
        names = [name for part in material.names.values() for name in part]
        return (key_of(text) for text in (material.id, self.family(material).name, *names))

    def show(self, material: Material) -> list[MaterialFact]:
        """Return everything held on one entry, state by state, each value with its basis."""
        facts: list[MaterialFact] = [
            MaterialFact(f"names.{system}", names, material.names_basis) for system, names in material.names.items()
        ]
        for state in (*material.states, *material.shared_states):
            span = (state.hb_min, state.hb_max)
            facts.append(MaterialFact(f"{state.id}.hardness_hb", span, state.hb_basis))
            facts += [
                MaterialFact(f"{state.id}.{name.removeprefix('material.')}", value, basis)
                for name, value, basis in facts_of_state(self, material, state, None)
                if name not in _OF_ENTRY
            ]
        return facts


def load_materials(
    root: Path, shop: Path | Sequence[Path] | None = None, sources: Mapping[str, Source] | None = None
) -> Materials:
    """Load the material knowledge below a data root, with a shop's own materials laid over it.

    Raises
    ------
    DataError
        with everything that is wrong in the files.
    """
    if sources is None:
        from millreason.knowledge import load_sources

        sources = load_sources(root)
    shops = () if shop is None else (shop,) if isinstance(shop, Path) else tuple(shop)
    book = load_book(root, shops, sources)
    return Materials(*(getattr(book, part.name) for part in fields(book)))


def _blank_facts(hints: tuple[Hint, ...]) -> list[LookUpFact]:
    """Return what the words say of the form, the raw surface and the skin of the blank."""
    said = ", ".join(hint.said for hint in hints)
    forms = tuple(dict.fromkeys(hint.form for hint in hints if hint.form))
    raw = [_SKIN_WORDS[hint.skin] for hint in hints if hint.skin in _SKIN_WORDS]
    raw += [hint.form for hint in hints if hint.form == "die_casting"]
    # Skins for which there is no word of their own are stated outright.
    skins = tuple(hint.skin for hint in hints if hint.skin and hint.skin != "none" and hint.skin not in _SKIN_WORDS)
    values = {
        "work.form_words": forms,
        "work.skin_words": tuple(dict.fromkeys(raw)) or ("none",),
        "work.skin": tuple(dict.fromkeys(skins)),
    }
    return [LookUpFact(name, value, _WORDS_BY, said) for name, value in values.items() if value]
