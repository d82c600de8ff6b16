"""The setup sheet: what stands beside the machine, or the questions, or the refusal, whichever the answer is."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from millreason import drawings
from millreason.report.page import Block, Box, Fields, Item, Items, Picture, Say, Section, Table, Tone, present
from millreason.report.words import clean, corner_text, count, fact_number, fact_shown, fact_words, lead_text, listing, option, value_text
from millreason.trace import Answer, CautionRecord, LimitRecord, Picks, PlanRecord, Question, Step
from millreason.units import plain, show

TONES: dict[str, Tone] = {"note": "note", "caution": "caution", "warning": "warning"}
_ORDER = {"warning": 0, "caution": 1, "note": 2}


def opening_sections(answer: Answer) -> list[Section]:
    """Return what the report opens with, by the verdict."""
    sections = [_contradictions(answer)] if answer.contradictions else []
    if answer.conditions:
        sections.append(_conditions(answer))
    if answer.verdict == "ask":
        sections.append(questions(answer, "Please answer these first"))
    if answer.refusal:
        sections.append(_refusal(answer))
    if answer.picks and answer.plan and answer.verdict not in ("ask", "refuse", "conditional"):
        sections.append(_setup(answer, answer.picks, answer.plan))
    return sections


def _contradictions(answer: Answer) -> Section:
    box = Box("The job contradicts itself", tuple(clean(text) for text in answer.contradictions), "warning")
    return Section("contradictions", "Contradictions", (box,), (box,))


def _conditions(answer: Answer) -> Section:
    lines = tuple(f"{clean(question.text)} {clean(question.because)}".strip() for question in answer.conditions)
    box = Box("Cutting data are held back until this is confirmed", lines, "stop")
    names = listing(f"{question.fact.partition('.')[2]}: yes" for question in answer.conditions)
    how = Say(f"When a qualified person has confirmed it, write under 'confirm:' in the job file: {names}. Then run it again.")
    return Section("conditions", "Condition", (box, how), (box, how))


def questions(answer: Answer, title: str) -> Section:
    """Return the questions, most valuable first, each with why it is asked."""
    entries = tuple(_question(question) for question in answer.questions)
    blocks: tuple[Block, ...] = (Items(entries, numbered=True),)
    return Section("questions", title, blocks, blocks)


def _question(question: Question) -> Item:
    effect = f"It would change: {clean(question.effect)}" if question.effect else ""
    rules = f" [{listing(question.rules)}]" if question.rules else ""
    details = (f"Why: {clean(question.because)}{rules}", effect, f"In the job file: {clean(question.fact)}")
    return Item(clean(question.text), tuple(line for line in details if line), "" if question.need == "must" else "useful")


# ---------------------------------------------------------------------- refusal
def _refusal(answer: Answer) -> Section:
    refusal = answer.refusal
    assert refusal is not None
    limits = limits_table(refusal.limits, answer.units, "Limits that bind")
    opened = Items(tuple(Item(clean(o.text), (f"Then: {clean(o.then)}",) if o.then else (), "verified") for o in refusal.openings), title="What would open a way (each was run)")
    none = Say("No single change that was tried opens a way.") if not refusal.openings else None
    other = Items(tuple(Item(clean(text)) for text in refusal.alternatives), title="Other ways")
    blocks = present(limits, opened, none, other)
    return Section("refusal", "Why it cannot be done as described", blocks, blocks)


def limits_table(limits: Sequence[LimitRecord], units: str, title: str = "") -> Table:
    """Return limits as value against limit, with the rule and what could be relaxed."""
    rows = tuple(
        (clean(limit.text) or option(limit.key), value_text(limit.value, "", units), value_text(limit.limit, "", units),
         clean(limit.rule), ", ".join(fact_words(name) for name in limit.relax))
        for limit in limits
    )  # fmt: skip
    return Table(("limit", "value", "allowed", "rule", "could be relaxed"), rows, frozenset({1, 2}), title)


# ---------------------------------------------------------------------- setup sheet
def _setup(answer: Answer, picks: Picks, plan: PlanRecord) -> Section:
    tool = Fields(_tool(answer, picks, plan), "Tool")
    use = Fields(_use(answer, picks, plan), "Position and passes")
    steps = Table(*_steps(plan.steps, answer.units), numbers=frozenset(range(1, len(plan.steps) + 1)), title="Cutting data")
    after = Fields(_after(answer, plan), "Edges, time and load")
    stops = Items(tuple(_stop(answer, plan)), title="Stop and look when")
    cautions = Items(tuple(_short_caution(caution) for caution in by_severity(answer.cautions)), title="Cautions")
    plain_blocks = present(tool, use, steps, after, stops, cautions)
    shown = present(tool, use, steps, *_pictures(answer, picks, plan), after, stops, cautions)
    return Section("sheet", "Setup sheet", shown, plain_blocks)


def by_severity(cautions: Sequence[CautionRecord]) -> list[CautionRecord]:
    """Return cautions with the gravest first, else in the order given."""
    return sorted(cautions, key=lambda caution: _ORDER[caution.severity])


def _short_caution(caution: CautionRecord) -> Item:
    return Item(clean(caution.do) or clean(caution.text), (), caution.severity, TONES[caution.severity])


def _tool(answer: Answer, picks: Picks, plan: PlanRecord) -> tuple[tuple[str, str], ...]:
    def length(value: float) -> str:
        return show(value, "mm", answer.units)

    group = fact_shown(answer, "material.iso_group") or fact_shown(answer, "work.iso_group")
    limit = fact_number(answer, "machine.changer_mass_kg")
    mass = show(plan.mass_kg, "kg", answer.units) + (f", changer takes {show(limit, 'kg', answer.units)}" if limit else "")
    rows = (
        ("Cutter", f"{option(picks.cutter_class)}, {option(picks.hand)} hand" + (f", own cutter {clean(picks.own_cutter)}" if picks.own_cutter else "")),
        ("Diameter", f"{length(picks.diameter_mm)}; over the inserts {length(picks.largest_diameter_mm)}"),
        ("Teeth", f"z {picks.teeth}, {option(picks.pitch)} pitch, {option(picks.spacing)} spacing"),
        ("Lead angle", lead_text(picks.lead_deg, picks.kappa_deg, picks.kappa_note)),
        ("Rake", f"{option(picks.rake)}: axial {picks.axial_rake_deg:+g} deg, radial {picks.radial_rake_deg:+g} deg"),
        ("Insert", f"{corner_text(picks.corner, answer.units)}; edge {option(picks.edge)}; wiper {option(picks.wiper)}; pockets {option(picks.pockets)}"),
        ("ISO 513", " ".join(part for part in (group, option(picks.application)) if part)),
        ("Mounting", ", ".join(part for part in (option(picks.mounting), fact_shown(answer, "machine.interface")) if part)),
        ("Gauge length", length(plan.gauge_length_mm)),
        ("Assembly mass", mass),
    )  # fmt: skip
    return rows


def _use(answer: Answer, picks: Picks, plan: PlanRecord) -> tuple[tuple[str, str], ...]:
    def length(value: float) -> str:
        return show(value, "mm", answer.units)

    overlap = f", overlap {length(plan.overlap_mm)}" if plan.radial_passes > 1 else ""
    exit_gap = picks.diameter_mm - plan.width_of_cut_mm - plan.entry_gap_mm
    teeth = " / ".join(plain(number, 2) for number in plan.teeth_in_cut)
    return (
        ("Passes", f"{plan.radial_passes} across x {plan.axial_passes} deep; width {length(plan.width_of_cut_mm)}{overlap}"),
        ("Direction", option(plan.direction)),
        ("Position", f"{option(plan.position)}; cutter centre {length(plan.centre_offset_mm)} off the centre of the cut"),
        ("Overhang", f"{length(plan.entry_gap_mm)} where teeth enter, {length(max(exit_gap, 0.0))} where they leave"),
        ("Entry", ", ".join(part for part in (option(plan.entry), option(plan.entry_feed)) if part)),
        ("Arc", f"teeth enter at {plain(plan.entry_angle_deg, 1)} deg, leave at {plain(plan.exit_angle_deg, 1)} deg ({plain(plan.arc_deg, 1)} deg in cut)"),
        ("Teeth in cut", f"{teeth} (least / mean / most); first contact {option(plan.first_contact)}"),
        ("Fluid", option(plan.fluid)),
    )  # fmt: skip


_STEP_ROWS: tuple[tuple[str, str, Callable[[Step], float]], ...] = (
    ("cutting speed vc", "m/min", lambda step: step.cutting_speed_m_min),
    ("feed per tooth fz", "mm", lambda step: step.feed_per_tooth_mm),
    ("table feed vf", "mm/min", lambda step: step.table_feed_mm_min),
    ("depth of cut ap", "mm", lambda step: step.depth_of_cut_mm),
    ("width of cut ae", "mm", lambda step: step.width_of_cut_mm),
    ("feed time", "min", lambda step: step.time_min),
)


def _steps(steps: Sequence[Step], units: str) -> tuple[tuple[str, ...], tuple[tuple[str, ...], ...]]:
    """Return the cutting data with one column per step, so that it stays narrow."""
    head = ("", *(option(step.name) for step in steps))
    rows = [
        ("layers x passes", *(f"{step.layers} x {step.passes}" for step in steps)),
        ("spindle speed n", *(show(step.spindle_speed_rpm, "rpm", units) for step in steps)),
    ]
    rows += [(label, *(show(value(step), unit, units) for step in steps)) for label, unit, value in _STEP_ROWS]
    return head, tuple(rows)


def _after(answer: Answer, plan: PlanRecord) -> tuple[tuple[str, str], ...]:
    spread = f"{count(plan.time_low_min)} to {count(plan.time_high_min)} min"
    bounds = " to ".join(show(bound, "um", answer.units) for bound in plan.ra_bounds_um)
    rows = [
        ("Time", f"{count(plan.time_min)} min per part ({spread}); in feed {count(plan.feed_time_min)} min"),
        ("Travel", clean(plan.travel_convention)),
        ("Finish", f"Ra {show(plan.expected_ra_um, 'um', answer.units)} expected" + (f" ({bounds})" if bounds else "")),
        ("Index edges", f"after {count(plan.tool_life_min)} min in cut, about {count(plan.parts_per_edge_set)} parts; {count(plan.edge_sets_for_batch)} sets for the batch"),
    ]  # fmt: skip
    if plan.cost_per_part:
        rows.append(("Cost per part", " / ".join(plain(cost, 2) for cost in plan.cost_per_part) + " (low / likely / high)"))
    return tuple(rows)


def _stop(answer: Answer, plan: PlanRecord) -> list[Item]:
    """Signs to stop at; the load is the computed one, so that the meter can be read against it."""
    heavy = max(plan.steps, key=lambda step: step.net_power_kw / step.available_power_kw, default=None)
    items = [Item("the sound changes, it chatters, or chips turn blue, dusty or welded together")]
    if heavy is not None and heavy.available_power_kw > 0:
        sharp = 100 * heavy.net_power_kw / heavy.available_power_kw
        worn = 100 * heavy.net_power_worn_kw / heavy.available_power_kw
        items.append(Item(f"the load passes {sharp:.0f} % by more than a little (sharp edges); at {worn:.0f} % the edges are worn out"))
    items.append(Item("burr, edge break-out or a step between passes grows"))
    return items


# ---------------------------------------------------------------------- drawings
def _pictures(answer: Answer, picks: Picks, plan: PlanRecord) -> list[Picture]:
    view = drawings.CutView(
        picks.diameter_mm, picks.largest_diameter_mm, plan.width_of_cut_mm, plan.entry_gap_mm, plan.entry_angle_deg,
        plan.exit_angle_deg, option(plan.direction), picks.hand == "left", answer.units,
    )  # fmt: skip
    made = [Picture(drawings.cutter_over_work(view), "Cutter over the work, seen from the spindle")]
    length, width = fact_number(answer, "work.length_mm"), fact_number(answer, "work.width_mm")
    if length and width:
        lanes = drawings.PassMap(length, width, plan.radial_passes, plan.width_of_cut_mm, plan.overlap_mm, picks.diameter_mm,
                                 plan.entry_gap_mm, picks.hand == "left", answer.units)  # fmt: skip
        made.append(Picture(drawings.pass_map(lanes), "Pass map"))
    depth = plan.depth_of_cut_mm
    angles = drawings.EdgeAngles(picks.kappa_deg, picks.lead_deg, picks.axial_rake_deg, picks.radial_rake_deg, depth, picks.corner == "round", answer.units)
    made.append(Picture(drawings.rakes_and_lead(angles), "Lead and rake"))
    return made
