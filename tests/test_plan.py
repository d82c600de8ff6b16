"""The cut plan: geometry that closes, loads that agree, and steps taken when power is short."""

from __future__ import annotations

import math

import pytest

from example_jobs import IRON, PLATE, SHOULDER, TITANIUM, WEAK, decided
from hard_limits import breaches
from millreason.answer import write_answer
from millreason.cut_plan import Plan

JOBS = {"plate": PLATE, "shoulder": SHOULDER, "iron": IRON, "titanium": TITANIUM, "weak": WEAK}


def plans(text: str) -> list[Plan]:
    out = decided(text)
    assert out.stands
    return [tried.plan for tried in out.stands]


@pytest.mark.parametrize("name", JOBS)
def test_passes_and_layers_close(name: str) -> None:
    for plan in plans(JOBS[name]):
        layout, width = plan.layout, 40.0 if name == "shoulder" else 120.0
        assert layout.passes * layout.width_mm - (layout.passes - 1) * layout.overlap_mm == pytest.approx(width)
        assert sum(load.layers * load.depth_mm for load in plan.loads) == pytest.approx(3)
        assert layout.width_mm <= plan.candidate.diameter_mm


@pytest.mark.parametrize("name", JOBS)
def test_the_arc_is_that_of_the_place_of_the_cutter(name: str) -> None:
    """phi runs from the entry side: cos phi = 1 - 2 s / D at a distance s from where the circle begins (geometry)."""
    for plan in plans(JOBS[name]):
        diameter, arc = plan.candidate.diameter_mm, plan.layout.arc
        gap = plan.layout.entry_gap_mm
        entry = math.degrees(math.acos(1 - 2 * gap / diameter))
        leave = math.degrees(math.acos(max(-1.0, 1 - 2 * (gap + plan.layout.width_mm) / diameter)))
        assert arc.arc_deg == pytest.approx(leave - entry, abs=1e-6)
        for load in plan.loads:
            straight = 90.0 if arc.entry_deg <= 90 <= arc.exit_deg else max(entry, 180 - leave)
            chip = (
                load.feed_per_tooth_mm * math.sin(math.radians(load.kappa_top_deg)) * math.sin(math.radians(straight))
            )
            assert load.hex_mm == pytest.approx(chip, rel=1e-6)


def test_short_power_takes_layers_before_feed() -> None:
    strong, weak = (decided(PLATE.replace("11 kW", power)).stands[0].plan for power in ("30 kW", "1.2 kW"))
    assert (strong.layers_for_power, strong.feed_left) == (0, 1.0)
    assert weak.layers_for_power > 0
    assert weak.heaviest.use_worn(1.3) <= 1


def test_a_slot_is_cut_along_both_walls() -> None:
    for plan in plans(SHOULDER.replace("shoulder", "slot").replace("width: 40 mm", "width: 70 mm")):
        layout, diameter = plan.layout, plan.candidate.diameter_mm
        assert diameter <= 70
        assert plan.candidate.outermost_mm <= 70 * 1.001
        assert layout.width_mm == pytest.approx(diameter), "the first pass is buried"
        assert layout.arc.arc_deg == pytest.approx(180)
        assert layout.passes * diameter - (layout.passes - 1) * layout.overlap_mm == pytest.approx(70)


def test_one_pass_is_kept_to() -> None:
    text = PLATE.replace("quantity: 10", "one_pass: yes").replace("changer_full: 90", "changer_full: 250")
    text = text.replace("changer_empty: 150", "changer_empty: 300").replace("changer_mass: 7", "changer_mass: 20")
    for plan in plans(text.replace("width: 120 mm", "width: 70 mm")):
        assert plan.layout.passes == 1
        assert plan.layout.width_mm == pytest.approx(70)


def test_a_stepped_drive_takes_the_step_below() -> None:
    text = PLATE.replace("speed_max: 8000 rpm", "speed_steps: [100 rpm, 400 rpm, 900 rpm]").replace(
        ", torque: 95 N.m", ""
    )
    for plan in plans(text):
        for load in plan.loads:
            assert load.spindle_speed_rpm in (100, 400, 900)
            assert load.cutting_speed_m_min <= plan.speed_wanted_m_min * 1.2001


def test_the_finishing_feed_stays_within_the_land() -> None:
    text = PLATE.replace("3.2 um", "0.8 um").replace("stock: 3 mm", "stock: 0.5 mm")
    for plan in plans(text):
        if plan.candidate.land_mm > 0 and plan.last.hex_mm > plan.hex_least_mm * 1.0001:
            assert plan.last.feed_per_tooth_mm * plan.candidate.teeth <= plan.candidate.land_mm


@pytest.mark.parametrize("name", JOBS)
def test_nothing_breaks_a_hard_limit(name: str) -> None:
    from example_jobs import adviser

    assert breaches(write_answer(adviser(), decided(JOBS[name]), openings=False).to_dict()) == []


@pytest.mark.parametrize(
    ("material", "edge", "low", "high"),
    [
        # Kalpakjian and Schmid, general recommendations for milling (recalled): diamond in high-silicon aluminium.
        ("AlSi17Cu4Mg", "diamond", 370, 910),
        # Common practice: cubic boron nitride in hardened steel, and carbide beside it.
        ("1.2379, hardness: 60 HRC", "cbn", 150, 250),
        ("1.2379, hardness: 60 HRC", "negative_land", 35, 75),
    ],
)
def test_each_cutting_material_runs_at_its_own_speed(material: str, edge: str, low: float, high: float) -> None:
    shelf = "cutters: [{id: own, cutter_class: face_mill, diameter: 63 mm, teeth: 5, kappa: 45 deg, edge: %s}]\n"
    job = PLATE.replace("C45, hardness: 190 HB", material).replace("stock: 3 mm", "stock: 0.15 mm") + shelf % edge
    for plan in plans(job):
        assert plan.candidate.edge == edge
        for load in plan.loads:
            assert low <= load.cutting_speed_m_min <= high
