"""The setup sheet: one page that stands beside the machine."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from millreason.report import drawings
from millreason.report.page import (
    Fields,
    Gallery,
    Item,
    Items,
    Pair,
    Picture,
    Say,
    Section,
    Table,
    Tone,
    present,
)
from millreason.report.svg import length
from millreason.report.words import (
    clean,
    corner_text,
    count,
    fact_number,
    fact_shown,
    joined,
    lead_text,
    option,
    rake_text,
)
from millreason.trace import Answer, CautionRecord, Picks, PlanRecord, Step
from millreason.units import plain, show

Rows = tuple[tuple[str, str], ...]
Line = tuple[str, str, Callable[[Step], float]]
TONES: dict[str, Tone] = {"note": "note", "caution": "caution", "warning": "warning"}
_ORDER = {"warning": 0, "caution": 1, "note": 2}
STOP_AT_SOUND = "the sound changes, it chatters, or chips turn blue, dusty or welded together"
STOP_AT_EDGE = "burr, edge break-out or a step between passes grows"
_LINES: tuple[Line, ...] = (
    ("spindle speed n", "rpm", lambda step: step.spindle_speed_rpm),
    ("cutting speed vc", "m/min", lambda step: step.cutting_speed_m_min),
    ("feed per tooth fz", "mm", lambda step: step.feed_per_tooth_mm),
    ("table feed vf", "mm/min", lambda step: step.table_feed_mm_min),
    ("depth of cut ap", "mm", lambda step: step.depth_of_cut_mm),
    ("width of cut ae", "mm", lambda step: step.width_of_cut_mm),
    ("time with returns", "min", lambda step: step.time_min),
)


def setup_sheet(answer: Answer, picks: Picks, plan: PlanRecord) -> Section:
    """Return the setup sheet of an answer."""
    left = present(steps_table(plan.steps, _LINES, answer.units, "Cutting data"))
    right = present(
        Fields(_after(answer, plan), "Edges, time and finish"),
        Items(tuple(Item(text) for text in _stop_signs(plan)), title="Stop and look when"),
    )
    cautions = tuple(_short_caution(caution) for caution in by_severity(answer.cautions) if caution.severity != "note")
    notes = [option(caution.key) for caution in answer.cautions if caution.severity == "note"]
    blocks = present(
        Fields(_tool(answer, picks, plan), "Tool"),
        Fields(_use(answer, picks, plan), "Position and passes"),
        Pair(left, right),
        Gallery(tuple(_pictures(answer, picks, plan))),
        Items(cautions, title="Cautions"),
        Say(f"Also noted under Cautions: {', '.join(notes)}.") if notes else None,
    )
    return Section("sheet", "Setup sheet", blocks, blocks)


def by_severity(cautions: Sequence[CautionRecord]) -> list[CautionRecord]:
    """Return cautions with the gravest first, else in the order given."""
    return sorted(cautions, key=lambda caution: _ORDER[caution.severity])


def _short_caution(caution: CautionRecord) -> Item:
    """Return what to do; what can hurt someone also with its reason."""
    words = clean(caution.do) or clean(caution.text)
    if caution.severity == "warning":
        words = f"{clean(caution.text)} {clean(caution.do)}".strip()
    return Item(words, (), caution.severity, TONES[caution.severity])


def steps_table(steps: Sequence[Step], lines: Sequence[Line], units: str, title: str = "") -> Table:
    """Return numbers of the steps with one column per step, so that the table stays narrow."""
    rows = [("layers x passes", *(f"{step.layers} x {step.passes}" for step in steps))]
    rows += [(name, *(show(value(step), unit, units) for step in steps)) for name, unit, value in lines]
    head = ("", *(option(step.name) for step in steps))
    return Table(head, tuple(rows), frozenset(range(1, len(steps) + 1)), title)


# ---------------------------------------------------------------------- fields
def _tool(answer: Answer, picks: Picks, plan: PlanRecord) -> Rows:
    units = answer.units
    own = f", own cutter {clean(picks.own_cutter)}" if picks.own_cutter else ""
    outer = show(picks.largest_diameter_mm, "mm", units)
    corner = corner_text(picks.corner, units)
    return (
        ("Cutter", f"{option(picks.cutter_class)}, {option(picks.hand)} hand{own}"),
        ("Diameter", f"{show(picks.diameter_mm, 'mm', units)}; over the inserts {outer}"),
        ("Teeth", f"z {picks.teeth}, {option(picks.pitch)} pitch, {option(picks.spacing)} spacing"),
        ("Lead angle", lead_text(picks.lead_deg, picks.kappa_deg, picks.kappa_note)),
        ("Rake", rake_text(picks)),
        ("Insert", f"{corner}, edge {option(picks.edge)}"),
        ("Wiper", f"{option(picks.wiper)}; pockets {option(picks.pockets)}"),
        ("ISO 513", option(picks.application)),
        ("Mounting", joined(option(picks.mounting), fact_shown(answer, "machine.interface"))),
        ("Gauge length", length(plan.gauge_length_mm, units)),
        ("Assembly mass", _mass(answer, plan)),
    )


def _mass(answer: Answer, plan: PlanRecord) -> str:
    limit = fact_shown(answer, "machine.changer_mass_kg")
    mass = show(plan.mass_kg, "kg", answer.units)
    return f"about {mass}; the changer takes {limit}" if limit else f"about {mass}"


def _use(answer: Answer, picks: Picks, plan: PlanRecord) -> Rows:
    def lengths(value: float) -> str:
        return length(value, answer.units)

    exit_gap = max(picks.diameter_mm - plan.width_of_cut_mm - plan.entry_gap_mm, 0.0)
    overlap = f", overlap {lengths(plan.overlap_mm)}" if plan.radial_passes > 1 else ""
    passes = f"{plan.radial_passes} across, {plan.axial_passes} deep; width {lengths(plan.width_of_cut_mm)}"
    return (
        ("Passes", f"{passes}{overlap}"),
        ("Direction", option(plan.direction)),
        ("Position", clean(plan.position)),
        ("Centre", f"{lengths(plan.centre_offset_mm)} off the middle of the cut"),
        ("Overhang", f"{lengths(plan.entry_gap_mm)} where teeth enter, {lengths(exit_gap)} where they leave"),
        ("Entry", joined(option(plan.entry), clean(plan.entry_feed))),
        ("Fluid", option(plan.fluid)),
    )


def _after(answer: Answer, plan: PlanRecord) -> Rows:
    bounds = " to ".join(show(bound, "um", answer.units) for bound in plan.ra_bounds_um)
    spread = f"{count(plan.time_low_min)} to {count(plan.time_high_min)}"
    life, parts = count(plan.tool_life_min), count(plan.parts_per_edge_set)
    sets = f"{count(plan.edge_sets_for_batch)} set{'' if plan.edge_sets_for_batch == 1 else 's'} of edges"
    finish = f"Ra about {show(plan.expected_ra_um, 'um', answer.units)}"
    rows = (
        ("Time", f"{count(plan.time_min)} min a part ({spread}); in feed {count(plan.feed_time_min)} min"),
        ("Finish", f"{finish} ({bounds})" if bounds else finish),
        ("Index edges", f"after {life} min in cut, about {parts} parts; {sets} for the batch"),
    )
    if plan.cost_per_part is None:
        return rows
    cost = " / ".join(plain(value, 2) for value in plan.cost_per_part)
    return (*rows, ("Cost", f"{cost} a part (low / likely / high)"))


def _stop_signs(plan: PlanRecord) -> list[str]:
    """Return the signs to stop at; the load is the computed one, to read the machine's meter against."""
    loads = [
        (
            100 * step.net_power_kw / step.available_power_kw,
            100 * step.net_power_worn_kw / step.available_power_kw,
        )
        for step in plan.steps
        if step.available_power_kw > 0
    ]
    if not loads:
        return [STOP_AT_SOUND, STOP_AT_EDGE]
    sharp, worn = max(loads)
    load = (
        f"the load goes past {worn:.0f} % of what the spindle has at this speed: the edges are worn "
        f"({sharp:.0f} % with sharp edges)"
    )
    return [STOP_AT_SOUND, load, STOP_AT_EDGE]


