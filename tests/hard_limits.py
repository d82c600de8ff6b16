"""What no answer may do, computed from the answer alone: none of the program's own formulas or checks is used.

Each check takes the answer as plain JSON values and yields a sentence for whatever is wrong.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator
from typing import Any

Plain = dict[str, Any]
NEAR = 1e-6
# A value that sits on a limit after rounding in a conversion is no breach.
SLACK = 1.002
HANDS = {"clockwise": "right", "counter_clockwise": "left"}
WATER = ("flood", "through_tool", "mql")
GIVES = {
    "air": "air_blast", "flood": "flood", "flood_water_mixed": "flood", "mg_rated_fluid": "flood",
    "through_tool": "through_tool", "mql": "mql", "mineral_oil": "mineral_oil", "brush_oil": "brush_oil",
}  # fmt: skip


def facts_of(answer: Plain) -> Plain:
    """Return the facts of an answer by name."""
    return {record["name"]: record["value"] for record in answer["trace"]["facts"]}


def breaches(answer: Plain) -> list[str]:
    """Return everything in an answer that no answer may do."""
    verdict = answer["verdict"]
    found = list(_shape(answer, verdict))
    if answer["picks"] is not None:
        facts = facts_of(answer)
        for check in _ON_PICKS:
            found.extend(check(answer["picks"], facts))
        if answer["plan"] is not None:
            for on_plan in _ON_PLAN:
                found.extend(on_plan(answer["picks"], answer["plan"], facts))
    return found


def _shape(answer: Plain, verdict: str) -> Iterator[str]:
    if (answer["picks"] is None) != (verdict in ("ask", "refuse")):
        yield f"{verdict} with picks {answer['picks'] is not None}"
    if (answer["plan"] is None) != (verdict in ("ask", "refuse", "conditional")):
        yield f"{verdict} with a plan {answer['plan'] is not None}"
    if verdict == "ask" and not any(question["need"] == "must" for question in answer["questions"]):
        yield "asks without a question that must be answered"
    if verdict == "refuse" and not (answer["refusal"] and answer["refusal"]["limits"]):
        yield "refuses without naming a limit"
    if verdict == "conditional" and (answer["checks"] or answer["trace"]["calculations"] or not answer["conditions"]):
        yield "conditional, and still shows data, or no condition"
    if len(answer["questions"]) > 6:
        yield f"{len(answer['questions'])} questions"
    keys = [caution["key"] for caution in answer["cautions"]]
    if len(keys) != len(set(keys)):
        yield "a caution twice"
    yield from (f"{place} is {value}" for place, value in _numbers(answer) if not math.isfinite(value))


def _numbers(value: Any, place: str = "") -> Iterator[tuple[str, float]]:
    if isinstance(value, float):
        yield place, value
    elif isinstance(value, dict):
        for name, inner in value.items():
            yield from _numbers(inner, f"{place}.{name}")
    elif isinstance(value, list):
        for inner in value:
            yield from _numbers(inner, place)


# ---------------------------------------------------------------------- the cutter
def _changer(picks: Plain, facts: Plain) -> Iterator[str]:
    if facts.get("machine.changer") == "none":
        return
    full, empty = facts.get("machine.changer_full_mm"), facts.get("machine.changer_empty_mm")
    limit = full if facts.get("machine.changer_state") == "full" or empty is None else empty
    if limit is not None and picks["largest_diameter_mm"] > limit * (1 + NEAR):
        yield f"changer takes {limit}, the cutter is {picks['largest_diameter_mm']} over its inserts"


def _shoulder(picks: Plain, facts: Plain) -> Iterator[str]:
    if facts.get("work.feature") == "shoulder" and picks["kappa_deg"] != 90:
        yield f"a square shoulder with kappa {picks['kappa_deg']}"


def _corner(picks: Plain, facts: Plain) -> Iterator[str]:
    allowed = facts.get("work.corner_radius_mm")
    at_wall = facts.get("work.feature") in ("shoulder", "closed_pocket", "slot")
    if not (allowed and at_wall):
        return
    name = picks["corner"]
    if name.startswith("radius_") and float(name.removeprefix("radius_")) > allowed * (1 + NEAR):
        yield f"corner {name} where the print allows {allowed}"
    if name == "round":
        radius = (picks["largest_diameter_mm"] - picks["diameter_mm"]) / 2
        if radius > allowed * (1 + NEAR):
            yield f"round insert of radius {radius} where the print allows {allowed}"


def _room(picks: Plain, facts: Plain) -> Iterator[str]:
    feature, over = facts.get("work.feature"), picks["largest_diameter_mm"]
    if feature == "slot" and over > facts["work.width_mm"] * SLACK:
        yield f"a slot of {facts['work.width_mm']} with a cutter of {over}"
    if feature == "closed_pocket" and over >= min(facts["work.width_mm"], facts["work.length_mm"]) * SLACK:
        yield f"a pocket of {facts['work.width_mm']} with a cutter of {over}"


def _mounting(picks: Plain, facts: Plain) -> Iterator[str]:
    mounting = picks["mounting"]
    if mounting == "straight_shank_collet" and picks["diameter_mm"] > 51:
        yield f"straight shank with {picks['diameter_mm']} mm"
    if mounting == "spindle_nose_flange" and facts.get("machine.nose") == "none":
        yield "bolted to a spindle nose that takes no bolts"


def _hand(picks: Plain, facts: Plain) -> Iterator[str]:
    wanted = HANDS.get(str(facts.get("machine.rotation")))
    if wanted and facts.get("work.feature") != "both_sides" and picks["hand"] != wanted:
        yield f"{picks['hand']} hand on a spindle that turns {facts['machine.rotation']}"


def _edge(picks: Plain, facts: Plain) -> Iterator[str]:
    if picks["edge"] == "diamond" and facts.get("material.iso_group") in ("P", "M", "K", "H"):
        yield "diamond in a ferrous metal, in which it dissolves"


# ---------------------------------------------------------------------- the plan
def _fluid(picks: Plain, plan: Plain, facts: Plain) -> Iterator[str]:
    fluid, hazards = plan["fluid"], facts.get("material.hazards") or []
    supplies = facts.get("machine.fluids") or []
    if fluid != "dry" and fluid not in {GIVES.get(supply) for supply in supplies}:
        yield f"fluid {fluid} where the machine has {supplies}"
    if "magnesium_fire" in hazards and fluid in WATER and "mg_rated_fluid" not in supplies:
        yield f"{fluid} on magnesium"
    if facts.get("material.iso_group") == "S" and supplies and fluid in ("dry", "air_blast"):
        yield f"titanium or a heat-resistant alloy {fluid}"


def _direction(picks: Plain, plan: Plain, facts: Plain) -> Iterator[str]:
    backlash = facts.get("machine.backlash_mm")
    loose = backlash is None or backlash > 0.1 * SLACK
    if facts.get("machine.control") == "manual" and loose and plan["direction"] == "climb":
        yield f"climb on a manual machine with a backlash of {backlash}"


def _speed(picks: Plain, plan: Plain, facts: Plain) -> Iterator[str]:
    steps, most = facts.get("machine.speed_steps_rpm"), facts.get("machine.speed_max_rpm")
    for step in plan["steps"]:
        speed = step["spindle_speed_rpm"]
        if most and speed > most * (1 + NEAR):
            yield f"{speed} rpm on a spindle of {most} rpm"
        if steps and min(abs(speed - one) for one in steps) > NEAR * speed:
            yield f"{speed} rpm is no step of the drive"
        if (feed := facts.get("machine.feed_max_mm_min")) and step["table_feed_mm_min"] > feed * SLACK:
            yield f"table feed {step['table_feed_mm_min']} over {feed}"


def _power(picks: Plain, plan: Plain, facts: Plain) -> Iterator[str]:
    """Hold the power against the motor, and the torque against the spindle: M = 9549 P / n (common practice)."""
    motor = facts["machine.power_kw"] * facts["machine.efficiency"]
    torque = facts.get("machine.torque_nm")
    for step in plan["steps"]:
        speed = step["spindle_speed_rpm"]
        force = step["specific_force_n_mm2"]
        removal = step["depth_of_cut_mm"] * step["width_of_cut_mm"] * step["table_feed_mm_min"]
        power = removal * force / 60e6
        worn = step["net_power_worn_kw"]
        if abs(power / step["net_power_kw"] - 1) > 1e-3:
            yield f"net power {step['net_power_kw']} where ap ae vf kc gives {power}"
        if worn < step["net_power_kw"] or worn > motor * SLACK:
            yield f"{worn} kW with worn edges on {motor} kW at the cutter"
        if worn > step["available_power_kw"] * SLACK:
            yield f"{worn} kW with worn edges where the spindle has {step['available_power_kw']} at {speed} rpm"
        if torque and not facts.get("machine.curve") and 9549.3 * worn / speed > torque * SLACK:
            yield f"{9549.3 * worn / speed} N.m with worn edges on a spindle of {torque} N.m"


def _consistent(picks: Plain, plan: Plain, facts: Plain) -> Iterator[str]:
    """Hold speeds, feeds and volumes to each other: vc = pi D n / 1000, vf = fz z n, Q = ap ae vf / 1000."""
    for step in plan["steps"]:
        speed, tooth, feed = step["spindle_speed_rpm"], step["feed_per_tooth_mm"], step["table_feed_mm_min"]
        pairs = {
            "vc": (step["cutting_speed_m_min"], math.pi * picks["diameter_mm"] * speed / 1000),
            "vf": (feed, tooth * picks["teeth"] * speed),
            "fn": (step["feed_per_rev_mm"], tooth * picks["teeth"]),
            "Q": (step["removal_rate_cm3_min"], step["depth_of_cut_mm"] * step["width_of_cut_mm"] * feed / 1000),
            "M": (step["torque_nm"], 9549.2966 * step["net_power_kw"] / speed),
        }
        for name, (said, is_) in pairs.items():
            if abs(said / is_ - 1) > 1e-4:
                yield f"{name} {said} in {step['name']}, but the other numbers give {is_}"


def _covers(picks: Plain, plan: Plain, facts: Plain) -> Iterator[str]:
    stock = sum(step["layers"] * step["depth_of_cut_mm"] for step in plan["steps"])
    if abs(stock - facts["work.stock_mm"]) > 1e-6 + 1e-6 * stock:
        yield f"the layers take {stock} of {facts['work.stock_mm']} mm"
    if sum(step["layers"] for step in plan["steps"]) != plan["axial_passes"]:
        yield "layers of the steps do not add up"
    width, passes = plan["width_of_cut_mm"], plan["radial_passes"]
    covered = passes * width - (passes - 1) * plan["overlap_mm"]
    if covered < facts["work.width_mm"] * (1 - NEAR):
        yield f"{passes} passes of {width} cover {covered} of {facts['work.width_mm']} mm"
    if width > picks["diameter_mm"] * (1 + NEAR):
        yield f"a pass of {width} with a cutter of {picks['diameter_mm']}"
    alone = facts.get("require.one_pass") or facts.get("require.no_overlap_line")
    if alone and passes != 1:
        yield f"{passes} passes where one is asked for"


def _depth(picks: Plain, plan: Plain, facts: Plain) -> Iterator[str]:
    """Hold the depth to the edge: below 90 degrees the inserts stand out by depth over tan kappa."""
    reach = (picks["largest_diameter_mm"] - picks["diameter_mm"]) / 2
    deepest = max(step["depth_of_cut_mm"] for step in plan["steps"])
    if picks["corner"] == "round":
        if deepest > reach * SLACK:
            yield f"{deepest} mm deep with a round insert of radius {reach}"
    elif picks["lead_deg"] and deepest > reach * math.tan(math.radians(picks["kappa_deg"])) * SLACK:
        yield f"{deepest} mm deep where the edge reaches {reach * math.tan(math.radians(picks['kappa_deg']))}"
    if deepest > picks["diameter_mm"] / 2:
        yield f"{deepest} mm deep with a body of {picks['diameter_mm']} mm"


def _carried(picks: Plain, plan: Plain, facts: Plain) -> Iterator[str]:
    most = facts.get("machine.changer_mass_kg")
    if most and facts.get("machine.changer") != "none" and plan["mass_kg"] > most * SLACK:
        yield f"{plan['mass_kg']} kg in a changer for {most} kg"


_ON_PICKS: tuple[Callable[[Plain, Plain], Iterator[str]], ...] = (
    _changer, _shoulder, _corner, _room, _mounting, _hand, _edge,
)  # fmt: skip
_ON_PLAN: tuple[Callable[[Plain, Plain, Plain], Iterator[str]], ...] = (
    _fluid, _direction, _speed, _power, _consistent, _covers, _depth, _carried,
)  # fmt: skip
