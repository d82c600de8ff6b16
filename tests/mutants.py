"""Small changes to rules, one at a time, to see whether the tests of the rule base notice each of them."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any

from millreason.rulebook import Conclusion, Condition, Rule, RuleBook, Scalar, TestSpec, describe
from millreason.stages import conclusion_text
from millreason.vocabulary import FactDefinition, Vocabulary
from rule_trials import WHOLE

MOVE = 0.05
KINDS = ("rule dropped", "condition flipped", "threshold moved", "conclusion swapped", "strength changed")
_OPPOSITE = {"at_least": "below", "above": "at_most", "at_most": "above", "below": "at_least"}


@dataclass(frozen=True)
class Mutant:
    """A rule with one change; without the rule where it was dropped."""

    rule_id: str
    kind: str
    what: str
    rule: Rule | None

    def __str__(self) -> str:
        return f"{self.rule_id}: {self.kind}: {self.what}"


def mutants(book: RuleBook, vocabulary: Vocabulary, strengths: list[str]) -> Iterator[Mutant]:
    """Yield every mutant of every rule; `strengths` from the weakest to the strongest."""
    swaps = _Swaps(book, vocabulary)
    for rule in book.rules.values():
        yield Mutant(rule.id, "rule dropped", rule.name, None)
        yield from _flipped(rule, vocabulary)
        yield from _moved(rule, vocabulary)
        yield from swaps.of(rule)
        yield from _strengths(rule, strengths)


# ---------------------------------------------------------------------- conditions
def _flipped(rule: Rule, vocabulary: Vocabulary) -> Iterator[Mutant]:
    for fact, condition in rule.when.items():
        for opposite in opposites(condition, vocabulary.facts[fact]):
            what = f"{describe(fact, condition)} -> {describe(fact, opposite)}"
            yield Mutant(rule.id, "condition flipped", what, _with_condition(rule, fact, opposite))


def opposites(condition: Condition, definition: FactDefinition) -> Iterator[Condition]:
    """Yield the conditions that hold where this one does not."""
    if isinstance(condition, bool):
        yield not condition
    elif isinstance(condition, list) or not isinstance(condition, TestSpec):
        yield TestSpec(none_of=condition if isinstance(condition, list) else [condition])
    elif condition.between is not None:
        yield TestSpec(below=condition.between[0])
        yield TestSpec(above=condition.between[1])
    else:
        name, value = next((name, value) for name, value in condition if value is not None)
        swapped: dict[str, Any] = {
            "known": {"known": not value},
            "lacks": {"equals": value},
            "equals": {"none_of": [value]},
            "one_of": {"none_of": value},
            "none_of": {"one_of": value},
        }.get(name, {_OPPOSITE.get(name, name): value})
        yield TestSpec(**swapped)


def _moved(rule: Rule, vocabulary: Vocabulary) -> Iterator[Mutant]:
    for fact, condition in rule.when.items():
        if not isinstance(condition, TestSpec):
            continue
        for test in (*_OPPOSITE, "between"):
            value = getattr(condition, test)
            if value is None:
                continue
            for moved in _moves(fact, value):
                if _inside(moved, vocabulary.facts[fact]):
                    what = f"{fact} {test.replace('_', ' ')} {value} -> {moved}"
                    changed = TestSpec(**{test: moved})  # type: ignore[arg-type]
                    yield Mutant(rule.id, "threshold moved", what, _with_condition(rule, fact, changed))


def _moves(fact: str, value: float | list[float]) -> Iterator[float | list[float]]:
    if isinstance(value, list):
        low, high = value
        yield from ([moved, high] for moved in _moves(fact, low) if moved <= high)  # type: ignore[operator]
        yield from ([low, moved] for moved in _moves(fact, high) if low <= moved)  # type: ignore[operator]
        return
    step = 1.0 if fact in WHOLE else abs(value) * MOVE or MOVE
    yield from (round(value - step, 9), round(value + step, 9))


def _inside(value: float | list[float], definition: FactDefinition) -> bool:
    low, high = definition.range or (float("-inf"), float("inf"))
    return all(low <= item <= high for item in (value if isinstance(value, list) else [value]))


def _with_condition(rule: Rule, fact: str, condition: Condition) -> Rule:
    return rule.model_copy(update={"when": {**rule.when, fact: condition}})


# ---------------------------------------------------------------------- conclusions
def _strengths(rule: Rule, levels: list[str]) -> Iterator[Mutant]:
    field = "strength" if rule.then.strength else "lower"
    level = getattr(rule.then, field)
    for place in (levels.index(level) - 1, levels.index(level) + 1) if level else ():
        if 0 <= place < len(levels):
            yield _concluding(rule, "strength changed", {field: levels[place]})


def _concluding(rule: Rule, kind: str, change: dict[str, Any]) -> Mutant:
    then = rule.then.model_copy(update=change)
    return Mutant(
        rule.id,
        kind,
        f"{conclusion_text(rule.then)} -> {conclusion_text(then)}",
        rule.model_copy(update={"then": then}),
    )


class _Swaps:
    """Swaps what a rule concludes for another thing that it could conclude."""

    def __init__(self, book: RuleBook, vocabulary: Vocabulary) -> None:
        self._facts = vocabulary.facts
        self._picks = vocabulary.picks
        self._adjustables = list(vocabulary.adjustables)
        self._limits = list(vocabulary.facts["answer.limits"].options)
        self._asked = [name for name, fact in vocabulary.facts.items() if fact.ask and not name.startswith("confirm.")]
        self._confirmed = [name for name in vocabulary.facts if name.startswith("confirm.")]
        cautions = (rule.then.caution for rule in book.rules.values())
        self._cautions = sorted({caution.key for caution in cautions if caution})
        self._offers = [rule.then.offer for rule in book.rules.values() if rule.then.offer]

    def of(self, rule: Rule) -> Iterator[Mutant]:
        """Yield the mutants of a rule's conclusion."""
        for change in self._changes(rule.then):
            if any(getattr(rule.then, name) != value for name, value in change.items()):
                yield _concluding(rule, "conclusion swapped", change)

    def _changes(self, then: Conclusion) -> Iterator[dict[str, Any]]:
        stance = next((name for name in ("for_", "against", "rule_out") if getattr(then, name)), None)
        if stance:
            yield from self._evidence(then, stance)
        for verb in ("set", "assume"):
            for fact, value in (getattr(then, verb) or {}).items():
                yield from ({verb: {**getattr(then, verb), fact: other}} for other in self._other_values(fact, value))
        for name, value in (then.adjust or {}).items():
            rest = {other: number for other, number in (then.adjust or {}).items() if other != name}
            yield {"adjust": {**rest, name: round(value * (1 + MOVE), 9)}}
            yield {"adjust": {**rest, _next(self._adjustables, name): value}}
        if then.ask:
            yield {"ask": _next(self._asked, then.ask)}
            yield {"need": "useful" if then.need == "must" else "must"}
        if then.condition:
            yield {"condition": _next(self._confirmed, then.condition)}
        yield from self._texts(then)

    def _evidence(self, then: Conclusion, stance: str) -> Iterator[dict[str, Any]]:
        if stance != "rule_out":
            yield {stance: None, "against" if stance == "for_" else "for_": getattr(then, stance)}
        for pick, options in getattr(then, stance).items():
            held = options if isinstance(options, list) else [options]
            others = [option for option in self._picks[pick].options if option not in held]
            if others:
                yield {stance: {**getattr(then, stance), pick: [others[0], *held[1:]]}}

    def _other_values(self, fact: str, value: Scalar | dict[str, str]) -> Iterator[Scalar]:
        definition = self._facts[fact]
        if isinstance(value, bool):
            yield not value
        elif definition.options and not isinstance(value, dict):
            yield _next(definition.options, value)
        elif isinstance(value, int | float):
            yield round(value * (1 + MOVE), 9)

    def _texts(self, then: Conclusion) -> Iterator[dict[str, Any]]:
        for name in ("refuse", "reject"):
            spec = getattr(then, name)
            if spec:
                yield {name: spec.model_copy(update={"limit": _next(self._limits, spec.limit)})}
        if then.caution:
            yield {"caution": then.caution.model_copy(update={"key": _next(self._cautions, then.caution.key)})}
            graver = {"note": "caution", "caution": "warning", "warning": "note"}[then.caution.severity]
            yield {"caution": then.caution.model_copy(update={"severity": graver})}
        if then.offer:
            yield {"offer": _next(self._offers, then.offer)}


def _next(names: list[Any], name: Any) -> Any:
    """Return the name after one in a list, the first after the last."""
    return names[(names.index(name) + 1) % len(names)]
