"""What a condition admits, as sets that can be met, compared and sampled."""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass, replace

from millreason.rulebook import Condition, Rule, Scalar, TestSpec
from millreason.vocabulary import FactDefinition

ANY_TEXT = "something"
ALONE: Scalar = "none"  # of several values at once, this one stands by itself
SHARES = (0.5, 0.25, 0.75, 0.1, 0.9)


@dataclass(frozen=True)
class ValueSet:
    """Listed values, or (nothing listed) a span of numbers or any text; less some values."""

    listed: frozenset[Scalar] | None = None
    low: float = -math.inf
    high: float = math.inf
    open_low: bool = False
    open_high: bool = False
    without: frozenset[Scalar] = frozenset()
    text: bool = False

    @property
    def empty(self) -> bool:
        """Whether no value is left."""
        if self.listed is not None:
            return not self.listed
        if self.text or self.low < self.high:
            return False
        return self.low > self.high or self.open_low or self.open_high or self.low in self.without

    def holds(self, value: Scalar) -> bool:
        """Whether a value belongs to the set."""
        if self.listed is not None:
            return value in self.listed
        if value in self.without:
            return False
        if self.text:
            return isinstance(value, str)
        if isinstance(value, str | bool):
            return False
        above = value > self.low or (value == self.low and not self.open_low)
        return above and (value < self.high or (value == self.high and not self.open_high))

    def meet(self, other: ValueSet) -> ValueSet:
        """Return the values that belong to both."""
        if self.listed is not None:
            return ValueSet(frozenset(value for value in self.listed if other.holds(value)))
        if other.listed is not None:
            return other.meet(self)
        low, open_low = max((self.low, self.open_low), (other.low, other.open_low))
        high, shut_high = min((self.high, not self.open_high), (other.high, not other.open_high))
        return ValueSet(None, low, high, open_low, not shut_high, self.without | other.without, self.text or other.text)

    def less(self, values: frozenset[Scalar]) -> ValueSet:
        """Return the set without some values."""
        if self.listed is not None:
            return ValueSet(self.listed - values)
        return replace(self, without=self.without | values)

    def within(self, other: ValueSet) -> bool:
        """Whether every value of this set belongs to the other."""
        if self.listed is not None:
            return all(other.holds(value) for value in self.listed)
        if self.empty:
            return True
        if other.listed is not None:
            return False
        met = self.meet(other)
        same_span = (met.low, met.high, met.open_low, met.open_high) == (
            self.low, self.high, self.open_low, self.open_high,
        )  # fmt: skip
        return same_span and not any(self.holds(value) for value in other.without)

    def samples(self, order: Iterable[Scalar] = ()) -> list[Scalar]:
        """Return a few members, the plainest first."""
        if self.listed is not None:
            known = [value for value in order if value in self.listed]
            return known or sorted(self.listed, key=str)
        if self.text:
            return [name for name in (ANY_TEXT, f"{ANY_TEXT} else") if self.holds(name)]
        return [value for value in self._numbers() if self.holds(value)]

    def _numbers(self) -> list[float]:
        low = self.low if math.isfinite(self.low) else min(0.0, self.high - 1)
        high = self.high if math.isfinite(self.high) else max(low * 2, low + 1)
        inside = [low + (high - low) * share for share in SHARES]
        return [*(float(f"{value:.3g}") for value in inside), *inside, low, high]


def universe(definition: FactDefinition) -> ValueSet:
    """Return every value that the vocabulary lets a fact have."""
    if definition.kind in ("choice", "choices") or definition.options:
        return ValueSet(frozenset(plain(option) for option in definition.options))
    if definition.kind == "flag":
        return ValueSet(frozenset({True, False}))
    if definition.kind in ("number", "numbers"):
        low, high = definition.range or (-math.inf, math.inf)
        return ValueSet(None, low, high)
    return ValueSet(text=True)


def plain(value: Scalar) -> Scalar:
    """Write whole numbers as the engine does, as floats."""
    return float(value) if isinstance(value, int) and not isinstance(value, bool) else value


