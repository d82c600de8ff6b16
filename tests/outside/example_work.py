"""The work of the published examples: each from its inputs to its results, by the program's formulas.

Units are converted by pint's own registry, not by the program.
"""

import math
import re
from collections.abc import Callable
from typing import Any

import pint

from millreason.formulas import body, chip, cutting_force, drive, engagement, life, passes, surface

UNITS: Any = pint.UnitRegistry(preprocessors=[lambda text: re.sub(r"(?<=[a-z])([23])\b", r"**\1", text)])
WORK: dict[str, Callable[["Given"], dict[str, Any]]] = {}


class Given:
    """Inputs of one example, in whatever unit a formula asks for."""

    def __init__(self, inputs: dict[str, Any]) -> None:
        self._inputs = inputs

    def __call__(self, name: str, unit: str = "") -> Any:
        """Return one input, converted."""
        value = self._inputs[name]
        return UNITS.Quantity(value).to(unit).magnitude if unit else value


def works(example: str) -> Callable[..., Any]:
    """Register the computation of one example."""

    def register(compute: Callable[[Given], dict[str, Any]]) -> Callable[[Given], dict[str, Any]]:
        WORK[example] = compute
        return compute

    return register


def quantity(value: float, unit: str) -> Any:
    """Return a computed result with its unit."""
    return UNITS.Quantity(value, unit)


def speed_and_feed(given: Given) -> tuple[float, float]:
    """Return spindle speed and feed rate from cutting speed, diameter, teeth and feed per tooth."""
    speed = body.spindle_speed(given("cutting_speed", "m/min"), given("diameter", "mm"))
    return speed, body.table_feed(given("feed_per_tooth", "mm"), given("teeth"), speed)


def removal(given: Given, feed: float) -> Any:
    """Return the removal rate of a full width."""
    return quantity(body.removal_rate(given("depth", "mm"), given("width", "mm"), feed), "cm3/min")


def slab_travel(given: Given, overrun: bool = False) -> float:
    """Return the travel of a peripheral cut, whose approach lies along the depth."""
    approach = passes.approach_flush(given("depth", "mm"), given("diameter", "mm"))
    return passes.feed_travel(given("length", "mm"), approach, approach if overrun else 0.0)


def minutes(travel: float, feed: float) -> Any:
    """Return the time of one pass."""
    return quantity(passes.pass_time(travel, feed, 1, 0.0), "min")


@works("metric-spindle-speed")
@works("army-manual-speed")
def _spindle_speed(given: Given) -> dict[str, Any]:
    speed = body.spindle_speed(given("cutting_speed", "m/min"), given("diameter", "mm"))
    return {"spindle_speed": quantity(speed, "1/min")}


@works("inch-speed-and-feed")
def _speed_and_feed(given: Given) -> dict[str, Any]:
    speed, feed = speed_and_feed(given)
    return {"spindle_speed": quantity(speed, "1/min"), "feed": quantity(feed, "mm/min")}


@works("handbook-speed-both-units")
def _both_units(given: Given) -> dict[str, Any]:
    inch = body.spindle_speed(given("cutting_speed", "m/min"), given("diameter", "mm"))
    metric = body.spindle_speed(given("cutting_speed_metric", "m/min"), given("diameter_metric", "mm"))
    return {"spindle_speed": quantity(inch, "1/min"), "spindle_speed_metric": quantity(metric, "1/min")}


@works("board-review-speeds")
def _board_review(given: Given) -> dict[str, Any]:
    return {
        f"spindle_speed_{name}": quantity(body.spindle_speed(given(name, "m/min"), given("diameter", "mm")), "1/min")
        for name in ("slow", "fast")
    }


@works("slab-time-and-removal")
@works("slab-approach")
@works("examination-2024-slab-time")
def _slab(given: Given) -> dict[str, Any]:
    _, feed = speed_and_feed(given)
    return {
        "approach": quantity(passes.approach_flush(given("depth", "mm"), given("diameter", "mm")), "mm"),
        "time": minutes(slab_travel(given), feed),
        "time_with_overrun": minutes(slab_travel(given, overrun=True), feed),
        "removal_rate": removal(given, feed),
    }


@works("face-time-half-diameter-rule")
def _face_full_overrun(given: Given) -> dict[str, Any]:
    _, feed = speed_and_feed(given)
    travel = passes.full_overrun_travel(given("length", "mm"), given("diameter", "mm"), 0.0)
    return {"time": minutes(travel, feed), "removal_rate": removal(given, feed)}


