"""The words and the small conditions in which the acceptance cases state what they expect."""

from __future__ import annotations

import re
from collections.abc import Mapping
from typing import Any

PLAN_PICKS = ("direction", "fluid", "radial_passes", "axial_passes", "position")

_CAUTIONS = """
body_speed_limit guarding lifting atc_diameter_neighbours atc_mass atc_moment hold_down_lift
entry_roll_in exit_breakout burr skin_first_pass min_chip_thickness work_hardening bue notch_wear
thermal_shock chip_recutting chip_packing thin_floor_axial thin_rim support_first residual_stress
pass_overlap_step spindle_tram runout_axial wiper_feed corner_limit corner_remainder wall_step
true_90_check ramp_limit non_centre_cutting interrupted_edges hand_rotation backlash_climb
manual_machine_setup gauge_length balance torque_low_rpm power_limit power_margin_worn tool_life_planning
hardness_verify grinding_alternative fire_magnesium fire_titanium no_fine_chips chip_housekeeping
hydrogen_wet_mg no_rubbing_or_dwell beryllium_exposure lead_exposure nickel_cobalt_exposure
dust_cast_iron exposure_limits time_includes_travel unit_ambiguity contradiction missing_data
"""
CAUTIONS = frozenset(_CAUTIONS.split())
_STEP_VALUES = """
cutting_speed_m_min spindle_speed_rpm feed_per_tooth_mm table_feed_mm_min feed_per_rev_mm depth_of_cut_mm
width_of_cut_mm hex_mm mean_chip_mm removal_rate_cm3_min net_power_kw torque_nm passes time_min
width_to_diameter unit_power_kw_per_cm3_min
"""
STEP_VALUES = frozenset(_STEP_VALUES.split())
VERDICTS = frozenset(("recommend", "recommend_with_warnings", "conditional", "ask", "refuse"))
TESTS = frozenset(("above", "below", "at_least", "at_most", "between", "one_of", "none_of", "known"))

_UNITS = {
    "mm": 1.0,
    "in": 25.4,
    "kW": 1.0,
    "hp": 0.745699872,
    "N.m": 1.0,
    "lbf.ft": 1.3558179483,
    "rpm": 1.0,
    "kg": 1.0,
    "lb": 0.45359237,
    "mm/min": 1.0,
    "in/min": 25.4,
}


def metric(quantity: Any) -> Any:
    """Turn '3 in' into 76.2; lists likewise; None stays None. Independent of the program's own reader."""
    if quantity is None:
        return None
    if isinstance(quantity, list):
        return [metric(entry) for entry in quantity]
    match = re.fullmatch(r"([\d.]+)\s*(\S+)", str(quantity))
    if not match or match[2] not in _UNITS:
        raise ValueError(f"{quantity!r} is not a quantity known here; units: {', '.join(_UNITS)}")
    return float(match[1]) * _UNITS[match[2]]


def holds(condition: Any, value: Any) -> bool:
    """Tell whether a value meets a literal, a mapping of tests (all of them), or a list (any of them)."""
    if isinstance(condition, list):
        return any(holds(entry, value) for entry in condition)
    if isinstance(condition, Mapping):
        return all(_test(word, limit, value) for word, limit in condition.items())
    if _is_number(condition):
        return _is_number(value) and bool(condition == value)
    return condition is value or (isinstance(condition, str) and condition == value)


def _is_number(value: Any) -> bool:
    return isinstance(value, int | float) and not isinstance(value, bool)


def _test(word: str, limit: Any, value: Any) -> bool:
    if word == "known":
        return (value is not None) is limit
    if word == "one_of":
        return value in limit
    if word == "none_of":
        return value is not None and value not in limit
    if not _is_number(value):
        return False
    low, high = limit if word == "between" else (limit, limit)
    return {
        "above": value > high,
        "below": value < low,
        "at_least": value >= low,
        "at_most": value <= high,
        "between": low <= value <= high,
    }[word]


def view(answer: Mapping[str, Any]) -> dict[str, Any]:
    """Return the answer with the derived values that conditions may name.

    A round insert has no fixed angle: its `kappa_deg` reads 'round'. Every step gets its ratio of width to
    diameter and its unit power.
    """
    picks = dict(answer.get("picks") or {})
    plan = dict(answer.get("plan") or {})
    if picks.get("cutter_class") == "round_insert_mill":
        picks["kappa_deg"] = "round"
    plan["steps"] = [_step_view(step, picks.get("diameter_mm")) for step in plan.get("steps") or []]
    first = plan["steps"][0] if plan["steps"] else {}
    return {**answer, "picks": picks, "plan": plan, "steps": plan["steps"], "first_step": first}


def _step_view(step: Mapping[str, Any], diameter: float | None) -> dict[str, Any]:
    shown = dict(step)
    if diameter and step.get("width_of_cut_mm"):
        shown["width_to_diameter"] = step["width_of_cut_mm"] / diameter
    if step.get("removal_rate_cm3_min") and step.get("net_power_kw") is not None:
        shown["unit_power_kw_per_cm3_min"] = step["net_power_kw"] / step["removal_rate_cm3_min"]
    return shown


def values_at(seen: Mapping[str, Any], path: str) -> list[Any]:
    """Return what lies at 'picks.x', 'plan.x', 'verdict', or at 'steps.x' once per step."""
    head, _, rest = path.partition(".")
    if head == "steps":
        return [step.get(rest) for step in seen["steps"]]
    return [seen[head].get(rest) if rest else seen.get(head)]


def all_hold(conditions: Mapping[str, Any], seen: Mapping[str, Any]) -> bool:
    """Tell whether every named value meets its condition (for steps: in at least one step)."""
    return all(any(holds(test, value) for value in values_at(seen, path)) for path, test in conditions.items())


def sentences(answer: Mapping[str, Any]) -> list[str]:
    """Return every sentence that advises the reader: not the trace, not what was rejected."""
    told = [
        answer.get(part) for part in ("cautions", "questions", "refusal", "assumptions", "checks", "plan", "summary")
    ]
    return [part for text in _strings(told) for part in re.split(r"(?<=[.;!?])\s+", text)]


def _strings(found: Any) -> list[str]:
    if isinstance(found, str):
        return [found]
    inner = found.values() if isinstance(found, Mapping) else found if isinstance(found, list | tuple) else ()
    return [text for entry in inner for text in _strings(entry)]
