"""Cutters on hand: what is known is kept, the rest is filled in, and a rule that excludes one is named."""

from __future__ import annotations

import pytest

from example_jobs import PLATE, adviser, answered, decided
from millreason.candidates import Candidate
from millreason.own_cutters import own_candidates

SHELF = """\
cutters:
  - {id: A63, cutter_class: face_mill, diameter: 63 mm, teeth: 5, kappa: 45 deg, rake: positive_negative, corner: facet}
  - {id: S50, cutter_class: square_shoulder_mill, diameter: 50 mm, teeth: 4, kappa: 90 deg, usable_depth: 9 mm}
"""


def candidates(shelf: str, job: str = PLATE) -> dict[str, Candidate]:
    out = decided(job + shelf)
    assert out.ledgers is not None
    offered = adviser().knowledge.interfaces["7/24-40"].mountings.options
    made = own_candidates(out.job.cutters, adviser().knowledge.cutters, out.ledgers, offered)
    return {one.own.id: one for one in made if one.own is not None}


def test_what_is_known_of_a_cutter_is_kept() -> None:
    made = candidates(SHELF)
    first, second = made["A63"], made["S50"]
    assert (first.size.nominal_mm, first.teeth, first.family.kappa_deg) == (63, 5, 45)
    assert (first.rake.rake, first.corner.corner, first.wiper) == ("positive_negative", "facet", "none")
    assert (second.family.cutter_class, second.family.usable_depth_mm) == ("square_shoulder_mill", 9)
    assert second.pitch in ("coarse", "fine", "extra_fine")


def test_the_answer_picks_from_the_shelf() -> None:
    answer = answered(PLATE + SHELF)
    assert answer.picks is not None
    assert answer.picks.own_cutter in ("A63", "S50")


def test_an_angle_between_families_is_kept() -> None:
    fields = "cutter_class: face_mill, diameter: 80 mm, teeth: 6, kappa: 65 deg"
    (one,) = candidates(f"cutters: [{{id: X, {fields}}}]").values()
    assert one.family.kappa_deg == 65
    assert one.options["kappa_deg"] == "65"


@pytest.mark.parametrize("limit", [700, 5000])
def test_the_speed_marked_on_a_body_is_never_exceeded(limit: int) -> None:
    fields = f"diameter: 63 mm, teeth: 5, kappa: 45 deg, speed_limit: {limit} rpm"
    answer = answered(f"{PLATE}cutters: [{{id: X, {fields}}}]")
    assert answer.plan is not None
    assert max(step.spindle_speed_rpm for step in answer.plan.steps) <= limit


def test_a_shelf_that_does_not_do_is_a_refusal_that_names_the_limit() -> None:
    text = PLATE.replace("open_face", "shoulder") + "cutters: [{id: X, diameter: 63 mm, teeth: 5, kappa: 45 deg}]"
    answer = answered(text)
    assert answer.verdict == "refuse"
    assert answer.refusal is not None
    assert "cutter_on_hand" in {limit.key for limit in answer.refusal.limits}


HIGH_FEED, ROUND = "cutter_class: high_feed_mill, usable_depth: 15 mm", "cutter_class: round_insert_mill"


@pytest.mark.parametrize("fields", [HIGH_FEED, ROUND])
@pytest.mark.parametrize("diameter", [12, 25, 63])
def test_a_body_measured_at_the_outside_keeps_a_floor(fields: str, diameter: int) -> None:
    for one in candidates(f"cutters: [{{id: X, diameter: {diameter} mm, teeth: 3, {fields}}}]").values():
        assert 0 < one.diameter_mm < one.outermost_mm == pytest.approx(diameter)
    answered(f"{PLATE}cutters: [{{id: X, diameter: {diameter} mm, teeth: 3, {fields}}}]")
