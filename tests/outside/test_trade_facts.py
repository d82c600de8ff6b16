"""Facts that the trade agrees on, held against the answers. All are common practice; no source is claimed for any."""

from __future__ import annotations

import math
from collections import Counter
from dataclasses import replace
from functools import cache
from itertools import pairwise

import pytest

from example_jobs import CASES, IRON, PLATE, SHOULDER, adviser, answered, case, read
from millreason.answer import write_answer
from millreason.outcome import Tried
from millreason.quality import Quality
from millreason.trace import Answer

ROOMY = PLATE.replace("changer_full: 90", "changer_full: 320").replace("changer_mass: 7", "changer_mass: 40")
ROOMY = ROOMY.replace("7/24-40, power: 11 kW, torque: 95", "7/24-50, power: 22 kW, torque: 400").replace(
    "150 mm", "400 mm"
)
ALUMINIUM = PLATE.replace("C45, hardness: 190 HB", "6082-T6")
FINE = PLATE.replace("3.2 um", "0.8 um").replace("stock: 3 mm", "stock: 0.5 mm")


@cache
def all_answers() -> tuple[Answer, ...]:
    decided = (adviser().decide(case(path)) for path in CASES)
    return tuple(write_answer(adviser(), out, openings=False) for out in decided)


def recommended() -> list[Answer]:
    return [answer for answer in all_answers() if answer.plan is not None]


def best(text: str, **only: str) -> Tried:
    """Return the best candidate that has the options."""
    return adviser().decide(read(text), only).stands[0]


@pytest.mark.parametrize("width", [40, 60, 80, 100, 130])
def test_the_diameter_is_near_one_and_a_half_times_the_width(width: int) -> None:
    """Common practice: effective diameter 1.5 times the width; a quarter to a third of the cutter overhangs."""
    answer = answered(ROOMY.replace("width: 120", f"width: {width}").replace("quantity: 10", "one_pass: yes"))
    assert answer.picks is not None
    ratio = answer.picks.diameter_mm / width
    assert 1.2 <= ratio <= 1.75
    assert 0.15 <= 1 - 1 / ratio <= 0.43


def test_a_cutter_no_wider_than_the_work_is_not_chosen_for_a_face() -> None:
    """Common practice: a cutter no wider than the work gives thin chips, heat and rubbing at entry and exit."""
    faces = [one for one in recommended() if fact(one, "work.feature") in ("open_face", "both_sides")]
    assert len(faces) > 20
    for answer in faces:
        assert answer.picks is not None
        assert answer.plan is not None
        assert answer.plan.width_of_cut_mm <= 0.9 * answer.picks.diameter_mm
        assert answer.plan.arc_deg < 180


def fact(answer: Answer, name: str) -> object:
    return next((record.value for record in answer.trace.facts if record.name == name), None)


def test_climb_milling_is_the_usual_mode() -> None:
    """Common practice: climb milling is the usual mode with indexable inserts."""
    by_control = Counter(
        (fact(one, "machine.control"), one.plan.direction) for one in recommended() if one.plan is not None
    )
    assert by_control["cnc", "climb"] > 0.9 * sum(n for (control, _), n in by_control.items() if control == "cnc")


@pytest.mark.parametrize(("turns", "hand"), [("clockwise", "right"), ("counter_clockwise", "left")])
def test_the_hand_follows_the_rotation(turns: str, hand: str) -> None:
    """Common practice: seen from its face a right-hand cutter turns counter-clockwise, from the drive end clockwise."""
    answer = answered(PLATE.replace("changer_state: full", f"changer_state: full, rotation: {turns}"))
    assert answer.picks is not None
    assert answer.picks.hand == hand


