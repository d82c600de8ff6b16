"""Which facts the ratios of a job are computed from, found by leaving one out at a time."""

from __future__ import annotations

from collections.abc import Mapping

from millreason.facts import Situation
from millreason.knowledge import Knowledge
from millreason.lookups import complete_situation
from millreason.vocabulary import Vocabulary


def rests_on(knowledge: Knowledge, vocabulary: Vocabulary) -> Mapping[str, frozenset[str]]:
    """Return for each computed ratio the facts without which it cannot be computed."""
    given = {
        name: (fact.plausible or fact.range or [1.0])[0]
        for name, fact in vocabulary.facts.items()
        if fact.kind == "number" and fact.from_ in ("job", "looked_up")
    }
    whole = computed(given, knowledge, vocabulary)
    needs: dict[str, set[str]] = {name: set() for name in whole}
    for left_out in given:
        rest = {name: value for name, value in given.items() if name != left_out}
        for name in whole.keys() - computed(rest, knowledge, vocabulary).keys():
            needs[name].add(left_out)
    return {name: frozenset(facts) for name, facts in needs.items() if facts}


def computed(given: Mapping[str, object], knowledge: Knowledge, vocabulary: Vocabulary) -> dict[str, object]:
    """Return the ratios that follow from given facts."""
    situation = Situation(vocabulary)
    for name, value in given.items():
        situation.set(name, value, "given")
    complete_situation(situation, knowledge, vocabulary)
    return {record.name: situation.value(record.name) for record in situation.records() if record.name not in given}
