"""The plan as it is written down: steps with every number, position, time, life and cost."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import TYPE_CHECKING

from millreason.cut_plan import Load, plan_teeth
from millreason.formulas.economics import cost_per_part, edges_per_batch
from millreason.formulas.entry_paths import helix_path
from millreason.formulas.life import life_band
from millreason.formulas.travel import pass_time
from millreason.formulas.unit_power import Band, feed_factor, unit_power_check
from millreason.plan import start_speed
from millreason.practice import PracticeValue
from millreason.trace import PlanRecord, Step
from millreason.units import show

if TYPE_CHECKING:
    from millreason.choice import Adviser
    from millreason.outcome import Outcome, Tried

MINUTES_PER_HOUR = 60.0
TRAVEL_CONVENTION = (
    "each pass travels length + cutter diameter + clearance at both ends, so the whole cutter clears the work"
)


def make_plan_record(adviser: Adviser, out: Outcome, chosen: Tried) -> PlanRecord:
    """Write down the plan of the chosen candidate."""
    practice = adviser.knowledge.practice
    plan, layout, meter = chosen.plan, chosen.plan.layout, out.meter
    assert meter is not None
    fact = out.situation.value
    travel = meter.travel(plan)
    back = practice["extra_pass_min"].number
    steps = [_step(load, out, chosen, travel, back, practice) for load in plan.loads]
    time = meter.time(plan)
    cut_time = sum(travel * load.layers * layout.passes / load.table_feed_mm_min for load in plan.loads)
    life = _life(out, chosen, practice)
    quantity = int(fact("require.quantity", 1))
    ra = meter.quality.roughness(plan)
    teeth = plan_teeth(plan)
    pocket = fact("work.feature") == "closed_pocket"
    return PlanRecord(
        direction=out.separate["direction"],
        position=_position(chosen, out.job.units),
        centre_offset_mm=layout.offset_mm,
        entry=str(chosen.facts.get("plan.entry", "from_outside")),
        entry_gap_mm=layout.entry_gap_mm,
        arc_deg=layout.arc.arc_deg,
        entry_angle_deg=layout.arc.entry_deg,
        exit_angle_deg=layout.arc.exit_deg,
        teeth_in_cut=teeth,
        first_contact=str(chosen.facts.get("plan.first_contact", "")),
        radial_passes=layout.passes,
        axial_passes=plan.layers,
        width_of_cut_mm=layout.width_mm,
        overlap_mm=layout.overlap_mm,
        depth_of_cut_mm=max(load.depth_mm for load in plan.loads),
        fluid=out.separate["fluid"],
        steps=steps,
        travel_convention=TRAVEL_CONVENTION,
        feed_time_min=cut_time,
        time_min=time,
        time_low_min=time * practice["time_low_factor"].number,
        time_high_min=time * practice["time_high_factor"].number,
        expected_ra_um=ra[0],
        ra_bounds_um=[ra[1], ra[2]],
        mass_kg=float(chosen.facts["plan.mass_kg"]),
        gauge_length_mm=meter.gauge_length(chosen.candidate),
        entry_feed=_entry_feed(chosen, practice, pocket, out.job.units),
        tool_life_min=life.likely,
        parts_per_edge_set=life.likely / cut_time,
        edge_sets_for_batch=math.ceil(
            edges_per_batch(cut_time, quantity, life.likely, chosen.candidate.teeth) / chosen.candidate.teeth
        ),
        cost_per_part=_cost(out, chosen, practice, cut_time, life),
    )


def _step(
    load: Load, out: Outcome, chosen: Tried, travel: float, back: float, practice: Mapping[str, PracticeValue]
) -> Step:
    passes = chosen.plan.layout.passes
    unit = _unit_power(load, out, practice)
    return Step(
        name=load.name,
        layers=load.layers,
        passes=passes,
        cutting_speed_m_min=load.cutting_speed_m_min,
        spindle_speed_rpm=load.spindle_speed_rpm,
        feed_per_tooth_mm=load.feed_per_tooth_mm,
        feed_per_rev_mm=load.feed_per_tooth_mm * chosen.candidate.teeth,
        table_feed_mm_min=load.table_feed_mm_min,
        depth_of_cut_mm=load.depth_mm,
        width_of_cut_mm=chosen.plan.layout.width_mm,
        hex_mm=load.hex_mm,
        mean_chip_mm=load.mean_chip_mm,
        removal_rate_cm3_min=load.removal_cm3_min,
        specific_force_n_mm2=load.specific_force_n_mm2,
        net_power_kw=load.net_power_kw,
        net_power_worn_kw=load.net_power_kw * practice["wear_factor"].number,
        available_power_kw=load.available_kw,
        torque_nm=load.torque_nm,
        peak_torque_nm=load.peak_torque_nm,
        tangential_force_n=load.peak_tangential_n,
        radial_force_n=load.radial_n,
        axial_force_n=load.axial_n,
        unit_power_kw=unit,
        travel_mm=travel,
        time_min=pass_time(travel, load.table_feed_mm_min, load.layers * passes, back),
    )


def _unit_power(load: Load, out: Outcome, practice: Mapping[str, PracticeValue]) -> float | None:
    """Return the power by the handbook's unit-power method, the independent check, for sharp edges."""
    constant = out.situation.value("material.unit_power_j_mm3")
    if constant is None:
        return None
    reference = practice["unit_power_feed"]
    factor = feed_factor(load.feed_per_tooth_mm, reference.by["reference_mm"], reference.by["exponent"])
    return unit_power_check(load.removal_cm3_min, constant, factor, 1.0)


