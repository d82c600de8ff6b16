"""How a change and what came of it are told: values with the digits that were run, picks in the words of the trade."""

from __future__ import annotations

import math
from collections.abc import Mapping

from millreason.explain.variations import DIGITS
from millreason.explanation_records import Result
from millreason.job import Value
from millreason.report.words import clean, fact_words, option, pick_words
from millreason.units import INCH_SHOWN, convert, plain
from millreason.vocabulary import Vocabulary

_ENDED = {"ask": "a question comes first", "refuse": "no cutter stands"}
_VERDICTS = {
    "recommend": "without warnings",
    "recommend_with_warnings": "with warnings",
    "conditional": "held back until a condition is confirmed",
}


def value_words(value: object, unit: str, system: str) -> str:
    """Return a value as it was run; for a reader in inches the inch value first."""
    if value is None:
        return "not known"
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, list | tuple):
        return ", ".join(value_words(item, "", system) for item in value)
    if not isinstance(value, int | float):
        return option(str(value))
    metric = f"{_digits(value)} {unit}".rstrip()
    if system != "inch" or unit not in INCH_SHOWN:
        return metric
    other = INCH_SHOWN[unit][0]
    return f"{_digits(convert(value, unit, other))} {other} ({metric})"


def _digits(value: float) -> str:
    whole = math.floor(math.log10(abs(value))) + 1 if value else 1
    return plain(value, max(0, DIGITS - whole))


def change_words(
    changes: Mapping[str, Value | None], before: Mapping[str, object], vocabulary: Vocabulary, system: str
) -> str:
    """Return a change in words: 'work: stock 2 mm instead of 3 mm'."""
    parts = []
    for fact, value in changes.items():
        unit = vocabulary.facts[fact].unit
        now, was = value_words(value, unit, system), value_words(before.get(fact), unit, system)
        parts.append(f"{fact_words(fact)} {now} instead of {was}")
    return " and ".join(parts)


def option_words(pick: str, name: str, system: str) -> str:
    """Return a pick with its option: 'pitch coarse', 'lead 15 deg (kappa 75 deg)', 'cutter A-12 on hand'."""
    if pick == "cutter":
        return f"cutter {clean(name)} on hand"
    return pick_words(pick, name, system)


def picks_changed(before: Result, after: Result) -> dict[str, str]:
    """Return the picks that are another option after, with that option."""
    names = after.picks if after.stands else {}
    return {pick: option_ for pick, option_ in names.items() if before.picks.get(pick) != option_}


def result_words(before: Result, after: Result, system: str) -> str:
    """Return what a run came to against the answer: the picks that change, or why no cutter stands."""
    if not after.stands:
        words = ", ".join(fact_words(name) if after.verdict == "ask" else option(name) for name in after.stopped_by)
        return f"{_ENDED[after.verdict]}: {words}" if words else _ENDED[after.verdict]
    changed = picks_changed(before, after)
    told = [option_words(pick, option_, system) for pick, option_ in changed.items()]
    if before.verdict != after.verdict:
        told.append(_VERDICTS[after.verdict])
    return ", ".join(told) or "the same picks"


def same_picks(before: Result, after: Result) -> bool:
    """Whether two runs end with the same cutter and use, or both without one for the same reason."""
    if not before.stands and not after.stands:
        return (before.verdict, before.stopped_by) == (after.verdict, after.stopped_by)
    return before.picks == after.picks
