"""How many rules there are, by stage, topic and basis, and what the knowledge rests on."""

from __future__ import annotations

from collections import Counter

from millreason.rule_audit.findings import Subject
from millreason.rulebook import STAGES

BASES = ("checked", "recalled", "common_practice", "derived", "invented", "shop")


def count_lines(subject: Subject) -> list[str]:
    """Return the counts as lines of text."""
    rules = list(subject.rules)
    stages = Counter(rule.stage for rule in rules)
    topics = Counter(subject.book.topics[rule.id] for rule in rules)
    bases = Counter(rule.basis.kind for rule in rules)
    knowledge = dict(subject.adviser.provenance)
    return [
        f"{len(rules)} rules in {len(topics)} topics",
        f"  by stage: {_listed(stages, STAGES)}",
        f"  by basis: {_listed(bases, BASES)}",
        "  by topic:",
        *(f"    {count:>4}  {topic}" for topic, count in sorted(topics.items())),
        f"{sum(knowledge.values())} values of the knowledge, by basis: {_listed(knowledge, BASES)}",
        f"{len(subject.adviser.knowledge.sources)} sources, {len(subject.facts)} facts in the vocabulary",
    ]


def _listed(counts: object, order: tuple[str, ...]) -> str:
    assert isinstance(counts, dict)
    return ", ".join(f"{counts[name]} {name.replace('_', ' ')}" for name in order if counts.get(name))
