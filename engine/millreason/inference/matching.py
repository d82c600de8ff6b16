"""What every inference engine shares: facts, tests and rules, the limits on them, and the record of a run.

A run's ledger holds what is known, calls the actions, and puts the firings into a canonical order that no
engine, rule order or fact order can change: by depth (given facts have depth 0, a firing lies one below the
deepest fact it used), then by rule id, then by its facts. A fact that several firings produce is ``made`` by
the first of them in this order and ``already_known`` to the rest, so that following ``made`` backwards always
ends at given facts.
"""

from __future__ import annotations

import math
from collections import Counter, defaultdict
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, field
from itertools import chain
from operator import ge, gt, le, lt
from typing import ClassVar, Literal, cast, get_args

from millreason.errors import OutOfRangeError, RuleActionError, RuleSetLimitError

Scalar = str | float | bool
Kind = Literal["value", "missing", "lacks", "known"]
Op = Literal["eq", "ne", "lt", "le", "gt", "ge", "between", "in", "not_in"]
TypedValue = tuple[str, Scalar]

MOST_RULES = 4_000
MOST_TESTS = 4_000
MOST_TESTS_PER_RULE = 16
MOST_TESTS_PER_ATTRIBUTE = 200
MOST_USES_PER_TEST = 4_000
MOST_FACTS = 20_000
MOST_FIRINGS = 20_000
COMPARISONS: dict[str, Callable[[float, float], bool]] = {"lt": lt, "le": le, "gt": gt, "ge": ge}
SINGLE = ("eq", "ne")
SETS = ("in", "not_in")


def scalar(value: object, name: str = "value") -> Scalar:
    """Return the value as text, finite float or bool; integers become floats, -0 becomes 0."""
    if isinstance(value, bool):
        return value
    if isinstance(value, str):
        return str.__str__(value)
    if isinstance(value, int | float):
        try:
            number = float(value) + 0.0
        except OverflowError:
            number = math.inf
        if math.isfinite(number):
            return number
        raise OutOfRangeError(name, value, "a finite number")
    found = type(value).__name__
    raise TypeError(f"{name}: {value!r} is of type {found}; only text, numbers and bools can be facts.")


def typed(value: Scalar) -> TypedValue:
    """Pair a scalar with its type, so that True is not 1.0 and '3' is not 3."""
    return type(value).__name__, value


@dataclass(frozen=True, eq=False)
class Fact:
    """An attribute and a value; or that the attribute is not known, or does not hold that value."""

    attribute: str
    value: Scalar
    kind: Kind = "value"
    key: tuple[str, str, str, Scalar] = field(init=False, repr=False)

    def __post_init__(self) -> None:
        value = scalar(self.value, self.attribute)
        object.__setattr__(self, "value", value)
        object.__setattr__(self, "key", (self.attribute, self.kind, *typed(value)))

    def __eq__(self, other: object) -> bool:
        return isinstance(other, Fact) and self.key == other.key

    def __hash__(self) -> int:
        return hash(self.key)

    def __lt__(self, other: Fact) -> bool:
        return self.key < other.key


@dataclass(frozen=True)
class Test:
    """One condition on one fact; it holds if some fact of this attribute and kind meets it."""

    __test__: ClassVar[bool] = False  # its name must not make test runners collect it

    attribute: str
    op: Op
    value: Scalar | tuple[Scalar, ...]
    kind: Kind = "value"


@dataclass(frozen=True)
class InferenceRule:
    """A rule as the engines see it: an id and a conjunction of tests."""

    id: str
    tests: tuple[Test, ...]


@dataclass(frozen=True)
class Firing:
    """One firing: the fact that met each test, in order, and what became of the facts it produced."""

    rule: str
    facts: tuple[Fact, ...]
    made: tuple[Fact, ...]
    already_known: tuple[Fact, ...]


Action = Callable[[str, tuple[Fact, ...]], Iterable[Fact]]


