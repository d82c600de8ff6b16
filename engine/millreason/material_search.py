"""Finding the material that a person names: exact names, slips, words of a whole group, and what is near."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass, field, replace
from typing import Literal

from rapidfuzz import fuzz, process
from rapidfuzz.distance import Levenshtein

from millreason.errors import OutOfRangeError
from millreason.hardness import Converted, hardness_as_hb
from millreason.material_book import Material, MaterialBook, State
from millreason.material_records import FormWords, GeneralWords, Group, OutsideWords
from millreason.material_text import (
    Reading,
    Token,
    digits_of,
    join,
    key_of,
    leave_sizes_out,
    skeleton,
    take_hardness,
    tokens_of,
)

LONGEST_PHRASE = 9
SHORT_KEY = 2  # keys this short are words of the shop as often as grades
NEAR_SHOWN = 5

# How surely a name means its entry: a designation, a trade word, a near equivalent, a word for a group.
Rank = Literal[0, 1, 2, 3]


@dataclass(frozen=True)
class NameHit:
    """A name of a material in the text."""

    material: Material
    rank: Rank
    said: str
    slip_of: str = ""


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


@dataclass(frozen=True)
class Hint:
    """A word that says something of the skin or the form of the blank."""

    said: str
    form: str | None
    skin: str | None


@dataclass(frozen=True)
class Said:
    """What else stood in the text besides a name."""

    text: str
    matched: tuple[str, ...] = ()
    ignored: tuple[str, ...] = ()
    hints: tuple[Hint, ...] = ()
    state_words: tuple[tuple[str, tuple[str, ...]], ...] = ()
    general: tuple[tuple[str, tuple[Group, ...]], ...] = ()
    reading: Reading | None = None


@dataclass(frozen=True)
class Found:
    """The entry and state a text means."""

    material: Material
    state: State
    said: Said
    hardness: Converted | None = None
    doubts: tuple[str, ...] = ()

    @property
    def hardness_hb(self) -> float | None:
        """Hardness that stood in the text, in Brinell."""
        return self.hardness.value if self.hardness else None


@dataclass(frozen=True)
class Ambiguous:
    """The text fits several entries; the question says what would settle it."""

    candidates: tuple[Material, ...]
    why: str
    question: str
    said: Said


@dataclass(frozen=True)
class Unknown:
    """No entry has such a name; near are names that look alike."""

    near: tuple[str, ...]
    why: str
    said: Said


Result = Found | Ambiguous | Unknown


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
    rank: Rank = 0
    if material.is_group:
        rank = 3
    elif system == "near":
        rank = 2
    elif len(key) <= SHORT_KEY or not digits_of(key):
        rank = 1
    entries = index.names.setdefault(key, [])
    if all(known is not material for known, _, _ in entries):
        entries.append((material, rank, name))


def find_material(
    book: MaterialBook, text: str, iso_group: Group | None = None, hardness_hb: float | None = None
) -> Result:
    """Find the entry and state that a text names.

    A group or hardness that is known from elsewhere settles a choice between candidates and picks the state.
    """
    index: Index = book.index
    reading, rest = take_hardness(text)
    rest = leave_sizes_out(rest)
    hits, left = _name_hits(index, rest)
    said = replace(_words_said(index, rest, left, hits), text=text, reading=reading)
    if not hits:
        hits, said = _slips(index, said)
    best, said = _best(book, hits, said)
    entries = tuple({hit.material.id: hit.material for hit in best}.values())
    outside = [index.outside[key_of(word)] for word in said.ignored if key_of(word) in index.outside]
    if len(entries) > 1:
        entries = _narrowed(book, entries, iso_group, hardness_hb)
    if len(entries) == 1:
        return _found(book, entries[0], best, said, hardness_hb)
    if entries:
        return _several(entries, best, said)
    if outside:
        return Unknown((), outside[0].why, said)
    if said.general:
        return _general(book, index, said)
    return Unknown(_near(index, said), "No material of this name is known.", said)


def _spans(tokens: Sequence[Token | None]) -> Iterator[tuple[int, int, str]]:
    """Yield every run of unused tokens, the longest first."""
    for length in range(min(LONGEST_PHRASE, len(tokens)), 0, -1):
        for start in range(len(tokens) - length + 1):
            run = [token for token in tokens[start : start + length] if token is not None]
            if len(run) == length:
                yield start, start + length, join([token.key for token in run])


def _words(text: str, tokens: Sequence[Token | None]) -> str:
    """Return the piece of text that a run of tokens came from."""
    run = [token for token in tokens if token is not None]
    return text[run[0].start : run[-1].end]


def _name_hits(index: Index, text: str) -> tuple[list[NameHit], list[Token | None]]:
    """Take names out of the text; words for a whole group wait until nothing better is found."""
    left: list[Token | None] = list(tokens_of(text))
    hits: list[NameHit] = []
    for worst in (2, 3):
        for start, end, key in list(_spans(left)):
            if any(token is None for token in left[start:end]):
                continue
            entries = [entry for entry in index.names.get(key, ()) if entry[1] <= worst]
            if not entries or _longer_word(index, left, start, end):
                continue
            said = _words(text, left[start:end])
            hits += [NameHit(material, rank, said) for material, rank, _ in entries]
            left[start:end] = [None] * (end - start)
        if hits:
            break
    return hits, left


def _longer_word(index: Index, left: Sequence[Token | None], start: int, end: int) -> bool:
    """Say whether a name without digits is only part of a longer word of the trade."""
    if any(token and digits_of(token.key) for token in left[start:end]):
        return False
    for begin, stop, key in _spans(left):
        if (
            begin <= start
            and stop >= end
            and stop - begin > end - start
            and (key in index.forms or key in index.general)
        ):
            return True
    return False


def _words_said(index: Index, text: str, left: list[Token | None], hits: Sequence[NameHit]) -> Said:
    """Read states, forms and group words from what the names left over; one phrase may say several things."""
    states: list[tuple[str, tuple[str, ...]]] = []
    hints: list[Hint] = []
    general: list[tuple[str, tuple[Group, ...]]] = []
    for start, end, key in list(_spans(left)):
        if any(token is None for token in left[start:end]):
            continue
        words = _words(text, left[start:end])
        if key in index.states:
            states.append((words, tuple(index.states[key])))
        if key in index.forms:
            hints.append(Hint(words, index.forms[key].form, index.forms[key].skin))
        if key in index.general:
            general.append((words, tuple(index.general[key].groups)))
        if key in index.states or key in index.forms or key in index.general:
            left[start:end] = [None] * (end - start)
    ignored = tuple(
        _words(text, [token]) for token in left if token is not None and token.key not in index.fillers
    )
    matched = tuple(dict.fromkeys(hit.said for hit in hits))
    return Said("", matched, ignored, tuple(hints), tuple(states), tuple(general))


def _slips(index: Index, said: Said) -> tuple[list[NameHit], Said]:
    """Try the words that nothing knew as slips of the keyboard: same digits, hardly different letters."""
    text = " ".join(said.ignored)
    tokens: list[Token | None] = list(tokens_of(text))
    for start, end, key in _spans(tokens):
        meant = None if key in index.outside else _slip(index, key)
        if meant is None:
            continue
        words = _words(text, tokens[start:end])
        ignored = tuple(_words(text, [token]) for token in (*tokens[:start], *tokens[end:]))
        if meant in index.names:
            hits = [NameHit(material, rank, words, name) for material, rank, name in index.names[meant]]
            return hits, replace(said, matched=(words,), ignored=ignored)
        return [], replace(
            said, general=(*said.general, (words, tuple(index.general[meant].groups))), ignored=ignored
        )
    return [], said


def _slip(index: Index, key: str) -> str | None:
    alike = index.by_skeleton.get(skeleton(key))
    if alike is not None and len(key) >= 4 and not key.isdigit():
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


def _best(book: MaterialBook, hits: Sequence[NameHit], said: Said) -> tuple[list[NameHit], Said]:
    """Keep the surest hits; the others become words for a group, which may still contradict."""
    if not hits:
        return [], said
    surest = min(hit.rank for hit in hits)
    best = [hit for hit in hits if hit.rank == surest]
    ids = {hit.material.id for hit in best}
    demoted = [
        (hit.said, book.groups(hit.material))
        for hit in hits
        if hit.rank != surest and hit.material.id not in ids
    ]
    kept = {hit.said for hit in best}
    return best, replace(said, general=(*said.general, *(word for word in demoted if word[0] not in kept)))


def _narrowed(
    book: MaterialBook, entries: tuple[Material, ...], iso_group: Group | None, hb: float | None
) -> tuple[Material, ...]:
    fits = [entry for entry in entries if iso_group is None or iso_group in book.groups(entry)]
    if hb is not None:
        fits = [entry for entry in fits if any(state.distance(hb) == 0 for state in entry.states)]
    return tuple(fits) if len(fits) == 1 else entries


def _found(
    book: MaterialBook, material: Material, hits: Sequence[NameHit], said: Said, hardness_hb: float | None
) -> Found:
    doubts = []
    hit = next(hit for hit in hits if hit.material is material)
    if hit.slip_of:
        doubts.append(f"{hit.said!r} is read as {hit.slip_of!r}.")
    if hit.rank == 2:
        doubts.append(f"{hit.said!r} is near to {material.name}, not the same grade; its data are taken.")
    if material.is_group:
        doubts.append(f"{hit.said!r} names a group, not a grade; its usual values are taken.")
    hardness = None
    if said.reading is not None:
        try:
            hardness = hardness_as_hb(
                book.hardness, said.reading.value, said.reading.scale, book.family(material).table
            )
        except OutOfRangeError as problem:
            doubts.append(f"{said.reading.said!r} is left aside: {problem}")
    hb = hardness_hb if hardness_hb is not None else hardness.value if hardness else None
    named = [name for _, names in said.state_words for name in names]
    named += [
        state
        for name, state in material.state_names.items()
        if key_of(name) == key_of(hit.slip_of or hit.said)
    ]
    state, doubt = choose_state(book, material, named, hb)
    return Found(material, state, said, hardness, (*doubts, *([doubt] if doubt else [])))


def choose_state(
    book: MaterialBook, material: Material, named: Sequence[str], hb: float | None
) -> tuple[State, str]:
    """Return the state that words and hardness point to, and a doubt where neither settles it.

    From the hardness at which steel counts as hardened only hardened states count, below it only the others.
    """
    states = (*material.states, *material.shared_states)
    by_word = [state for state in states if state.id in named]
    hardened = book.family_file.hardened
    if hb is not None:
        margin = book.family_file.range_margin
        close = [state for state in by_word if state.distance(hb) <= margin * hb]
        hard = [state for state in states if state.group == "H"]
        soft = [state for state in states if state.group != "H"]
        pool = close or (hard if hb >= hardened.from_hb else soft) or list(states)
        return min(pool, key=lambda state: state.distance(hb)), ""
    if by_word:
        return by_word[0], ""
    if "hardened" in named and material.shared_states:
        state = next(state for state in material.shared_states if state.id == hardened.usual)
        return state, f"Hardened, but how hard is not said: {state.hb_min:g} to {state.hb_max:g} HB taken."
    return _first_state(material, named)


def _first_state(material: Material, named: Sequence[str]) -> tuple[State, str]:
    state, *others = material.states
    taken = f"{state.id.replace('_', ' ')} taken ({state.hb_min:g} to {state.hb_max:g} HB)"
    if not others:
        return state, ""
    if named:
        return state, f"No data are held for the state {named[0].replace('_', ' ')}; {taken}."
    could_be = ", ".join(other.id.replace("_", " ") for other in others)
    return state, f"State not said: {taken}; it could be {could_be}."


def _several(entries: Sequence[Material], hits: Sequence[NameHit], said: Said) -> Ambiguous:
    words = tuple(dict.fromkeys(hit.said for hit in hits))
    listed = " or ".join(entry.name for entry in entries)
    if len(words) == 1:
        why = f"{words[0]!r} is used for {listed}."
    else:
        why = f"{' and '.join(repr(word) for word in words)} are different materials: {listed}."
    return Ambiguous(tuple(entries), why, f"Which is it: {listed}?", said)


def _general(book: MaterialBook, index: Index, said: Said) -> Ambiguous:
    # The longest phrase says most: 'stainless steel' before 'steel'.
    word = max((words for words, _ in said.general), key=lambda words: len(key_of(words)))
    entry = index.general.get(key_of(word)) or index.general[_slip(index, key_of(word)) or ""]
    candidates = tuple(book.materials[name] for name in entry.such_as)
    return Ambiguous(
        candidates, f"{word!r} names a whole group; speed and force differ widely inside it.", entry.ask, said
    )


def _near(index: Index, said: Said) -> tuple[str, ...]:
    wanted = join([token.key for word in said.ignored for token in tokens_of(word)]) or key_of(said.text)
    if not wanted:
        return ()
    ranked = process.extract(
        wanted, list(index.names), scorer=fuzz.ratio, limit=4 * NEAR_SHOWN, score_cutoff=60
    )
    shown = dict.fromkeys(_shown(index, key) for key, _, _ in ranked)
    return tuple(list(shown)[:NEAR_SHOWN])


def _shown(index: Index, key: str) -> str:
    material, _, name = index.names[key][0]
    return name if name == material.name else f"{name} ({material.name})"


def all_names(materials: Iterable[Material]) -> list[str]:
    """Return every exact name of the materials."""
    return [name for material in materials for name in material.exact_names]
