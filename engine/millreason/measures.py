"""What a plan measures up to: the plan.* facts that the judging rules look at, all computed."""

from __future__ import annotations

import math
from collections.abc import Callable, Mapping
from typing import Any

from millreason.candidates import Candidate
from millreason.cut_plan import Load, Plan
from millreason.cutters import CuttersFile
from millreason.facts import Situation
from millreason.formulas.body import Assembly, body_mass, combined_mass, tip_moment
from millreason.formulas.chip import chip_volume_per_tooth_pass, gullet_fill
from millreason.formulas.engagement import exit_angle_from_centreline
from millreason.formulas.entry_paths import ramp_limit_angle
from millreason.formulas.first_contact import first_contact
from millreason.formulas.stiffness import tool_deflection
from millreason.formulas.travel import full_overrun_travel, pass_time
from millreason.machines import Interface
from millreason.quality import Quality
from millreason.spindle import Spindle

MM3_PER_M3 = 1e9
MM_PER_UM = 1e-3
# Facts that only body and size decide, and those that pitch, rake and edge decide too: what a rejection by them
# rules out with it. Everything else may differ from one candidate to the next.
BODY_FACTS = frozenset({
    "plan.outermost_diameter_mm", "plan.changer_full_use", "plan.changer_empty_use", "plan.mass_kg",
    "plan.mass_use", "plan.moment_nm", "plan.moment_use", "plan.passes_across", "plan.width_to_diameter",
    "plan.uncovered", "pick.cutter_class", "pick.kappa_deg", "pick.diameter_mm", "pick.mounting",
    "plan.width_of_cut_mm", "plan.usual_diameter_use", "plan.pocket_use", "plan.pocket_corner_use",
    "plan.overhang_to_diameter",
})  # fmt: skip
CORNER_FACTS = frozenset({"plan.corner_use", "pick.corner", "pick.corner_radius_mm"})
CUT_FACTS = BODY_FACTS | {
    "plan.power_use", "plan.power_use_worn", "plan.net_power_kw", "plan.available_power_kw", "plan.gullet_use",
    "plan.teeth_in_cut", "plan.cutting_speed_m_min", "plan.spindle_speed_rpm", "plan.speed_to_start",
    "plan.body_speed_use", "plan.lift_to_clamp", "plan.layers_for_power", "plan.feed_cut_for_power",
    "plan.torque_nm", "plan.stable_depth_use", "pick.pitch", "pick.teeth", "pick.rake", "pick.edge",
}  # fmt: skip


