"""How far an answer holds: the interval of every number, the options of every word, and what the assumptions do."""

from __future__ import annotations

import math
from collections.abc import Callable, Iterable, Iterator
from dataclasses import replace

from millreason.explain.reruns import Reruns
from millreason.explain.variations import Input, Span, bounds, can_vary, known_inputs, other_values, rule_lines
from millreason.explain.words import (
    change_words,
    picks_changed,
    result_words,
    same_picks,
    value_words,
)
from millreason.explanation_records import Alternative, Assumption, End, Interval, Options, Result
from millreason.job import Value
from millreason.stages import plain_value
from millreason.trace import Question

_TOLD = 3


def find_intervals(reruns: Reruns) -> list[Interval]:
    """Return, for every number that is given, looked up or assumed, how far it may move while the picks stay."""
    lines = rule_lines(reruns.adviser.rulebook)
    known = known_inputs(reruns.outcome.situation, reruns.vocabulary)
    return [find_interval(reruns, entry, lines.get(entry.fact, ())) for entry in known if entry.is_number]


def find_interval(
    reruns: Reruns, entry: Input, lines: Iterable[float], within: tuple[float, float] | None = None
) -> Interval:
    """Return how far one number may move while the picks stay, within its span or the one given."""
    span = Span(entry, lines, within)
    assert span.value is not None
    ends = {up: _end(reruns, entry.fact, span, up) for up in (False, True)}
    return Interval(
        entry.fact,
        entry.definition.unit,
        span.value,
        entry.origin,
        [min(span.low, span.value), max(span.high, span.value)],
        ends[False],
        ends[True],
    )


def _end(reruns: Reruns, fact: str, span: Span, up: bool) -> End | None:
    """Return one end, found on the quick engine and confirmed; found again on the sure one should the two differ."""
    for at in (reruns.at, reruns.confirmed):
        inside, beyond = _bracket(lambda value, at=at: at({fact: value}), reruns.base, span, up)  # type: ignore[misc]
        same = inside == span.value or same_picks(reruns.base, reruns.confirmed({fact: inside}))
        if beyond is None:
            if same:
                return None
            continue
        after = reruns.confirmed({fact: beyond})
        if same and not same_picks(reruns.base, after):
            told = result_words(reruns.base, after, reruns.job.units)
            return End(inside, beyond, told, picks_changed(reruns.base, after), after.verdict)
    raise AssertionError(f"{fact}: the ends found on one engine do not hold on it")


def _bracket(at: Callable[[float], Result], base: Result, span: Span, up: bool) -> tuple[float, float | None]:
    """Return the last number with the picks of the base and the first with others; None where there is none."""
    assert span.value is not None
    inside, beyond = span.value, None
    for sample in span.outwards(up):
        if not same_picks(base, at(sample)):
            beyond = sample
            break
        inside = sample
    while beyond is not None and (middle := span.middle(inside, beyond)) is not None:
        if same_picks(base, at(middle)):
            inside = middle
        else:
            beyond = middle
    return inside, beyond


# ---------------------------------------------------------------------- words and flags
def find_options(reruns: Reruns) -> list[Options]:
    """Return, for every word and flag that is known, which other values leave the picks and which change them."""
    known = known_inputs(reruns.outcome.situation, reruns.vocabulary)
    return [_options(reruns, entry) for entry in known if not entry.is_number]


def _options(reruns: Reruns, entry: Input) -> Options:
    same, other = [], []
    for value in other_values(entry):
        after = reruns.at({entry.fact: value})
        if after.contradictions > reruns.base.contradictions:
            continue
        if same_picks(reruns.base, after):
            same.append(plain_value(value))
            continue
        after = reruns.confirmed({entry.fact: value})
        told = result_words(reruns.base, after, reruns.job.units)
        changed = picks_changed(reruns.base, after)
        other.append(Alternative(plain_value(value), told, changed, after.verdict))
    return Options(entry.fact, plain_value(entry.value), entry.origin, same, other)


# ---------------------------------------------------------------------- assumptions
def weigh_assumptions(reruns: Reruns) -> list[Assumption]:
    """Return what each assumed fact does over its plausible values, the one with the largest effect first."""
    known = known_inputs(reruns.outcome.situation, reruns.vocabulary)
    weighed = [_assumption(reruns, entry) for entry in known if entry.origin == "assumed"]
    return sorted(weighed, key=lambda assumption: -assumption.effect)


def _assumption(reruns: Reruns, entry: Input) -> Assumption:
    results = list(_varied(reruns, entry))
    record = reruns.outcome.situation.record(entry.fact)
    effect = effect_of(reruns.base, [after for _, after in results])
    text = _outcomes(reruns, entry, results) if effect else f"changes nothing over {_varied_words(reruns, entry)}"
    question = _question(reruns, entry, text, record.by if record else "") if effect else None
    return Assumption(
        entry.fact,
        plain_value(entry.value),
        entry.definition.unit,
        record.by if record else "",
        _varied_words(reruns, entry),
        effect,
        text,
        question,
    )


