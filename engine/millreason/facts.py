"""The situation: every fact known about a job, with its origin, and its form for the inference engine."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from typing import Any

from millreason.inference import Fact, InferenceRule
from millreason.provenance import Basis
from millreason.trace import BasisRecord, FactRecord, Origin, Plain
from millreason.vocabulary import Vocabulary

Value = Any


class Situation:
    """Facts by name; the first value set stays, so that what a person gave is never overwritten."""

    def __init__(self, vocabulary: Vocabulary) -> None:
        self._vocabulary = vocabulary
        self._values: dict[str, Value] = {}
        # Who said a fact and how; the record is made only when it is wanted.
        self._said: dict[str, tuple[Origin, str, str, BasisRecord | None]] = {}

    def __len__(self) -> int:
        return len(self._values)

    def copy(self) -> Situation:
        """Return an independent copy."""
        other = Situation(self._vocabulary)
        other._values = dict(self._values)
        other._said = dict(self._said)
        return other

    def with_facts(self, facts: Mapping[str, Value], by: str) -> Situation:
        """Return a copy with further computed facts."""
        other = self.copy()
        for name, value in facts.items():
            other.set(name, value, "computed", by)
        return other

    def set(
        self,
        name: str,
        value: Value,
        origin: Origin,
        by: str = "",
        text: str = "",
        basis: BasisRecord | None = None,
    ) -> bool:
        """Record a fact unless it is known already; return whether it was new."""
        if value is None or name in self._values:
            return False
        self._values[name] = value
        self._said[name] = origin, by, text, basis
        return True

    def value(self, name: str, default: Value = None) -> Value:
        """Return the value of a fact, or the default where it is not known."""
        return self._values.get(name, default)

    def record(self, name: str) -> FactRecord | None:
        """Return the record of a fact, or None where it is not known."""
        if name not in self._values:
            return None
        definition = self._vocabulary.facts.get(name)
        unit = definition.unit if definition else ""
        return FactRecord(name, _plain(self._values[name]), unit, *self._said[name])

    def records(self) -> list[FactRecord]:
        """Return every fact in the order of the vocabulary."""
        order = self._vocabulary.order
        names = sorted(self._values, key=lambda name: (order.get(name, len(order)), name))
        return [record for name in names if (record := self.record(name)) is not None]

    def for_inference(self, subjects: Iterable[tuple[str, str]]) -> list[Fact]:
        """Return the facts of the given attributes and kinds, as the inference engine wants them."""
        facts: list[Fact] = []
        for attribute, kind in subjects:
            facts.extend(self._inference_facts(attribute, kind))
        return facts

    def _inference_facts(self, attribute: str, kind: str) -> Iterator[Fact]:
        value = self._values.get(attribute)
        if kind == "value":
            if value is not None:
                items = value if isinstance(value, tuple) else (value,)
                yield from (Fact(attribute, item) for item in items if isinstance(item, str | int | float))
        elif kind == "lacks":
            held = value if isinstance(value, tuple) else (value,)
            yield from (
                Fact(attribute, option, "lacks")
                for option in self._vocabulary.facts[attribute].options
                if option not in held
            )
        elif (value is None) == (kind == "missing"):
            yield Fact(attribute, "" if kind == "missing" else True, kind)  # type: ignore[arg-type]


def subjects_of(rules: Iterable[InferenceRule]) -> tuple[tuple[str, str], ...]:
    """Return every attribute and kind that a set of rules looks at, in a stable order."""
    return tuple(sorted({(test.attribute, test.kind) for rule in rules for test in rule.tests}))


def basis_record(basis: Basis) -> BasisRecord:
    """Return a basis as it is printed."""
    source = basis.cited.source if basis.cited else ""
    return BasisRecord(basis.kind, source, basis.remark, basis.note or "")


def _plain(value: Value) -> Plain:
    if isinstance(value, tuple):
        return [list(item) if isinstance(item, tuple) else item for item in value]
    return value  # type: ignore[no-any-return]