@works("face-time-in-cut-and-at-feed")
def _face_centred(given: Given) -> dict[str, Any]:
    _, feed = speed_and_feed(given)
    approach = passes.approach_centred(given("width", "mm"), given("diameter", "mm"))
    length, extra = given("length", "mm"), given("extra", "mm")
    at_feed = passes.feed_travel(length, approach, given("diameter", "mm") / 2, clearance_mm=extra)
    return {
        "time": minutes(passes.feed_travel(length, approach, 0.0), feed),
        "removal_rate": removal(given, feed),
        "time_at_feed": minutes(at_feed, feed),
    }


@works("face-of-a-round-bar")
def _round_bar(given: Given) -> dict[str, Any]:
    _, feed = speed_and_feed(given)
    across = given("part_diameter", "mm")
    approach = passes.approach_centred(across, given("diameter", "mm"))
    time = minutes(passes.feed_travel(across, approach, 0.0), feed)
    volume = quantity(math.pi / 4 * across**2 * given("depth", "mm"), "mm3")
    largest = body.removal_rate(given("depth", "mm"), across, feed)
    return {
        "time": time,
        "mean_removal_rate": volume / time,
        "largest_removal_rate": quantity(largest, "cm3/min"),
    }


@works("examination-slab-with-overrun")
def _slab_overrun(given: Given) -> dict[str, Any]:
    return {"time": minutes(slab_travel(given, overrun=True), given("feed", "mm/min"))}


@works("examination-least-travel")
def _least_travel(given: Given) -> dict[str, Any]:
    return {"travel": quantity(slab_travel(given), "mm")}


@works("slab-power-and-torque")
@works("slab-power-other-energy")
def _slab_power(given: Given) -> dict[str, Any]:
    speed = given("spindle_speed", "1/min")
    feed = body.table_feed(given("feed_per_tooth", "mm"), given("teeth"), speed)
    rate = removal(given, feed)
    power = cutting_force.unit_power_check(rate.magnitude, given("energy", "J/mm3"), 1.0, 1.0)
    return {
        "removal_rate": rate,
        "power": quantity(power, "kW"),
        "torque": quantity(cutting_force.torque_from_power(power, speed), "N*m"),
        "time": minutes(slab_travel(given), feed),
    }


@works("face-power")
def _face_power(given: Given) -> dict[str, Any]:
    feed, width = given("feed", "mm/min"), given("width", "mm")
    # An energy of one joule per cubic millimetre is a specific force of 1000 N/mm2.
    power = cutting_force.net_power(given("depth", "mm"), width, feed, 1000 * given("energy", "J/mm3"))
    travel = passes.full_overrun_travel(given("length", "mm"), given("diameter", "mm"), 0.0)
    unit_feed = body.table_feed(1.0, given("teeth"), given("spindle_speed", "1/min"))
    return {
        "removal_rate": removal(given, feed),
        "time": minutes(travel, feed),
        "feed_per_tooth": quantity(feed / unit_feed, "mm"),
        "power": quantity(power, "kW"),
    }


@works("handbook-unit-power")
def _unit_power(given: Given) -> dict[str, Any]:
    feed = given("cutting_speed", "mm/min")
    rate = body.removal_rate(given("depth", "mm"), given("feed_per_turn", "mm"), feed)
    factors = given("feed_factor"), given("wear_factor")
    power = cutting_force.unit_power_check(rate, given("energy", "J/mm3"), *factors)
    return {
        "removal_rate": quantity(rate, "cm3/min"),
        "power": quantity(power, "kW"),
        "motor_power": quantity(drive.motor_power(power, given("efficiency")), "kW"),
    }


@works("chip-thickness-law-power")
def _law_power(given: Given) -> dict[str, Any]:
    feed = given("feed", "mm/min")
    per_tooth = feed / (given("teeth") * given("spindle_speed", "1/min"))
    mean = chip.peripheral_chip_thickness(per_tooth, given("depth", "mm"), given("diameter", "mm")) / 2
    force = cutting_force.specific_cutting_force(given("kc11", "N/mm2"), given("exponent"), mean)
    power = cutting_force.net_power(given("width", "mm"), given("depth", "mm"), feed, force)
    return {"mean_chip_thickness": quantity(mean, "mm"), "power": quantity(power, "kW")}


