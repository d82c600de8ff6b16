"""The quote block: an answer as short `key: value` lines of YAML for an estimator's sheet or script."""

from __future__ import annotations

import json

from millreason.report.words import clean, fact_number, job_key, lead_text, option
from millreason.trace import Answer, Picks, Plain, PlanRecord

FORMAT = "millreason-quote/1"
Value = str | float | int | list[str] | list[float]


def quote(answer: Answer) -> str:
    """Return the block; lengths are in mm, times in minutes, whatever units the job was written in."""
    lines: dict[str, Value] = {"format": FORMAT, "job": clean(answer.job), "verdict": answer.verdict}
    lines["flags"] = flags(answer)
    if answer.picks and answer.plan and answer.verdict in ("recommend", "recommend_with_warnings"):
        lines["tool"] = _tool(answer.picks)
        lines |= _times(answer, answer.plan)
    lines["assumed"] = [f"{job_key(record.name)} = {_plain(record.value)}" for record in answer.assumptions]
    lines["made_by"] = f"millreason {answer.version}, {answer.knowledge_hash[:12]}"
    return "".join(f"{name}: {_text(value)}\n" for name, value in lines.items())


def flags(answer: Answer) -> list[str]:
    """Return what an estimator must not overlook, one word group each."""
    first = {"ask": ["ask"], "refuse": ["refuse"], "conditional": ["conditional on safety"]}.get(answer.verdict, [])
    asked = [f"ask {question.fact}" for question in answer.questions if question.need == "must"]
    held = [f"confirm {question.fact}" for question in answer.conditions]
    limits = [f"limit {limit.key}" for limit in answer.refusal.limits] if answer.refusal else []
    over = [f"{check.verdict} {check.key}" for check in answer.checks if check.verdict != "ok"]
    warned = [f"{caution.severity} {caution.key}" for caution in answer.cautions if caution.severity != "note"]
    doubt = ["contradiction"] if answer.contradictions else []
    return list(dict.fromkeys([*first, *doubt, *asked, *held, *limits, *over, *warned]))


def _tool(picks: Picks) -> str:
    own = f", own cutter {clean(picks.own_cutter)}" if picks.own_cutter else ""
    lead = lead_text(picks.lead_deg, picks.kappa_deg, picks.kappa_note)
    body = f"{option(picks.cutter_class)} D {picks.diameter_mm:g} mm z {picks.teeth}"
    return f"{body} {option(picks.hand)} hand, {lead}{own}"


def _times(answer: Answer, plan: PlanRecord) -> dict[str, Value]:
    load = fact_number(answer, "costs.load_min")
    quantity = fact_number(answer, "require.quantity")
    index = fact_number(answer, "costs.edge_change_min")
    lines: dict[str, Value] = {
        "passes_across": plan.radial_passes,
        "layers_deep": plan.axial_passes,
        "travel_per_pass_mm": [_round(step.travel_mm) for step in plan.steps],
        "travel_counts": clean(plan.travel_convention),
        "feed_min": _round(plan.feed_time_min),
        "extra_pass_min": _round(plan.time_min - plan.feed_time_min),
        "repositions": max(plan.radial_passes * plan.axial_passes - 1, 0),
        "time_min_low_likely_high": [
            _round(plan.time_low_min),
            _round(plan.time_min),
            _round(plan.time_high_min),
        ],
        "parts_per_edge_set": round(plan.parts_per_edge_set, 1),
        "edge_sets_for_batch": _round(plan.edge_sets_for_batch),
    }
    if quantity is not None:
        lines["quantity"] = _round(quantity)
    if load is not None:
        lines["load_min_per_part"] = _round(load)
    if index is not None and plan.parts_per_edge_set > 0:
        lines["index_min_per_part"] = _round(index / plan.parts_per_edge_set)
    if plan.cost_per_part:
        lines["cost_per_part_low_likely_high"] = [_round(cost) for cost in plan.cost_per_part]
    missing = [name for name, value in (("load", load), ("index", index)) if value is None]
    lines["not_in_time"] = [*missing, "tool change", "first-off", "deburring"]
    return lines


def _round(number: float) -> float:
    shown = round(number, 3)
    return int(shown) if shown == int(shown) else shown


def _plain(value: Plain) -> str:
    if isinstance(value, bool):
        return "yes" if value else "no"
    return f"{value:g}" if isinstance(value, float) else clean(value)


def _text(value: Value) -> str:
    return json.dumps(value, ensure_ascii=False)
