"""One stage of rules on one situation: run the engine, and turn firings into records and conclusions."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass

from millreason.facts import Situation, basis_record, subjects_of
from millreason.inference import Fact, Firing, RuleEngine, make_engine
from millreason.rulebook import PLACEHOLDER, Conclusion, RejectSpec, Rule, RuleBook, compile_rules, describe
from millreason.trace import ConditionRecord, FiringRecord, LimitRecord, Plain
from millreason.units import show
from millreason.vocabulary import Vocabulary

_WORDS = re.compile(r"_+")


class Stage:
    """The rules of one stage, compiled once; it may run on any number of situations."""

    def __init__(self, rules: Iterable[Rule], book: RuleBook, vocabulary: Vocabulary, engine: str | None) -> None:
        self.rules: dict[str, Rule] = {rule.id: rule for rule in rules}
        self._book = book
        self._vocabulary = vocabulary
        compiled = compile_rules(self.rules.values())
        self._subjects = subjects_of(compiled)
        self._engine: RuleEngine | None = make_engine(compiled, prefer=engine) if compiled else None  # type: ignore[arg-type]

    @property
    def engine_name(self) -> str:
        """Name of the inference engine that runs the stage."""
        return self._engine.name if self._engine is not None else "none"

    def run(self, situation: Situation) -> list[Firing]:
        """Fire the rules on a situation and return one firing a rule, in canonical order."""
        if self._engine is None:
            return []
        firings = self._engine.run(
            situation.for_inference(self._subjects), lambda rule, _: self._facts_made(rule, situation)
        )
        seen: dict[str, Firing] = {}
        for firing in firings:
            seen.setdefault(firing.rule, firing)
        return list(seen.values())

    def _facts_made(self, rule: str, situation: Situation) -> Iterator[Fact]:
        """Yield the facts that a firing makes for other rules of the same stage."""
        then = self.rules[rule].then
        for name, value in {**(then.assume or {}), **(then.set or {})}.items():
            settled = situation.value(value["fact"]) if isinstance(value, dict) else value
            if settled is not None:
                yield from (Fact(name, item) for item in (settled if isinstance(settled, tuple) else (settled,)))

    def record(self, firing: Firing, situation: Situation, system: str, about: str = "") -> FiringRecord:
        """Return the record of a firing, its texts filled with the values of the situation."""
        rule = self.rules[firing.rule]
        conditions = [
            self._condition(rule, fact, test, situation) for fact, test in zip(firing.facts, _tests(rule), strict=True)
        ]
        return FiringRecord(
            rule.id, rule.name.replace("-", " "), rule.stage, fill(rule.says, situation, self._vocabulary, system),
            fill(rule.why, situation, self._vocabulary, system), conditions, conclusion_text(rule.then),
            basis_record(rule.basis), about, rule.id in self._book.from_shop,
        )  # fmt: skip

    def why(self, rule: str, situation: Situation, system: str) -> str:
        """Return a rule's reason, filled with the values of the situation."""
        return fill(self.rules[rule].why, situation, self._vocabulary, system)

    def limit(self, rule: str, spec: RejectSpec, situation: Situation, system: str) -> LimitRecord:
        """Return the record of a limit that a rule names."""
        against = situation.value(spec.against) if isinstance(spec.against, str) else spec.against
        value = plain_value(situation.value(spec.value))
        why, unit = self.why(rule, situation, system), self._vocabulary.facts[spec.value].unit
        return LimitRecord(spec.limit, why, value, plain_value(against), rule, list(spec.relax), unit=unit)

    def _condition(self, rule: Rule, fact: Fact, test: str, situation: Situation) -> ConditionRecord:
        record = situation.record(fact.attribute)
        if fact.kind != "value":
            return ConditionRecord(
                fact.attribute,
                test,
                None if fact.kind == "missing" else fact.value,
                record.origin if record else "absent",
            )
        return ConditionRecord(fact.attribute, test, fact.value, record.origin if record else "concluded")


def _tests(rule: Rule) -> list[str]:
    """Return the conditions of a rule in words, in the order in which the engine tests them."""
    texts = [describe(fact, condition) for fact, condition in rule.when.items()]
    return texts + [f"{fact} is not known" for fact in rule.implied_missing]


def fill(text: str, situation: Situation, vocabulary: Vocabulary, system: str) -> str:
    """Fill {fact} placeholders with values and units; a fact that is not known is said to be so."""

    def value_of(match: re.Match[str]) -> str:
        name = match.group(1)
        value = situation.value(name)
        definition = vocabulary.facts[name]
        if value is None:
            return "an unknown value"
        if match.group(0).endswith("%}"):
            return shown(value * 100, "percent", system)
        return shown(value, definition.unit, system)

    return PLACEHOLDER.sub(value_of, text)


def shown(value: object, unit: str, system: str) -> str:
    """Return a value as a person reads it."""
    if isinstance(value, bool):
        return "yes" if value else "no"
    if isinstance(value, tuple | list):
        return ", ".join(shown(item, unit, system) for item in value)
    if isinstance(value, int | float):
        return show(float(value), unit, system)
    return _WORDS.sub(" ", str(value))


def conclusion_text(then: Conclusion) -> str:
    """Return what a rule concludes in words."""
    pairs: Mapping[str, object] | None
    if then.for_ or then.against or then.rule_out:
        verb = "speaks for" if then.for_ else "speaks against" if then.against else "rules out"
        pairs = then.for_ or then.against or then.rule_out or {}
        strength = f" ({then.strength})" if then.strength else ""
        return f"{verb} {_pairs(pairs)}{strength}"
    if then.assume or then.set:
        return f"{'assumes' if then.assume else 'concludes'} {_pairs(then.assume or then.set or {})}"
    if then.adjust:
        return f"tunes {_pairs(then.adjust)}"
    if then.ask:
        return f"asks for {then.ask} ({then.need})"
    if then.condition:
        return f"holds the data back until {then.condition} is confirmed"
    if then.reject or then.refuse:
        spec = then.reject or then.refuse
        return f"{'rejects' if then.reject else 'refuses'}: limit {spec.limit.replace('_', ' ')}" if spec else ""
    if then.lower:
        return f"lowers the candidate ({then.lower})"
    if then.caution:
        return f"{then.caution.severity}: {then.caution.key.replace('_', ' ')}"
    return "offers another way"


def _pairs(pairs: Mapping[str, object]) -> str:
    return "; ".join(f"{name.replace('_', ' ')} {_item(value)}" for name, value in pairs.items())


def _item(value: object) -> str:
    if isinstance(value, dict):
        return f"as {value['fact']}"
    if isinstance(value, list):
        return " or ".join(_item(item) for item in value)
    if isinstance(value, bool):
        return "yes" if value else "no"
    return str(value).replace("_", " ") if isinstance(value, str) else f"{value:g}"


def plain_value(value: object) -> Plain:
    """Return a fact's value as JSON holds it."""
    return list(value) if isinstance(value, tuple) else value  # type: ignore[return-value]


@dataclass
class Tuning:
    """The adjustables that rules have tuned, each with the rules that did."""

    how: Mapping[str, str]
    values: dict[str, float]
    rules: dict[str, list[str]]

    def apply(self, rule: str, changes: Mapping[str, float]) -> None:
        """Combine a rule's changes with those before: factors multiply, least and most keep the strictest."""
        for name, value in changes.items():
            before = self.values.get(name)
            if before is None:
                self.values[name] = value
            elif self.how[name] == "factor":
                self.values[name] = before * value
            else:
                self.values[name] = max(before, value) if self.how[name] == "at_least" else min(before, value)
            self.rules.setdefault(name, []).append(rule)