def _varied(reruns: Reruns, entry: Input) -> Iterator[tuple[Value, Result]]:
    """Yield every plausible value of a fact that is tried, and what it comes to."""
    values: Iterable[Value] = other_values(entry)
    if entry.is_number:
        values = Span(entry, rule_lines(reruns.adviser.rulebook).get(entry.fact, ())).samples
    for value in values:
        yield value, reruns.at({entry.fact: value})


def _varied_words(reruns: Reruns, entry: Input) -> str:
    units = reruns.job.units
    if entry.is_number:
        low, high = (value_words(end, entry.definition.unit, units) for end in bounds(entry))
        return f"{low} to {high}"
    return " / ".join(value_words(value, "", units) for value in other_values(entry))


def effect_of(base: Result, results: list[Result]) -> float:
    """Return how much a fact can change: picks and verdict in the worst case, then the share of values that do.

    A pick counts 1, all of them where no cutter stands any more; another verdict counts 1; the time counts by its
    logarithm, so that a job twice as long adds 0.69.
    """
    changes = [_change(base, after) for after in results]
    if not changes or max(changes) == 0.0:
        return 0.0
    return max(changes) + sum(change > 0 for change in changes) / len(changes)


def _change(base: Result, after: Result) -> float:
    if same_picks(base, after) and base.verdict == after.verdict:
        return 0.0
    count = len(picks_changed(base, after)) if after.stands and base.stands else max(len(base.picks), len(after.picks))
    ratio = abs(math.log(after.time_min / base.time_min)) if after.time_min and base.time_min else 0.0
    return count + (base.verdict != after.verdict) + ratio


def _outcomes(reruns: Reruns, entry: Input, results: list[tuple[Value, Result]]) -> str:
    """Return the different outcomes in words, each with the value that is nearest to the one assumed."""
    units, told = reruns.job.units, dict[str, str]()
    ordered = sorted(results, key=lambda pair: _nearness(entry, pair[0]))
    for value, after in ordered:
        if same_picks(reruns.base, after) and reruns.base.verdict == after.verdict:
            continue
        words = result_words(reruns.base, reruns.confirmed({entry.fact: value}), units)
        told.setdefault(words, f"{value_words(value, entry.definition.unit, units)}: {words}")
        if len(told) == _TOLD:
            break
    return "; ".join(told.values())


def _nearness(entry: Input, value: Value) -> float:
    numbers = isinstance(value, int | float) and isinstance(entry.value, int | float)
    return abs(value - entry.value) if numbers else 0.0  # type: ignore[operator]


def _question(reruns: Reruns, entry: Input, effect: str, rule: str) -> Question:
    definition = entry.definition
    told = next((firing.why for firing in reruns.outcome.firings if firing.rule == rule), "")
    text = definition.ask or f"{definition.means}: {_choices(entry)}?"
    return Question(entry.fact, text, definition.because or told, "useful", [rule] if rule else [], effect)


def _choices(entry: Input) -> str:
    if entry.is_number:
        return "how much"
    if entry.definition.kind == "flag":
        return "yes or no"
    return " or ".join(value_words(option, "", "metric") for option in entry.definition.options)


def rank_questions(reruns: Reruns, questions: list[Question], assumptions: list[Assumption]) -> list[Question]:
    """Return the open questions and those of the assumptions, what must be known first, then by effect.

    A question about a blank fact is tried over its plausible values too; one that changes nothing comes last.
    """
    ranked = [(question.need != "must", -effect, question) for question, effect in _with_effects(reruns, questions)]
    ranked += [(True, -entry.effect, entry.question) for entry in assumptions if entry.question is not None]
    kept: dict[str, Question] = {}
    for _, _, question in sorted(ranked, key=lambda entry: entry[:2]):
        kept.setdefault(question.fact, question)
    return list(kept.values())


def _with_effects(reruns: Reruns, questions: list[Question]) -> Iterator[tuple[Question, float]]:
    situation, vocabulary = reruns.outcome.situation, reruns.vocabulary
    for question in questions:
        definition = vocabulary.facts[question.fact]
        entry = Input(question.fact, definition, situation.value(question.fact), "absent")
        if not can_vary(question.fact, definition):
            yield question, 0.0
            continue
        results = list(_varied(reruns, entry))
        effect = effect_of(reruns.base, [after for _, after in results])
        yield (replace(question, effect=_outcomes(reruns, entry, results)) if effect else question), effect


__all__ = ["change_words", "find_interval", "find_intervals", "find_options", "rank_questions", "weigh_assumptions"]
