"""What a plan measures up to: each figure from the plan's own numbers, by hand."""

from __future__ import annotations

import math

import pytest

from example_jobs import PLATE, SHOULDER, adviser, decided, read
from millreason.candidates import Catalogue
from millreason.measures import BODY_FACTS, CORNER_FACTS, CUT_FACTS
from millreason.outcome import Tried
from millreason.search import Search


def tried(text: str) -> Tried:
    return decided(text).stands[0]


def test_uses_are_the_value_over_its_limit() -> None:
    one = tried(PLATE)
    facts, load = one.facts, one.plan.heaviest
    assert facts["plan.changer_full_use"] == pytest.approx(one.candidate.outermost_mm / 90)
    assert facts["plan.mass_use"] == pytest.approx(facts["plan.mass_kg"] / 7)
    assert facts["plan.power_use"] == pytest.approx(load.net_power_kw / load.available_kw)
    assert facts["plan.power_use_worn"] > facts["plan.power_use"]
    assert facts["plan.power_use_band"] > facts["plan.power_use_worn"]
    assert facts["plan.width_to_diameter"] == pytest.approx(one.plan.layout.width_mm / one.candidate.diameter_mm)
    assert facts["plan.feed_per_rev_mm"] == pytest.approx(load.feed_per_tooth_mm * one.candidate.teeth)
    assert facts["plan.teeth_in_cut"] == pytest.approx(one.candidate.teeth * one.plan.layout.arc.arc_deg / 360)
    assert facts["plan.torque_nm"] == pytest.approx(load.net_power_kw * 30000 / math.pi / load.spindle_speed_rpm)
    assert "plan.pocket_use" not in facts
    assert "plan.flatness_use" not in facts


def test_the_time_counts_the_way_over_both_ends() -> None:
    one = tried(PLATE)
    layout, total = one.plan.layout, 0.0
    for load in one.plan.loads:
        at_least = load.layers * layout.passes * (300 + one.candidate.diameter_mm) / load.table_feed_mm_min
        total += at_least
    assert total < one.facts["plan.time_min"] < total * 1.5


def test_a_slot_and_a_pocket_measure_the_room_between_their_walls() -> None:
    slot = tried(SHOULDER.replace("shoulder", "slot").replace("width: 40 mm", "width: 70 mm"))
    assert slot.facts["plan.pocket_use"] == pytest.approx(slot.candidate.outermost_mm / 70)
    pocket = tried(SHOULDER.replace("shoulder", "closed_pocket").replace("width: 40 mm", "width: 130 mm"))
    assert pocket.facts["plan.pocket_use"] == pytest.approx(pocket.candidate.outermost_mm / 130)
    assert pocket.facts["plan.entry"] in ("ramp", "helix")
    assert pocket.facts["plan.ramp_deg"] > 0


def test_what_is_shared_is_the_same_for_all_that_share_it() -> None:
    """Rejections are carried over to candidates with the same body, cut or corner: their figures must be equal."""
    seen: dict[tuple[object, ...], dict[str, object]] = {}
    out = decided(PLATE.replace("11 kW", "4 kW").replace("rigidity: normal", "rigidity: weak"))
    knowledge = adviser().knowledge
    assert out.ledgers is not None
    assert out.spindle is not None
    offered = knowledge.interfaces["7/24-40"].mountings.options
    search = Search(adviser(), out, out.spindle)
    for candidate in list(Catalogue(knowledge.cutters, out.ledgers, "metric", offered).best_first())[::11]:
        one = search._try(candidate)
        body = (candidate.family.id, candidate.size.label)
        cut = (*body, candidate.pitch, candidate.rake.axial_deg, candidate.rake.radial_deg, candidate.edge)
        corner = (candidate.family.id, candidate.corner.corner)
        kinds = [("body", body, BODY_FACTS), ("corner", corner, CORNER_FACTS)]
        if one.plan.loads[0].name == "roughing" and one.plan.heaviest.name == "roughing":
            kinds.append(("cut", cut, CUT_FACTS))
        for kind, key, names in kinds:
            values = {name: one.facts.get(name) for name in names}
            assert seen.setdefault((kind, *key), values) == pytest.approx(values), (kind, key)


def test_hold_down_and_floor_are_measured_only_where_known() -> None:
    bare = tried(PLATE)
    assert "plan.lift_to_clamp" not in bare.facts
    text = PLATE.replace("hold: vise", "hold: clamps, clamp_force: 40 kN")
    held = adviser().decide(read(text), {"kappa_deg": "90"}).stands[0]
    assert held.facts["plan.lift_to_clamp"] > 0
    floor = "thickness: 20 mm, floor_thickness: 8 mm, unsupported_span: 100 mm"
    text = PLATE.replace("width: 120 mm", f"width: 120 mm, {floor}")
    thin = adviser().decide(read(text), {"kappa_deg": "45"}).stands[0]
    assert thin.facts["plan.floor_spring_mm"] > 0
