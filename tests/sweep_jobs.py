"""Jobs sampled over the whole input space, as a person would write them; all parts and shops are invented."""

from __future__ import annotations

import math
from collections.abc import Sequence
from random import Random
from typing import Any

from millreason.choice import Adviser

Plain = dict[str, Any]
VAGUE = (
    "steel", "stainless", "cast iron", "aluminium", "tool steel", "titanium", "brass", "graphite", "PEEK", "blorium",
)  # fmt: skip
SKINS = ("none", "mill_scale", "cast_skin", "forged_scale", "flame_cut_edge", "weld", "hardened_skin", "alpha_case")
FEATURES = ("open_face", "shoulder", "closed_pocket", "both_sides", "slot")
FLUIDS = (
    "none", "air", "flood", "flood_water_mixed", "through_tool", "mql", "mineral_oil", "mg_rated_fluid", "brush_oil",
)  # fmt: skip
CONFIRM = ("magnesium_fire_controls", "no_steel_inserts_cast_in", "beryllium_exposure_controls")
PER_INCH = 25.4


class Sampler:
    """Makes one job after another from a seed."""

    def __init__(self, adviser: Adviser, seed: int) -> None:
        self._random = Random(seed)
        self._machines = list(adviser.knowledge.machines)
        self._interfaces = list(adviser.knowledge.interfaces)
        self._materials = list(adviser.materials.materials.values())
        self._classes = [str(name) for name in adviser.vocabulary.facts["machine.class"].options]
        self._inch = False

    def job(self) -> Plain:
        """Return the next job."""
        self._inch = self._random.random() < 0.35
        made: Plain = {
            "title": "A sampled job",
            "work": self._work(),
            "require": self._require(),
            "machine": self._machine(),
            "fixture": self._fixture(),
        }
        if self._chance(0.5):
            made["confirm"] = {name: self._chance(0.9) for name in CONFIRM if self._chance(0.8)}
        if self._chance(0.1):
            made["cutters"] = [self._cutter(number) for number in range(self._random.randint(1, 4))]
        if self._chance(0.1):
            made["costs"] = {"machine_rate": "80 /h", "edge": 5}
        return {name: section for name, section in made.items() if section}

    # ------------------------------------------------------------------ sections
    def _work(self) -> Plain:
        work: Plain = {}
        how = self._random.random()
        if how < 0.75:
            material = self._random.choice(self._materials)
            work["material"] = self._random.choice([name for names in material.names.values() for name in names])
        elif how < 0.83:
            work["material"] = self._random.choice(VAGUE)
        elif how < 0.95:
            work["iso_group"] = self._random.choice("PMKNSH")
        if self._chance(0.3):
            brinell, rockwell = self._random.randint(60, 620), self._random.randint(18, 64)
            work["hardness"] = self._random.choice([f"{brinell} HB", f"{rockwell} HRC"])
        if self._chance(0.4):
            work["skin"] = sorted({self._random.choice(SKINS) for _ in range(self._random.randint(1, 2))})
        if self._chance(0.25):
            work["skin_depth"] = self._length(0.1, 5)
        if self._chance(0.92):
            work["feature"] = self._random.choices(FEATURES, weights=(5, 2, 1.5, 1, 1))[0]
        self._put(work, "length", 0.97, self._length(10, 4000))
        self._put(work, "width", 0.97, self._length(6, 1500))
        self._put(work, "stock", 0.97, self._length(0.1, 40))
        self._put(work, "thickness", 0.5, self._length(2, 400))
        self._put(work, "floor_thickness", 0.12, self._length(1, 30))
        self._put(work, "unsupported_span", 0.12, self._length(10, 800))
        self._put(work, "wall_thickness", 0.1, self._length(1, 30))
        self._put(work, "wall_height", 0.1, self._length(5, 150))
        self._put(work, "corner_radius", 0.25, self._length(0.2, 8))
        self._put(work, "pocket_corner", 0.1, self._length(5, 60))
        self._put(work, "step_height", 0.12, self._length(0.5, 120))
        self._put(work, "interruptions", 0.3, self._random.choice(("none", "holes", "slots", "large_voids")))
        return work

    def _require(self) -> Plain:
        require: Plain = {}
        fine = self._log(0.2, 12.5)
        self._put(require, "finish", 0.6, f"{fine / 0.0254:.4g} uin" if self._inch else f"{fine:.3g} um")
        self._put(require, "flatness", 0.4, self._length(0.01, 0.5))
        self._put(require, "edge_breakout", 0.15, self._length(0.05, 2))
        self._put(require, "quantity", 0.6, round(self._log(1, 20000)))
        self._put(require, "no_overlap_line", 0.12, self._chance(0.7))
        self._put(require, "one_pass", 0.1, self._chance(0.7))
        self._put(require, "finish_only", 0.1, self._chance(0.7))
        self._put(require, "surface_integrity", 0.05, True)
        return require

    def _machine(self) -> Plain:
        how = self._random.random()
        if how < 0.4:
            machine: Plain = {"name": self._random.choice(self._machines)}
            self._put(machine, "backlash", 0.1, self._length(0.005, 0.8))
            self._put(machine, "worn", 0.1, True)
            self._put(machine, "changer_state", 0.3, self._random.choice(("full", "neighbours_empty")))
            return machine
        machine = {}
        self._put(machine, "class", 0.85, self._random.choice(self._classes))
        self._put(machine, "interface", 0.85, self._random.choice(self._interfaces))
        self._put(machine, "power", 0.8, self._power())
        self._put(machine, "duty", 0.2, self._random.choice(("S1", "S3", "S6")))
        if self._chance(0.2):
            steps = sorted({round(self._log(30, 4000)) for _ in range(self._random.randint(2, 12))})
            machine["speed_steps"] = [f"{step} rpm" for step in steps]
        else:
            self._put(machine, "speed_max", 0.8, f"{round(self._log(900, 30000))} rpm")
        self._put(machine, "torque", 0.5, self._torque())
        self._put(machine, "base_speed", 0.1, f"{round(self._log(200, 6000))} rpm")
        self._put(machine, "drive", 0.4, self._random.choice(("direct", "belt", "belt_step_pulley", "geared_head")))
        full = self._log(40, 200)
        self._put(machine, "changer_full", 0.4, self._written(full))
        self._put(machine, "changer_empty", 0.35, self._written(full * self._random.uniform(1, 2.2)))
        self._put(machine, "changer_state", 0.3, self._random.choice(("full", "neighbours_empty")))
        self._put(machine, "changer_mass", 0.25, f"{self._log(2, 40):.3g} kg")
        self._put(machine, "changer_moment", 0.1, f"{self._log(3, 80):.3g} N.m")
        self._put(machine, "fluids", 0.75, sorted(self._random.sample(FLUIDS, self._random.randint(1, 3))))
        self._put(machine, "backlash", 0.3, self._length(0.002, 1))
        self._put(machine, "control", 0.5, self._random.choice(("cnc", "cnc", "manual")))
        self._put(machine, "feed_max", 0.4, f"{round(self._log(200, 30000))} mm/min")
        self._put(machine, "nose", 0.2, self._random.choice(("bolted_flange", "none")))
        self._put(machine, "rotation", 0.1, self._random.choice(("clockwise", "counter_clockwise", "both")))
        self._put(machine, "stiffness", 0.15, f"{self._log(2, 300):.3g} N/um")
        if "stiffness" in machine:
            machine["damping_ratio"] = round(self._log(0.01, 0.1), 4)
        self._put(machine, "worn", 0.08, True)
        return machine

    def _fixture(self) -> Plain:
        fixture: Plain = {}
        self._put(fixture, "rigidity", 0.6, self._random.choice(("rigid", "normal", "weak")))
        holds = ("clamps", "side_clamps", "vise", "bolted", "hydraulic", "vacuum", "magnet", "tape", "chuck")
        self._put(fixture, "hold", 0.6, self._random.choice(holds))
        self._put(fixture, "overhang", 0.25, self._length(50, 500))
        self._put(fixture, "clamp_force", 0.15, f"{self._log(200, 60000):.3g} N")
        self._put(fixture, "support_below", 0.3, self._chance(0.6))
        return fixture

    def _cutter(self, number: int) -> Plain:
        classes = ("face_mill", "square_shoulder_mill", "round_insert_mill", "high_feed_mill")
        cutter: Plain = {"id": f"invented {number}", "diameter": self._length(25, 250)}
        cutter["teeth"] = self._random.randint(2, 16)
        self._put(cutter, "cutter_class", 0.8, self._random.choice(classes))
        self._put(cutter, "kappa", 0.5, self._random.choice(("45 deg", "75 deg", "90 deg")))
        self._put(cutter, "rake", 0.4, self._random.choice(("positive_negative", "double_positive", "double_negative")))
        self._put(cutter, "corner", 0.4, self._random.choice(("facet", "radius_0.8", "radius_1.6")))
        self._put(cutter, "speed_limit", 0.5, f"{round(self._log(800, 20000))} rpm")
        self._put(cutter, "usable_depth", 0.3, self._length(1, 15))
        self._put(cutter, "mass", 0.3, f"{self._log(0.3, 15):.3g} kg")
        return cutter

    # ------------------------------------------------------------------ values
    def _put(self, section: Plain, name: str, share: float, value: Any) -> None:
        if self._chance(share):
            section[name] = value

    def _chance(self, share: float) -> bool:
        return self._random.random() < share

    def _log(self, low: float, high: float) -> float:
        return math.exp(self._random.uniform(math.log(low), math.log(high)))

    def _length(self, low: float, high: float) -> str:
        return self._written(self._log(low, high))

    def _written(self, millimetres: float) -> str:
        return f"{millimetres / PER_INCH:.4g} in" if self._inch else f"{millimetres:.3g} mm"

    def _power(self) -> str:
        power = self._log(0.8, 90)
        return f"{power / 0.7457:.3g} hp" if self._inch else f"{power:.3g} kW"

    def _torque(self) -> str:
        torque = self._log(4, 3000)
        return f"{torque / 1.3558:.3g} lbf.ft" if self._inch else f"{torque:.3g} N.m"


def in_inches(value: Any) -> Any:
    """Return a job with every length, power and torque in millimetres, kilowatt and N.m written in inch units."""
    if isinstance(value, dict):
        return {name: in_inches(inner) for name, inner in value.items()}
    if isinstance(value, list):
        return [in_inches(inner) for inner in value]
    if isinstance(value, str):
        for metric, per, inch in (("mm", PER_INCH, "in"), ("um", 0.0254, "uin"), ("kW", 0.745699871582270, "hp")):
            number, _, unit = value.partition(" ")
            if unit == metric:
                return f"{float(number) / per!r} {inch}"
    return value


def shuffled(value: Any, random: Random) -> Any:
    """Return a job with the entries of every section in another order."""
    if not isinstance(value, dict):
        return value
    names: Sequence[str] = random.sample(list(value), len(value))
    return {name: shuffled(value[name], random) for name in names}
