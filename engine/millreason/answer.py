"""Writing the answer: from what a choice found to the frozen records that people and programs read."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from millreason import __version__
from millreason.checks import make_checks, robustness
from millreason.limits import binding_limits
from millreason.openings import find_openings
from millreason.plan_record import make_plan_record
from millreason.trace import (
    Answer,
    Calculation,
    CandidateRecord,
    CautionRecord,
    FactRecord,
    FiringRecord,
    Picks,
    Question,
    Refusal,
    SourceRecord,
    Trace,
    Verdict,
)

if TYPE_CHECKING:
    from millreason.choice import Adviser
    from millreason.outcome import Outcome, Tried

MOST_QUESTIONS = 6
MOST_CANDIDATES_SHOWN = 12
_SEVERITIES = ("note", "caution", "warning")


def write_answer(adviser: Adviser, out: Outcome, openings: bool = True) -> Answer:
    """Write the answer to a decided job; openings of a refusal are searched unless told otherwise."""
    verdict = verdict_of(out)
    chosen = out.stands[0] if out.stands and verdict not in ("ask", "refuse") else None
    cautions = _cautions(out)
    plan = make_plan_record(adviser, out, chosen) if chosen else None
    checks = make_checks(adviser, out, chosen) if chosen else []
    held = verdict == "conditional"
    refusal = _refusal(adviser, out, openings) if verdict == "refuse" else None
    return Answer(
        job=out.job.title,
        file=out.job.file,
        units=out.job.units,
        verdict=verdict,
        summary=_summary(out, verdict, chosen),
        picks=_picks(out, chosen) if chosen else None,
        plan=None if held else plan,
        checks=[] if held else checks,
        cautions=cautions,
        assumptions=[record for record in out.situation.records() if record.origin == "assumed"],
        questions=_questions(adviser, out),
        conditions=list(out.conditions.values()),
        contradictions=list(out.contradictions),
        notes=[*out.unit_doubts, *out.notes],
        refusal=refusal,
        runners_up=[] if held or not chosen else [_candidate(tried, "stands") for tried in _others(out)],
        existing=_existing(adviser, out) if chosen and not held else None,
        robustness=robustness(adviser, out, chosen) if chosen and not held else "",
        trace=_trace(adviser, out, chosen, held),
        engine=adviser.stages["weigh"].engine_name,
        version=__version__,
        knowledge_hash=adviser.knowledge.content_hash,
        provenance=dict(adviser.provenance),
    )


def verdict_of(out: Outcome) -> Verdict:
    """Return the verdict: what a rule refuses stays refused; else ask, refuse, hold back, and warn, in this order."""
    if out.limits:
        return "refuse"
    if out.must_ask:
        return "ask"
    if not out.stands:
        return "refuse"
    if out.conditions:
        return "conditional"
    grave = any(then.caution and then.caution.severity == "warning" for _, then in out.cautions)
    return "recommend_with_warnings" if grave else "recommend"


def _summary(out: Outcome, verdict: Verdict, chosen: Tried | None) -> str:
    if verdict == "ask":
        return "Some facts are missing without which no cutter and no time can be defended."
    if verdict == "refuse":
        return "No cutter does this job within the limits; see which limits bind and what would open a way."
    assert chosen is not None
    words = (
        chosen.candidate.label[0].lower() + chosen.candidate.label[1:]
        if chosen.candidate.label[0] != "D"
        else chosen.candidate.label
    )
    if verdict == "conditional":
        return f"{words}; no cutting data before that."
    layout = chosen.plan.layout
    passes = "one pass" if layout.passes == 1 else f"{layout.passes} passes side by side"
    layers = "one layer" if chosen.plan.layers == 1 else f"{chosen.plan.layers} layers in depth"
    return f"{words}; {passes}, {layers}."


def _picks(out: Outcome, chosen: Tried) -> Picks:
    candidate, separate = chosen.candidate, out.separate
    kappa = candidate.family.kappa_deg
    top = chosen.plan.heaviest.kappa_top_deg
    note = f"round insert: {top:.0f} degrees at the top of the cut" if candidate.is_round else ""
    return Picks(
        cutter_class=candidate.family.cutter_class,
        diameter_mm=candidate.diameter_mm,
        largest_diameter_mm=candidate.outermost_mm,
        teeth=candidate.teeth,
        pitch=candidate.pitch,
        spacing=separate["spacing"],
        rake=candidate.rake.rake,
        axial_rake_deg=candidate.rake.axial_deg,
        radial_rake_deg=candidate.rake.radial_deg,
        lead_deg=None if candidate.is_round else 90 - kappa,
        kappa_deg=top if candidate.is_round else kappa,
        kappa_note=note,
        corner=candidate.corner.corner,
        edge=candidate.edge,
        wiper=candidate.wiper,
        pockets=candidate.pockets,
        mounting=candidate.mounting,
        hand=separate["hand"],
        application=f"{out.situation.value('material.iso_group')} {separate['application'].replace('_', ' ')}",
        own_cutter=candidate.own.id if candidate.own else None,
    )


def _cautions(out: Outcome) -> list[CautionRecord]:
    """Return one record for every caution key, the gravest words first, with all rules that gave it."""
    merged: dict[str, CautionRecord] = {}
    for firing, then in out.cautions:
        spec = then.caution
        if spec is None:
            continue
        before = merged.get(spec.key)
        record = CautionRecord(spec.key, spec.severity, firing.why, spec.do, [firing.rule], firing.basis)
        if before is None:
            merged[spec.key] = record
        elif _SEVERITIES.index(spec.severity) > _SEVERITIES.index(before.severity):
            merged[spec.key] = replace(record, rules=[*before.rules, firing.rule])
        else:
            merged[spec.key] = replace(before, rules=[*before.rules, firing.rule])
    return sorted(merged.values(), key=lambda caution: -_SEVERITIES.index(caution.severity))


def _questions(adviser: Adviser, out: Outcome) -> list[Question]:
    """Return the questions to put, conditions and those that must be answered first, at most six."""
    order = adviser.vocabulary.order
    ranked = sorted(out.questions.values(), key=lambda question: (question.need != "must", order.get(question.fact, 0)))
    return [*out.conditions.values(), *ranked][:MOST_QUESTIONS]


def _others(out: Outcome) -> list[Tried]:
    """Return the best candidates of another class, angle or size than the chosen one."""
    seen = {_kind(out.stands[0])}
    others = []
    for tried in out.stands[1:]:
        if _kind(tried) not in seen:
            seen.add(_kind(tried))
            others.append(tried)
    return others[:3]


def _kind(tried: Tried) -> tuple[str, float, str]:
    family = tried.candidate.family
    return family.cutter_class, family.kappa_deg, tried.candidate.size.label


def _candidate(tried: Tried, outcome: str) -> CandidateRecord:
    keys = ("passes_across", "layers", "power_use_worn", "time_min", "outermost_diameter_mm", "teeth_in_cut")
    numbers = {name: float(tried.facts[f"plan.{name}"]) for name in keys if f"plan.{name}" in tried.facts}
    picks = {name.removeprefix("pick."): value for name, value in tried.facts.items() if name.startswith("pick.")}
    return CandidateRecord(
        tried.candidate.label, picks, tried.candidate.evidence, tried.lowered, tried.standing, outcome,  # type: ignore[arg-type]
        list(tried.reasons), list(tried.limits), numbers,
    )  # fmt: skip


def _existing(adviser: Adviser, out: Outcome) -> CandidateRecord | None:
    """Return how the cutter in use would do in this job: it stands, or is rejected with the limits it breaks."""
    if out.job.existing is None:
        return None
    outcome = adviser.decide(replace(out.job, cutters=(out.job.existing,), existing=None))
    if outcome.stands:
        return _candidate(outcome.stands[0], "stands")
    return _candidate(outcome.rejected[0], "rejected") if outcome.rejected else None


def _refusal(adviser: Adviser, out: Outcome, openings: bool) -> Refusal:
    limits = binding_limits(out)
    found = find_openings(adviser, out, limits) if openings else []
    offers = [then.offer for _, then in out.cautions if then.offer]
    return Refusal(limits, found, list(dict.fromkeys(offers)))


def _trace(adviser: Adviser, out: Outcome, chosen: Tried | None, held: bool) -> Trace:
    situation = out.situation
    facts: list[FactRecord] = situation.records()
    firings = list(out.firings)
    candidates = []
    if chosen is not None:
        place = next((number for number, firing in enumerate(firings) if firing.stage == "caution"), len(firings))
        judge = adviser.stages["judge"]
        label = chosen.candidate.label
        firings[place:place] = [judge.record(f, chosen.situation, out.job.units, label) for f in chosen.firings]
        if not held:
            candidates.append(_candidate(chosen, "chosen"))
            candidates.extend(_candidate(tried, "stands") for tried in out.stands[1:MOST_CANDIDATES_SHOWN])
    if not held:
        candidates.extend(_candidate(tried, "rejected") for tried in out.rejected[:MOST_CANDIDATES_SHOWN])
    names = (
        {}
        if chosen is None
        else {
            **{k.removeprefix("pick."): _name(v) for k, v in chosen.facts.items() if k.startswith("pick.")},
            **out.separate,
        }
    )
    if chosen is not None:
        names["diameter_mm"] = f"{chosen.candidate.size.nominal_mm:g}"
    ledgers = out.ledgers.records(names) if out.ledgers else []
    calculations = chosen.plan.sheet.calculations() if chosen is not None and not held else []
    if verdict_of(out) in ("ask",):
        ledgers, candidates = [], []
    sources = _sources(adviser, facts, firings, calculations)
    return Trace(facts, firings, ledgers, candidates, calculations, out.candidates_possible, sources)


def _sources(
    adviser: Adviser, facts: list[FactRecord], firings: list[FiringRecord], calculations: list[Calculation]
) -> list[SourceRecord]:
    """Return every source that the facts, rules and formulas of an answer cite."""
    cited = {record.basis.source for record in facts if record.basis} | {firing.basis.source for firing in firings}
    cited.update(part.strip() for use in calculations for line in use.references for part in line.split(","))
    known = adviser.knowledge.sources
    return [
        SourceRecord(
            name, known[name].kind, known[name].author, known[name].title, known[name].edition or "", known[name].year
        )
        for name in sorted(cited)
        if name in known
    ]


def _name(value: object) -> str:
    return f"{value:g}" if isinstance(value, int | float) else str(value)