def admitted(condition: Condition, whole: ValueSet) -> ValueSet:
    """Return the values of a fact that meet a condition; `whole` is every value that the fact may have."""
    if isinstance(condition, list):
        return ValueSet(frozenset(map(plain, condition))).meet(whole)
    if not isinstance(condition, TestSpec):
        return ValueSet(frozenset({plain(condition)})).meet(whole)
    spec = condition
    if spec.equals is not None:
        return admitted(spec.equals, whole)
    if spec.one_of is not None:
        return admitted(spec.one_of, whole)
    if spec.none_of is not None:
        return whole.less(frozenset(map(plain, spec.none_of)))
    if spec.between is not None:
        return ValueSet(None, spec.between[0], spec.between[1]).meet(whole)
    bounds = {
        "at_least": ValueSet(low=spec.at_least or 0.0),
        "above": ValueSet(low=spec.above or 0.0, open_low=True),
        "at_most": ValueSet(high=spec.at_most or 0.0),
        "below": ValueSet(high=spec.below or 0.0, open_high=True),
    }
    for name, bound in bounds.items():
        if getattr(spec, name) is not None:
            return bound.meet(whole)
    return whole


@dataclass(frozen=True)
class Demand:
    """What a rule, or several together, demand of one fact."""

    several: bool
    any_of: tuple[ValueSet, ...] = ()
    lacks: frozenset[Scalar] = frozenset()
    missing: bool = False

    @property
    def possible(self) -> bool:
        """Whether some state of the fact meets the demand."""
        if (self.missing and self.any_of) or any(values.empty for values in self.values):
            return False
        alone = any(values.listed == frozenset({ALONE}) for values in self.values)
        return not alone or all(values.holds(ALONE) for values in self.values)

    @property
    def single(self) -> Demand:
        """The same demand of a fact that holds one value only."""
        return Demand(False).also(replace(self, several=False))

    @property
    def values(self) -> tuple[ValueSet, ...]:
        """The set of each value that is demanded, less those the fact must lack."""
        return tuple(values.less(self.lacks) if self.lacks else values for values in self.any_of)

    def also(self, other: Demand) -> Demand:
        """Return both demands together; a fact with one value needs one that meets all."""
        several = self.several or other.several
        any_of = tuple(dict.fromkeys(self.any_of + other.any_of))
        if not several and len(any_of) > 1:
            met = any_of[0]
            for values in any_of[1:]:
                met = met.meet(values)
            any_of = (met,)
        return Demand(several, any_of, self.lacks | other.lacks, self.missing or other.missing)

    def implies(self, other: Demand) -> bool:
        """Whether every state that meets this demand meets the other."""
        if other.missing and not self.missing:
            return False
        if any(self._may_hold(option) for option in other.lacks):
            return False
        return all(any(mine.within(theirs) for mine in self.values) for theirs in other.any_of)

    def _may_hold(self, option: Scalar) -> bool:
        if self.missing or option in self.lacks:
            return False
        return self.several or not self.any_of or any(values.holds(option) for values in self.any_of)

    def accepts(self, value: Scalar) -> bool:
        """Whether the single value meets the demand."""
        return not self.missing and value not in self.lacks and all(s.holds(value) for s in self.any_of)


Demands = dict[str, Demand]


def demand(condition: Condition, definition: FactDefinition) -> Demand:
    """Return what one condition demands of its fact."""
    several = definition.kind in ("choices", "numbers")
    if isinstance(condition, TestSpec) and condition.known is False:
        return Demand(several, missing=True)
    if isinstance(condition, TestSpec) and condition.lacks is not None:
        return Demand(several, lacks=frozenset({plain(condition.lacks)}))
    return Demand(several, (admitted(condition, universe(definition)),))


def demands(rule: Rule, facts: dict[str, FactDefinition]) -> Demands:
    """Return what a rule demands of every fact that it looks at."""
    found = {fact: demand(condition, facts[fact]) for fact, condition in rule.when.items()}
    for fact in rule.implied_missing:
        found[fact] = Demand(facts[fact].kind in ("choices", "numbers"), missing=True)
    return found


def together(first: Demands, second: Demands) -> Demands | None:
    """Return the demands of two rules at once, or None where they exclude each other."""
    merged = dict(first)
    for fact, more in second.items():
        merged[fact] = merged[fact].also(more) if fact in merged else more
        if not merged[fact].possible:
            return None
    return merged


def one_value_each(wanted: Demands) -> bool:
    """Whether the demands can be met although no fact holds several values."""
    return all(need.single.possible for need in wanted.values())


def implies(first: Demands, second: Demands) -> bool:
    """Whether every situation that meets the first demands meets the second."""
    return all((fact in first and first[fact].implies(wanted)) or _always(wanted) for fact, wanted in second.items())


def _always(wanted: Demand) -> bool:
    return not wanted.any_of and not wanted.missing and not wanted.lacks