def test_rakes_set_force_and_strength() -> None:
    """Common practice: both rakes negative give the highest force, both positive the freest cut."""
    factors = {}
    for rake in ("double_negative", "positive_negative", "double_positive"):
        load = best(PLATE, rake=rake, kappa_deg="45", diameter_mm="63").plan.loads[0]
        factors[rake] = load.force_factor
    assert factors["double_negative"] > factors["positive_negative"] >= factors["double_positive"]


def test_the_rake_signs_are_what_their_names_say() -> None:
    """Common practice: negative radial with positive axial is a strong edge that lifts the chip."""
    for answer in recommended():
        assert answer.picks is not None
        signs = (answer.picks.axial_rake_deg > 0, answer.picks.radial_rake_deg > 0)
        wanted = {
            "double_negative": (False, False),
            "positive_negative": (True, False),
            "double_positive": (True, True),
        }
        assert signs == wanted[answer.picks.rake]


def test_more_lead_means_more_axial_force_and_a_thinner_longer_chip() -> None:
    """Common practice: more lead means more axial force and a longer, thinner chip."""
    loads = [best(PLATE, kappa_deg=kappa, diameter_mm="63").plan.loads[0] for kappa in ("90", "75", "45")]
    axial = [load.axial_n / math.hypot(load.axial_n, load.radial_n) for load in loads]
    thickness = [load.hex_mm / load.feed_per_tooth_mm for load in loads]
    length = [load.depth_mm / math.sin(math.radians(load.kappa_mean_deg)) / load.depth_mm for load in loads]
    assert all(later > earlier for earlier, later in pairwise(axial))
    assert all(later < earlier for earlier, later in pairwise(thickness))
    assert all(later > earlier for earlier, later in pairwise(length))


def test_the_standard_leads_are_made() -> None:
    """Common practice: standard leads are 0, 15, 30 and 45 degrees; high-feed leads of 60 and more came later."""
    straight = [family for family in adviser().knowledge.cutters.families if family.insert_diameter_mm is None]
    leads = {90 - family.kappa_deg for family in straight}
    assert leads >= {0, 15, 30, 45}
    assert any(lead >= 60 for lead in leads)


def test_most_pockets_are_fixed() -> None:
    """Common practice: most pockets are fixed; cartridges let one body take other inserts and angles."""
    pockets = Counter(answer.picks.pockets for answer in recommended() if answer.picks is not None)
    assert pockets["fixed"] > 0.8 * pockets.total()
    assert any("cartridge" in family.pockets_for(size) for family in adviser().knowledge.cutters.families
               for size in adviser().knowledge.cutters.sizes)  # fmt: skip


def test_pitch_follows_the_chip() -> None:
    """Common practice: fine pitch is mainly for cast iron and finishing, coarse for ductile materials and wide cuts."""
    teeth = {}
    for name, text in {"iron": IRON, "aluminium": ALUMINIUM, "finishing": FINE}.items():
        answer = answered(text)
        assert answer.picks is not None
        teeth[name] = answer.picks.pitch
    assert teeth["aluminium"] == "coarse"
    assert teeth["iron"] in ("fine", "extra_fine")
    assert teeth["finishing"] in ("fine", "extra_fine")
    by_group: dict[object, Counter[str]] = {}
    for one in recommended():
        assert one.picks is not None
        by_group.setdefault(fact(one, "material.iso_group"), Counter())[one.picks.pitch] += 1
    coarse = {group: count["coarse"] / count.total() for group, count in by_group.items()}
    assert coarse["N"] > 0.7 > coarse["P"] > coarse["K"]


