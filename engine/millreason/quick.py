"""A quick adviser for re-runs: the same rules and search, with firings remembered and no texts written.

A rule looks at a fact only through its tests, so two situations that meet the same tests fire the same rules.
The firings of a stage are kept under what the tests can tell apart: between two thresholds a number is as good as another.
"""

from __future__ import annotations

from bisect import bisect_left
from collections.abc import Hashable, Iterable, Iterator, Mapping
from functools import cached_property
from typing import Any

from millreason.choice import Adviser
from millreason.facts import Situation, basis_record
from millreason.inference import Firing
from millreason.materials import Materials
from millreason.rulebook import RejectSpec, Rule, RuleBook, tested_values
from millreason.stages import Stage, conclusion_text
from millreason.trace import FiringRecord, LimitRecord
from millreason.vocabulary import Vocabulary

_MOST_REMEMBERED = 20_000


class QuickAdviser(Adviser):
    """Decides like the adviser it is made from, on the plain engine, and only as far as the best candidate."""

    runners_up = 0

    def __init__(self, adviser: Adviser) -> None:
        super().__init__(adviser.knowledge, adviser.materials, adviser.vocabulary, adviser.rulebook, "twin")
        self.materials = _RememberedMaterials(adviser.materials)  # type: ignore[assignment]

    @cached_property
    def stages(self) -> Mapping[str, Stage]:
        """The compiled stages, each remembering what it fired."""
        book, vocabulary = self.rulebook, self.vocabulary
        names = ("assume", "appraise", "weigh", "judge", "caution")
        stages: dict[str, Stage] = {name: _QuickStage(book.stage(name), book, vocabulary) for name in names}  # type: ignore[arg-type]
        return {**stages, "size": _QuickStage(book.stage("weigh", about_size=True), book, vocabulary)}


class _RememberedMaterials:
    """Looks a material up once for each name, group, hardness and condition."""

    def __init__(self, materials: Materials) -> None:
        self._materials = materials
        self._found: dict[tuple[Any, ...], Any] = {}

    def look_up(self, *said: Any) -> Any:
        if said not in self._found:
            self._found[said] = self._materials.look_up(*said)
        return self._found[said]


class _Telling:
    """What the tests of a stage can tell apart in one fact."""

    def __init__(self, raw: bool) -> None:
        self.raw = raw
        self.numbers: list[float] = []

    def of(self, value: Any) -> Hashable:
        if self.raw or value is None or isinstance(value, str | bool | tuple):
            return value  # type: ignore[no-any-return]
        place = bisect_left(self.numbers, value)
        return place, place < len(self.numbers) and self.numbers[place] == value


class _QuickStage(Stage):
    """A stage that remembers its firings and writes records without texts."""

    def __init__(self, rules: Iterable[Rule], book: RuleBook, vocabulary: Vocabulary) -> None:
        super().__init__(rules, book, vocabulary, "twin")
        self._tellings = dict(_tellings(self.rules.values()))
        self._firings: dict[Hashable, list[Firing]] = {}
        self._records: dict[str, FiringRecord] = {}

    def run(self, situation: Situation) -> list[Firing]:
        """Return the firings for a situation; those for one that meets the same tests are remembered."""
        key = tuple([telling.of(situation.value(name)) for name, telling in self._tellings.items()])
        found = self._firings.get(key)
        if found is None:
            if len(self._firings) >= _MOST_REMEMBERED:
                self._firings.clear()
            found = self._firings[key] = super().run(situation)
        return found

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
