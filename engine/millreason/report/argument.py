"""The argument behind an answer: why it won, why others lost, margins, assumptions, rules, numbers and sources."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable

from millreason import drawings
from millreason.report.page import Block, Fields, Fold, Item, Items, Picture, Say, Section, Table, present
from millreason.report.sheet import TONES, by_severity, limits_table, questions
from millreason.report.words import (
    basis_text,
    clean,
    count,
    fact_value,
    fact_words,
    option,
    origin_text,
    pick_name,
    value_text,
)
from millreason.trace import (
    Answer,
    BasisRecord,
    CandidateRecord,
    Evidence,
    FactRecord,
    FiringRecord,
    Ledger,
    OptionLedger,
)
from millreason.units import show

_STANCE = {"for": "+", "against": "-", "rule_out": "ruled out"}
_STAGES = {
    "assume": "Filling gaps",
    "appraise": "Judging the job",
    "weigh": "Weighing the options",
    "judge": "Judging the computed plan",
    "caution": "Cautions",
}


def argument_sections(answer: Answer) -> list[Section]:
    """Return everything that follows the opening, in the order of a report; empty parts are left out."""
    made = [
        _why(answer), _lost(answer), _margins(answer), _assumptions(answer),
        _open_questions(answer), _cautions(answer), _facts(answer, "given"), _rules(answer), _looked_up(answer), _calculations(answer),
        _sources(answer),
    ]  # fmt: skip
    return [section for section in made if section is not None]


def _section(key: str, title: str, blocks: tuple[Block, ...], brief: tuple[Block, ...] | None = None) -> Section | None:
    return Section(key, title, blocks, brief) if blocks else None


# ---------------------------------------------------------------------- why it won
def _why(answer: Answer) -> Section | None:
    ledgers = [ledger for ledger in answer.trace.ledgers if any(option.evidence for option in ledger.options)]
    if answer.picks is None or answer.verdict in ("ask", "refuse", "conditional"):
        return None
    chosen = [item for ledger in ledgers if (item := _chosen(ledger)) is not None]
    folds = tuple(Fold(f"Ledger: {pick_name(ledger.pick)}", (_ledger_table(ledger),)) for ledger in ledgers)
    robust = Say(clean(answer.robustness)) if answer.robustness else None
    blocks = (*present(Items(tuple(item for item, _ in chosen)), robust), *folds)
    return _section("why", "Why this one", blocks, present(Items(tuple(short for _, short in chosen)), robust))


def _chosen(ledger: Ledger) -> tuple[Item, Item] | None:
    """Return the chosen option with its reasons, in full and in one line."""
    best = next((entry for entry in ledger.options if entry.option == ledger.chosen), None)
    if best is None:
        return None
    name = f"{pick_name(ledger.pick)}: {option(best.option)}"
    for_it = sorted((e for e in best.evidence if e.stance == "for"), key=lambda entry: -entry.weight)
    against = [entry for entry in best.evidence if entry.stance != "for"]
    details = [_evidence(entry) for entry in (*for_it, *against)]
    details += [f"next: {_standing(entry)}" for entry in ledger.options if entry is not best][:1]
    reason = f" - {clean(for_it[0].why)} [{for_it[0].rule}]" if for_it else ""
    return Item(name, tuple(details), f"{best.balance:+g}"), Item(f"{name}{reason}")


def _evidence(entry: Evidence) -> str:
    weight = f"{_STANCE[entry.stance]}{count(abs(entry.weight))} {entry.strength}" if entry.stance != "rule_out" else "ruled out"
    return f"{weight}: {clean(entry.why)} [{clean(entry.rule)}]"


def _standing(entry: OptionLedger) -> str:
    return f"{option(entry.option)}, {'ruled out' if entry.ruled_out else f'{entry.balance:+g}'}"


def _ledger_table(ledger: Ledger) -> Table:
    rows = [_ledger_row(entry, entry.option == ledger.chosen) for entry in ledger.options]
    return Table(("option", "balance", "for", "against", "ruled out by"), tuple(rows), frozenset({1}))


def _ledger_row(entry: OptionLedger, chosen: bool) -> tuple[str, ...]:
    def said(stance: str) -> str:
        return "; ".join(f"{clean(e.why)} [{clean(e.rule)}, {e.strength}]" if stance != "rule_out" else f"{clean(e.why)} [{clean(e.rule)}]" for e in entry.evidence if e.stance == stance)

    name = f"{option(entry.option)} (chosen)" if chosen else option(entry.option)
    return name, f"{entry.balance:+g}", said("for"), said("against"), said("rule_out")


# ---------------------------------------------------------------------- why the others lost
def _lost(answer: Answer) -> Section | None:
    tried = answer.trace.candidates
    rejected = [candidate for candidate in tried if candidate.outcome == "rejected"]
    runners = answer.runners_up or [candidate for candidate in tried if candidate.outcome == "stands"]
    if not runners and not rejected:
        return None
    told = Say(f"{len(tried)} complete tools were planned and judged, best first, out of {answer.trace.candidates_possible} possible.")
    second = Items(tuple(_runner(candidate, answer.units) for candidate in runners), title="Runners-up")
    fallen = tuple(_rejected(candidate, answer.units) for candidate in rejected)
    table = Table(("tool", "standing", "rejected for", "value", "limit", "rule"), tuple(row for rows in fallen for row in rows), frozenset({1, 3, 4}))
    fold = (Fold(f"Rejected: {len(rejected)}", (table,)),) if rejected else ()
    return _section("lost", "Why the others lost", (*present(told, second), *fold))


def _runner(candidate: CandidateRecord, units: str) -> Item:
    numbers = ", ".join(f"{option(name)} {value_text(value, '', units)}" for name, value in candidate.key_numbers.items())
    details = [clean(reason) for reason in candidate.reasons] + ([numbers] if numbers else [])
    return Item(clean(candidate.label), tuple(details), f"{candidate.standing:+g}")


def _rejected(candidate: CandidateRecord, units: str) -> list[tuple[str, ...]]:
    first = (clean(candidate.label), f"{candidate.standing:+g}")
    if not candidate.limits:
        return [(*first, "; ".join(clean(reason) for reason in candidate.reasons), "", "", "")]
    return [
        (*(first if place == 0 else ("", "")), clean(limit.text) or option(limit.key), value_text(limit.value, "", units), value_text(limit.limit, "", units), clean(limit.rule))
        for place, limit in enumerate(candidate.limits)
    ]  # fmt: skip


# ---------------------------------------------------------------------- margins
def _margins(answer: Answer) -> Section | None:
    if not answer.checks:
        return None
    rows = tuple(
        (clean(check.name), show(check.value, check.unit, answer.units), show(check.limit, check.unit, answer.units), f"{check.use_percent:.0f} %", check.verdict, clean(check.by))
        for check in answer.checks
    )  # fmt: skip
    bars = drawings.margin_bars([drawings.Bar(clean(c.name), c.use_percent, c.verdict) for c in answer.checks])
    table = Table(("check", "value", "limit", "use", "verdict", "by"), rows, frozenset({1, 2, 3}))
    sources = tuple(Item(clean(c.name), (basis_text(c.basis),)) for c in answer.checks if c.basis)
    fold = (Fold("What the limits rest on", (Items(sources),)),) if sources else ()
    return _section("margins", "Margins", (*present(table, Picture(bars, "Use of each limit; the line is 100 %")), *fold))


# ---------------------------------------------------------------------- assumptions, questions, cautions
def _assumptions(answer: Answer) -> Section | None:
    entries = tuple(_assumption(record, answer) for record in answer.assumptions)
    short = tuple(Item(f"{entry.text} - {entry.details[0]}" if entry.details else entry.text) for entry in entries)
    how = Say("Assumed because the job does not say. To change one, write it in the job file under the name given and run it again.")
    return _section("assumptions", "Assumptions", (how, Items(entries)) if entries else (), (Items(short),))


def _assumption(record: FactRecord, answer: Answer) -> Item:
    firing = next((firing for firing in answer.trace.firings if firing.rule == record.by), None)
    why = clean(record.text) or (clean(firing.why) if firing else "")
    rests = basis_text(record.basis or (firing.basis if firing else None))
    details = [f"{why} [{clean(record.by)}]" if record.by else why, rests, f"In the job file: {clean(record.name)}"]
    return Item(f"{fact_words(record.name)} {value_text(record.value, record.unit, answer.units)}", tuple(line for line in details if line))


def _open_questions(answer: Answer) -> Section | None:
    if answer.verdict == "ask" or not answer.questions:
        return None
    return questions(answer, "Worth asking")


def _cautions(answer: Answer) -> Section | None:
    entries = tuple(
        Item(clean(caution.text), (f"Do: {clean(caution.do)}", f"{clean(', '.join(caution.rules))}; {basis_text(caution.basis)}"), caution.severity, TONES[caution.severity])
        for caution in by_severity(answer.cautions)
    )  # fmt: skip
    brief = (Items(entries),) if answer.picks is None else None
    return _section("cautions", "Cautions", (Items(entries),) if entries else (), brief)


# ---------------------------------------------------------------------- facts and numbers
def _facts(answer: Answer, origin: str) -> Section | None:
    rows = tuple((fact_words(record.name), fact_value(record, answer.units)) for record in answer.trace.facts if record.origin == origin)
    blocks = present(Fields(rows))
    brief = blocks if answer.verdict in ("ask", "refuse", "conditional") else None
    return _section("given", "What was given", blocks, brief)


def _looked_up(answer: Answer) -> Section | None:
    rows = tuple(
        (fact_words(record.name), value_text(record.value, record.unit, answer.units), clean(record.by), basis_text(record.basis))
        for record in answer.trace.facts
        if record.origin == "looked_up"
    )
    found = _section("looked-up", "Numbers looked up", present(Table(("fact", "value", "from", "source"), rows, frozenset({1}))))
    return found


def _calculations(answer: Answer) -> Section | None:
    rows = tuple(
        (fact_words(calculation.result_of), value_text(calculation.value, calculation.unit, answer.units), clean(calculation.formula), _inputs(calculation.inputs), clean(", ".join(calculation.references)))
        for calculation in answer.trace.calculations
    )  # fmt: skip
    table = Table(("result", "value", "formula", "inputs", "references"), rows, frozenset({1}))
    return _section("calculations", "Calculations", (Fold(f"{len(rows)} calculations", (table,)),) if rows else ())


def _inputs(inputs: dict[str, object]) -> str:
    return ", ".join(f"{clean(name)} = {_number(value)}" for name, value in inputs.items())


def _number(value: object) -> str:
    return f"{value:.6g}" if isinstance(value, float) else clean(value)


# ---------------------------------------------------------------------- rules
def _rules(answer: Answer) -> Section | None:
    stages: dict[str, list[FiringRecord]] = defaultdict(list)
    for firing in answer.trace.firings:
        stages[firing.stage].append(firing)
    order = [*_STAGES, *(stage for stage in stages if stage not in _STAGES)]
    folds = tuple(_stage_fold(stage, stages[stage], answer.units) for stage in order if stages.get(stage))
    told = Say(f"{len(answer.trace.firings)} firings. Each line gives the rule, what it says, the facts it fired on with where they came from, what it concluded and what it rests on.")
    return _section("rules", "Every rule that fired", (told, *folds) if folds else ())


def _stage_fold(stage: str, firings: list[FiringRecord], units: str) -> Fold:
    entries = tuple(_firing(firing, units) for firing in firings)
    return Fold(f"{_STAGES.get(stage, option(stage))}: {len(firings)}", (Items(entries),))


def _firing(firing: FiringRecord, units: str) -> Item:
    facts = "; ".join(f"{clean(c.test)} [{origin_text(c.origin)}{_held(c.test, c.value, units)}]" for c in firing.conditions)
    about = f" ({clean(firing.about)})" if firing.about else ""
    shop = ", the shop's own rule" if firing.from_shop else ""
    details = (f"Facts: {facts}", f"Concluded: {clean(firing.conclusion)}{about}", f"Why: {clean(firing.why)}", f"Rests on: {basis_text(firing.basis)}{shop}")
    return Item(clean(firing.says), details, clean(firing.rule))


def _held(test: str, value: object, units: str) -> str:
    shown = value_text(value, "", units) if value is None or isinstance(value, str | float | int | bool | list) else clean(value)
    return "" if value is None or test.endswith(f" is {shown}") else f": {shown}"


# ---------------------------------------------------------------------- sources
def _sources(answer: Answer) -> Section | None:
    places: dict[str, set[str]] = defaultdict(set)
    for basis in _bases(answer):
        if basis is not None and basis.source:
            how = " (recalled)" if basis.kind == "recalled" else ""
            places[clean(basis.source)].add(f"{clean(basis.where)}{how}" if basis.where else how.strip(" ()") or "used")
    for calculation in answer.trace.calculations:
        for reference in calculation.references:
            places[clean(reference)].add(clean(calculation.formula))
    rows = tuple((name, "; ".join(sorted(used))) for name, used in sorted(places.items()))
    return _section("sources", "Sources", present(Table(("source", "where in it, or used by"), rows)))


def _bases(answer: Answer) -> Iterable[BasisRecord | None]:
    yield from (firing.basis for firing in answer.trace.firings)
    yield from (record.basis for record in answer.trace.facts)
    yield from (check.basis for check in answer.checks)
    yield from (caution.basis for caution in answer.cautions)


__all__ = ["argument_sections", "limits_table"]
