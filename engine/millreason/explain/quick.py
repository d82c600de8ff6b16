"""A quick adviser for re-runs: the same rules, search and formulas, with results remembered and no texts written.

A rule looks at a fact only through its tests, so two situations that meet the same tests fire the same rules.
The firings of a stage are kept under what the tests can tell apart: between two thresholds all numbers are one.
A plan is kept with the facts it has read; it serves again wherever these are the same.
"""

from __future__ import annotations

from bisect import bisect_left
from collections import defaultdict
from collections.abc import Hashable, Iterable, Iterator, Mapping
from functools import cached_property
from typing import TYPE_CHECKING, Any
from weakref import WeakKeyDictionary

from millreason.choice import Adviser
from millreason.facts import Situation, basis_record
from millreason.inference import Firing
from millreason.materials import Materials
from millreason.measures import Meter
from millreason.plan import Planner
from millreason.rulebook import RejectSpec, Rule, tested_values
from millreason.search import Search, identity_of
from millreason.stages import Stage, conclusion_text
from millreason.trace import FiringRecord, LimitRecord

if TYPE_CHECKING:
    from millreason.candidates import Candidate
    from millreason.cut_plan import Plan
    from millreason.outcome import Outcome
    from millreason.spindle import Spindle

_MOST_REMEMBERED = 5_000
_MOST_PLANS = 6_000
_Plans = defaultdict[tuple[Hashable, ...], "list[tuple[dict[str, Any], Plan, dict[str, Any]]]"]


_MADE: WeakKeyDictionary[Adviser, tuple[QuickAdviser, QuickAdviser]] = WeakKeyDictionary()


class QuickAdviser(Adviser):
    """Decides like the adviser it is made from, only as far as the best candidate, and without texts.

    It runs the rules on the plain engine; one made with a quick adviser beside it, on the engine of the adviser itself.
    """

    runners_up = 0

    def __init__(self, adviser: Adviser, beside: QuickAdviser | None = None) -> None:
        engine = adviser.engine if beside is not None else "twin"
        super().__init__(adviser.knowledge, adviser.materials, adviser.vocabulary, adviser.rulebook, engine)
        self.materials = _RememberedMaterials(adviser.materials)  # type: ignore[assignment]
        self._plans: _Plans = beside._plans if beside is not None else defaultdict(list)
        self._compiled = adviser.stages if beside is not None else None

    def search(self, out: Outcome, spindle: Spindle) -> Search:
        """Return a search that shares its plans with all searches before it."""
        if sum(map(len, self._plans.values())) > _MOST_PLANS:
            self._plans.clear()
        return _QuickSearch(self, out, spindle, self._plans)

    @cached_property
    def stages(self) -> Mapping[str, Stage]:
        """The compiled stages, telling no more than which rules fired."""
        compiled = self._compiled if self._compiled is not None else super().stages
        return {name: _QuickStage(stage) for name, stage in compiled.items()}


def quick_and_sure(adviser: Adviser) -> tuple[QuickAdviser, QuickAdviser]:
    """Return the advisers for re-runs: one on the plain engine, and one on the adviser's own."""
    if adviser not in _MADE:
        quick = QuickAdviser(adviser)
        _MADE[adviser] = quick, QuickAdviser(adviser, quick)
    return _MADE[adviser]


class _RememberedMaterials:
    """Looks a material up once for each name, group, hardness and condition."""

    def __init__(self, materials: Materials) -> None:
        self._materials = materials
        self._found: dict[tuple[Any, ...], Any] = {}

    def look_up(self, *said: Any) -> Any:
        if said not in self._found:
            self._found[said] = self._materials.look_up(*said)
        return self._found[said]


class _Reading:
    """A situation that remembers which facts were read from it."""

    def __init__(self, situation: Situation) -> None:
        self._value = situation.value
        self.read: dict[str, Any] = {}

    def value(self, name: str, default: Any = None) -> Any:
        """Return the value of a fact, or the default where it is not known."""
        found = self.read[name] = self._value(name)
        return default if found is None else found


