"""Recomputes what an answer says in numbers, from its own data and from the limits of the job's machine."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from typing import Any

from acceptance_terms import metric

SAME = 0.01  # two statements of one quantity
SAME_TIME = 0.10
CLEARANCE_MM = 6.0  # travel beyond length and cutter, both ends together
REPOSITION_MIN = 0.05
USUAL_EFFICIENCY = 0.8
ROUNDING_MM = 0.05
STRAIGHT_FEATURES = (None, "open_face", "shoulder")

NEEDED = (
    "cutting_speed_m_min",
    "spindle_speed_rpm",
    "feed_per_tooth_mm",
    "table_feed_mm_min",
    "depth_of_cut_mm",
    "width_of_cut_mm",
    "passes",
    "layers",
)

Facts = Mapping[str, Any]
Note = tuple[str, str]  # ("hit" | "remark" | "miss", what)


def gaps(seen: Facts) -> list[str]:
    """Return what a plan leaves out that every plan must state."""
    lacking = [
        f"plan without {name}" for name in ("diameter_mm", "teeth") if seen["steps"] and not seen["picks"].get(name)
    ]
    return lacking + [
        f"step {number} without {name}"
        for number, step in enumerate(seen["steps"], 1)
        for name in NEEDED
        if not step.get(name)
    ]


def consistency(expect: Facts, seen: Facts, job: Facts) -> Iterator[Note]:
    """Hold the numbers of every step, the time and the cover of the face against each other."""
    picks = seen["picks"]
    yield from (("miss", gap) for gap in gaps(seen))
    if not seen["steps"] or gaps(seen):
        return
    if isinstance(picks.get("kappa_deg"), int | float) and picks.get("lead_deg") != 90 - picks["kappa_deg"]:
        yield "miss", f"lead {picks.get('lead_deg')} does not go with kappa {picks['kappa_deg']}"
    for number, step in enumerate(seen["steps"], 1):
        for name, value in _recomputed(step, picks).items():
            if not _same(step.get(name), value, SAME):
                yield (
                    "miss",
                    f"step {number}: {name} {short(step.get(name))}, its own data give {short(value)}",
                )
    if job["work"].get("feature") in STRAIGHT_FEATURES and job["work"].get("length"):
        yield from _time_and_cover(seen, job["work"], picks["diameter_mm"])


def _recomputed(step: Facts, picks: Facts) -> Mapping[str, float | None]:
    """Recompute what follows from speed, feed per tooth, depth and width of one step."""
    feed, diameter = step["feed_per_tooth_mm"], picks["diameter_mm"]
    turns = _turns(step, picks)
    table = turns * picks["teeth"] * feed
    values: dict[str, float | None] = {
        "spindle_speed_rpm": turns,
        "table_feed_mm_min": table,
        "feed_per_rev_mm": picks["teeth"] * feed,
        "removal_rate_cm3_min": step["depth_of_cut_mm"] * step["width_of_cut_mm"] * table / 1000.0,
    }
    if step.get("net_power_kw") is not None:
        values["torque_nm"] = step["net_power_kw"] * 60_000.0 / (2.0 * math.pi * turns)
    if isinstance(picks.get("kappa_deg"), int | float) and step["width_of_cut_mm"] >= diameter / 2.0:
        values["hex_mm"] = feed * math.sin(math.radians(picks["kappa_deg"]))
    return values


def _turns(step: Facts, picks: Facts) -> float:
    """Return the speed from D; under a round insert any diameter between floor and outermost may carry it."""
    slowest, fastest = (
        1000.0 * step["cutting_speed_m_min"] / (math.pi * diameter)
        for diameter in (picks.get("largest_diameter_mm") or picks["diameter_mm"], picks["diameter_mm"])
    )
    stated = step.get("spindle_speed_rpm")
    if picks.get("kappa_deg") == "round" and stated and slowest * (1 - SAME) <= stated <= fastest * (1 + SAME):
        return float(stated)
    return float(fastest)


def _time_and_cover(seen: Facts, work: Facts, diameter: float) -> Iterator[Note]:
    length, width, stock = metric(work["length"]), metric(work.get("width")), metric(work.get("stock"))
    steps, across = seen["steps"], seen["plan"].get("radial_passes") or 1
    travel = length + diameter + CLEARANCE_MM
    strokes = [step["passes"] * step["layers"] for step in steps]
    cut = sum(number * travel / step["table_feed_mm_min"] for number, step in zip(strokes, steps, strict=True))
    time = cut + REPOSITION_MIN * (sum(strokes) - 1)
    shown = seen["plan"].get("time_min")
    right = "hit" if _same(shown, time, SAME_TIME) else "miss"
    yield right, f"time {short(shown)} min against {short(time)} with the whole travel"
    for step in steps:
        if width and across * step["width_of_cut_mm"] < width - ROUNDING_MM:
            yield (
                "miss",
                f"{across} passes of {short(step['width_of_cut_mm'])} mm do not cover {short(width)} mm",
            )
    removed = sum(number / across * step["depth_of_cut_mm"] for number, step in zip(strokes, steps, strict=True))
    if stock and not _same(removed, stock, 2 * SAME):
        yield "miss", f"the steps remove {short(removed)} mm of the {short(stock)} mm stock"


def machine_limits(expect: Facts, seen: Facts, job: Facts) -> Iterator[Note]:
    """Hold speed, power and outermost diameter against the machine of the job."""
    machine, stated = job.get("machine", {}), expect.get("limits", {})
    if gaps(seen):
        return
    for step in seen["steps"]:
        yield from _power(step, machine, stated.get("efficiency", USUAL_EFFICIENCY))
        yield from _speed(step["spindle_speed_rpm"], machine)
    largest, picks = seen["picks"].get("largest_diameter_mm"), seen["picks"]
    full, empty = metric(machine.get("changer_full")), metric(machine.get("changer_empty"))
    told = {caution["key"] for caution in seen.get("cautions") or []}
    if largest and empty and largest > empty + ROUNDING_MM:
        yield "miss", f"outermost diameter {short(largest)} never fits a changer for {short(empty)}"
    if largest and full and largest > full + ROUNDING_MM and "atc_diameter_neighbours" not in told:
        yield (
            "miss",
            f"outermost diameter {short(largest)} needs empty neighbours above {short(full)}: not told",
        )
    if largest and isinstance(picks.get("kappa_deg"), int | float) and picks.get("diameter_mm"):
        depth = max((step["depth_of_cut_mm"] for step in seen["steps"]), default=0.0)
        reach = picks["diameter_mm"] + 2.0 * depth / math.tan(math.radians(picks["kappa_deg"]))
        if largest < reach - ROUNDING_MM:
            yield (
                "miss",
                f"outermost diameter {short(largest)} is below {short(reach)}, which the depth needs",
            )


def _power(step: Facts, machine: Facts, efficiency: float) -> Iterator[Note]:
    motor, torque = metric(machine.get("power")), metric(machine.get("torque"))
    turning = 2.0 * math.pi * step["spindle_speed_rpm"] / 60_000.0
    bounds = [motor * efficiency] if motor else []
    bounds += [torque * turning] if torque else []
    if bounds and (step.get("net_power_kw") is None or step["net_power_kw"] > min(bounds) * (1.0 + SAME / 2.0)):
        yield (
            "miss",
            f"net power {short(step.get('net_power_kw'))} kW, available {short(min(bounds))} at this speed",
        )


def _speed(turns: float, machine: Facts) -> Iterator[Note]:
    steps, most = metric(machine.get("speed_steps")), metric(machine.get("speed_max"))
    if most and turns > most * (1.0 + SAME / 2.0):
        yield "miss", f"{short(turns)} rpm, the spindle ends at {short(most)}"
    if steps and not any(_same(turns, step, SAME) for step in steps):
        yield "miss", f"{short(turns)} rpm is not a step of this machine"


def _same(value: float | None, expected: float | None, tolerance: float) -> bool:
    return value is not None and expected is not None and abs(value - expected) <= tolerance * abs(expected)


def short(value: Any) -> str:
    return f"{value:.4g}" if isinstance(value, int | float) and not isinstance(value, bool) else str(value)
