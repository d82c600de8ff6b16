"""How near the cut comes to every limit, and its numbers in full."""

from __future__ import annotations

from millreason.report import charts
from millreason.report.page import Fields, Fold, Gallery, Item, Items, Picture, Section, Table, present, section
from millreason.report.sheet import Line, steps_table
from millreason.report.words import basis_text, clean, contact_text, fact, option, recommends
from millreason.trace import Answer, PlanRecord
from millreason.units import plain, show

_LINES: tuple[Line, ...] = (
    ("feed per revolution fn", "mm", lambda step: step.feed_per_rev_mm),
    ("largest chip thickness hex", "mm", lambda step: step.hex_mm),
    ("mean chip thickness hm", "mm", lambda step: step.mean_chip_mm),
    ("removal rate Q", "cm3/min", lambda step: step.removal_rate_cm3_min),
    ("specific cutting force kc", "N/mm2", lambda step: step.specific_force_n_mm2),
    ("net power, sharp edges", "kW", lambda step: step.net_power_kw),
    ("net power, worn edges", "kW", lambda step: step.net_power_worn_kw),
    ("net power the spindle has", "kW", lambda step: step.available_power_kw),
    ("torque, mean", "N.m", lambda step: step.torque_nm),
    ("torque, peak", "N.m", lambda step: step.peak_torque_nm),
    ("tangential force, peak", "N", lambda step: step.tangential_force_n),
    ("radial force", "N", lambda step: step.radial_force_n),
    ("axial force", "N", lambda step: step.axial_force_n),
    ("travel of each pass", "mm", lambda step: step.travel_mm),
)


def margins(answer: Answer) -> Section | None:
    """Return every limit with its value, how much of it is used and what it rests on."""
    if not answer.checks:
        return None
    rows = tuple(
        (
            clean(check.name),
            show(check.value, check.unit, answer.units),
            show(check.limit, check.unit, answer.units),
            f"{check.use_percent:.0f} %",
            check.verdict,
            clean(check.by),
        )
        for check in answer.checks
    )
    table = Table(("check", "value", "limit", "use", "verdict", "by"), rows, frozenset({1, 2, 3}))
    bars = [charts.Bar(clean(check.name), check.use_percent, check.verdict) for check in answer.checks]
    drawn = Picture(charts.margin_bars(bars), "Use of each limit; the line is 100 %")
    rests = tuple(Item(clean(c.name), (basis_text(c.basis),)) for c in answer.checks if c.basis)
    fold = Fold("What the limits rest on", (Items(rests),)) if rests else None
    return section("margins", "Margins", present(table, Gallery((drawn, *_drive(answer))), fold))


def numbers(answer: Answer) -> Section | None:
    """Return the numbers of the cut that are not on the setup sheet."""
    if answer.plan is None or not recommends(answer):
        return None
    other = [
        (option(step.name), show(step.unit_power_kw, "kW", answer.units))
        for step in answer.plan.steps
        if step.unit_power_kw is not None
    ]
    told = Fields(tuple(other), "Net power by the unit-power method, an independent check") if other else None
    plan = answer.plan
    path = Fields((("Arc", _arc(plan)), ("Teeth in cut", _teeth(plan)), ("Travel", clean(plan.travel_convention))))
    return section("plan", "The cut in numbers", present(path, steps_table(plan.steps, _LINES, answer.units), told))


def _arc(plan: PlanRecord) -> str:
    enter, leave = plain(plan.entry_angle_deg, 1), plain(plan.exit_angle_deg, 1)
    return f"teeth enter at {enter} deg, leave at {leave} deg ({plain(plan.arc_deg, 1)} deg in cut)"


def _teeth(plan: PlanRecord) -> str:
    teeth = " / ".join(plain(number, 2) for number in plan.teeth_in_cut)
    first = f"; first contact at {contact_text(plan.first_contact)}" if plan.first_contact else ""
    return f"{teeth} (least / mean / most){first}"


def _drive(answer: Answer) -> list[Picture]:
    """Draw the spindle's curve where the trace holds it as points of speed and net power."""
    curve, steps = fact(answer, "machine.net_curve"), answer.plan.steps if answer.plan else []
    if curve is None or not isinstance(curve.value, list) or not steps:
        return []
    pairs = [point for point in curve.value if isinstance(point, list) and len(point) == 2]
    if not pairs:
        return []
    step = max(steps, key=lambda entry: entry.net_power_worn_kw / entry.available_power_kw)
    work = charts.WorkingPoint(step.spindle_speed_rpm, step.net_power_kw, step.net_power_worn_kw)
    drawn = charts.drive_curve([(float(speed), float(power)) for speed, power in pairs], work)
    return [Picture(drawn, f"Power and torque at the cutter; the dots are the {option(step.name)}")]
