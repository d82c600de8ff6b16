"""The nearest change of one input, or of two, that makes an option the pick: searched, then confirmed."""

from __future__ import annotations

import heapq
from collections.abc import Iterable, Iterator
from functools import partial
from itertools import combinations, product

from millreason.explain.reruns import Changes, Reruns
from millreason.explain.variations import Input, Span, blank_inputs, distance, known_inputs, other_values, rule_lines
from millreason.explain.words import result_words
from millreason.explanation_records import Change, Result
from millreason.job import Value
from millreason.stages import plain_value

MATERIAL = "work.material"
MOST_CHANGES = 3
# How many single changes that come near are combined in pairs, and how many of one fact.
_NEAR_MISSES = 12
_OF_ONE_FACT = 2
_TRIED_CLOSER = 6
# How many of the best first steps are combined with every other change where no two near misses are enough.
_FIRST_STEPS = 2
_Step = tuple[Input, Value]


def find_nearest(reruns: Reruns, pick: str, option: str) -> list[Change]:
    """Return the nearest changes of one input that make an option the pick, else the nearest pair of them."""
    search = _Search(reruns, pick, option)
    return search.singles() or search.pairs()


class _Search:
    """Looks for changes after which one option is the pick."""

    def __init__(self, reruns: Reruns, pick: str, option: str) -> None:
        self._reruns = reruns
        self._pick = pick
        self._option = option
        situation, vocabulary = reruns.outcome.situation, reruns.vocabulary
        self._inputs = {
            entry.fact: entry for entry in (*known_inputs(situation, vocabulary), *blank_inputs(situation, vocabulary))
        }
        material = vocabulary.facts[MATERIAL]
        self._inputs[MATERIAL] = Input(MATERIAL, material, situation.value(MATERIAL), "given")
        # One material of each family stands for all of them.
        entries = {entry.family: entry.name for entry in reversed(reruns.adviser.materials.entries())}
        self._materials = [name for name in entries.values() if name != situation.value("material.name")]
        lines = rule_lines(reruns.adviser.rulebook)
        self._spans = {
            fact: Span(entry, lines.get(fact, ())) for fact, entry in self._inputs.items() if entry.is_number
        }

    def _hit(self, result: Result) -> bool:
        """Whether the option is the pick, of a job that does not contradict itself more than before."""
        sound = result.contradictions <= self._reruns.base.contradictions
        return sound and result.picks.get(self._pick) == self._option

    def _values(self, entry: Input) -> list[Value]:
        if entry.definition.kind == "text":
            return list(self._materials)
        return list(self._spans[entry.fact].samples) if entry.is_number else other_values(entry)

    # ------------------------------------------------------------------ one input
    def singles(self) -> list[Change]:
        """Return the nearest single changes, at most one for each fact, nearest first."""
        rough = []
        for entry in self._inputs.values():
            hits = [value for value in self._values(entry) if self._hit(self._reruns.at({entry.fact: value}))]
            if hits:
                nearest = min(hits, key=partial(distance, entry))
                rough.append((distance(entry, nearest), entry, nearest))
        rough.sort(key=lambda found: found[0])
        closer = [
            {entry.fact: self._closer(entry, value, {})} for _, entry, value in rough[: MOST_CHANGES + _TRIED_CLOSER]
        ]
        return self._confirmed(closer)

    def _closer(self, entry: Input, value: Value, held: Changes) -> Value:
        """Return the value nearest to the present one that still makes the pick, with other changes held."""
        span = self._spans.get(entry.fact)
        if span is None or span.value is None or not isinstance(value, int | float):
            return value
        hit, miss = float(value), self._last_miss(entry, span, float(value), held)
        while (middle := span.middle(miss, hit)) is not None:
            if self._hit(self._reruns.at({**held, entry.fact: middle})):
                hit = middle
            else:
                miss = middle
        return hit

    def _last_miss(self, entry: Input, span: Span, value: float, held: Changes) -> float:
        """Return the sample next to a hit on the side of the present value, or that value itself."""
        assert span.value is not None
        up = value > span.value
        between = [s for s in span.outwards(up) if (s < value if up else s > value)]
        missed = [s for s in between if not self._hit(self._reruns.at({**held, entry.fact: s}))]
        return missed[-1] if missed else span.value

    # ------------------------------------------------------------------ two inputs
    def pairs(self) -> list[Change]:
        """Return the nearest pair of changes out of those that come nearest alone."""
        near = self._near_misses()
        found = list(self._pairs_that_hit(combinations(near, 2)))
        if not found:
            every = [(entry, value) for entry in self._inputs.values() for value in self._values(entry)]
            found = list(self._pairs_that_hit(product(_one_of_each(near)[:_FIRST_STEPS], every)))
        found.sort(key=lambda pair: pair[0])
        closer: list[Changes] = []
        for _, first, one, second, two in found[:_TRIED_CLOSER]:
            one = self._closer(first, one, {second.fact: two})
            two = self._closer(second, two, {first.fact: one})
            closer.append({first.fact: one, second.fact: two})
        return self._confirmed(closer)[:1]

    def _pairs_that_hit(
        self, pairs: Iterable[tuple[_Step, _Step]]
    ) -> Iterator[tuple[float, Input, Value, Input, Value]]:
        for (first, one), (second, two) in pairs:
            if first.fact != second.fact and self._hit(self._reruns.at({first.fact: one, second.fact: two})):
                yield distance(first, one) + distance(second, two), first, one, second, two

    def _near_misses(self) -> list[tuple[Input, Value]]:
        """Return the single changes after which least is missing to make the option the pick."""
        ranked: list[tuple[tuple[int, float], float, Input, Value]] = []
        for entry in self._inputs.values():
            gaps = [
                (self._gap({entry.fact: value}), distance(entry, value), entry, value) for value in self._values(entry)
            ]
            ranked.extend(heapq.nsmallest(_OF_ONE_FACT, gaps, key=lambda gap: gap[:2]))
        best = heapq.nsmallest(_NEAR_MISSES, ranked, key=lambda gap: gap[:2])
        return [(entry, value) for _, _, entry, value in best]

    def _gap(self, changes: Changes) -> tuple[int, float]:
        return self._reruns.gap(changes, self._pick, self._option)

    # ------------------------------------------------------------------ confirming
    def _confirmed(self, changes: list[Changes] | list[dict[str, Value]]) -> list[Change]:
        ranked = sorted(changes, key=self._total)
        return list(self._true_ones(ranked))[:MOST_CHANGES]

    def _total(self, change: Changes) -> float:
        return sum(distance(self._inputs[fact], value) for fact, value in change.items() if value is not None)

    def _true_ones(self, changes: list[Changes] | list[dict[str, Value]]) -> Iterator[Change]:
        for change in changes:
            after = self._reruns.confirmed(change)
            if self._hit(after):
                told = result_words(self._reruns.base, after, self._reruns.job.units)
                plain = {fact: plain_value(value) for fact, value in change.items()}
                yield Change(plain, "", told, after.picks)


def _one_of_each(steps: list[_Step]) -> list[_Step]:
    return list({entry.fact: (entry, value) for entry, value in reversed(steps)}.values())[::-1]
