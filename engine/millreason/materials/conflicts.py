"""Statements about a material that cannot all be true, each shown with both sides."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from millreason.materials.book import MaterialBook, State
from millreason.materials.records import Group
from millreason.materials.search import Ambiguous, Found, Result


@dataclass(frozen=True)
class Contradiction:
    """Two statements that cannot both hold."""

    what: str
    side_a: str
    side_b: str

    def __str__(self) -> str:
        return f"{self.what}: {self.side_a}; but {self.side_b}"


def find_contradictions(
    book: MaterialBook, result: Result, iso_group: Group | None = None, hardness_hb: float | None = None
) -> list[Contradiction]:
    """Report what was said of the material that cannot all be true, with both sides."""
    found = [*_word_contradictions(book, result), *_group_contradictions(book, result, iso_group)]
    if isinstance(result, Found):
        found += _hardness_contradictions(book, result, hardness_hb)
    return found


def _word_contradictions(book: MaterialBook, result: Result) -> Iterator[Contradiction]:
    if not isinstance(result, Found):
        return
    groups = book.groups(result.material)
    for words, allowed in result.said.general:
        # Nearly every iron and steel can be hard: the group H alone makes no two names agree.
        meant = set(allowed) - {"H"} or set(allowed)
        if not meant & set(groups):
            name = f"{result.material.name} is {book.family(result.material).name} (group {groups[0]})"
            yield Contradiction("the name of the material", name, f"{words!r} means group {' or '.join(allowed)}")


def _group_contradictions(book: MaterialBook, result: Result, iso_group: Group | None) -> Iterator[Contradiction]:
    if iso_group is None:
        return
    if isinstance(result, Found):
        groups: tuple[Group, ...] = book.groups(result.material)
        name = f"{result.material.name} is {book.family(result.material).name}, group {' or '.join(groups)}"
    elif isinstance(result, Ambiguous) and result.said.general:
        words, groups = max(result.said.general, key=lambda word: len(word[0]))
        name = f"{words!r} means group {' or '.join(groups)}"
    else:
        return
    if iso_group not in groups:
        yield Contradiction("the ISO 513 group", name, f"the group given is {iso_group}")


def _hardness_contradictions(book: MaterialBook, found: Found, given: float | None) -> Iterator[Contradiction]:
    said = found.hardness_hb
    margin = book.family_file.figures_margin
    if said is not None and given is not None and abs(said - given) > margin * max(said, given):
        reading = found.said.reading.said if found.said.reading else ""
        words = f"the material text says {reading} (about {said:.0f} HB)"
        yield Contradiction("the hardness", words, f"the hardness given is {given:.0f} HB")
    hb = given if given is not None else said
    if hb is None:
        return
    family = book.family(found.material)
    if hb > family.most_hb:
        limit = f"{family.name} does not go above about {family.most_hb:g} HB"
        yield Contradiction("the hardness", f"{found.material.name}: {limit}", f"the hardness is {hb:.0f} HB")
        return
    yield from _range_contradiction(book, found, hb)


def _range_contradiction(book: MaterialBook, found: Found, hb: float) -> Iterator[Contradiction]:
    """Compare a hardness with the state that was named, or with all states if none was."""
    named = {name for _, names in found.said.state_words for name in names}
    states = [*found.material.states, *found.material.shared_states]
    pool = [state for state in states if state.id in named]
    if not pool and "hardened" in named:
        pool = [state for state in states if state.group == "H"]
    pool = pool or _reachable(found, states)
    if pool and all(state.distance(hb) > book.family_file.range_margin * _near_end(state, hb) for state in pool):
        nearest = min(pool, key=lambda state: state.distance(hb))
        span = f"{nearest.hb_min:g} to {nearest.hb_max:g} HB"
        place = f"{found.material.name}, {nearest.id.replace('_', ' ')}: {span}"
        yield Contradiction("the hardness", place, f"the hardness is {hb:.0f} HB")


def _reachable(found: Found, states: Sequence[State]) -> list[State]:
    # A material that hardens can be tempered to anything between its soft and its hard states.
    return list(states) if not found.material.shared_states else []


def _near_end(state: State, hb: float) -> float:
    return state.hb_max if hb > state.hb_max else state.hb_min
