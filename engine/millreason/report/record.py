"""The record behind the argument: what was given, every rule that fired, every number and every source."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable, Iterator, Mapping

from millreason.report.page import Fields, Fold, Item, Items, Say, Section, Table, present, section
from millreason.report.words import (
    basis_text,
    clean,
    condition_text,
    fact_value,
    fact_words,
    option,
    origin_text,
    recommends,
    value_text,
)
from millreason.trace import Answer, BasisRecord, FactRecord, FiringRecord, Plain, SourceRecord

_STAGES = {
    "assume": "Filling gaps",
    "appraise": "Judging the job",
    "weigh": "Weighing the options",
    "judge": "Judging the computed plan",
    "caution": "Cautions",
}
_FIRINGS = (
    "Each entry gives the rule, what it says, the facts it fired on with where they came from, "
    "what it concluded and what it rests on."
)


def record_sections(answer: Answer) -> list[Section]:
    """Return the sections that let a reviewer follow every statement to its ground."""
    made = [_given(answer), _rules(answer), _numbers(answer), _calculations(answer), _sources(answer)]
    return [part for part in made if part is not None]


# ---------------------------------------------------------------------- facts
def _given(answer: Answer) -> Section | None:
    told = [record for record in answer.trace.facts if record.origin == "given"]
    rows = tuple((fact_words(record.name), fact_value(record, answer.units)) for record in told)
    blocks = present(Fields(rows))
    return section("given", "What was given", blocks, None if recommends(answer) else blocks)


def _numbers(answer: Answer) -> Section | None:
    found = [record for record in answer.trace.facts if record.origin == "looked_up"]
    made = [record for record in answer.trace.facts if record.origin in ("computed", "concluded")]
    looked_up = Table(("fact", "value", "from", "source"), _fact_rows(found, answer.units), frozenset({1}))
    concluded = Table(("fact", "value", "by", "rests on"), _fact_rows(made, answer.units), frozenset({1}))
    fold = Fold(f"Computed and concluded: {len(made)}", (concluded,)) if made else None
    return section("numbers", "Numbers looked up", present(looked_up, fold))


def _fact_rows(records: Iterable[FactRecord], units: str) -> tuple[tuple[str, ...], ...]:
    return tuple(
        (
            fact_words(record.name),
            value_text(record.value, record.unit, units),
            clean(record.by),
            basis_text(record.basis) or origin_text(record.origin),
        )
        for record in records
    )


# ---------------------------------------------------------------------- rules
def _rules(answer: Answer) -> Section | None:
    stages: dict[str, list[FiringRecord]] = defaultdict(list)
    for firing in answer.trace.firings:
        stages[firing.stage].append(firing)
    order = [*_STAGES, *(stage for stage in stages if stage not in _STAGES)]
    folds = [_stage(stage, stages[stage], answer.units) for stage in order if stage in stages]
    told = Say(f"{len(answer.trace.firings)} firings. {_FIRINGS}")
    return section("rules", "Every rule that fired", (told, *folds)) if folds else None


def _stage(stage: str, firings: list[FiringRecord], units: str) -> Fold:
    entries = tuple(_firing(firing, units) for firing in firings)
    return Fold(f"{_STAGES.get(stage, option(stage))}: {len(firings)}", (Items(entries),))


def _firing(firing: FiringRecord, units: str) -> Item:
    facts = "; ".join(condition_text(condition, units) for condition in firing.conditions)
    about = f" ({clean(firing.about)})" if firing.about else ""
    shop = ", the shop's own rule" if firing.from_shop else ""
    details = (
        f"Facts: {facts}",
        f"Concluded: {clean(firing.conclusion)}{about}",
        f"Why: {clean(firing.why)}",
        f"Rests on: {basis_text(firing.basis)}{shop}",
    )
    return Item(clean(firing.says), details, clean(firing.rule))


# ---------------------------------------------------------------------- calculations
def _calculations(answer: Answer) -> Section | None:
    rows = tuple(
        (
            fact_words(use.result_of),
            value_text(use.value, use.unit, answer.units),
            clean(use.formula),
            _inputs(use.inputs),
            clean(", ".join(use.references)),
        )
        for use in answer.trace.calculations
    )
    table = Table(("result", "value", "formula", "inputs", "references"), rows, frozenset({1}))
    return (
        section("calculations", "Calculations", (Fold(f"{len(rows)} uses of a formula", (table,)),)) if rows else None
    )


def _inputs(inputs: Mapping[str, Plain]) -> str:
    return ", ".join(f"{clean(name)} = {_plain(value)}" for name, value in inputs.items())


def _plain(value: Plain) -> str:
    return f"{value:.6g}" if isinstance(value, float) else clean(value)


# ---------------------------------------------------------------------- sources
def _work(name: str, titles: Mapping[str, SourceRecord]) -> str:
    source = titles.get(name)
    if source is None:
        return name
    when = ", ".join(clean(str(part)) for part in (source.edition, source.year) if part)
    return f"{clean(source.author)}, {clean(source.title)}{f' ({when})' if when else ''} [{name}]"


def _sources(answer: Answer) -> Section | None:
    places: dict[str, set[str]] = defaultdict(set)
    for basis in _bases(answer):
        if basis is not None and basis.source:
            how = " (recalled)" if basis.kind == "recalled" else ""
            places[clean(basis.source)].add(f"{clean(basis.where) or 'as a whole'}{how}")
    for use in answer.trace.calculations:
        for reference in use.references:
            places[clean(reference)].add(clean(use.formula))
    titles = {source.id: source for source in answer.trace.sources}
    rows = tuple((_work(name, titles), "; ".join(sorted(used))) for name, used in sorted(places.items()))
    return section(
        "sources", "Sources", present(Table(("source", "where in it, or the formula it stands behind"), rows))
    )


def _bases(answer: Answer) -> Iterator[BasisRecord | None]:
    yield from (firing.basis for firing in answer.trace.firings)
    yield from (record.basis for record in answer.trace.facts)
    yield from (check.basis for check in answer.checks)
    yield from (caution.basis for caution in answer.cautions)
