"""Finding the material that a person names: exact names, slips, words of a whole group, and what is near."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

from millreason.errors import OutOfRangeError
from millreason.materials.book import Material, MaterialBook, State
from millreason.materials.facts import speed_pick
from millreason.materials.hardness import Converted, hardness_as_hb
from millreason.materials.index import (
    GROUP_RANK,
    NEAR_RANK,
    Index,
    Rank,
    near_names,
    slip_of,
)
from millreason.materials.records import Group
from millreason.materials.text import (
    Reading,
    Token,
    digits_of,
    join,
    key_of,
    leave_sizes_out,
    take_hardness,
    tokens_of,
)

LONGEST_PHRASE = 9


@dataclass(frozen=True)
class NameHit:
    """A name of a material in the text."""

    material: Material
    rank: Rank
    said: str
    slip_of: str = ""


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
    state_said: bool = False

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
    kind: str | None = None


Result = Found | Ambiguous | Unknown


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
        entries = _narrowed(book, entries, said, iso_group, hardness_hb)
    if len(entries) == 1:
        return _found(book, entries[0], best, said, hardness_hb)
    if entries and _one_word_for_alike(book, entries, best):
        doubt = f"{_used_for(entries, best)}; they cut alike, and {entries[0].name} is taken."
        return _found(book, entries[0], best, said, hardness_hb, [doubt])
    if entries:
        return _several(entries, best, said)
    if outside:
        return Unknown((), outside[0].why, said, outside[0].kind)
    if said.general:
        return _general(book, index, said)
    return Unknown(near_names(index, _wanted(said)), "No material of this name is known.", said)


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
    for worst in (NEAR_RANK, GROUP_RANK):
        for start, end, key in list(_spans(left)):
            if any(token is None for token in left[start:end]):
                continue
            entries = [entry for entry in index.names.get(key, ()) if entry[1] <= worst]
            if not entries or _part_of_more(index, text, left, start, end):
                continue
            said = _words(text, left[start:end])
            hits += [NameHit(material, rank, said) for material, rank, _ in entries]
            left[start:end] = [None] * (end - start)
        if hits:
            break
    return hits, left


def _part_of_more(index: Index, text: str, left: Sequence[Token | None], start: int, end: int) -> bool:
    """Say whether a name without digits is only part of a longer word, or of a grade that is not known."""
    if any(token and digits_of(token.key) for token in left[start:end]):
        return False
    last, following = left[end - 1], left[end] if end < len(left) else None
    if last and following and following.key.isdigit() and not text[last.end : following.start].strip("-"):
        return " " not in text[last.end : following.start]
    return any(
        begin <= start and stop >= end and stop - begin > end - start
        for begin, stop, key in _spans(left)
        if key in index.forms or key in index.general
    )


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
    ignored = tuple(_words(text, [token]) for token in left if token is not None and token.key not in index.fillers)
    matched = tuple(dict.fromkeys(hit.said for hit in hits))
    return Said("", matched, ignored, tuple(hints), tuple(states), tuple(general))


def _slips(index: Index, said: Said) -> tuple[list[NameHit], Said]:
    """Try the words that nothing knew as slips of the keyboard: same digits, hardly different letters."""
    text = " ".join(said.ignored)
    tokens: list[Token | None] = list(tokens_of(text))
    for start, end, key in _spans(tokens):
        meant = None if key in index.outside else slip_of(index, key)
        if meant is None:
            continue
        words = _words(text, tokens[start:end])
        ignored = tuple(_words(text, [token]) for token in (*tokens[:start], *tokens[end:]))
        if meant in index.names:
            hits = [NameHit(material, rank, words, name) for material, rank, name in index.names[meant]]
            return hits, replace(said, matched=(words,), ignored=ignored)
        return [], replace(said, general=(*said.general, (words, tuple(index.general[meant].groups))), ignored=ignored)
    return [], said


def _best(book: MaterialBook, hits: Sequence[NameHit], said: Said) -> tuple[list[NameHit], Said]:
    """Keep the surest hits; the others become words for a group, which may still contradict."""
    if not hits:
        return [], said
    surest = min(hit.rank for hit in hits)
    best = [hit for hit in hits if hit.rank == surest]
    ids = {hit.material.id for hit in best}
    demoted = [
        (hit.said, book.groups(hit.material)) for hit in hits if hit.rank != surest and hit.material.id not in ids
    ]
    kept = {hit.said for hit in best}
    return best, replace(said, general=(*said.general, *(word for word in demoted if word[0] not in kept)))


def _narrowed(
    book: MaterialBook, entries: tuple[Material, ...], said: Said, iso_group: Group | None, hb: float | None
) -> tuple[Material, ...]:
    """Let a group, a word for a group or a hardness settle a choice, if it leaves just one."""
    fits = [entry for entry in entries if iso_group is None or iso_group in book.groups(entry)]
    for _, allowed in said.general:
        fits = [entry for entry in fits if set(book.family(entry).groups) & set(allowed)]
    if hb is not None:
        fits = [entry for entry in fits if any(state.distance(hb) == 0 for state in entry.states)]
    return tuple(fits) if len(fits) == 1 else entries


def _found(
    book: MaterialBook,
    material: Material,
    hits: Sequence[NameHit],
    said: Said,
    hardness_hb: float | None,
    known_doubts: Sequence[str] = (),
) -> Found:
    doubts = list(known_doubts)
    hit = next(hit for hit in hits if hit.material is material)
    if hit.slip_of:
        doubts.append(f"{hit.said!r} is read as {hit.slip_of!r}.")
    if hit.rank == NEAR_RANK:
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
    named += [state for name, state in material.state_names.items() if key_of(name) == key_of(hit.slip_of or hit.said)]
    state, doubt = choose_state(book, material, named, hb)
    return Found(material, state, said, hardness, (*doubts, *([doubt] if doubt else [])), state.id in named)


def choose_state(book: MaterialBook, material: Material, named: Sequence[str], hb: float | None) -> tuple[State, str]:
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


def _one_word_for_alike(book: MaterialBook, entries: Sequence[Material], hits: Sequence[NameHit]) -> bool:
    """Tell whether one name is used for several entries of the same family, dangers, group and speed."""
    firsts = [(entry, entry.states[0]) for entry in entries]
    kinds = {(e.family, e.hazards, state.group, speed_pick(book, state).speed) for e, state in firsts}
    return len(kinds) == 1 and len({hit.said for hit in hits}) == 1


def _used_for(entries: Sequence[Material], hits: Sequence[NameHit]) -> str:
    return f"{hits[0].said!r} is used for {' or '.join(entry.name for entry in entries)}"


def _several(entries: Sequence[Material], hits: Sequence[NameHit], said: Said) -> Ambiguous:
    words = tuple(dict.fromkeys(hit.said for hit in hits))
    listed = " or ".join(entry.name for entry in entries)
    if len(words) == 1:
        why = f"{_used_for(entries, hits)}."
    else:
        why = f"{' and '.join(repr(word) for word in words)} are different materials: {listed}."
    return Ambiguous(tuple(entries), why, f"Which is it: {listed}?", said)


def _general(book: MaterialBook, index: Index, said: Said) -> Ambiguous:
    # The longest phrase says most: 'stainless steel' before 'steel'.
    word = max((words for words, _ in said.general), key=lambda words: len(key_of(words)))
    entry = index.general.get(key_of(word)) or index.general[slip_of(index, key_of(word)) or ""]
    candidates = tuple(book.materials[name] for name in entry.such_as)
    return Ambiguous(
        candidates, f"{word!r} names a whole group; speed and force differ widely inside it.", entry.ask, said
    )


def _wanted(said: Said) -> str:
    """Return the key of what nothing knew, or of the whole text."""
    return join([token.key for word in said.ignored for token in tokens_of(word)]) or key_of(said.text)
