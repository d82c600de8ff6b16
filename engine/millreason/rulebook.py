"""The rules: their shape in YAML, loading with located errors, and their form for the inference engine."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Annotated, Any, Literal

from pydantic import BaseModel, ConfigDict, Field, model_validator

from millreason.errors import DataError, Finding, did_you_mean
from millreason.inference import InferenceRule, Test
from millreason.provenance import Basis
from millreason.vocabulary import FactDefinition, Vocabulary
from millreason.yaml_source import Document, read_model, read_yaml

Stage = Literal["assume", "appraise", "weigh", "judge", "caution"]
STAGES: tuple[Stage, ...] = ("assume", "appraise", "weigh", "judge", "caution")
Scalar = str | float | bool
PLACEHOLDER = re.compile(r"\{([a-z_]+\.[a-z_0-9.]+)\}")


class _Strict(BaseModel):
    model_config = ConfigDict(extra="forbid", frozen=True, strict=True)


class TestSpec(_Strict):
    """The long form of one condition; the short forms are a value (equals) or a list (one of)."""

    __test__ = False

    equals: Scalar | None = None
    one_of: list[Scalar] | None = None
    none_of: list[Scalar] | None = None
    at_least: float | None = None
    at_most: float | None = None
    above: float | None = None
    below: float | None = None
    between: Annotated[list[float], Field(min_length=2, max_length=2)] | None = None
    known: bool | None = None
    lacks: Scalar | None = None

    @model_validator(mode="after")
    def _only_one(self) -> TestSpec:
        given = [name for name, value in self if value is not None]
        if len(given) != 1:
            raise ValueError(f"a condition holds exactly one test, found {', '.join(given) or 'none'}")
        return self


Condition = Scalar | list[Scalar] | TestSpec


class RejectSpec(_Strict):
    """A limit that a candidate breaks: its key, the value and what it is held against, and what could be relaxed."""

    limit: str
    value: str
    against: str | float | None = None
    relax: list[str] = Field(default_factory=list)


class CautionSpec(_Strict):
    """A caution: its key, how grave it is and what to do."""

    key: str
    severity: Literal["note", "caution", "warning"]
    do: str


class Conclusion(_Strict):
    """What a rule concludes: exactly one thing, with a strength (for, against) or the limit it rests on (rule_out)."""

    assume: dict[str, Scalar | dict[Literal["fact"], str]] | None = None
    ask: str | None = None
    need: Literal["must", "useful"] | None = None
    set: dict[str, Scalar] | None = None
    adjust: dict[str, float] | None = None
    refuse: RejectSpec | None = None
    condition: str | None = None
    for_: dict[str, Scalar | list[Scalar]] | None = Field(default=None, alias="for")
    against: dict[str, Scalar | list[Scalar]] | None = None
    rule_out: dict[str, Scalar | list[Scalar]] | None = None
    limit: RejectSpec | None = None
    strength: str | None = None
    reject: RejectSpec | None = None
    lower: str | None = None
    caution: CautionSpec | None = None
    offer: str | None = None

    @property
    def kind(self) -> str:
        """Name of the one thing concluded."""
        return next(name for name in _KINDS if getattr(self, name) is not None)

    @model_validator(mode="after")
    def _only_one(self) -> Conclusion:
        given = [name for name in _KINDS if getattr(self, name) is not None]
        if len(given) != 1:
            raise ValueError(f"a rule concludes exactly one thing, found {', '.join(given) or 'none'}")
        if (self.strength is not None) != (given[0] in ("for_", "against")):
            raise ValueError("'strength' goes with 'for' and 'against', and only with them")
        if self.limit is not None and given[0] != "rule_out":
            raise ValueError("'limit' names what a 'rule_out' rests on, and goes only with it")
        if (self.need is not None) != (given[0] == "ask"):
            raise ValueError("'need' (must or useful) goes with 'ask', and only with it")
        return self


_KINDS = ("assume", "ask", "set", "adjust", "refuse", "condition", "for_", "against", "rule_out", "reject", "lower", "caution", "offer")
_ALLOWED_IN: dict[str, tuple[str, ...]] = {
    "assume": ("assume", "ask"),
    "appraise": ("set", "adjust", "refuse", "condition", "ask"),
    "weigh": ("for_", "against", "rule_out"),
    "judge": ("reject", "lower"),
    "caution": ("caution", "offer"),
}


class Rule(_Strict):
    """One rule of the trade."""

    id: Annotated[str, Field(pattern=r"^[A-Z]{2,4}-\d{3}$")]
    name: Annotated[str, Field(pattern=r"^[a-z0-9]+(-[a-z0-9]+)*$")]
    says: str
    stage: Stage
    when: dict[str, Condition]
    then: Conclusion
    why: str
    basis: Basis
    answers: list[int | str] = Field(default_factory=list)

    @property
    def implied_missing(self) -> tuple[str, ...]:
        """Facts that an assumption or a question silently needs to be unknown."""
        targets = [*(self.then.assume or {}), *([self.then.ask] if self.then.ask else [])]
        return tuple(fact for fact in targets if fact not in self.when)

    @property
    def about_size(self) -> bool:
        """Whether the rule weighs one diameter of the series."""
        return any(fact.startswith("size.") for fact in self.when)


class RuleFile(_Strict):
    """One file of rules on one topic."""

    topic: str
    rules: list[Rule]


@dataclass(frozen=True)
class RuleBook:
    """All rules, by id in the order of the files, with the file and line of each."""

    rules: Mapping[str, Rule]
    places: Mapping[str, str]
    topics: Mapping[str, str]
    from_shop: frozenset[str] = frozenset()

    def stage(self, stage: Stage, about_size: bool = False) -> list[Rule]:
        """Return the rules of one stage; those on single diameters apart."""
        return [rule for rule in self.rules.values() if rule.stage == stage and rule.about_size == about_size]


def load_rules(root: Path, vocabulary: Vocabulary, shop: Path | None = None, sources: Iterable[str] | None = None,
               strengths: Iterable[str] | None = None) -> RuleBook:  # fmt: skip
    """Load every rule file below a data root and a shop's folder, and check each rule against the vocabulary.

    Raises
    ------
    DataError
        with all findings of all files at once.
    """
    findings: list[Finding] = []
    rules: dict[str, Rule] = {}
    places: dict[str, str] = {}
    topics: dict[str, str] = {}
    from_shop: set[str] = set()
    checker = _Checker(vocabulary, sources, strengths)
    folders = [(root / "rules", "rules")] + ([(shop / "rules", f"{shop.name}/rules")] if shop else [])
    for folder, shown in folders:
        for path in sorted(folder.glob("*.yaml")):
            try:
                document = read_yaml(path, f"{shown}/{path.name}")
                content = read_model(document, RuleFile)
            except DataError as problem:
                findings.extend(problem.findings)
                continue
            for number, rule in enumerate(content.rules):
                key = ("rules", number)
                if rule.id in rules:
                    findings.append(document.finding(key, f"the id is taken by {places[rule.id]}. Take a new one.", rule.id))
                    continue
                findings.extend(checker.check(document, key, rule))
                rules[rule.id] = rule
                places[rule.id] = f"{document.name}:{document.line(key)}"
                topics[rule.id] = content.topic
                if shop and folder != root / "rules":
                    from_shop.add(rule.id)
    if findings:
        raise DataError(findings)
    return RuleBook(rules, places, topics, frozenset(from_shop))


class _Checker:
    """Holds one rule against the vocabulary, the sources and the strengths."""

    def __init__(self, vocabulary: Vocabulary, sources: Iterable[str] | None, strengths: Iterable[str] | None) -> None:
        self._facts = vocabulary.facts
        self._picks = vocabulary.picks
        self._adjustables = vocabulary.adjustables
        self._sources = None if sources is None else set(sources)
        self._strengths = None if strengths is None else set(strengths)

    def check(self, document: Document, key: tuple[str | int, ...], rule: Rule) -> list[Finding]:
        found: list[Finding] = []

        def say(part: tuple[str | int, ...], message: str) -> None:
            found.append(document.finding(key + part, message, f"{rule.id} {'.'.join(map(str, part))}"))

        if not rule.when:
            say(("when",), "has no condition. A rule that always holds is a value of the knowledge.")
        for fact, condition in rule.when.items():
            for message in self._condition(fact, condition):
                say(("when", fact), message)
        kind = rule.then.kind
        if kind not in _ALLOWED_IN[rule.stage]:
            allowed = ", ".join(name.rstrip("_") for name in _ALLOWED_IN[rule.stage])
            say(("then",), f"{kind.rstrip('_')!r} is not concluded in stage {rule.stage!r}. Allowed there: {allowed}.")
        for message in self._conclusion(rule.then):
            say(("then",), message)
        for text in (rule.says, rule.why, rule.then.offer or "", rule.then.caution.do if rule.then.caution else ""):
            for fact in PLACEHOLDER.findall(text):
                if fact not in self._facts:
                    say(("why",), f"names the unknown fact {fact!r}.{did_you_mean(fact, self._facts)}")
        source = rule.basis.cited.source if rule.basis.cited else None
        if source and self._sources is not None and source not in self._sources:
            hint = did_you_mean(source, self._sources)
            say(("basis", "cited"), f"unknown source {source!r}.{hint} Sources are in knowledge/sources.yaml.")
        return found

    def _condition(self, fact: str, condition: Condition) -> Iterable[str]:
        definition = self._facts.get(fact)
        if definition is None:
            yield f"unknown fact.{did_you_mean(fact, self._facts)} Facts are in knowledge/vocabulary.yaml."
            return
        for value in tested_values(condition):
            yield from self._value(definition, value)

    def _value(self, definition: FactDefinition, value: Scalar) -> Iterable[str]:
        if definition.kind in ("number", "numbers"):
            if isinstance(value, bool) or not isinstance(value, int | float):
                yield f"{value!r} is not a number, but the fact is one in {definition.unit or 'no unit'}."
            elif definition.range and not definition.range[0] <= value <= definition.range[1]:
                yield f"{value} lies outside the range of the fact, {definition.range[0]:g} to {definition.range[1]:g}."
        elif definition.kind in ("choice", "choices"):
            if value not in definition.options:
                yield f"{value!r} is no option.{did_you_mean(str(value), map(str, definition.options))} Options: {', '.join(map(str, definition.options))}."
        elif definition.kind == "flag" and not isinstance(value, bool):
            yield f"{value!r} is neither true nor false."

    def _conclusion(self, then: Conclusion) -> Iterable[str]:
        for fact, value in {**(then.assume or {}), **(then.set or {})}.items():
            source = value.get("fact") if isinstance(value, dict) else None
            if fact not in self._facts:
                yield f"unknown fact {fact!r}.{did_you_mean(fact, self._facts)}"
            elif source is not None:
                if source not in self._facts:
                    yield f"unknown fact {source!r}.{did_you_mean(source, self._facts)}"
            elif not isinstance(value, dict):
                yield from (f"{fact}: {message}" for message in self._value(self._facts[fact], value))
        for fact in filter(None, (then.ask, then.condition)):
            definition = self._facts.get(fact)
            if definition is None or definition.ask is None:
                yield f"{fact!r} is no fact with a question in the vocabulary.{did_you_mean(fact, self._facts)}"
        for name in then.adjust or {}:
            if name not in self._adjustables:
                yield f"unknown adjustable {name!r}.{did_you_mean(name, self._adjustables)}"
        for pick, options in {**(then.for_ or {}), **(then.against or {}), **(then.rule_out or {})}.items():
            if pick not in self._picks:
                yield f"unknown pick {pick!r}.{did_you_mean(pick, self._picks)}"
                continue
            if self._picks[pick].options:
                for option in options if isinstance(options, list) else [options]:
                    if option not in self._picks[pick].options:
                        yield f"{pick}: {option!r} is no option. Options: {', '.join(map(str, self._picks[pick].options))}."
        strength = then.strength or then.lower
        if strength and self._strengths is not None and strength not in self._strengths:
            yield f"unknown strength {strength!r}. Strengths are in knowledge/strengths.yaml: {', '.join(sorted(self._strengths))}."
        yield from self._limit(then.reject or then.refuse or then.limit)

    def _limit(self, spec: RejectSpec | None) -> Iterable[str]:
        if spec is None:
            return
        if spec.limit not in self._facts["answer.limits"].options:
            yield f"unknown limit {spec.limit!r}. Limits are the options of answer.limits in the vocabulary."
        for fact in (spec.value, spec.against, *spec.relax):
            if isinstance(fact, str) and fact not in self._facts:
                yield f"unknown fact {fact!r}.{did_you_mean(fact, self._facts)}"


def tested_values(condition: Condition) -> list[Scalar]:
    """Return every value that a condition compares with."""
    if isinstance(condition, list):
        return condition
    if not isinstance(condition, TestSpec):
        return [condition]
    values: list[Scalar] = []
    for name, value in condition:
        if value is not None and name != "known":
            values.extend(value if isinstance(value, list) else [value])
    return values


def compile_rules(rules: Iterable[Rule]) -> list[InferenceRule]:
    """Turn rules into the form the inference engine runs."""
    return [
        InferenceRule(rule.id, (*(_test(*entry) for entry in rule.when.items()), *(Test(fact, "eq", "", "missing") for fact in rule.implied_missing)))
        for rule in rules
    ]


_OPERATORS: dict[str, Any] = {"equals": "eq", "at_least": "ge", "at_most": "le", "above": "gt", "below": "lt"}


def _test(fact: str, condition: Condition) -> Test:
    if isinstance(condition, list):
        return Test(fact, "in", tuple(_scalar(value) for value in condition))
    if not isinstance(condition, TestSpec):
        return Test(fact, "eq", _scalar(condition))
    name, value = next((name, value) for name, value in condition if value is not None)
    if name == "known":
        return Test(fact, "eq", True, kind="known") if value else Test(fact, "eq", "", kind="missing")
    if name == "lacks":
        return Test(fact, "eq", _scalar(value), kind="lacks")
    if name in ("one_of", "none_of", "between"):
        operator: Any = {"one_of": "in", "none_of": "not_in", "between": "between"}[name]
        return Test(fact, operator, tuple(_scalar(item) for item in value))
    return Test(fact, _OPERATORS[name], _scalar(value))


def _scalar(value: Scalar) -> Scalar:
    return float(value) if isinstance(value, int) and not isinstance(value, bool) else value


def describe(fact: str, condition: Condition) -> str:
    """Return a condition as a person reads it: 'plan.hex_mm below 0.1'."""
    if isinstance(condition, list):
        return f"{fact} is one of {', '.join(map(str, condition))}"
    if not isinstance(condition, TestSpec):
        return f"{fact} is {_word(condition)}"
    name, value = next((name, value) for name, value in condition if value is not None)
    if name == "known":
        return f"{fact} is {'known' if value else 'not known'}"
    if isinstance(value, list):
        joined = " and ".join(map(str, value)) if name == "between" else ", ".join(map(str, value))
        return f"{fact} {name.replace('_', ' ')} {joined}"
    return f"{fact} {name.replace('_', ' ')} {_word(value)}"


def _word(value: object) -> str:
    return {True: "yes", False: "no"}[value] if isinstance(value, bool) else str(value)
