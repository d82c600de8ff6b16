"""Concrete facts under which rules fire together, found by search and confirmed by running them."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterator, Mapping, Sequence
from functools import cached_property
from itertools import islice
from math import inf
from typing import Any

from millreason.facts import Situation
from millreason.knowledge import Knowledge
from millreason.lookups import look_up_usual
from millreason.rule_audit.ratios import computed, rests_on
from millreason.rule_audit.values import ALONE, Demand, Demands, ValueSet, demands, plain, together
from millreason.rulebook import Rule, RuleBook, Scalar
from millreason.stages import Stage
from millreason.vocabulary import Vocabulary

MOST_TRIES = 60
Facts = dict[str, Any]


class WitnessSearch:
    """Finds facts that a person or the computation could state, and on which given rules all fire."""

    def __init__(self, book: RuleBook, vocabulary: Vocabulary, knowledge: Knowledge) -> None:
        self._book = book
        self._vocabulary = vocabulary
        self._knowledge = knowledge
        self._demands: dict[str, Demands] = {}

    def demands(self, rule: Rule) -> Demands:
        """Return what a rule demands of each fact."""
        if rule.id not in self._demands:
            self._demands[rule.id] = demands(rule, self._vocabulary.facts)
        return self._demands[rule.id]

    @cached_property
    def _appraise(self) -> Stage:
        rules = [rule for rule in self._book.rules.values() if rule.stage == "appraise" and rule.then.set]
        return Stage(rules, self._book, self._vocabulary, "twin")

    @cached_property
    def _makers(self) -> dict[str, list[tuple[Rule, Scalar]]]:
        """The rules that conclude each judgement, with the value concluded."""
        makers: dict[str, list[tuple[Rule, Scalar]]] = defaultdict(list)
        for rule in self._book.rules.values():
            for fact, value in (rule.then.set or {}).items():
                makers[fact].append((rule, plain(value)))
        return makers

    def find(self, *rules: Rule) -> Facts | None:
        """Return facts on which all the rules fire, judgements traced back to what they rest on."""
        wanted: Demands | None = {}
        for rule in rules:
            wanted = together(wanted, self.demands(rule)) if wanted is not None else None
        if wanted is None:
            return None
        for roots in islice(self._traced_back(wanted, frozenset()), MOST_TRIES):
            if self._needs_what_must_be_unknown(roots):
                continue
            for facts in self._samples(roots):
                if self.confirms(facts, rules):
                    return facts
        return None

    def _needs_what_must_be_unknown(self, wanted: Demands) -> bool:
        """Whether a ratio is demanded although something it is computed from must not be known."""
        return any(
            need.any_of and any(base in wanted and wanted[base].missing for base in self._rests_on.get(name, ()))
            for name, need in wanted.items()
        )

    @cached_property
    def _rests_on(self) -> Mapping[str, frozenset[str]]:
        return rests_on(self._knowledge, self._vocabulary)

    def _traced_back(self, wanted: Demands, done: frozenset[str]) -> Iterator[Demands]:
        """Yield the demands with each judgement replaced by the demands of a rule that concludes it."""
        fact = next((name for name in wanted if name not in done and self._concluded(name, wanted[name])), None)
        if fact is None:
            yield {name: need for name, need in wanted.items() if self._vocabulary.facts[name].from_ != "rules"}
            return
        for maker, value in self._makers[fact]:
            if not wanted[fact].accepts(value):
                continue
            settled = {**wanted, fact: Demand(wanted[fact].several, (ValueSet(frozenset({value})),))}
            merged = together(settled, self.demands(maker))
            if merged is not None:
                yield from self._traced_back(merged, done | {fact})

    def _concluded(self, fact: str, need: Demand) -> bool:
        return self._vocabulary.facts[fact].from_ == "rules" and bool(need.any_of)

    def _samples(self, wanted: Demands) -> Iterator[Facts]:
        """Yield values for every fact that is demanded, then the same with one fact changed, as far as it may."""
        choices = {name: self._choices(name, need) for name, need in wanted.items() if need.any_of}
        first: Facts = {name: options[0] for name, options in choices.items() if options}
        yield first
        for name, options in choices.items():
            yield from ({**first, name: other} for other in options[1:])

    def _choices(self, name: str, need: Demand) -> list[Any]:
        """Return the values to try for one fact, the plainest first."""
        definition = self._vocabulary.facts[name]
        order = [plain(option) for option in definition.options if len(need.values) == 1 or option != ALONE]
        if need.several:
            chosen = [values.samples(order)[0] for values in need.values]
            return [tuple(dict.fromkeys(chosen))]
        low, high = definition.plausible or (-inf, inf)
        usual = need.values[0].meet(ValueSet(low=low, high=high)) if definition.kind == "number" else None
        return [*(usual.samples(order)[:1] if usual else []), *need.values[0].samples(order)]

    def confirms(self, facts: Facts, rules: Sequence[Rule]) -> bool:
        """Run the rules on the facts, after the rules that judge the job, and say whether all fire."""
        situation = self._situation(facts)
        stage = rules[0].stage
        if stage == "assume":
            return self._fires(Stage(rules, self._book, self._vocabulary, "twin"), situation, rules)
        if stage == "appraise":
            extra = [rule for rule in rules if not rule.then.set]
            judging = Stage([*self._appraise.rules.values(), *extra], self._book, self._vocabulary, "twin")
            return self._fires(judging if extra else self._appraise, situation, rules)
        self.judge(situation)
        return self._fires(Stage(rules, self._book, self._vocabulary, "twin"), situation, rules)

    def _situation(self, facts: Facts) -> Situation:
        """Return the facts as a job would have them: what can be looked up for others is, and goes before."""
        situation = Situation(self._vocabulary)
        ratios = [name for name, bases in self._rests_on.items() if name in facts and bases <= facts.keys()]
        if ratios:
            follows = computed(
                {name: facts[name] for name in facts if name not in ratios}, self._knowledge, self._vocabulary
            )
            facts = {**facts, **{name: follows[name] for name in ratios if name in follows}}
        for looked_up in (False, True):
            for name, value in facts.items():
                if (self._vocabulary.facts[name].from_ != "job") == looked_up:
                    situation.set(name, value, "given")
            if facts.get("machine.interface") in self._knowledge.interfaces and not looked_up:
                look_up_usual(situation, self._knowledge)
        return situation

    def judge(self, situation: Situation) -> None:
        """Add what the appraising rules conclude about the facts."""
        for firing in self._appraise.run(situation):
            for name, value in (self._appraise.rules[firing.rule].then.set or {}).items():
                situation.set(name, plain(value), "concluded", firing.rule)

    @staticmethod
    def _fires(stage: Stage, situation: Situation, rules: Sequence[Rule]) -> bool:
        fired = {firing.rule for firing in stage.run(situation)}
        return all(rule.id in fired for rule in rules)


def told(facts: Facts) -> str:
    """Return facts as a person reads them: 'work.stock_mm 4.5, work.feature slot'."""
    return ", ".join(f"{name} {_word(value)}" for name, value in sorted(facts.items())) or "no facts at all"


def _word(value: Any) -> str:
    if isinstance(value, tuple):
        return " and ".join(_word(item) for item in value)
    if isinstance(value, bool):
        return "yes" if value else "no"
    return f"{value:g}" if isinstance(value, int | float) else str(value)