@dataclass(frozen=True)
class CompiledTest:
    """A checked test; equal conditions in different rules compare equal."""

    attribute: str
    kind: str
    op: str
    values: tuple[TypedValue, ...]

    @property
    def subject(self) -> tuple[str, str]:
        """The attribute and kind of the facts that it looks at."""
        return self.attribute, self.kind

    def predicate(self) -> Callable[[Fact], bool]:
        """Return a function that says whether a fact of this subject meets the test."""
        values = frozenset(self.values)
        if self.op in ("eq", "in"):
            return lambda fact: fact.key[2:] in values
        if self.op in ("ne", "not_in"):
            return lambda fact: fact.key[2:] not in values
        low, high = (cast(float, self.values[place][1]) for place in (0, -1))
        if self.op == "between":
            return lambda fact: type(fact.value) is float and low <= fact.value <= high
        compare = COMPARISONS[self.op]
        return lambda fact: type(fact.value) is float and compare(fact.value, low)


@dataclass(frozen=True)
class RuleSet:
    """Checked rules, each as indices into the list of the distinct tests."""

    ids: tuple[str, ...]
    tests: tuple[CompiledTest, ...]
    conditions: tuple[tuple[int, ...], ...]
    subjects: frozenset[tuple[str, str]]


def compile_rules(rules: Sequence[InferenceRule]) -> RuleSet:
    """Check the rules against the limits common to all engines, and share equal tests."""
    _check_limit("rule set", "rules", len(rules), MOST_RULES)
    numbers: dict[CompiledTest, int] = {}
    conditions: dict[str, tuple[int, ...]] = {}
    for rule in rules:
        if rule.id in conditions:
            raise RuleSetLimitError(f"rule {rule.id}: the id is used twice. Give each rule an id of its own.")
        if not rule.tests:
            raise RuleSetLimitError(f"rule {rule.id}: 0 tests, but at least 1 is needed. Add a condition.")
        _check_limit(f"rule {rule.id}", "tests", len(rule.tests), MOST_TESTS_PER_RULE)
        compiled = (_compile_test(rule.id, test) for test in rule.tests)
        conditions[rule.id] = tuple(numbers.setdefault(test, len(numbers)) for test in compiled)
    _check_limit("rule set", "different tests", len(numbers), MOST_TESTS)
    _check_crowding(tuple(numbers), conditions.values())
    subjects = frozenset(test.subject for test in numbers)
    return RuleSet(tuple(conditions), tuple(numbers), tuple(conditions.values()), subjects)


REMEDIES = {
    "rules": "Split the rules into stages of their own.",
    "different tests": "Split the rules into stages of their own.",
    "tests": "Conclude a named judgement in a rule of its own, and test that.",
    "different tests on it": "Conclude a few named classes from it first, and test those.",
    "uses": "Conclude a named judgement from it first, and test that.",
    "facts": "Look for rules that feed themselves, or split the work into several runs.",
    "firings": "Look for rules that feed themselves, or that pair many facts.",
}


def _check_limit(where: str, what: str, found: int, most: int) -> None:
    if found > most:
        message = f"{where}: {found} {what}, but at most {most} are carried safely. {REMEDIES[what]}"
        raise RuleSetLimitError(message)


def _check_crowding(tests: Sequence[CompiledTest], conditions: Iterable[tuple[int, ...]]) -> None:
    for (attribute, _), count in Counter(test.subject for test in tests).items():
        _check_limit(f"attribute {attribute}", "different tests on it", count, MOST_TESTS_PER_ATTRIBUTE)
    for number, count in Counter(chain.from_iterable(conditions)).items():
        test = tests[number]
        where = f"test {test.attribute} {test.op} {', '.join(str(value) for _, value in test.values)}"
        _check_limit(where, "uses", count, MOST_USES_PER_TEST)


