"""Forward chaining over flat facts: the one interface, and the pure-Python twin that defines its meaning.

A rule is a conjunction of tests, each on one fact. It fires once for every distinct choice of facts that meet its
tests; the facts its action makes are asserted in the same run. Two engines do this, the durable one
(``durable_session``, the default) and the twin below (the fallback, and the oracle in tests).

Firings come back in a canonical order that no engine, rule order or fact order can change: by depth (given facts
have depth 0, a firing lies one below the deepest fact it used), then by rule id, then by its facts. A fact made by
several firings is ``made`` by the first of them in this order and ``already_known`` to the rest, so that following
``made`` backwards always ends at given facts.
"""

from __future__ import annotations

import math
from collections import defaultdict, deque
from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass, field
from itertools import product
from operator import ge, gt, le, lt
from typing import ClassVar, Literal, Protocol, cast

from millreason.errors import OutOfRangeError, RuleActionError, RuleSetLimitError

Scalar = str | float | bool
Kind = Literal["value", "missing", "lacks"]
Op = Literal["eq", "ne", "lt", "le", "gt", "ge", "between", "in", "not_in"]
EngineName = Literal["durable", "twin"]
TypedValue = tuple[str, Scalar]

MOST_FIRINGS = 100_000
MOST_TESTS_PER_RULE = 16
MOST_RULES = 4_000
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
    raise TypeError(f"{name}: {value!r} is of type {type(value).__name__}; only text, numbers and bools can be facts.")


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


class RuleEngine(Protocol):
    """A compiled rule set; each run is a session of its own, and any thread may run it."""

    name: str

    def run(self, facts: Iterable[Fact], action: Action) -> list[Firing]:
        """Fire every rule on every choice of facts that meets it, and return the firings in canonical order."""

    def close(self) -> None:
        """Free what the compiled rules hold; the engine cannot run afterwards."""


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

    def met_by(self, value: Scalar) -> bool:
        """Say whether a fact of this subject with this value meets the test."""
        if self.op in ("eq", "in"):
            return typed(value) in self.values
        if self.op in ("ne", "not_in"):
            return typed(value) not in self.values
        if type(value) is not float:
            return False
        bounds = [cast(float, bound) for _, bound in self.values]
        if self.op == "between":
            return bounds[0] <= value <= bounds[1]
        return COMPARISONS[self.op](value, bounds[0])


@dataclass(frozen=True)
class RuleSet:
    """Checked rules, each as indices into the list of the distinct tests."""

    ids: tuple[str, ...]
    tests: tuple[CompiledTest, ...]
    conditions: tuple[tuple[int, ...], ...]
    subjects: frozenset[tuple[str, str]]


def compile_rules(rules: Sequence[InferenceRule]) -> RuleSet:
    """Check the rules against the limits common to all engines, and share equal tests."""
    if len(rules) > MOST_RULES:
        raise _limit("rule set", "rules", len(rules), MOST_RULES, "Split the rules into stages of their own.")
    numbers: dict[CompiledTest, int] = {}
    conditions: dict[str, tuple[int, ...]] = {}
    for rule in rules:
        if rule.id in conditions:
            raise RuleSetLimitError(f"rule {rule.id}: the id is used twice; each rule needs an id of its own.")
        if not rule.tests:
            raise RuleSetLimitError(f"rule {rule.id}: it has no test; at least 1 is needed. Add a condition.")
        if len(rule.tests) > MOST_TESTS_PER_RULE:
            remedy = "Conclude a named judgement in a first rule and test that."
            raise _limit(f"rule {rule.id}", "tests", len(rule.tests), MOST_TESTS_PER_RULE, remedy)
        compiled = (_compile_test(rule.id, test) for test in rule.tests)
        conditions[rule.id] = tuple(numbers.setdefault(test, len(numbers)) for test in compiled)
    subjects = frozenset(test.subject for test in numbers)
    return RuleSet(tuple(conditions), tuple(numbers), tuple(conditions.values()), subjects)


def _limit(where: str, what: str, found: int, most: int, remedy: str) -> RuleSetLimitError:
    return RuleSetLimitError(f"{where}: {found} {what}, but at most {most} are carried safely. {remedy}")