def _position(chosen: Tried, system: str) -> str:
    layout = chosen.plan.layout
    side = "the side where the teeth leave" if chosen.plan.direction == "climb" else "the side where the teeth enter"
    if not layout.one_pass:
        reach = show(layout.width_mm, "mm", system)
        ends = "leave" if chosen.plan.direction == "climb" else "enter"
        return f"passes step across the work; each reaches {reach} into it, and the teeth {ends} with a thin chip"
    if layout.offset_mm <= 0:
        return "cutter centred on the work; there is no room to offset it"
    offset = show(layout.offset_mm, "mm", system)
    return f"cutter centre {offset} off the middle of the work, so that it stands out more on {side}"


def _entry_feed(chosen: Tried, practice: Mapping[str, PracticeValue], pocket: bool, system: str) -> str:
    if pocket:
        angle = chosen.facts.get("plan.ramp_deg")
        if chosen.facts.get("plan.entry") == "helix" and isinstance(angle, float):
            return _helix(chosen, angle, practice, system)
        share = practice["feed_in_ramp"].number
        limit = f"at most {angle:.1f} degrees" if isinstance(angle, float) else "within the body's limit"
        return f"ramp or helix {limit}, at {share * 100:.0f}% of the feed"
    radius = practice["roll_in_radius_to_diameter"].number * chosen.candidate.diameter_mm
    share = practice["feed_at_entry"].number
    arc = show(round(radius), "mm", system)
    return f"roll in on an arc of about {arc}, or enter straight at {share * 100:.0f}% of the feed until engaged"


def _helix(chosen: Tried, angle: float, practice: Mapping[str, PracticeValue], system: str) -> str:
    """Say how the cutter spirals in: path of its centre, pitch of a turn and feed."""
    fact, outermost = chosen.situation.value, chosen.candidate.outermost_mm
    hole = min(fact("work.width_mm"), fact("work.length_mm"), 2 * chosen.candidate.diameter_mm)
    share, load = practice["feed_in_ramp"].number, chosen.plan.loads[0]
    if hole <= outermost:
        return f"ramp along the pocket at most {angle:.1f} degrees, at {share * 100:.0f}% of the feed"
    feed = load.table_feed_mm_min * share
    path = chosen.plan.sheet.use("helix", "mm", helix_path, hole, outermost, angle, load.depth_mm, feed)
    across, pitch = show(path.diameter_mm, "mm", system), show(path.pitch_mm, "mm", system)
    centre = show(path.centre_feed_mm_min, "mm/min", system)
    return f"spiral in on a circle of {across} for the cutter centre, at most {pitch} deep a turn, centre feed {centre}"


def _life(out: Outcome, chosen: Tried, practice: Mapping[str, PracticeValue]) -> Band:
    """Return the life of the edges at the speed of the heaviest layer, from the life behind the start speeds."""
    basis, exponent = practice["tool_life_min"], practice["taylor_n"]
    start = start_speed(out.situation.value, chosen.candidate.edge)
    life = Band(basis.low or basis.number, basis.number, basis.high or basis.number)
    likely = exponent.of("coated_carbide")
    taylor = Band(exponent.low or likely, likely, exponent.high or likely)
    return chosen.plan.sheet.use(
        "life of the edges", "min", life_band, chosen.plan.heaviest.cutting_speed_m_min, start, life, taylor
    )


def _cost(
    out: Outcome, chosen: Tried, practice: Mapping[str, PracticeValue], cut_time: float, life: Band
) -> list[float] | None:
    """Return the cost of a part, low, likely and high, where the person gave a machine rate and an edge cost."""
    fact = out.situation.value
    rate, edge = fact("costs.machine_rate_per_h"), fact("costs.edge")
    if rate is None or edge is None:
        return None
    load = fact("costs.load_min", practice["load_min"].number)
    change = fact("costs.edge_change_min", practice["edge_index_min"].number * chosen.candidate.teeth)
    result = []
    for minutes in (life.high, life.likely, life.low):
        cost = cost_per_part(
            load,
            cut_time,
            change,
            edge * chosen.candidate.teeth,
            rate / MINUTES_PER_HOUR,
            max(minutes, cut_time),
            "fractional",
        )
        result.append(cost.total)
    return result
