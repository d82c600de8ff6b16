"""The cut plan of one candidate: passes, layers, speed, feed, force, power, finish, mass and time, all computed."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from dataclasses import replace
from typing import Any

from millreason.candidates import Candidate
from millreason.cut_plan import Layout, Load, Plan
from millreason.facts import Situation
from millreason.formulas.chip import feed_for_chip_thickness, maximum_chip_thickness, mean_chip_thickness
from millreason.formulas.cutting_force import (
    SpeedBranch,
    mean_tooth_force,
    net_power,
    rake_factor,
    specific_cutting_force,
    speed_factor,
    torque_from_power,
)
from millreason.formulas.drive import speed_at_or_below
from millreason.formulas.drive_curve import available_power
from millreason.formulas.engagement import engagement_arc, flush_arc
from millreason.formulas.motion import cutting_speed, removal_rate, spindle_speed, table_feed
from millreason.formulas.passes import passes_across
from millreason.formulas.rakes import orthogonal_rake
from millreason.formulas.round_insert import round_insert_angle
from millreason.formulas.stiffness import stable_depth
from millreason.formulas.tooth_forces import force_components, peak_torque
from millreason.spindle import Spindle
from millreason.worksheet import Worksheet

Tuning = Mapping[str, float]
_TINY = 1e-9
UM_PER_MM = 1000


def start_speed(fact: Callable[..., Any], edge: str, part: str = "start", default: float | None = None) -> Any:
    """Return the start (or min, max) speed [m/min] for an edge; diamond and boron nitride have their own."""
    own = fact(f"material.{edge}_speed_{part}_m_min")
    return fact(f"material.speed_{part}_m_min", default) if own is None else own


class Planner:
    """Makes plans for the candidates of one job."""

    def __init__(self, situation: Situation, tuning: Tuning, practice: Mapping[str, Any], spindle: Spindle) -> None:
        self._fact = situation.value
        self._tuning = tuning
        self._practice = practice
        self._spindle = spindle

    def plan(self, candidate: Candidate, direction: str) -> Plan:
        """Compute the plan of a candidate: first as the knowledge starts it, then within the machine's power."""
        sheet = Worksheet()
        layout = self._layout(candidate, direction, sheet)
        rake = sheet.use(
            "orthogonal rake",
            "deg",
            orthogonal_rake,
            candidate.rake.radial_deg,
            candidate.rake.axial_deg,
            self._kappa(candidate, candidate.family.usable_depth_mm)[1],
        )
        wanted = self._speed_wanted(candidate.edge)
        hex_wanted, hex_least = self._chip_wanted(candidate)
        rough, finish = self._depths(candidate)
        draft = Plan(candidate, layout, [], direction, wanted, hex_wanted, hex_least, 0, 1.0, rake, sheet)
        return self._within_power(draft, rough, finish)

    # ------------------------------------------------------------------ passes and position
    def _layout(self, candidate: Candidate, direction: str, sheet: Worksheet) -> Layout:
        width, diameter = self._fact("work.width_mm"), candidate.diameter_mm
        ratio = min(self._number("width_to_diameter_most"), self._tuning.get("width_to_diameter_most", math.inf))
        # A very small body cannot give away the usual overlap.
        overlap = min(self._number("pass_overlap_mm"), ratio * diameter / 2)
        one_ratio = min(
            self._practice["width_to_diameter_one_pass"].high,
            self._tuning.get("width_to_diameter_most", math.inf),
        )
        forced = bool(self._fact("require.one_pass") or self._fact("require.no_overlap_line"))
        if self._fact("work.feature") == "slot":
            return self._slot(width, diameter, forced, sheet)
        if width <= one_ratio * diameter or forced:
            return self._one_pass(min(width, diameter), diameter, direction, sheet)
        count = sheet.use("plan.passes_across", "", passes_across, width, diameter, overlap, ratio)
        strip = (width + (count - 1) * overlap) / count
        side = "exit" if direction == "climb" else "entry"
        arc = sheet.use("arc of contact", "deg", flush_arc, strip, diameter, side)
        gap = diameter - strip if side == "exit" else 0.0
        return Layout(int(count), strip, overlap, (diameter - strip) / 2, gap, arc, False)

    def _slot(self, width: float, diameter: float, forced: bool, sheet: Worksheet) -> Layout:
        """Lay the passes along both walls; the first is buried to its full diameter, and the plan is made for that."""
        reach, count = min(width, diameter), 1
        if width > diameter and not forced:
            overlap = min(self._number("pass_overlap_mm"), diameter / 2)
            count = int(sheet.use("plan.passes_across", "", passes_across, width, diameter, overlap, 1.0))
        lap = (count * reach - width) / (count - 1) if count > 1 else 0.0
        arc = sheet.use("arc of contact", "deg", flush_arc, reach, diameter)
        return Layout(count, reach, lap, 0.0, 0.0, arc, count == 1)

    def _one_pass(self, width: float, diameter: float, direction: str, sheet: Worksheet) -> Layout:
        room = (diameter - width) / 2
        offset = max(0.0, min(self._number("offset_to_diameter") * diameter, room - self._number("side_clearance_mm")))
        if self._fact("work.feature") == "shoulder":
            offset = room
        gap = room + (offset if direction == "climb" else -offset)
        arc = sheet.use("arc of contact", "deg", engagement_arc, width, diameter, max(gap, 0.0))
        return Layout(1, width, 0.0, offset, gap, arc, True)

    # ------------------------------------------------------------------ depth
    def _depth_limit(self, candidate: Candidate) -> float:
        limit = min(candidate.family.usable_depth_mm, self._tuning.get("depth_most_mm", math.inf))
        if candidate.is_round:
            share = self._tuning.get("insert_depth_share_most", self._number("round_depth_share"))
            limit = min(limit, share * (candidate.family.insert_diameter_mm or 0.0))
        return limit

    def _depths(self, candidate: Candidate) -> tuple[tuple[int, float], tuple[int, float]]:
        """Return layers and depth of the roughing and of the finishing layers."""
        stock = self._fact("work.stock_mm")
        stage = self._fact("cut.stage", "roughing")
        limit = self._depth_limit(candidate)
        least = int(self._tuning.get("layers_least", 1))
        finish = min(self._tuning.get("finishing_depth_mm", self._number("finishing_depth_mm")), limit)
        # A roughing layer thinner than the finishing layer would be no roughing at all.
        if stage == "finishing" or (stage == "roughing_and_finishing" and stock < 2 * finish - _TINY):
            count = max(math.ceil(stock / limit - _TINY), least)
            return (0, 0.0), (count, stock / count)
        if stage == "roughing":
            finish = 0.0
        rough = stock - finish
        count = max(math.ceil(rough / limit - _TINY), least - (1 if finish else 0), 1)
        return (count, rough / count), ((1, finish) if finish else (0, 0.0))

    # ------------------------------------------------------------------ speed and feed
    def _speed_wanted(self, edge: str) -> float:
        factor = self._tuning.get("cutting_speed", 1.0)
        start = start_speed(self._fact, edge) * factor
        low, high = start_speed(self._fact, edge, "min", 0.0), start_speed(self._fact, edge, "max", math.inf)
        kept = min(max(start, low), high) if factor >= 1.0 else min(start, high)
        return float(min(kept, self._tuning.get("cutting_speed_most_m_min", math.inf)))

    def _chip_wanted(self, candidate: Candidate) -> tuple[float, float]:
        """Return the largest chip thickness that is aimed at, and the least the edge and the rules allow."""
        sine45 = math.sin(math.pi / 4)
        least = max(self._practice["chip_least_mm"].by[candidate.edge], self._tuning.get("hex_least_mm", 0.0))
        aim = self._fact("material.fz45_start_mm") * sine45 * self._tuning.get("feed", 1.0)
        most = min(self._fact("material.fz45_max_mm", math.inf) * sine45, self._tuning.get("hex_most_mm", math.inf))
        return max(min(aim, most), least), least

    def _kappa(self, candidate: Candidate, depth: float) -> tuple[float, float]:
        """Return the cutting-edge angle at the top of the cut and its mean; round inserts follow the depth."""
        if not candidate.is_round:
            return candidate.family.kappa_deg, candidate.family.kappa_deg
        diameter = candidate.family.insert_diameter_mm or 0.0
        angle = round_insert_angle(min(depth, diameter / 2), diameter)
        return angle.top_deg, angle.mean_deg

    def _feed(self, chip: float, kappa: float, layout: Layout, teeth: int, speed: float) -> float:
        feed = feed_for_chip_thickness(chip, kappa, layout.arc.entry_deg, layout.arc.exit_deg)
        feed = max(feed, self._tuning.get("feed_per_tooth_least_mm", 0.0))
        return float(min(feed, self._fact("machine.feed_max_mm_min", math.inf) / (teeth * speed)))

    # ------------------------------------------------------------------ load
    def _load(self, plan: Plan, name: str, layers: int, depth: float, chip: float) -> Load:
        sheet, layout, candidate = plan.sheet, plan.layout, plan.candidate
        top, mean = self._kappa(candidate, depth)
        diameter, width, arc = candidate.diameter_mm, layout.width_mm, layout.arc
        speed = self._speed(plan.speed_wanted_m_min, candidate, sheet, name)
        vc = sheet.use(f"cutting speed, {name}", "m/min", cutting_speed, speed, diameter)
        fz = self._feed(chip, top, layout, candidate.teeth, speed)
        vf = sheet.use(f"table feed, {name}", "mm/min", table_feed, fz, candidate.teeth, speed)
        hex_ = sheet.use(
            f"largest chip thickness, {name}",
            "mm",
            maximum_chip_thickness,
            fz,
            top,
            arc.entry_deg,
            arc.exit_deg,
        )
        hm = sheet.use(
            f"mean chip thickness, {name}", "mm", mean_chip_thickness, fz, mean, width, diameter, arc.arc_deg
        )
        factor = self._force_factor(plan.orthogonal_rake_deg, vc, sheet, name)
        kc11, mc = self._fact("material.kc11_n_mm2"), self._fact("material.mc")
        kc = sheet.use(f"specific cutting force, {name}", "N/mm2", specific_cutting_force, kc11, mc, hm, factor)
        power = sheet.use(f"net power, {name}", "kW", net_power, depth, width, vf, kc)
        available = sheet.use(f"available net power, {name}", "kW", available_power, self._spindle.net_curve, speed)
        torque = sheet.use(f"mean torque, {name}", "N.m", torque_from_power, power, speed)
        peak = sheet.use(
            f"peak load, {name}",
            "N.m",
            peak_torque,
            candidate.teeth,
            arc.entry_deg,
            arc.exit_deg,
            depth,
            fz,
            mean,
            diameter,
            kc11,
            mc,
            factor,
        )
        tooth = sheet.use(f"mean force on a tooth, {name}", "N", mean_tooth_force, depth, mean, hm, kc)
        thrust = peak.tangential_force_n * self._number("radial_to_tangential")
        parts = sheet.use(f"thrust, {name}", "N", force_components, thrust, mean)
        removal = sheet.use(f"removal rate, {name}", "cm3/min", removal_rate, depth, width, vf)
        return Load(
            name, layers, depth, top, mean, vc, speed, fz, vf, hex_, hm, kc, factor, removal, power, available, torque,
            peak.torque_nm, peak.tangential_force_n, tooth, parts.radial_n, parts.axial_n,
        )  # fmt: skip

    def _speed(self, wanted: float, candidate: Candidate, sheet: Worksheet, name: str) -> float:
        speed = sheet.use(f"spindle speed wanted, {name}", "rpm", spindle_speed, wanted, candidate.diameter_mm)
        speed = min(speed, self._spindle.speed_max_rpm, candidate.speed_limit_rpm)
        if not self._spindle.steps:
            return float(speed)
        if speed < self._spindle.steps[0]:
            return self._spindle.steps[0]
        return float(sheet.use(f"spindle step, {name}", "rpm", speed_at_or_below, self._spindle.steps, speed))

    def _force_factor(self, rake: float, speed: float, sheet: Worksheet, name: str) -> float:
        low, high = self._number("rake_span_low_deg"), self._number("rake_span_high_deg")
        reference = self._practice["reference_rake_deg"].by[self._fact("material.iso_group")]
        factor = sheet.use(
            f"rake factor, {name}",
            "",
            rake_factor,
            min(max(rake, low), high),
            reference,
            self._number("rake_change_per_deg"),
        )
        slow = self._practice["speed_factor_slow"].by
        branch = SpeedBranch(slow["from_m_min"], slow["to_m_min"], slow["coefficient"], slow["exponent"])
        if speed >= branch.high_m_min:
            # The published factor lowers the force above 100 m/min; not taking it stays on the safe side.
            return float(factor)
        return float(
            factor * sheet.use(f"speed factor, {name}", "", speed_factor, max(speed, branch.low_m_min), (branch,))
        )

    # ------------------------------------------------------------------ within the machine's power
    def _within_power(self, plan: Plan, rough: tuple[int, float], finish: tuple[int, float]) -> Plan:
        """Take more layers, then less feed, until worn edges stay within the power at the speed."""
        wear = self._number("wear_factor")
        allowed = self._tuning.get("power_use_most", self._number("power_use_most"))
        start_count, depth = rough if rough[0] else finish
        name = "roughing" if rough[0] else "finishing"
        chip = plan.hex_wanted_mm
        mark = len(plan.sheet.uses)
        load = self._load(plan, name, start_count, depth, chip)
        least_depth = max(2 * plan.hex_least_mm, self._number("finishing_depth_mm"))
        steady = self._steady_depth(plan, load)
        if depth > steady:
            total = depth * start_count
            start_count = max(start_count, min(math.ceil(total / steady - _TINY), int(total / least_depth)))
            depth = total / start_count
            del plan.sheet.uses[mark:]
            load = self._load(plan, name, start_count, depth, chip)
        count = start_count
        while load.use_worn(wear) > allowed and depth * count / (count + 1) >= least_depth:
            grow = max(
                count + 1,
                min(math.ceil(count * load.use_worn(wear) / allowed), int(depth * count / least_depth)),
            )
            count, depth = grow, depth * count / grow
            del plan.sheet.uses[mark:]
            load = self._load(plan, name, count, depth, chip)
        if load.use_worn(wear) > allowed and chip > plan.hex_least_mm:
            chip = self._thinner_chip(plan, load, allowed / wear, chip)
            del plan.sheet.uses[mark:]
            load = self._load(plan, name, count, depth, chip)
        loads = [load]
        if rough[0] and finish[0]:
            loads.append(self._finishing(plan, finish, chip))
        elif name == "finishing":
            del plan.sheet.uses[mark:]
            loads = [self._finishing(plan, (count, depth), chip)]
        return replace(plan, loads=loads, layers_for_power=count - start_count, feed_left=chip / plan.hex_wanted_mm)

    def _steady_depth(self, plan: Plan, load: Load) -> float:
        """Return the deepest layer that the stiffness bears, where stiffness and damping are known."""
        stiffness, damping = self._fact("machine.stiffness_n_um"), self._fact("machine.damping_ratio")
        if stiffness is None or damping is None:
            return math.inf
        teeth = max(plan.candidate.teeth * plan.layout.arc.arc_deg / 360, 1.0)
        limit = stable_depth(
            stiffness * UM_PER_MM,
            damping,
            load.specific_force_n_mm2,
            self._number("direction_factor"),
            teeth,
            load.kappa_mean_deg,
        )
        return limit.depth_mm * self._number("stable_depth_use_most")

    def _thinner_chip(self, plan: Plan, load: Load, share: float, chip: float) -> float:
        """Return the chip thickness at which the load fits; power goes with chip thickness to the power 1 - mc."""
        over = load.net_power_kw / (load.available_kw * share)
        return max(plan.hex_least_mm, float(chip * over ** (-1.0 / (1.0 - self._fact("material.mc")))))

    def _finishing(self, plan: Plan, finish: tuple[int, float], chip: float) -> Load:
        """Plan the finishing layers: the feed per revolution stays within the land, the cusp within the finish."""
        layers, depth = finish
        candidate, arc = plan.candidate, plan.layout.arc
        aim = min(chip, plan.hex_wanted_mm * self._tuning.get("finishing_feed", 1.0))
        top = self._kappa(candidate, depth)[0]
        most = self._finishing_feed_most(candidate)
        if most is not None:
            aim = min(aim, maximum_chip_thickness(most, top, arc.entry_deg, arc.exit_deg))
        return self._load(plan, "finishing", layers, depth, max(aim, plan.hex_least_mm))

    def _finishing_feed_most(self, candidate: Candidate) -> float | None:
        land = candidate.land_mm
        if land > 0:
            return land / self._number("land_to_feed") / candidate.teeth
        radius = candidate.corner.radius_mm or 0.0
        asked = self._fact("require.finish_ra_um")
        if radius <= 0 or asked is None:
            return None
        run_out = self._practice["run_out_axial_mm"].by[
            "cartridge" if candidate.pockets == "cartridge" else "fixed_finishing"
        ]
        cusp = asked / 1000 * self._number("ra_to_rt") - run_out
        return math.sqrt(8 * radius * cusp) if cusp > 0 else None

    def _number(self, name: str) -> float:
        return float(self._practice[name].value)