@works("energy-power")
def _energy_power(given: Given) -> dict[str, Any]:
    rate = removal(given, given("feed", "mm/min"))
    power = cutting_force.unit_power_check(rate.magnitude, given("energy", "J/mm3"), 1.0, 1.0)
    return {"power": quantity(power, "kW")}


@works("rake-corrected-force")
def _rake_corrected(given: Given) -> dict[str, Any]:
    width, diameter = given("width", "mm"), given("diameter", "mm")
    arc = engagement.centred_arc(width, diameter).arc_deg
    mean = chip.mean_chip_thickness(given("feed_per_tooth", "mm"), 90, width, diameter, arc)
    rakes = given("rake", "deg"), given("reference_rake", "deg")
    after_rake = given("kc_table", "N/mm2") * cutting_force.rake_factor(*rakes, given("change_per_degree"))
    force = after_rake * given("thickness_factor")
    # The exercise takes the feed per tooth as the thickness of the largest chip.
    tooth = cutting_force.mean_tooth_force(given("depth", "mm"), 90, given("feed_per_tooth", "mm"), force)
    return {
        "mean_chip_thickness": quantity(mean, "mm"),
        "kc_after_rake": quantity(after_rake, "N/mm2"),
        "kc": quantity(force, "N/mm2"),
        "force_per_tooth": quantity(tooth, "N"),
    }


@works("examination-thickest-chip")
def _thickest_chip(given: Given) -> dict[str, Any]:
    feed = given("feed", "mm/min") / (given("teeth") * given("spindle_speed", "1/min"))
    thickest = chip.peripheral_chip_thickness(feed, given("depth", "mm"), given("diameter", "mm"))
    return {"maximum_chip_thickness": quantity(thickest, "mm")}


@works("round-insert-removal")
def _round_insert(given: Given) -> dict[str, Any]:
    insert, depth = given("insert_diameter", "mm"), given("depth", "mm")
    effective = chip.round_insert_effective_diameter(given("diameter", "mm"), insert, depth)
    top = chip.round_insert_angle(depth, insert).top_deg
    feed = chip.feed_for_chip_thickness(given("maximum_chip_thickness", "mm"), top, 0, 180)
    speed = body.spindle_speed(given("cutting_speed", "m/min"), effective)
    rate = body.removal_rate(depth, effective, body.table_feed(feed, given("teeth"), speed))
    return {
        "removal_rate": quantity(rate, "cm3/min"),
        "effective_diameter": quantity(effective, "mm"),
        "feed_per_tooth": quantity(feed, "mm"),
    }


@works("chip-or-power-limit")
def _side_cut(given: Given) -> dict[str, Any]:
    depth, diameter = given("radial_depth", "mm"), given("diameter", "mm")
    cut = engagement.flush_arc(depth, diameter, "entry")
    thickest = given("maximum_chip_thickness", "mm")
    feed = chip.feed_for_chip_thickness(thickest, 90, cut.entry_deg, cut.exit_deg)
    approach = passes.approach(diameter, cut.entry_deg, cut.exit_deg)
    travel = passes.feed_travel(given("length", "mm"), approach, 0.0) + given("clearance", "mm")
    speed = body.spindle_speed(given("cutting_speed", "m/min"), diameter)
    return {
        "feed_per_tooth": quantity(feed, "mm"),
        "time_16": minutes(travel, body.table_feed(feed, given("teeth"), speed)),
        "time_8": minutes(travel, body.table_feed(feed, given("effective_teeth"), speed)),
    }


@works("radius-roughness")
def _radius_roughness(given: Given) -> dict[str, Any]:
    ideal = surface.radius_roughness(given("feed", "mm"), given("corner_radius", "mm")).ra_um
    return {"ideal_ra": quantity(ideal, "um"), "estimated_ra": quantity(ideal * given("ratio"), "um")}


@works("peripheral-waves")
def _waves(given: Given) -> dict[str, Any]:
    feed = given("feed", "mm/min") / (given("teeth") * given("spindle_speed", "1/min"))
    return {"height": quantity(surface.peripheral_roughness(feed, given("diameter", "mm")), "um")}


@works("taylor-one-step")
def _taylor_step(given: Given) -> dict[str, Any]:
    reference = life.Band(*[given("life_1", "min")] * 3)
    slope = life.Band(*[given("exponent")] * 3)
    band = life.life_band(given("speed_2", "m/min"), given("speed_1", "m/min"), reference, slope)
    return {"life": quantity(band.likely, "min")}


