"""The index of all names and words, and what a word that is not in it may stand for."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Literal

from rapidfuzz import fuzz, process
from rapidfuzz.distance import Levenshtein

from millreason.materials.book import Material, MaterialBook
from millreason.materials.records import FormWords, GeneralWords, OutsideWords
from millreason.materials.text import digits_of, key_of, skeleton

SHORT_KEY = 2  # keys this short are words of the shop as often as grades
NEAR_SHOWN = 5

# How surely a name means its entry: a designation, a short one, a trade word, a near equivalent, a group of materials.
Rank = Literal[0, 1, 2, 3, 4]
NEAR_RANK: Rank = 3
GROUP_RANK: Rank = 4


@dataclass
class Index:
    """All phrases by key."""

    names: dict[str, list[tuple[Material, Rank, str]]] = field(default_factory=dict)
    states: dict[str, list[str]] = field(default_factory=dict)
    forms: dict[str, FormWords] = field(default_factory=dict)
    general: dict[str, GeneralWords] = field(default_factory=dict)
    outside: dict[str, OutsideWords] = field(default_factory=dict)
    fillers: frozenset[str] = frozenset()
    by_digits: dict[str, list[str]] = field(default_factory=dict)
    by_skeleton: dict[str, str] = field(default_factory=dict)


def build_index(book: MaterialBook) -> Index:
    """Build the index of all names and words of the book."""
    index = Index(fillers=frozenset(key_of(word) for word in book.words.fillers))
    for material in book.materials.values():
        for system, names in material.names.items():
            for name in names:
                _add_name(index, material, system, name)
    for state, words in book.words.states.items():
        for word in words:
            index.states.setdefault(key_of(word), []).append(state)
    index.forms = {key_of(word): entry for entry in book.words.forms for word in entry.words}
    index.general = {key_of(word): entry for entry in book.words.general for word in entry.words}
    index.outside = {key_of(word): entry for entry in book.words.outside for word in entry.words}
    for key in (*index.names, *index.general):
        index.by_digits.setdefault(digits_of(key), []).append(key)
        index.by_skeleton.setdefault(skeleton(key), key)
    return index


def _add_name(index: Index, material: Material, system: str, name: str) -> None:
    key = key_of(name)
    entries = index.names.setdefault(key, [])
    if all(known is not material for known, _, _ in entries):
        entries.append((material, _rank(material, system, key), name))


def _rank(material: Material, system: str, key: str) -> Rank:
    if material.is_group and not digits_of(key):
        return GROUP_RANK
    if system == "near":
        return NEAR_RANK
    if not digits_of(key):
        return 2
    return 1 if len(key) <= SHORT_KEY else 0


def slip_of(index: Index, key: str) -> str | None:
    """Return the known key that a key is a slip of, if there is just one."""
    alike = index.by_skeleton.get(skeleton(key))
    if alike is not None and len(key) >= 4 and any(mark.isalpha() for mark in key):
        return alike
    letters = len(key) - len(digits_of(key))
    if letters < 3 or len(key) < 5:
        return None
    allowed = 1 if len(key) < 8 else 2
    known = index.by_digits.get(digits_of(key), ())
    best = process.extract(key, known, scorer=Levenshtein.distance, score_cutoff=allowed, limit=2)
    if not best or (len(best) > 1 and best[0][1] == best[1][1] and not _same(index, best[0][0], best[1][0])):
        return None
    return str(best[0][0])


def _same(index: Index, first: str, second: str) -> bool:
    both = [{entry[0].id for entry in index.names.get(key, ())} for key in (first, second)]
    return bool(both[0]) and both[0] == both[1]


def near_names(index: Index, wanted: str) -> tuple[str, ...]:
    """Return the names most like a key, nearest first."""
    if not wanted:
        return ()
    ranked = process.extract(wanted, list(index.names), scorer=fuzz.ratio, limit=4 * NEAR_SHOWN, score_cutoff=60)
    shown = dict.fromkeys(_shown(index, key) for key, _, _ in ranked)
    return tuple(list(shown)[:NEAR_SHOWN])


def _shown(index: Index, key: str) -> str:
    material, _, name = index.names[key][0]
    return name if name == material.name else f"{name} ({material.name})"
