"""What the inputs of a job could be instead: other options, and numbers over the span that is plausible."""

from __future__ import annotations

import math
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from itertools import pairwise

from millreason.facts import Situation
from millreason.job import Value
from millreason.rulebook import RuleBook, tested_values
from millreason.vocabulary import FactDefinition, Vocabulary

# Mathematics of the search, no figures of the trade: how close ends are found, and how far apart samples lie.
TOLERANCE = 0.01
RATIO = 1.6
DIGITS = 4
_STEPS_FROM_ZERO = 4
_BESIDE = 0.004


@dataclass(frozen=True)
class Input:
    """One fact of a job that a person could change, as it is known; value None is unknown."""

    fact: str
    definition: FactDefinition
    value: Value | None
    origin: str

    @property
    def is_number(self) -> bool:
        """Whether the fact is a single number."""
        return self.definition.kind == "number"


def known_inputs(situation: Situation, vocabulary: Vocabulary) -> list[Input]:
    """Return the facts that are given, looked up from the job or assumed, and that a job could state."""
    return [
        Input(name, definition, situation.value(name), record.origin)
        for name, definition in _job_facts(vocabulary)
        if (record := situation.record(name)) is not None and record.origin in ("given", "looked_up", "assumed")
    ]


def blank_inputs(situation: Situation, vocabulary: Vocabulary) -> list[Input]:
    """Return the facts that a job could state and that are not known."""
    return [
        Input(name, definition, None, "absent")
        for name, definition in _job_facts(vocabulary)
        if situation.value(name) is None and can_vary(name, definition)
    ]


def _job_facts(vocabulary: Vocabulary) -> Iterator[tuple[str, FactDefinition]]:
    for name, definition in vocabulary.facts.items():
        varied = definition.kind in ("number", "choice", "choices", "flag")
        if definition.from_ == "job" and varied and not name.startswith("confirm."):
            yield name, definition


def can_vary(name: str, definition: FactDefinition) -> bool:
    """Whether a fact that is not known can be tried over values that are plausible."""
    words = definition.kind in ("choice", "choices", "flag")
    number = definition.kind == "number" and definition.plausible is not None
    return definition.from_ == "job" and not name.startswith("confirm.") and (words or number)


def other_values(entry: Input) -> list[Value]:
    """Return the other values of a word or flag."""
    value, options = entry.value, [str(option) for option in entry.definition.options]
    if entry.definition.kind == "flag":
        return [not value] if isinstance(value, bool) else [True, False]
    if entry.definition.kind == "choice":
        return [option for option in options if option != value]
    held = value if isinstance(value, tuple) else ()
    singles: list[Value] = [(option,) for option in options]
    words = [str(item) for item in held]
    less: list[Value] = [tuple(word for word in words if word != left) for left in words] if len(words) > 1 else []
    more: list[Value] = []
    if held and "none" not in held:
        more = [(*words, option) for option in options if option not in words and option != "none"]
    return [other for other in dict.fromkeys([*less, *more, *singles]) if other != value]


class Span:
    """The numbers that one fact could be: from where to where, and where the rules draw their lines."""

    def __init__(self, entry: Input, lines: Iterable[float], ends: tuple[float, float] | None = None) -> None:
        self.value = entry.value if isinstance(entry.value, int | float) else None
        self.low, self.high = ends or bounds(entry)
        self._lines = sorted({tidy(line) for line in lines if self.low < line < self.high})
        # A line may count from either side, so a bracket is closed on it and close by on both sides.
        near = (tidy(line * side) for line in self._lines for side in (1 - _BESIDE, 1.0, 1 + _BESIDE))
        self._near = sorted({number for number in near if self.low < number < self.high})

    @property
    def samples(self) -> list[float]:
        """Numbers over the whole span: one between any two lines, more where lines are far apart, and both ends."""
        edges = [self.low, *self._lines, self.high]
        inner = {tidy(number) for a, b in pairwise(edges) for number in _between(a, b)}
        return sorted({self.low, self.high, *inner} - {self.value})

    def outwards(self, up: bool) -> list[float]:
        """Return the samples on one side of the value, nearest first."""
        assert self.value is not None
        beyond = [sample for sample in self.samples if (sample > self.value) == up]
        return beyond if up else beyond[::-1]

    def middle(self, a: float, b: float) -> float | None:
        """Return a number between two, on a line of the rules where there is one; None where they are close enough."""
        low, high = min(a, b), max(a, b)
        if high - low <= TOLERANCE * max(abs(low), abs(high)):
            return None
        inside = [number for number in self._near if low < number < high]
        found = inside[len(inside) // 2] if inside else tidy(math.sqrt(low * high) if low > 0 else (low + high) / 2)
        return found if low < found < high else None


def bounds(entry: Input) -> tuple[float, float]:
    """Return the plausible span of a number, within what is possible.

    Where the value itself lies at an end of it or outside, the span goes on to half or twice the value.
    """
    least, most = entry.definition.range or [-math.inf, math.inf]
    low, high = entry.definition.plausible or [least, most]
    if isinstance(entry.value, int | float):
        low = low if low < entry.value else entry.value / 2
        high = high if high > entry.value else entry.value * 2
    return tidy(max(low, least)), tidy(min(high, most))


def _between(low: float, high: float) -> list[float]:
    if low <= 0:
        return [low + (high - low) * step / _STEPS_FROM_ZERO for step in range(1, _STEPS_FROM_ZERO)]
    count = max(1, math.ceil(math.log(high / low) / math.log(RATIO)))
    return [low * (high / low) ** ((step + 0.5) / count) for step in range(count)]


def tidy(value: float) -> float:
    """Return a number with the digits that are printed, so that what is printed is what was run."""
    return float(f"{value:.{DIGITS}g}")


def rule_lines(book: RuleBook) -> dict[str, tuple[float, ...]]:
    """Return the numbers that rules compare each fact with."""
    found: dict[str, set[float]] = {}
    for rule in book.rules.values():
        for fact, condition in rule.when.items():
            numbers: Sequence[float] = [
                float(value)
                for value in tested_values(condition)
                if isinstance(value, int | float) and not isinstance(value, bool)
            ]
            found.setdefault(fact, set()).update(numbers)
    return {fact: tuple(sorted(numbers)) for fact, numbers in found.items() if numbers}


def distance(entry: Input, value: Value) -> float:
    """Return how far a change goes: doubling or halving a number counts 1, and so does another word."""
    old = entry.value
    if not entry.is_number or not isinstance(old, int | float) or not isinstance(value, int | float):
        return 1.0
    if old > 0 and value > 0:
        return abs(math.log2(value / old))
    low, high = bounds(entry)
    return abs(value - old) / (high - low)
