"""The margins of an answer: every computed limit with its use, and whether the choice survives the data's own band."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING, Literal

from millreason.trace import Check

if TYPE_CHECKING:
    from millreason.choice import Adviser
    from millreason.outcome import Outcome, Tried

NEAR = 0.85
# Name, key, use, value and limit as facts (None where there is none), unit, and the formula behind.
_FROM_FACTS = (
    ("outermost diameter, neighbours full", "changer_full", "plan.changer_full_use", "plan.outermost_diameter_mm",
     "machine.changer_full_mm", "mm", "cutter knowledge"),
    ("outermost diameter, neighbours empty", "changer_empty", "plan.changer_empty_use", "plan.outermost_diameter_mm",
     "machine.changer_empty_mm", "mm", "cutter knowledge"),
    ("mass of the assembly", "changer_mass", "plan.mass_use", "plan.mass_kg",
     "machine.changer_mass_kg", "kg", "body.combined_mass"),
    ("tipping moment", "changer_moment", "plan.moment_use", "plan.moment_nm",
     "machine.changer_moment_nm", "N.m", "body.tip_moment"),
    ("finish Ra", "finish", "plan.ra_use", "plan.ra_um",
     "require.finish_ra_um", "um", "surface.roughness_with_runout"),
    ("flatness", "flatness", "plan.flatness_use", None,
     "require.flatness_mm", "mm", "stiffness and tilt"),
    ("insert corner", "corner", "plan.corner_use", "pick.corner_radius_mm",
     "work.corner_radius_mm", "mm", "cutter knowledge"),
    ("table feed", "table_feed", "plan.feed_use", None,
     "machine.feed_max_mm_min", "mm/min", "motion.table_feed"),
    ("lift over hold-down", "hold_down", "plan.lift_to_clamp", "plan.lift_n",
     None, "N", "holding.lift_force"),
    ("stable depth", "stable_depth", "plan.stable_depth_use", "plan.depth_of_cut_mm",
     None, "mm", "stiffness.stable_depth"),
    ("depth of cut in the insert", "usable_depth", "plan.depth_use", "plan.depth_of_cut_mm",
     None, "mm", "cutter knowledge"),
    ("chips in the gullet", "gullet", "plan.gullet_use", None,
     None, "", "chip.gullet_fill"),
    ("body speed", "body_speed", "plan.body_speed_use", "plan.spindle_speed_rpm",
     None, "rpm", "motion.spindle_speed"),
    ("width over diameter", "width_to_diameter", None, "plan.width_to_diameter",
     None, "", "passes.balanced_width"),
)  # fmt: skip


def make_checks(adviser: Adviser, out: Outcome, chosen: Tried) -> list[Check]:
    """Return every margin that can be computed for the chosen candidate."""
    return [*_power(adviser, out, chosen), *_chip(out, chosen), *_from_facts(adviser, out, chosen)]


def _power(adviser: Adviser, out: Outcome, chosen: Tried) -> Iterator[Check]:
    wear = adviser.knowledge.practice["wear_factor"].number
    load = chosen.plan.heaviest
    yield _check(
        "net power, sharp edges",
        "power",
        load.net_power_kw,
        load.available_kw,
        "kW",
        "cutting_force.net_power",
    )
    yield _check(
        "net power, worn edges",
        "power_worn",
        load.net_power_kw * wear,
        load.available_kw,
        "kW",
        "cutting_force.net_power",
    )
    torque = load.torque_nm * load.available_kw / load.net_power_kw
    yield _check(
        "mean torque, worn edges",
        "torque",
        load.torque_nm * wear,
        torque,
        "N.m",
        "cutting_force.torque_from_power",
    )
    assert out.spindle is not None
    fastest = max(entry.spindle_speed_rpm for entry in chosen.plan.loads)
    yield _check("spindle speed", "speed", fastest, out.spindle.speed_max_rpm, "rpm", "motion.spindle_speed")


def _chip(out: Outcome, chosen: Tried) -> Iterator[Check]:
    thinnest = min(load.hex_mm for load in chosen.plan.loads)
    least = chosen.plan.hex_least_mm
    use = least / thinnest
    yield Check(
        "chip thickness above the least",
        "chip_least",
        thinnest,
        least,
        "mm",
        use * 100,
        _verdict(use),
        "chip.maximum_chip_thickness",
    )


def _from_facts(adviser: Adviser, out: Outcome, chosen: Tried) -> Iterator[Check]:
    practice = adviser.knowledge.practice

    def known(fact: str | None) -> float | None:
        value = None if fact is None else chosen.facts.get(fact, out.situation.value(fact))
        return float(value) if isinstance(value, int | float) else None

    for name, key, use_fact, value_fact, limit_fact, unit, by in _FROM_FACTS:
        if key == "width_to_diameter":
            limit: float | None = (
                practice["width_to_diameter_one_pass"].high
                if chosen.plan.layout.one_pass
                else practice["width_to_diameter_most"].number
            )
            use = (known(value_fact) or 0.0) / (limit or 1.0)
        else:
            found = known(use_fact)
            if found is None:
                continue
            use, limit = found, known(limit_fact)
        value = known(value_fact)
        if value is None:
            value = use * limit if limit else use
        if limit is None:
            limit = value / use if value_fact and use else 1.0
        verdict = _verdict(use)
        if key == "changer_full" and verdict == "over" and (known("plan.changer_empty_use") or 2.0) <= 1:
            verdict = "near"  # it goes with empty neighbours
        yield Check(name, key, value, limit, unit, use * 100, verdict, by)


def _check(name: str, key: str, value: float, limit: float, unit: str, by: str) -> Check:
    use = value / limit
    return Check(name, key, value, limit, unit, use * 100, _verdict(use), by)


def _verdict(use: float) -> Literal["ok", "near", "over"]:
    return "ok" if use <= NEAR else "near" if use <= 1 + 1e-9 else "over"


def robustness(adviser: Adviser, out: Outcome, chosen: Tried) -> str:
    """Say in one line whether the power holds over the whole band of the force data, with sharp and worn edges."""
    practice = adviser.knowledge.practice
    fact, load = out.situation.value, chosen.plan.heaviest
    band = practice["force_band"].number
    low, high = fact("material.kc_low_ratio", 1 - band), fact("material.kc_high_ratio", 1 + band)
    wear = practice["wear_factor"].number
    nominal = load.net_power_kw / load.available_kw
    worst = nominal * high * wear
    span = f"{nominal * low * 100:.0f} to {nominal * high * 100:.0f}%"
    words = f"Power takes {span} of what the spindle has over the band of the force data with sharp edges"
    if worst <= 1:
        return (
            f"{words}, and {worst * 100:.0f}% at the upper end with worn edges: the choice holds over the whole band."
        )
    if nominal * wear <= 1:
        remedy = "change edges early or cut lighter if the material turns out hard"
        return f"{words}; worn edges at the upper end would take {worst * 100:.0f}%: {remedy}."
    return f"{words}; worn edges already take {nominal * wear * 100:.0f}%: there is no reserve."