class _QuickSearch(Search):
    """A search that plans a candidate only where a fact has changed that its plan reads."""

    def __init__(self, adviser: Adviser, out: Outcome, spindle: Spindle, plans: _Plans) -> None:
        super().__init__(adviser, out, spindle)
        knowledge = adviser.knowledge
        self._reading = _Reading(out.situation)
        situation: Any = self._reading
        self._meter = Meter(situation, knowledge.practice, knowledge.cutters, self._interface, spindle)
        self._planner = Planner(situation, out.tuning.values, knowledge.practice, spindle)
        self._plans = plans
        fixed = out.situation.value("machine.interface"), spindle, out.separate["direction"]
        self._key = *fixed, tuple(sorted(out.tuning.values.items()))

    def _measured(self, candidate: Candidate) -> tuple[Plan, dict[str, Any]]:
        known = self._plans[*self._key, *identity_of(candidate)]
        value = self._out.situation.value
        for read, plan, measured in known:
            if all(value(name) == before for name, before in read.items()):
                return plan, measured
        self._reading.read = {}
        plan, measured = super()._measured(candidate)
        plan.sheet.uses.clear()
        known.append((self._reading.read, plan, measured))
        return plan, measured


class _Telling:
    """What the tests of a stage can tell apart in one fact."""

    def __init__(self, raw: bool) -> None:
        self.raw = raw
        self.numbers: list[float] = []

    def of(self, value: Any) -> Hashable:
        if self.raw or value is None or isinstance(value, str | bool | tuple):
            return value  # type: ignore[no-any-return]
        # Even places are between the numbers, odd ones on them.
        place = bisect_left(self.numbers, value)
        return 2 * place + (place < len(self.numbers) and self.numbers[place] == value)


class _QuickStage(Stage):
    """A compiled stage that fires once for all situations its tests cannot tell apart, and writes no texts."""

    def __init__(self, stage: Stage) -> None:
        self.__dict__.update(stage.__dict__)
        self._tellings = dict(_tellings(self.rules.values()))
        self._found: dict[Hashable, tuple[Firing, ...]] = {}
        # Of a firing only the rule is looked at, so one stands for all of its rule.
        self._one_of: dict[str, Firing] = {}
        self._records: dict[str, FiringRecord] = {}

    def run(self, situation: Situation) -> list[Firing]:
        """Return the firings for a situation; those for one that meets the same tests are remembered."""
        key = tuple([telling.of(situation.value(name)) for name, telling in self._tellings.items()])
        found = self._found.get(key)
        if found is None:
            if len(self._found) >= _MOST_REMEMBERED:
                self._found.clear()
            fired = super().run(situation)
            found = self._found[key] = tuple(self._one_of.setdefault(firing.rule, firing) for firing in fired)
        return list(found)

    def record(self, firing: Firing, situation: Situation, system: str, about: str = "") -> FiringRecord:
        """Return the record of a rule without its texts."""
        if firing.rule not in self._records:
            rule = self.rules[firing.rule]
            told = conclusion_text(rule.then)
            self._records[firing.rule] = FiringRecord(
                rule.id, rule.name, rule.stage, "", "", [], told, basis_record(rule.basis)
            )
        return self._records[firing.rule]

    def why(self, rule: str, situation: Situation, system: str) -> str:
        """Return nothing: a re-run prints no reasons."""
        return ""

    def limit(self, rule: str, spec: RejectSpec, situation: Situation, system: str) -> LimitRecord:
        """Return a limit with its key alone."""
        return LimitRecord(spec.limit, "", None, None, rule, [])


def _tellings(rules: Iterable[Rule]) -> Iterator[tuple[str, _Telling]]:
    """Yield every fact that the rules look at, with the numbers they compare it with."""
    found: dict[str, _Telling] = {}
    for rule in rules:
        for fact, condition in rule.when.items():
            telling = found.setdefault(fact, _Telling(False))
            telling.numbers.extend(
                float(value)
                for value in tested_values(condition)
                if isinstance(value, int | float) and not isinstance(value, bool)
            )
        for fact in rule.implied_missing:
            found.setdefault(fact, _Telling(False))
        for value in {**(rule.then.assume or {}), **(rule.then.set or {})}.values():
            if isinstance(value, dict):
                found.setdefault(value["fact"], _Telling(True)).raw = True
    for fact, telling in found.items():
        telling.numbers = sorted(set(telling.numbers))
        yield fact, telling