# ---------------------------------------------------------------------- drawings
def _pictures(answer: Answer, picks: Picks, plan: PlanRecord) -> list[Picture]:
    left_hand, units = picks.hand == "left", answer.units
    view = drawings.CutView(
        diameter_mm=picks.diameter_mm,
        outermost_mm=picks.largest_diameter_mm,
        width_mm=plan.width_of_cut_mm,
        entry_gap_mm=plan.entry_gap_mm,
        entry_deg=plan.entry_angle_deg,
        exit_deg=plan.exit_angle_deg,
        direction=option(plan.direction),
        left_hand=left_hand,
        units=units,
    )
    angles = drawings.EdgeAngles(
        kappa_deg=picks.kappa_deg,
        lead_deg=picks.lead_deg,
        axial_rake_deg=picks.axial_rake_deg,
        radial_rake_deg=picks.radial_rake_deg,
        depth_mm=plan.depth_of_cut_mm,
        round_insert=picks.corner == "round",
        units=units,
    )
    return [
        Picture(drawings.cutter_over_work(view), "Cutter over the work, seen from the spindle"),
        *_pass_map(answer, picks, plan),
        Picture(drawings.rakes_and_lead(angles), "Lead and rake"),
    ]


def _pass_map(answer: Answer, picks: Picks, plan: PlanRecord) -> list[Picture]:
    long, wide = fact_number(answer, "work.length_mm"), fact_number(answer, "work.width_mm")
    if not long or not wide:
        return []
    lanes = drawings.PassMap(
        length_mm=long,
        width_mm=wide,
        passes=plan.radial_passes,
        pass_width_mm=plan.width_of_cut_mm,
        overlap_mm=plan.overlap_mm,
        diameter_mm=picks.diameter_mm,
        entry_gap_mm=plan.entry_gap_mm,
        left_hand=picks.hand == "left",
        units=answer.units,
    )
    return [Picture(drawings.pass_map(lanes), "Pass map")]
