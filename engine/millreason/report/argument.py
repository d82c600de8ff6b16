"""The argument: why the answer won, why others lost, margins, assumptions, questions and cautions."""

from __future__ import annotations

from collections.abc import Sequence

from millreason.report.margins import margins, numbers
from millreason.report.opening import questions
from millreason.report.page import (
    Block,
    Fold,
    Item,
    Items,
    Say,
    Section,
    Table,
    present,
    section,
    without_empty_columns,
)
from millreason.report.record import record_sections
from millreason.report.sheet import TONES, by_severity
from millreason.report.words import (
    basis_text,
    clean,
    count,
    fact_words,
    job_key,
    limit_number,
    number_words,
    option,
    pick_name,
    pick_option,
    pick_words,
    recommends,
    value_text,
)
from millreason.trace import Answer, CandidateRecord, Evidence, FactRecord, Ledger, OptionLedger

_ASSUMED = (
    "Assumed because the job does not say. To change one, write it in the job file under the name given, "
    "and run it again."
)

_MAIN_PICKS = ("cutter_class", "diameter_mm", "kappa_deg", "rake", "pitch")


def argument_sections(answer: Answer) -> list[Section]:
    """Return everything that follows the opening, in the order of a report; empty parts are left out."""
    held = {question.fact for question in answer.conditions}
    open_ones = [question for question in answer.questions if question.fact not in held]
    asked = questions(answer, "Worth asking") if open_ones and answer.verdict != "ask" else None
    made = [
        _why(answer),
        _lost(answer),
        margins(answer),
        numbers(answer),
        _assumptions(answer),
        _notes(answer),
        asked,
        _cautions(answer),
        *record_sections(answer),
    ]
    return [part for part in made if part is not None]


# ---------------------------------------------------------------------- why it won
def _why(answer: Answer) -> Section | None:
    if not recommends(answer):
        return None
    spoken = [ledger for ledger in answer.trace.ledgers if any(entry.evidence for entry in ledger.options)]
    told = [item for ledger in spoken if (item := _chosen(ledger, answer.units)) is not None]
    robust = Say(clean(answer.robustness)) if answer.robustness else None
    folds = [Fold(f"Ledger: {pick_name(ledger.pick)}", (_ledger(ledger, answer.units),)) for ledger in spoken]
    blocks = present(Items(tuple(told)), robust, *folds)
    return section("why", "Why this one", blocks, (*_why_in_short(spoken, answer.units), *present(robust)))


def _why_in_short(ledgers: Sequence[Ledger], units: str) -> tuple[Block, ...]:
    """Return the strongest reason for each of the picks that make the cutter, and the rest in one line."""
    by_pick = {ledger.pick: ledger for ledger in ledgers}
    first = tuple(Item(_short(by_pick[pick], units, True)) for pick in _MAIN_PICKS if pick in by_pick)
    rest = ", ".join(_short(ledger, units, False) for ledger in ledgers if ledger.pick not in _MAIN_PICKS)
    return present(Items(first), Say(f"Also: {rest}.") if rest else None)


def _short(ledger: Ledger, units: str, reason: bool) -> str:
    best = next((entry for entry in ledger.options if entry.option == ledger.chosen), None)
    told = max((e for e in best.evidence if e.stance == "for"), key=lambda e: e.weight, default=None) if best else None
    name = pick_words(ledger.pick, ledger.chosen or "none", units)
    if told is None:
        return name
    return f"{name}: {clean(told.why)} [{told.rule}]" if reason else f"{name} [{told.rule}]"


def _chosen(ledger: Ledger, units: str) -> Item | None:
    """Return the chosen option with every reason."""
    best = next((entry for entry in ledger.options if entry.option == ledger.chosen), None)
    if best is None:
        return None
    name = pick_words(ledger.pick, best.option, units)
    spoken_for = sorted((e for e in best.evidence if e.stance == "for"), key=lambda entry: -entry.weight)
    against = [entry for entry in best.evidence if entry.stance != "for"]
    details = [_evidence(entry) for entry in (*spoken_for, *against)]
    next_best = next((entry for entry in ledger.options if entry is not best), None)
    if next_best is not None:
        details.append(f"next: {_standing(ledger.pick, next_best, units)}")
    return Item(name, tuple(details), f"{best.balance:+g}")


def _evidence(entry: Evidence) -> str:
    if entry.stance == "rule_out":
        return f"ruled out: {clean(entry.why)} [{clean(entry.rule)}]"
    sign = "+" if entry.stance == "for" else "-"
    return f"{sign}{count(abs(entry.weight))} {entry.strength}: {clean(entry.why)} [{clean(entry.rule)}]"


def _standing(pick: str, entry: OptionLedger, units: str) -> str:
    balance = "ruled out" if entry.ruled_out else f"{entry.balance:+g}"
    return f"{pick_option(pick, entry.option, units)}, {balance}"


def _ledger(ledger: Ledger, units: str) -> Table:
    spoken = [entry for entry in ledger.options if entry.evidence or entry.option == ledger.chosen]
    silent = [pick_option(ledger.pick, entry.option, units) for entry in ledger.options if entry not in spoken]
    rows = [_ledger_row(ledger, entry, units) for entry in spoken]
    if silent:
        rows.append(("others", "", f"nothing was said about {', '.join(silent)}", "", ""))
    head = ("option", "balance", "for", "against", "ruled out by")
    return without_empty_columns(Table(head, tuple(rows), frozenset({1})))