def test_a_larger_corner_finishes_finer_and_a_wiper_finest() -> None:
    """Common practice: a larger corner radius finishes finer than a small one, a wiper flat finest; one can be enough.

    The radius rule is that of inserts without a parallel land; with one, the land decides.
    """
    tried = best(PLATE, kappa_deg="90", diameter_mm="63", pitch="coarse", rake="positive_negative", corner="radius_0.8")
    quality = Quality(tried.situation, adviser().knowledge.practice)
    rough = []
    for radius in (0.4, 0.8, 1.6):
        bare = tried.candidate.corner.model_copy(update={"radius_mm": radius, "land_mm": 0.0})
        plan = replace(tried.plan, candidate=replace(tried.candidate, corner=bare))
        rough.append(quality.roughness(plan)[0])
    assert all(larger < smaller for smaller, larger in pairwise(rough))
    at_45 = {"kappa_deg": "45", "diameter_mm": "80", "corner": "facet"}
    wiped = best(FINE, wiper="one", **at_45).facts["plan.ra_um"]
    assert wiped < rough[-1]
    assert wiped <= best(FINE, wiper="none", **at_45).facts["plan.ra_um"]


def test_an_insert_that_stands_proud_is_warned_of_where_it_matters() -> None:
    """Common practice: inserts must be set to share the load; one that stands proud wears first and marks the face."""
    fine = {caution.key for caution in answered(FINE.replace("quantity: 10", "flatness: 0.02 mm")).cautions}
    assert "runout_axial" in fine


def test_close_tolerance_wants_a_stable_mounting() -> None:
    """Common practice: close tolerance wants a very stable mounting, and never a straight shank in a collet."""
    answer = answered(FINE.replace("quantity: 10", "flatness: 0.01 mm"))
    assert answer.picks is not None
    assert answer.picks.mounting in ("shell_arbor", "integral_taper_shank", "spindle_nose_flange")
    (ledger,) = [one for one in answer.trace.ledgers if one.pick == "mounting"]
    assert next(one.balance for one in ledger.options if one.option == "straight_shank_collet") < 0


def test_small_bodies_come_with_a_shank_or_on_an_arbor() -> None:
    """Common practice: under 3 in an integral shank is usual; small bodies on arbors came later; both are made."""
    cutters = adviser().knowledge.cutters
    face = next(family for family in cutters.families if family.id == "face-45")
    (size,) = [one for one in cutters.sizes if one.series == "metric" and one.nominal_mm == 50]
    made = {row.mounting for row in cutters.mountings_for(face, size)}
    assert made >= {"shell_arbor", "integral_taper_shank"}


@pytest.mark.parametrize("width", [60, 100])
def test_middle_sizes_sit_on_an_arbor(width: int) -> None:
    """Common practice: from 3 to 8 in the cutter sits in an adapter."""
    answer = answered(ROOMY.replace("width: 120", f"width: {width}").replace("quantity: 10", "one_pass: yes"))
    assert answer.picks is not None
    assert 76 < answer.picks.diameter_mm < 203
    assert answer.picks.mounting == "shell_arbor"


def test_large_bodies_go_straight_on_the_spindle_where_it_takes_them() -> None:
    """Common practice: from 8 in up the cutter may go straight on the spindle."""
    text = ROOMY.replace("machining_centre_vertical", "floor_borer, changer: none, nose: bolted_flange, control: cnc")
    text = text.replace("changer_full: 320 mm, changer_empty: 400 mm, changer_mass: 40 kg, changer_state: full, ", "")
    answer = answered(text.replace("width: 120", "width: 170").replace("quantity: 10", "one_pass: yes"))
    assert answer.picks is not None
    assert answer.picks.diameter_mm >= 200
    assert answer.picks.mounting == "spindle_nose_flange"


def test_small_face_mills_ramp_in_and_interpolate_a_pocket() -> None:
    """Common practice: small face mills may ramp in and interpolate a pocket."""
    text = SHOULDER.replace("shoulder", "closed_pocket").replace("width: 40 mm", "width: 110 mm")
    answer = answered(text.replace("C45, hardness: 190 HB", "6082-T6"))
    assert answer.plan is not None
    assert answer.picks is not None
    assert answer.plan.entry in ("ramp", "helix")
    assert answer.picks.largest_diameter_mm < 110
    assert "ramp_limit" in {caution.key for caution in answer.cautions}