def fitted(given: Given) -> life.TaylorLaw:
    """Return the law through two measured lives."""
    return life.taylor_fit(
        given("speed_1", "m/min"), given("life_1", "min"), given("speed_2", "m/min"), given("life_2", "min")
    )


@works("examination-2024-taylor")
def _taylor_between(given: Given) -> dict[str, Any]:
    law = fitted(given)
    found = life.tool_life(given("speed_3", "m/min"), law.constant_m_min, law.exponent)
    return {"life": quantity(found, "min")}


@works("examination-2009-taylor")
def _taylor_constants(given: Given) -> dict[str, Any]:
    law = fitted(given)
    lives = [
        life.tool_life(speed, law.constant_m_min, law.exponent)
        for speed in (given("speed_1", "m/min"), given("speed_1", "m/min") / 2)
    ]
    return {
        "exponent": law.exponent,
        "constant": quantity(law.constant_m_min, "m/min"),
        "gain_at_half_speed": lives[1] / lives[0] - 1,
    }


@works("examination-2017-break-even")
def _break_even(given: Given) -> dict[str, Any]:
    laws = [life.TaylorLaw(given(f"exponent_{i}"), given(f"constant_{i}", "m/min")) for i in (1, 2)]
    return {"speed": quantity(life.break_even_speed(*laws), "m/min")}


def economic_speed(given: Given, life_min: float) -> Any:
    """Return the speed that gives an economic life."""
    return quantity(life.speed_for_life(life_min, given("constant", "m/min"), given("exponent")), "m/min")


@works("economic-speeds")
def _economic_speeds(given: Given) -> dict[str, Any]:
    slope, change = given("exponent"), given("change", "min")
    cheapest = life.economic_life(slope, change, given("edge_cost"), given("rate"))
    return {
        "speed_most_output": economic_speed(given, life.economic_life(slope, change)),
        "speed_least_cost": economic_speed(given, cheapest),
    }


@works("cost-of-a-part")
def _cost_of_a_part(given: Given) -> dict[str, Any]:
    results: dict[str, Any] = {}
    for name in ("fast", "cheap"):
        speed = given(name, "mm/min")
        cutting = math.pi * given("diameter", "mm") * given("length", "mm") / (speed * given("feed", "mm"))
        edge = life.tool_life(speed / 1000, given("constant", "m/min"), given("exponent"))
        handling, change = given("handling", "min"), given("change", "min")
        cost = life.cost_per_part(handling, cutting, change, given("edge_cost"), given("rate"), edge, counting="whole")
        results |= {f"cost_{name}": cost.total, f"rate_{name}": quantity(1 / cost.cycle_min, "1/min")}
    return results


@works("least-cost-speed")
def _least_cost(given: Given) -> dict[str, Any]:
    cheapest = life.economic_life(given("exponent"), given("change", "min"), given("edge_cost"), given("rate"))
    return {"speed": economic_speed(given, cheapest)}


@works("reground-tool-cost")
def _reground(given: Given) -> dict[str, Any]:
    rate = given("rate_per_hour") / 60
    times = given("change", "min"), given("regrind", "min")
    cost = life.tool_change_cost(*times, rate, given("depreciation"))
    cheapest = life.economic_life(given("exponent"), 0.0, cost, rate)
    return {"change_cost": cost, "speed": economic_speed(given, cheapest)}


@works("extended-law-cost")
def _extended_law(given: Given) -> dict[str, Any]:
    change, costs = given("change", "min"), (given("edge_cost"), given("rate"))
    edge = life.economic_life(given("exponent"), change, *costs)
    constant = life.extended_constant(given("constant", "m/min"), given("feed", "mm"), given("feed_exponent"))
    speed = body.spindle_speed(life.speed_for_life(edge, constant, given("exponent")), given("diameter", "mm"))
    cutting = passes.pass_time(given("length", "mm"), speed * given("feed", "mm"), 1, 0.0)
    idle = given("rapid_travel", "mm") / given("rapid", "mm/min")
    idle += given("loading", "min") + given("interchange", "min")
    cost = life.cost_per_part(idle, cutting, change, *costs, edge, counting="fractional")
    return {"cost": cost.total}


@works("examination-least-cost")
def _least_cost_terms(given: Given) -> dict[str, Any]:
    cheapest = life.economic_life(given("exponent"), 0.0, given("change_cost"), given("cutting_cost"))
    return {"speed": economic_speed(given, cheapest)}