def _compile_test(rule: str, test: Test) -> CompiledTest:
    where = f"rule {rule}: {test.attribute} {test.op} {test.value!r}"
    given = test.value if isinstance(test.value, tuple) else (test.value,)
    values = [typed(scalar(value, f"rule {rule}: {test.attribute}")) for value in given]
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
        raise RuleSetLimitError(f"{where}: unknown operator; allowed are {', '.join(Op.__args__)}.")
    if len(values) != (2 if op == "between" else 1):
        raise RuleSetLimitError(f"{where}: {len(values)} bounds, but 'between' takes 2 and other comparisons 1.")
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
        self._known = set(self._given)
        self._fired: list[tuple[str, tuple[Fact, ...], tuple[Fact, ...]]] = []

    def opening_facts(self) -> list[Fact]:
        """Return the given facts that some rule looks at."""
        return self._looked_at(self._given)

    def fire(self, rule: int, facts: tuple[Fact, ...]) -> list[Fact]:
        """Run the action for a rule and return the new facts that some rule looks at."""
        rule_id = self._rules.ids[rule]
        if len(self._fired) >= MOST_FIRINGS:
            raise _limit(f"rule {rule_id}", "firings", MOST_FIRINGS + 1, MOST_FIRINGS, "Look for rules that feed themselves.")
        try:
            produced = dict.fromkeys(self._action(rule_id, facts))
        except Exception as cause:
            raise RuleActionError(rule_id, cause) from cause
        self._fired.append((rule_id, facts, tuple(produced)))
        new = [fact for fact in produced if fact not in self._known]
        self._known.update(new)
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


class TwinEngine:
    """The forward chainer in plain Python: every new fact is joined with the facts before it."""

    name = "twin"

    def __init__(self, rules: RuleSet) -> None:
        self._rules = rules
        self._equal: dict[tuple[str, ...], list[int]] = defaultdict(list)
        self._other: dict[tuple[str, str], list[int]] = defaultdict(list)
        self._uses: list[list[int]] = [[] for _ in rules.tests]
        for number, test in enumerate(rules.tests):
            if test.op in ("eq", "in"):
                for value in test.values:
                    self._equal[*test.subject, *value].append(number)  # type: ignore[index]
            else:
                self._other[test.subject].append(number)
        for rule, tests in enumerate(rules.conditions):
            for number in dict.fromkeys(tests):
                self._uses[number].append(rule)

    def run(self, facts: Iterable[Fact], action: Action) -> list[Firing]:
        """Fire every rule on every choice of facts that meets it."""
        ledger = Ledger(self._rules, facts, action)
        memory: list[list[Fact]] = [[] for _ in self._rules.tests]
        queue = deque(ledger.opening_facts())
        while queue:
            fact = queue.popleft()
            for rule, chosen in self._matches(fact, memory):
                queue.extend(ledger.fire(rule, chosen))
        return ledger.firings()

    def close(self) -> None:
        """Nothing is held outside Python."""

    def _met(self, fact: Fact) -> list[int]:
        others = self._other.get((fact.attribute, fact.kind), ())
        met = [number for number in others if self._rules.tests[number].met_by(fact.value)]
        return met + self._equal.get(fact.key, [])  # type: ignore[arg-type]

    def _matches(self, fact: Fact, memory: list[list[Fact]]) -> Iterator[tuple[int, tuple[Fact, ...]]]:
        met = self._met(fact)
        for number in met:
            memory[number].append(fact)
        for rule in dict.fromkeys(rule for number in met for rule in self._uses[number]):
            tests = self._rules.conditions[rule]
            if all(memory[number] for number in tests):
                for chosen in _choices(fact, [memory[number] for number in tests], [n in met for n in tests]):
                    yield rule, chosen


def _choices(fact: Fact, memories: list[list[Fact]], meets: list[bool]) -> Iterator[tuple[Fact, ...]]:
    """Yield each choice that uses the newest fact, once: the fact's first place decides."""
    for place, met in enumerate(meets):
        if met:
            pools = [
                (fact,) if at == place else (memory[:-1] if meets[at] and at < place else memory)
                for at, memory in enumerate(memories)
            ]
            yield from product(*pools)


def engine_names() -> tuple[EngineName, ...]:
    """Return the engines that work here, the preferred one first."""
    try:
        import durable_rules_engine  # noqa: F401
    except ImportError:
        return ("twin",)
    return ("durable", "twin")


def make_engine(rules: Sequence[InferenceRule], prefer: EngineName | None = None) -> RuleEngine:
    """Compile the rules for the preferred engine; without a preference, for the best that works here."""
    compiled = compile_rules(rules)
    if (prefer or engine_names()[0]) == "twin":
        return TwinEngine(compiled)
    from millreason.durable_session import DurableEngine

    return DurableEngine(compiled)
