"""The rules: their shape in YAML, loading with located errors, and their form for the inference engine."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Annotated, Any, Literal

from pydantic import BaseModel, ConfigDict, Field, model_validator

from millreason.errors import DataError, Finding
from millreason.inference import InferenceRule, Test
from millreason.provenance import Basis
from millreason.vocabulary import Vocabulary
from millreason.yaml_source import read_model, read_yaml

Stage = Literal["assume", "appraise", "weigh", "judge", "caution"]
STAGES: tuple[Stage, ...] = ("assume", "appraise", "weigh", "judge", "caution")
Scalar = str | float | bool
# {fact.name} prints the value with its unit, {fact.name%} a ratio as a percentage.
PLACEHOLDER = re.compile(r"\{([a-z_]+\.[a-z_0-9.]+)%?\}")


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


_KINDS = (
    "assume",
    "ask",
    "set",
    "adjust",
    "refuse",
    "condition",
    "for_",
    "against",
    "rule_out",
    "reject",
    "lower",
    "caution",
    "offer",
)


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
    from millreason.rule_checker import RuleChecker

    checker = RuleChecker(vocabulary, sources, strengths)
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
                    findings.append(
                        document.finding(key, f"the id is taken by {places[rule.id]}. Take a new one.", rule.id)
                    )
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
        InferenceRule(
            rule.id,
            (
                *(_test(*entry) for entry in rule.when.items()),
                *(Test(fact, "eq", "", "missing") for fact in rule.implied_missing),
            ),
        )
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
