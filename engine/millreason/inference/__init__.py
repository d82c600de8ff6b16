"""Forward chaining over flat facts: the one interface, and the pure-Python twin that defines its meaning.

A rule is a conjunction of tests, each on one fact. It fires once for every distinct choice of facts that
meet its tests; the facts that its action makes are asserted in the same run. An action must depend on the
rule and on the facts alone. Two engines do this: the durable one (``durable_session``, the default) and the
twin below (the fallback where the extension is missing, and the meaning that the other is held to).
"""

from __future__ import annotations

from collections import defaultdict, deque
from collections.abc import Callable, Iterable, Iterator, Sequence
from itertools import product
from typing import Literal, Protocol

from millreason.errors import MillreasonError
from millreason.inference.matching import (
    Action,
    Fact,
    Firing,
    InferenceRule,
    Kind,
    Ledger,
    Op,
    RuleSet,
    Scalar,
    Test,
    compile_rules,
)

__all__ = [
    "Action",
    "EngineName",
    "Fact",
    "Firing",
    "InferenceRule",
    "Kind",
    "Op",
    "RuleEngine",
    "Scalar",
    "Test",
    "TwinEngine",
    "engine_names",
    "make_engine",
]

EngineName = Literal["durable", "twin"]


class RuleEngine(Protocol):
    """A compiled rule set; each run is a session of its own, and any thread may run it."""

    name: str

    def run(self, facts: Iterable[Fact], action: Action) -> list[Firing]:
        """Fire every rule on every choice of facts that meets it; the firings come in canonical order."""

    def close(self) -> None:
        """Free what the compiled rules hold; the engine cannot run afterwards."""


class TwinEngine:
    """The forward chainer in plain Python: every new fact is joined with the facts before it."""

    name = "twin"

    def __init__(self, rules: RuleSet) -> None:
        self._rules = rules
        self._equal: dict[tuple[str, str, str, Scalar], list[int]] = defaultdict(list)
        self._other: dict[tuple[str, str], list[tuple[int, Callable[[Fact], bool]]]] = defaultdict(list)
        self._uses: list[list[int]] = [[] for _ in rules.tests]
        for number, test in enumerate(rules.tests):
            if test.op in ("eq", "in"):
                for kind, value in test.values:
                    self._equal[test.attribute, test.kind, kind, value].append(number)
            else:
                self._other[test.subject].append((number, test.predicate()))
        for rule, tests in enumerate(rules.conditions):
            for number in dict.fromkeys(tests):
                self._uses[number].append(rule)

    def run(self, facts: Iterable[Fact], action: Action) -> list[Firing]:
        """Fire every rule on every choice of facts that meets it."""
        ledger = Ledger(self._rules, facts, action)
        memory: dict[int, list[Fact]] = {}
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
        return [number for number, meets in others if meets(fact)] + self._equal.get(fact.key, [])

    def _matches(self, fact: Fact, memory: dict[int, list[Fact]]) -> Iterator[tuple[int, tuple[Fact, ...]]]:
        met = self._met(fact)
        for number in met:
            memory.setdefault(number, []).append(fact)
        for rule in dict.fromkeys(rule for number in met for rule in self._uses[number]):
            tests = self._rules.conditions[rule]
            if all(number in memory for number in tests):
                choices = _choices(fact, [memory[number] for number in tests], [n in met for n in tests])
                yield from ((rule, chosen) for chosen in choices)


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
        import millreason.inference.durable_session  # noqa: F401
    except ImportError:
        return ("twin",)
    return ("durable", "twin")


def make_engine(rules: Sequence[InferenceRule], prefer: EngineName | None = None) -> RuleEngine:
    """Compile the rules for the engine asked for; if none is, for the best that works here."""
    available = engine_names()
    name = prefer or available[0]
    if name not in available:
        raise MillreasonError(
            f"inference engine {name!r} does not work here; available: {', '.join(available)}. "
            "Choose one of these, or install durable-rules for the durable one."
        )
    compiled = compile_rules(rules)
    if name == "twin":
        return TwinEngine(compiled)
    from millreason.inference.durable_session import DurableEngine

    return DurableEngine(compiled)
