"""Surface, holding and spring of a plan: roughness, land, lift, floor and wall, stable depth, all computed."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from millreason.cut_plan import Load, Plan
from millreason.facts import Situation
from millreason.formulas.holding import lift_force, vacuum_hold
from millreason.formulas.rakes import inclination
from millreason.formulas.stiffness import floor_deflection, stable_depth, wall_deflection
from millreason.formulas.surface import land_against_feed, roughness_with_runout
from millreason.formulas.tilt import tilt_dish, trailing_lift

MM_PER_UM = 1e-3


class Quality:
    """Measures surface and holding for the plans of one job."""

    def __init__(self, situation: Situation, practice: Mapping[str, Any]) -> None:
        self._fact = situation.value
        self._practice = practice

    # ------------------------------------------------------------------ surface
    def roughness(self, plan: Plan) -> tuple[float, float, float]:
        """Return the roughness Ra expected, and its bounds with perfect teeth and with axial run-out."""
        load, candidate = plan.last, plan.candidate
        floor = self._practice["ra_floor_um"].by[self._fact("material.iso_group")]
        run_out = self.run_out(plan)
        feed_rev = load.feed_per_tooth_mm * candidate.teeth
        if candidate.land_mm >= feed_rev:
            return (
                floor,
                floor,
                floor + run_out * 1000 / self._number("ra_to_rt") * (0 if candidate.wiper != "none" else 1),
            )
        radius = candidate.corner.radius_mm or candidate.land_mm
        if radius <= 0:
            return floor, floor, floor
        bounds = plan.sheet.use(
            "roughness of the last layer",
            "um",
            roughness_with_runout,
            load.feed_per_tooth_mm,
            candidate.teeth,
            radius,
            run_out,
        )
        if candidate.land_mm >= load.feed_per_tooth_mm:
            high = floor + run_out * 1000 / self._number("ra_to_rt")
            return high, floor, high
        return (
            max(bounds.runout.ra_um, floor),
            max(bounds.perfect.ra_um, floor),
            max(bounds.runout.ra_um, floor),
        )

    def run_out(self, plan: Plan) -> float:
        """Return the axial run-out assumed for the last layer."""
        by = self._practice["run_out_axial_mm"].by
        if plan.candidate.pockets == "cartridge":
            return float(by["cartridge"])
        return float(by["fixed_finishing"] if plan.last.name == "finishing" else by["fixed"])

    def surface(self, plan: Plan) -> dict[str, Any]:
        """Return the facts about the finished surface."""
        load, candidate = plan.last, plan.candidate
        expected = self.roughness(plan)[0]
        land = None
        if candidate.land_mm > 0:
            land = plan.sheet.use(
                "plan.land_to_feed",
                "",
                land_against_feed,
                candidate.land_mm,
                load.feed_per_tooth_mm * candidate.teeth,
            )
        return {
            "ra_um": expected,
            "ra_use": _over(expected, self._fact("require.finish_ra_um")),
            "land_to_feed": land,
            "corner_use": _over(candidate.corner.radius_mm, self._fact("work.corner_radius_mm")),
        }

    # ------------------------------------------------------------------ holding, spring, chatter
    def holding(self, plan: Plan) -> dict[str, Any]:
        """Return the facts about lift, spring and chatter."""
        load = plan.heaviest
        kappa = max(load.kappa_mean_deg, 1.0)
        incline = plan.sheet.use(
            "inclination",
            "deg",
            inclination,
            plan.candidate.rake.radial_deg,
            plan.candidate.rake.axial_deg,
            kappa,
        )
        thrust = load.peak_tangential_n * self._number("radial_to_tangential")
        lift = plan.sheet.use("lift", "N", lift_force, load.peak_tangential_n, thrust, kappa, incline).lift_n
        clamp = self._clamp(plan)
        floor, wall = self._floor(plan), self._wall(plan)
        tilt = self._fact("machine.spindle_tilt_mm_m")
        layout = plan.layout
        dish = (
            plan.sheet.use(
                "dish by tilt",
                "mm",
                tilt_dish,
                tilt,
                plan.candidate.diameter_mm,
                layout.width_mm,
                layout.entry_gap_mm,
            )
            if tilt
            else None
        )
        off = sum(part for part in (floor, wall, dish) if part is not None) if (floor or wall or dish) else None
        return {
            "lift_n": lift,
            "lift_to_clamp": lift * self._number("clamp_factor") / clamp if clamp else None,
            "floor_spring_mm": floor,
            "wall_bend_mm": wall,
            "dish_mm": dish,
            "trailing_lift_mm": plan.sheet.use(
                "lift of the trailing edge", "mm", trailing_lift, tilt, plan.candidate.diameter_mm
            )
            if tilt
            else None,
            "flatness_use": _over(off, self._fact("require.flatness_mm")) if off else None,
            "stable_depth_use": self._stability(plan, load),
        }

    def _clamp(self, plan: Plan) -> float | None:
        given = self._fact("fixture.clamp_force_n")
        area = self._fact("fixture.sealed_area_mm2")
        if given is None and area is not None and self._fact("fixture.hold") == "vacuum":
            return plan.sheet.use("vacuum hold-down", "N", vacuum_hold, area, self._number("vacuum_pressure_n_mm2"))
        return float(given) if given is not None else None

    def _floor(self, plan: Plan) -> float | None:
        thickness, span = self._fact("work.floor_thickness_mm"), self._fact("work.unsupported_span_mm")
        modulus = self._modulus()
        if None in (thickness, span, modulus) or self._fact("fixture.support_below"):
            return None
        poisson = self._number("poisson_ratio")
        return plan.sheet.use(
            "plan.floor_spring_mm",
            "mm",
            floor_deflection,
            plan.last.axial_n,
            span,
            thickness,
            modulus,
            poisson,
            "resting",
        )

    def _wall(self, plan: Plan) -> float | None:
        thickness, height = self._fact("work.wall_thickness_mm"), self._fact("work.wall_height_mm")
        modulus = self._modulus()
        if None in (thickness, height, modulus):
            return None
        length = min(self._fact("work.length_mm"), height)
        return plan.sheet.use(
            "plan.wall_bend_mm",
            "mm",
            wall_deflection,
            plan.last.peak_tangential_n,
            height,
            thickness,
            length,
            modulus,
        )

    def _modulus(self) -> float | None:
        value = self._practice["youngs_modulus_n_mm2"].by.get(self._fact("material.iso_group"))
        return float(value) if value is not None else None

    def _stability(self, plan: Plan, load: Load) -> float | None:
        stiffness, damping = self._fact("machine.stiffness_n_um"), self._fact("machine.damping_ratio")
        if stiffness is None or damping is None:
            return None
        teeth = max(plan.candidate.teeth * plan.layout.arc.arc_deg / 360, 1.0)
        limit = plan.sheet.use(
            "stable depth", "mm", stable_depth, stiffness / MM_PER_UM, damping, load.specific_force_n_mm2,
            self._number("direction_factor"), teeth, load.kappa_mean_deg
        )  # fmt: skip
        return load.depth_mm / limit.depth_mm

    def _number(self, name: str) -> float:
        return float(self._practice[name].value)


def _over(value: float | None, limit: float | None) -> float | None:
    return None if value is None or limit is None else value / limit