class Meter:
    """Measures the plans of one job."""

    def __init__(
        self,
        situation: Situation,
        practice: Mapping[str, Any],
        cutters: CuttersFile,
        interface: Interface,
        spindle: Spindle,
    ) -> None:
        self._fact = situation.value
        self._practice = practice
        self._cutters = cutters
        self._interface = interface
        self._spindle = spindle
        self.quality = Quality(situation, practice)

    def picks(self, candidate: Candidate, separate: Mapping[str, str]) -> dict[str, Any]:
        """Return the pick.* facts of a candidate and the picks that hold for the whole job."""
        own = {
            "cutter_class": candidate.family.cutter_class,
            "kappa_deg": float(candidate.family.kappa_deg),
            "diameter_mm": candidate.diameter_mm,
            "pitch": candidate.pitch,
            "teeth": float(candidate.teeth),
            "rake": candidate.rake.rake,
            "corner": candidate.corner.corner,
            "corner_radius_mm": candidate.corner.radius_mm,
            "edge": candidate.edge,
            "wiper": candidate.wiper,
            "pockets": candidate.pockets,
            "mounting": candidate.mounting,
            **separate,
        }
        return {f"pick.{name}": value for name, value in own.items() if value is not None}

    def measure(self, plan: Plan) -> dict[str, Any]:
        """Return every plan.* fact that can be computed."""
        facts = {
            **self._body(plan),
            **self._passes(plan),
            **self._cut(plan),
            **self.quality.surface(plan),
            **self.quality.holding(plan),
        }
        return {f"plan.{name}": value for name, value in facts.items() if value is not None}

    # ------------------------------------------------------------------ body, changer, mass
    def assembly(self, plan: Plan) -> Assembly:
        """Return mass and centre of mass of cutter and adapter."""
        candidate, sheet = plan.candidate, plan.sheet
        material = self._cutters.body_materials[0]
        size = candidate.size
        mass = sheet.use(
            "mass of the body",
            "kg",
            body_mass,
            size.nominal_mm,
            size.height_mm,
            size.bore_mm or 0.0,
            material.density_kg_mm3 * MM3_PER_M3,
            material.fill,
        )
        marked = candidate.own.values.get("mass_kg") if candidate.own else None
        adapter = self._interface.adapter
        if candidate.mounting == "spindle_nose_flange":
            return Assembly(mass, size.height_mm / 2)
        length = max(self._fact("fixture.overhang_mm", adapter.length_mm + size.height_mm) - size.height_mm, 0.0)
        parts = (
            (float(marked) if isinstance(marked, int | float) else mass, length + size.height_mm / 2),
            (adapter.mass_kg, length / 2),
        )
        return sheet.use("mass of the assembly", "kg", combined_mass, parts)

    def gauge_length(self, candidate: Candidate) -> float:
        """Return the gauge length: as given, or adapter and body."""
        adapter = 0.0 if candidate.mounting == "spindle_nose_flange" else self._interface.adapter.length_mm
        return float(self._fact("fixture.overhang_mm", adapter + candidate.size.height_mm))

    def _body(self, plan: Plan) -> dict[str, Any]:
        candidate = plan.candidate
        outermost = candidate.outermost_mm
        assembly = self.assembly(plan)
        moment = plan.sheet.use("plan.moment_nm", "N.m", tip_moment, assembly.mass_kg, assembly.centre_mm)
        speed = plan.heaviest.spindle_speed_rpm
        caution = candidate.family.speed_caution
        limit = candidate.speed_limit_rpm
        if math.isinf(limit):
            limit = min(
                caution.spindle_speed_rpm,
                1000 * caution.cutting_speed_m_min / (math.pi * candidate.diameter_mm),
            )
        return {
            "outermost_diameter_mm": outermost,
            "changer_full_use": _over(outermost, self._fact("machine.changer_full_mm")),
            "changer_empty_use": _over(outermost, self._fact("machine.changer_empty_mm")),
            "mass_kg": assembly.mass_kg,
            "mass_use": _over(assembly.mass_kg, self._fact("machine.changer_mass_kg")),
            "moment_nm": moment,
            "moment_use": _over(moment, self._fact("machine.changer_moment_nm")),
            "mass_to_hand": assembly.mass_kg / self._number("lift_ideal_kg"),
            "body_speed_use": speed / limit,
            "body_speed_known": not math.isinf(candidate.speed_limit_rpm),
            "usual_diameter_use": _over(candidate.diameter_mm, self._fact("machine.largest_usual_diameter_mm")),
            "ramp_deg": self._ramp(plan),
            "tool_deflection_mm": self._deflection(plan),
            "overhang_to_diameter": self.gauge_length(candidate) / candidate.diameter_mm,
        }

    def _deflection(self, plan: Plan) -> float | None:
        """Return how far the cutter gives way sideways: bending of the arbor and tilt in the interface, an estimate."""
        diameter = self._interface.gauge.diameter_mm
        stiffness = self._practice["interface_stiffness_nmm_rad"].by[self._interface.size]
        modulus = self._practice["youngs_modulus_n_mm2"].by["P"]
        load = max(plan.loads, key=lambda entry: entry.radial_n)
        if load.radial_n <= 0:
            return None
        length = self.gauge_length(plan.candidate)
        found = plan.sheet.use(
            "tool deflection", "mm", tool_deflection, load.radial_n, length, diameter, modulus, stiffness
        )
        return found.total_mm

    def _ramp(self, plan: Plan) -> float | None:
        ramp, diameter = plan.candidate.family.ramp, plan.candidate.diameter_mm
        if ramp.axial_gap_mm <= 0 or diameter <= 2 * ramp.floor_edge_mm:
            return None
        return plan.sheet.use("plan.ramp_deg", "deg", ramp_limit_angle, ramp.axial_gap_mm, diameter, ramp.floor_edge_mm)

    # ------------------------------------------------------------------ passes, layers, time
    def _passes(self, plan: Plan) -> dict[str, Any]:
        layout, first = plan.layout, plan.loads[0]
        pocket = self._fact("work.feature") == "closed_pocket"
        outermost = plan.candidate.outermost_mm
        between = room_between_walls(self._fact)
        return {
            "pocket_use": _over(outermost, between),
            "pocket_corner_use": _over(outermost / 2, self._fact("work.pocket_corner_mm")) if pocket else None,
            "passes_across": float(layout.passes),
            "layers": float(plan.layers),
            "layers_for_power": float(plan.layers_for_power),
            "feed_cut_for_power": plan.feed_left,
            "width_of_cut_mm": layout.width_mm,
            "depth_of_cut_mm": max(load.depth_mm for load in plan.loads),
            "width_to_diameter": layout.width_mm / plan.candidate.diameter_mm,
            "depth_use": max(load.depth_mm for load in plan.loads) / plan.candidate.family.usable_depth_mm,
            "first_layer_to_skin": first.depth_mm / skin if (skin := self._fact("work.skin_depth_mm")) else None,
            "uncovered": bool(layout.one_pass and self._fact("work.width_mm") > layout.width_mm + 1e-6),
            "entry": ("helix" if self._fact("work.length_mm") < self._number("ramp_room") * outermost else "ramp")
            if pocket
            else "from_outside",
            "time_min": self.time(plan),
        }

    def travel(self, plan: Plan) -> float:
        """Return the travel of one pass: length, diameter and clearance at both ends."""
        clearance = self._number("approach_clearance_mm")
        return plan.sheet.use(
            "travel of a pass",
            "mm",
            full_overrun_travel,
            self._fact("work.length_mm"),
            plan.candidate.diameter_mm,
            clearance,
        )

    def time(self, plan: Plan) -> float:
        """Return the time in feed with the way back for every further pass."""
        travel, back = self.travel(plan), self._number("extra_pass_min")
        single = [
            pass_time(travel, load.table_feed_mm_min, load.layers * plan.layout.passes, back) for load in plan.loads
        ]
        return sum(single) + back * (len(single) - 1)

    # ------------------------------------------------------------------ speed, chip, power, gullet, entry and exit
    def _cut(self, plan: Plan) -> dict[str, Any]:
        load, candidate, arc = plan.heaviest, plan.candidate, plan.layout.arc
        wear = self._number("wear_factor")
        thinnest = min(plan.loads, key=lambda entry: entry.hex_mm)
        high = self._fact("material.kc_high_ratio", 1 + self._number("force_band"))
        exit_from_line = plan.sheet.use(
            "exit angle from the centre line", "deg", exit_angle_from_centreline, arc.exit_deg
        )
        contact = plan.sheet.use(
            "plan.first_contact", "", first_contact, load.depth_mm, load.feed_per_tooth_mm,
            max(load.kappa_mean_deg, 1.0),
            arc.entry_deg, candidate.rake.radial_deg, candidate.rake.axial_deg,
        )  # fmt: skip
        return {
            "cutting_speed_m_min": load.cutting_speed_m_min,
            "speed_to_start": load.cutting_speed_m_min / plan.speed_wanted_m_min,
            "spindle_speed_rpm": load.spindle_speed_rpm,
            "feed_per_tooth_mm": load.feed_per_tooth_mm,
            "feed_per_rev_mm": load.feed_per_tooth_mm * candidate.teeth,
            "hex_mm": thinnest.hex_mm,
            "mean_chip_mm": thinnest.mean_chip_mm,
            "hex_to_least": thinnest.hex_mm / plan.hex_least_mm,
            "teeth_in_cut": candidate.teeth * arc.arc_deg / 360,
            "net_power_kw": load.net_power_kw,
            "available_power_kw": load.available_kw,
            "power_use": load.use_worn(1.0),
            "power_use_worn": load.use_worn(wear),
            "power_use_band": load.use_worn(wear * high),
            "torque_nm": load.torque_nm,
            "peak_torque_nm": load.peak_torque_nm,
            "below_base_speed": load.spindle_speed_rpm < self._spindle.base_speed_rpm,
            "gullet_use": self._gullet(plan, load),
            "exit_offset_share": abs(math.sin(math.radians(exit_from_line))) / 2,
            "first_contact": contact.points if len(contact.points) == 1 else "tie",
            "feed_use": _over(
                max(entry.table_feed_mm_min for entry in plan.loads), self._fact("machine.feed_max_mm_min")
            ),
        }

    def _gullet(self, plan: Plan, load: Load) -> float | None:
        candidate = plan.candidate
        area = self._cutters.gullet.area_mm2(candidate.size.nominal_mm, candidate.teeth)
        room = area * candidate.family.edge_length_mm * self._number("gullet_share")
        ratio = self._practice["chip_ratio"].by[self._fact("material.chip_form", "long")]
        if room <= 0:
            return None
        volume = plan.sheet.use(
            "chip volume of a tooth pass",
            "mm3",
            chip_volume_per_tooth_pass,
            load.depth_mm,
            plan.layout.width_mm,
            load.feed_per_tooth_mm,
        )
        return plan.sheet.use("plan.gullet_use", "", gullet_fill, volume, ratio, room)

    def _number(self, name: str) -> float:
        return float(self._practice[name].value)


def room_between_walls(fact: Callable[[str], Any]) -> float | None:
    """Return the room a body has between the walls: the smaller side of a closed pocket, the width of a slot."""
    if fact("work.feature") == "slot":
        return float(fact("work.width_mm"))
    if fact("work.feature") == "closed_pocket":
        return float(min(fact("work.width_mm"), fact("work.length_mm")))
    return None


def _over(value: float | None, limit: float | None) -> float | None:
    return None if value is None or limit is None else value / limit