def _ledger_row(ledger: Ledger, entry: OptionLedger, units: str) -> tuple[str, ...]:
    mark = " (chosen)" if entry.option == ledger.chosen else ""
    said = (_said(entry, stance) for stance in ("for", "against", "rule_out"))
    return f"{pick_option(ledger.pick, entry.option, units)}{mark}", f"{entry.balance:+g}", *said


def _said(entry: OptionLedger, stance: str) -> str:
    words = (word for word in entry.evidence if word.stance == stance)
    strength = "" if stance == "rule_out" else ", {}"
    return "; ".join(f"{clean(word.why)} [{clean(word.rule)}{strength.format(word.strength)}]" for word in words)


# ---------------------------------------------------------------------- why the others lost
def _lost(answer: Answer) -> Section | None:
    tried = answer.trace.candidates
    rejected = [candidate for candidate in tried if candidate.outcome == "rejected"]
    runners = answer.runners_up or [candidate for candidate in tried if candidate.outcome == "stands"]
    if not runners and not rejected and answer.existing is None:
        return None
    told = Say(
        f"{answer.trace.candidates_possible} complete tools came up, best first; "
        f"{len(tried)} of those that were planned and judged are kept here."
    )
    second = Items(tuple(_runner(candidate, answer.units) for candidate in runners), title="Runners-up")
    in_use = None if answer.existing is None else _in_use(answer.existing, answer.units)
    blocks = present(told, in_use, second, _rejected(rejected, answer.units) if rejected else None)
    return section("lost", "Why the others lost", blocks)


def _in_use(candidate: CandidateRecord, units: str) -> Items:
    """Say how the cutter in use would do: as a runner-up, or with every limit it breaks."""
    broken = tuple(f"{clean(limit.text)} [{clean(limit.rule)}]" for limit in candidate.limits)
    item = _runner(candidate, units)
    outcome = "it breaks a limit" if broken else "it would do"
    return Items((Item(item.text, (*broken, *item.details), outcome),), title="The cutter in use")


def _runner(candidate: CandidateRecord, units: str) -> Item:
    numbers = ", ".join(number_words(name, value, units) for name, value in candidate.key_numbers.items())
    details = (*(clean(reason) for reason in candidate.reasons), *([numbers] if numbers else []))
    return Item(clean(candidate.label), details, f"{candidate.standing:+g}")


def _rejected(candidates: Sequence[CandidateRecord], units: str) -> Fold:
    rows = tuple(row for candidate in candidates for row in _rejected_rows(candidate, units))
    head = ("tool", "standing", "rejected because", "value", "limit", "rule")
    return Fold(f"Rejected: {len(candidates)}", (Table(head, rows, frozenset({1, 3, 4})),))


def _rejected_rows(candidate: CandidateRecord, units: str) -> list[tuple[str, ...]]:
    first = (clean(candidate.label), f"{candidate.standing:+g}")
    if not candidate.limits:
        return [(*first, "; ".join(clean(reason) for reason in candidate.reasons), "", "", "")]
    return [
        (
            *(first if place == 0 else ("", "")),
            clean(limit.text) or option(limit.key),
            limit_number(limit.value, units, limit.unit),
            limit_number(limit.limit, units, limit.unit),
            clean(limit.rule),
        )
        for place, limit in enumerate(candidate.limits)
    ]


# ---------------------------------------------------------------------- assumptions and cautions
def _assumptions(answer: Answer) -> Section | None:
    if not answer.assumptions:
        return None
    entries = tuple(_assumption(record, answer) for record in answer.assumptions)
    short = "; ".join(f"{entry.text} [{record.by}]" for entry, record in zip(entries, answer.assumptions, strict=True))
    brief = Say(f"Not told, so assumed: {short}. To change one, write it in the job file.")
    return section("assumptions", "Assumptions", (Say(_ASSUMED), Items(entries)), (brief,))


def _assumption(record: FactRecord, answer: Answer) -> Item:
    firing = next((firing for firing in answer.trace.firings if firing.rule == record.by), None)
    why = clean(record.text) or (clean(firing.why) if firing else "")
    rests = basis_text(record.basis or (firing.basis if firing else None))
    details = [
        f"{why} [{clean(record.by)}]" if record.by else why,
        rests,
        f"In the job file: {job_key(record.name)}",
    ]
    shown = f"{fact_words(record.name)} {value_text(record.value, record.unit, answer.units)}"
    return Item(shown, tuple(detail for detail in details if detail))


def _notes(answer: Answer) -> Section | None:
    if not answer.notes:
        return None
    blocks = (Items(tuple(Item(clean(text)) for text in answer.notes)),)
    return section("notes", "Remarks", blocks, blocks)


def _cautions(answer: Answer) -> Section | None:
    if not answer.cautions:
        return None
    entries = tuple(
        Item(
            clean(caution.text),
            (f"Do: {clean(caution.do)}", f"{clean(', '.join(caution.rules))}; {basis_text(caution.basis)}"),
            caution.severity,
            TONES[caution.severity],
        )
        for caution in by_severity(answer.cautions)
    )
    brief = None if recommends(answer) else (Items(entries),)
    return section("cautions", "Cautions", (Items(entries),), brief)