def _compile_test(rule: str, test: Test) -> CompiledTest:
    where = f"rule {rule}: {test.attribute} {test.op} {test.value!r}"
    given = test.value if isinstance(test.value, tuple) else (test.value,)
    try:
        values = [typed(scalar(value, test.attribute)) for value in given]
    except (TypeError, OutOfRangeError) as cause:
        raise RuleSetLimitError(f"{where}: {cause}") from cause
    if test.op in SINGLE and (len(values) != 1 or isinstance(test.value, tuple)):
        raise RuleSetLimitError(f"{where}: it takes one value. Use 'in' or 'not_in' for several.")
    if test.op in SETS:
        values = sorted(set(values))
        if not values:
            raise RuleSetLimitError(f"{where}: the list is empty; at least 1 value is needed. Add one.")
    elif test.op not in SINGLE:
        _check_bounds(where, test.op, values)
    return CompiledTest(test.attribute, test.kind, test.op, tuple(values))


def _check_bounds(where: str, op: str, values: list[TypedValue]) -> None:
    if op not in COMPARISONS and op != "between":
        raise RuleSetLimitError(f"{where}: unknown operator; allowed are {', '.join(get_args(Op))}.")
    if len(values) != (2 if op == "between" else 1):
        raise RuleSetLimitError(f"{where}: {len(values)} bounds; 'between' takes 2, other comparisons 1.")
    if any(kind != "float" for kind, _ in values):
        raise RuleSetLimitError(f"{where}: only numbers have an order. Use 'eq', 'in' or their opposites.")
    if values != sorted(values):
        raise RuleSetLimitError(f"{where}: the lower bound lies above the upper. Swap them.")


class Ledger:
    """What one run knows and has fired; the same for every engine."""

    def __init__(self, rules: RuleSet, facts: Iterable[Fact], action: Action) -> None:
        self._rules = rules
        self._action = action
        self._given = dict.fromkeys(facts)
        _check_limit("run", "facts", len(self._given), MOST_FACTS)
        self._known = set(self._given)
        self._fired: list[tuple[str, tuple[Fact, ...], tuple[Fact, ...]]] = []

    def opening_facts(self) -> list[Fact]:
        """Return the given facts that some rule looks at."""
        return self._looked_at(self._given)

    def fire(self, rule: int, facts: tuple[Fact, ...]) -> list[Fact]:
        """Run the action for a rule and return the new facts that some rule looks at."""
        rule_id = self._rules.ids[rule]
        _check_limit(f"rule {rule_id}", "firings", len(self._fired) + 1, MOST_FIRINGS)
        try:
            produced = dict.fromkeys(self._action(rule_id, facts))
        except Exception as cause:
            raise RuleActionError(rule_id, cause) from cause
        self._fired.append((rule_id, facts, tuple(produced)))
        new = [fact for fact in produced if fact not in self._known]
        self._known.update(new)
        _check_limit(f"rule {rule_id}", "facts", len(self._known), MOST_FACTS)
        return self._looked_at(new)

    def _looked_at(self, facts: Iterable[Fact]) -> list[Fact]:
        subjects = self._rules.subjects
        return [fact for fact in facts if (fact.attribute, fact.kind) in subjects]

    def firings(self) -> list[Firing]:
        """Return what has fired in canonical order."""
        known = set(self._given)
        waiting: dict[Fact, list[int]] = defaultdict(list)
        lacking = []
        for index, (_, facts, _) in enumerate(self._fired):
            unmet = set(facts) - known
            lacking.append(len(unmet))
            for fact in unmet:
                waiting[fact].append(index)
        ready = [index for index, count in enumerate(lacking) if not count]
        firings: list[Firing] = []
        while ready:
            ready.sort(key=lambda index: self._fired[index][:2])
            made = [fact for index in ready for fact in self._settle(index, known, firings)]
            ready = []
            for fact in made:
                for index in waiting[fact]:
                    lacking[index] -= 1
                    if not lacking[index]:
                        ready.append(index)
        return firings

    def _settle(self, index: int, known: set[Fact], firings: list[Firing]) -> tuple[Fact, ...]:
        rule_id, facts, produced = self._fired[index]
        made = tuple(fact for fact in produced if fact not in known)
        known.update(made)
        firings.append(Firing(rule_id, facts, made, tuple(fact for fact in produced if fact not in made)))
        return made
