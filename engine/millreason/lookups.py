"""What is looked up before the rules run: machine, interface, material, hardness, and the ratios of the job."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from millreason.errors import DataError, Finding, did_you_mean
from millreason.facts import Situation, basis_record
from millreason.formulas.drive_curve import available_power
from millreason.formulas.motion import spindle_speed
from millreason.formulas.passes import passes_across
from millreason.job import Job
from millreason.knowledge import Knowledge
from millreason.materials import Materials
from millreason.measures import room_between_walls
from millreason.provenance import Basis
from millreason.spindle import Spindle
from millreason.trace import Question
from millreason.vocabulary import Vocabulary

# Which fluid of a plan each supply of a machine gives; a cut can always be dry.
_SUPPLIES = {
    "air": "air_blast", "flood": "flood", "flood_water_mixed": "flood", "mg_rated_fluid": "flood",
    "through_tool": "through_tool",
    "mql": "mql", "mineral_oil": "mineral_oil", "brush_oil": "brush_oil",
}  # fmt: skip


@dataclass
class FirstSituation:
    """The facts before any rule has run, contradictions, and a question where the material is not clear."""

    situation: Situation
    contradictions: list[str] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)
    question: Question | None = None


def first_situation(job: Job, knowledge: Knowledge, materials: Materials, vocabulary: Vocabulary) -> FirstSituation:
    """Collect what the person gave and what can be looked up for it.

    Raises
    ------
    DataError
        if the job names a machine that the knowledge does not have.
    """
    result = FirstSituation(Situation(vocabulary))
    situation = result.situation
    for name, entry in job.given.items():
        if name != "work.hardness_hb":
            situation.set(name, entry.value, "given", job.file, entry.text)
    if any(name.startswith("machine.changer_") for name in job.given):
        situation.set("machine.changer", "automatic", "computed", "what was given for the changer")
    _look_up_machine(job, knowledge, situation)
    _look_up_interface(knowledge, situation)
    _look_up_material(job, materials, vocabulary, result)
    return result


def unit_doubts(situation: Situation, vocabulary: Vocabulary, far: float) -> list[str]:
    """Return a sentence for every given quantity so far from the usual that its unit is in doubt; counts have none."""
    doubts = []
    for record in situation.records():
        definition = vocabulary.facts.get(record.name)
        if (
            record.origin != "given"
            or definition is None
            or definition.plausible is None
            or not definition.unit
            or not isinstance(record.value, float)
        ):
            continue
        low, high = definition.plausible
        if not low / far <= record.value <= high * far:
            usual = f"{low:g} to {high:g} {definition.unit}"
            doubts.append(
                f"{definition.means}: {record.text or record.value} is far from the usual {usual}; is the unit right?"
            )
    return doubts


def look_up_usual(situation: Situation, knowledge: Knowledge) -> bool:
    """Look up what is usual for the interface and drive as they are known by now; return whether anything is new."""
    practice, before = knowledge.practice, len(situation)
    _look_up_interface(knowledge, situation)
    drive = situation.value("machine.drive")
    by_drive = practice["efficiency_by_drive"]
    efficiency = practice["efficiency_default"] if drive is None else by_drive
    label = efficiency.basis_label(drive)
    value = efficiency.number if drive is None else by_drive.of(drive)
    file = "knowledge/practice.yaml"
    situation.set(
        "machine.usual_efficiency",
        value,
        "looked_up",
        f"{file}",
        basis=_record(knowledge.basis(file, label), False),
    )
    base = practice["base_speed_default_rpm"]
    situation.set(
        "machine.usual_base_speed_rpm",
        base.number,
        "looked_up",
        file,
        basis=_record(knowledge.basis(file, base.basis_label()), False),
    )
    return len(situation) > before


def _look_up_machine(job: Job, knowledge: Knowledge, situation: Situation) -> None:
    if job.machine_name is None:
        return
    machine = knowledge.machines.get(job.machine_name)
    if machine is None:
        hint = did_you_mean(job.machine_name, knowledge.machines)
        raise DataError(
            [
                Finding(
                    job.file,
                    1,
                    "machine.name",
                    f"{job.machine_name!r} is no machine here.{hint} 'millreason machines' lists them.",
                )
            ]
        )
    from_shop = machine.id in knowledge.from_shop
    for name, value in machine.facts().items():
        label = machine.basis_label(name.removeprefix("machine."))
        basis = None if from_shop else knowledge.basis("knowledge/machines.yaml", label)
        settled = (
            tuple(tuple(item) if isinstance(item, list) else item for item in value)
            if isinstance(value, list)
            else value
        )
        situation.set(name, settled, "looked_up", f"machine {machine.id}", basis=_record(basis, from_shop))


def _look_up_interface(knowledge: Knowledge, situation: Situation) -> None:
    identity = situation.value("machine.interface")
    if identity is None:
        return
    interface = knowledge.interfaces[identity]

    def look_up(fact: str, value: Any, part: Any) -> None:
        label = getattr(part, "basis", None)
        basis = knowledge.basis("knowledge/interfaces.yaml", label) if label else None
        situation.set(fact, value, "looked_up", f"interface {identity}", basis=_record(basis, False))

    look_up("machine.taper_size", interface.size, interface.carries)
    look_up("machine.taper_family", interface.family, interface.gauge)
    look_up("machine.gauge_diameter_mm", interface.gauge.diameter_mm, interface.gauge)
    look_up("machine.largest_usual_diameter_mm", interface.carries.largest_mm, interface.carries)
    look_up("machine.largest_light_diameter_mm", interface.carries.light_mm, interface.carries)
    look_up("machine.usual_power_kw", interface.drive.power_kw, interface.drive)
    look_up("machine.usual_speed_max_rpm", interface.speed.most_rpm, interface.speed)
    if interface.changer is not None:
        for name in ("full_mm", "empty_mm", "mass_kg", "moment_nm"):
            look_up(f"machine.usual_changer_{name}", getattr(interface.changer, name), interface.changer)


def _look_up_material(job: Job, materials: Materials, vocabulary: Vocabulary, result: FirstSituation) -> None:
    situation = result.situation
    hardness = job.given.get("work.hardness_hb")
    measured = (float(hardness.value), hardness.unit) if hardness and isinstance(hardness.value, int | float) else None
    found = materials.look_up(
        situation.value("work.material"),
        situation.value("work.iso_group"),
        measured,
        situation.value("work.condition"),
    )
    for fact in found.facts:
        value = tuple(fact.value) if isinstance(fact.value, list) else fact.value
        if isinstance(value, int) and not isinstance(value, bool):
            value = float(value)
        situation.set(
            fact.name,
            value,
            "given" if fact.given else "looked_up",
            fact.by,
            fact.text,
            _record(fact.basis, fact.from_shop),
        )
    result.contradictions.extend(found.contradictions)
    result.notes.extend(found.notes)
    if found.question is not None:
        because = vocabulary.facts["work.material"].because or ""
        result.question = Question("work.material", found.question, because, "must", ["materials"])


def _record(basis: Basis | None, from_shop: bool) -> Any:
    from millreason.trace import BasisRecord

    if from_shop:
        return BasisRecord("shop", "", "the shop's own folder")
    return basis_record(basis) if basis is not None else None


def complete_situation(situation: Situation, knowledge: Knowledge, vocabulary: Vocabulary) -> None:
    """Add the ratios of the job, once the gaps are filled."""
    fact = situation.value

    def ratio(name: str, upper: float | None, lower: float | None) -> None:
        if upper is not None and lower:
            situation.set(name, upper / lower, "computed", "ratio")

    ratio("job.thickness_to_stock", fact("work.stock_mm"), fact("work.thickness_mm"))
    ratio(
        "job.floor_slenderness",
        fact("work.unsupported_span_mm"),
        fact("work.floor_thickness_mm", fact("work.thickness_mm")),
    )
    ratio("job.wall_slenderness", fact("work.wall_height_mm"), fact("work.wall_thickness_mm"))
    ratio("job.overhang_to_gauge", fact("fixture.overhang_mm"), fact("machine.gauge_diameter_mm"))
    ratio("job.width_to_largest_cutter", fact("work.width_mm"), fact("machine.largest_usual_diameter_mm"))
    ratio("job.skin_to_stock", fact("work.skin_depth_mm"), fact("work.stock_mm"))
    width = fact("work.width_mm")
    if width is not None:
        share = knowledge.practice["width_to_diameter_one_pass"]
        situation.set(
            "job.one_pass_least_mm",
            width / (share.high or 1.0),
            "computed",
            "width over the largest share of the diameter",
        )
        situation.set(
            "job.one_pass_most_mm",
            width / (share.low or 1.0),
            "computed",
            "width over the smallest share of the diameter",
        )
    fluids = fact("machine.fluids") or ()
    supplied = ("dry", *(_SUPPLIES[fluid] for fluid in fluids if fluid in _SUPPLIES))
    situation.set("machine.coolants", tuple(dict.fromkeys(supplied)), "computed", "fluids of the machine")
    steps = fact("machine.speed_steps_rpm")
    if steps:
        situation.set("machine.speed_max_rpm", max(steps), "computed", "highest step")


def size_facts(
    nominal_mm: float,
    situation: Situation,
    knowledge: Knowledge,
    tuning: Mapping[str, float],
    spindle: Spindle,
) -> dict[str, float]:
    """Return the size.* facts of one diameter of the series for a job."""
    fact, practice = situation.value, knowledge.practice
    width = fact("work.width_mm")
    most = tuning.get("width_to_diameter_most", math.inf)
    one_pass = min(practice["width_to_diameter_one_pass"].high or 1.0, most)
    single = fact("require.one_pass") or fact("require.no_overlap_line")
    slot = fact("work.feature") == "slot"
    most_of_one = 1.0 if slot else one_pass
    most_of_several = 1.0 if slot else min(practice["width_to_diameter_most"].number, most)
    overlap = min(practice["pass_overlap_mm"].number, most_of_several * nominal_mm / 2)
    passes = (
        1 if single or width <= most_of_one * nominal_mm else passes_across(width, nominal_mm, overlap, most_of_several)
    )
    strip = nominal_mm if slot and passes > 1 else (width + (passes - 1) * overlap) / passes
    speed = spindle_speed(fact("material.speed_start_m_min"), nominal_mm)
    at = min(speed, spindle.speed_max_rpm)
    full = max(power for _, power in spindle.net_curve)
    facts: dict[str, float | None] = {
        "size.diameter_mm": nominal_mm,
        "size.width_to_diameter": strip / nominal_mm,
        "size.passes_across": float(passes),
        "size.to_usual_largest": _over(nominal_mm, fact("machine.largest_usual_diameter_mm")),
        "size.to_light_largest": _over(nominal_mm, fact("machine.largest_light_diameter_mm")),
        "size.to_changer": _over(
            nominal_mm,
            fact("machine.changer_full_mm")
            if fact("machine.changer_state") == "full"
            else fact("machine.changer_empty_mm", fact("machine.changer_full_mm")),
        ),
        "size.to_changer_full": _over(nominal_mm, fact("machine.changer_full_mm")),
        "size.to_pocket_corner": _over(nominal_mm / 2, fact("work.pocket_corner_mm"))
        if fact("work.feature") == "closed_pocket"
        else None,
        "size.to_pocket": _over(nominal_mm, room_between_walls(fact)),
        "size.speed_use": speed / spindle.speed_max_rpm,
        "size.torque_share": min(available_power(spindle.net_curve, at) / full, 1.0),
    }
    return {name: value for name, value in facts.items() if value is not None}


def _over(value: float, limit: float | None) -> float | None:
    return value / limit if limit else None
