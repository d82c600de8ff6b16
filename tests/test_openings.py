"""What would open a way after a refusal: every opening is true when run, and no smaller change does."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest

from example_jobs import PLATE, SHOULDER, adviser, decided, read
from millreason.answer import write_answer
from millreason.job import Job
from millreason.openings import LESS_IS_EASIER, TOLERANCE
from millreason.outcome import Outcome
from millreason.trace import Answer, Opening

ONE_PASS = PLATE.replace("quantity: 10", "one_pass: yes")
WIDE = ONE_PASS.replace("width: 120 mm", "width: 105 mm")
CORNER = SHOULDER.replace("corner_radius: 1 mm", "corner_radius: 0.3 mm")
SHELF = PLATE.replace("open_face", "shoulder") + "cutters: [{id: X, diameter: 63 mm, teeth: 5, kappa: 45 deg}]"
DUST = PLATE.replace("C45, hardness: 190 HB", "CuBe2").replace("[air, flood]", "[air]")
REFUSED = {"one pass": WIDE, "corner": CORNER, "shelf": SHELF, "dust": DUST}


def answered(text: str) -> tuple[Outcome, Answer]:
    out = decided(text)
    return out, write_answer(adviser(), out)


def changed(job: Job, changes: dict[str, Any]) -> Job:
    machine = changes.get("machine.name")
    if machine:
        kept = {
            fact: given
            for fact, given in job.given.items()
            if not fact.startswith("machine.") or fact == "machine.fluids"
        }
        return replace(job, given=kept, machine_name=machine)
    for fact, value in changes.items():
        job = job.with_value(fact, value)
    return job


@pytest.mark.parametrize("name", REFUSED)
def test_every_opening_is_true_when_run(name: str) -> None:
    out, answer = answered(REFUSED[name])
    assert answer.verdict == "refuse"
    assert answer.refusal is not None
    for opening in answer.refusal.openings:
        again = adviser().decide(changed(out.job, opening.change))
        assert again.stands, opening.text
        assert again.stands[0].candidate.label == opening.then
        assert opening.text


def numbers(openings: list[Opening]) -> list[tuple[str, float]]:
    single = [opening.change for opening in openings if len(opening.change) == 1]
    pairs = [next(iter(change.items())) for change in single]
    return [(fact, value) for fact, value in pairs if isinstance(value, float)]


@pytest.mark.parametrize("name", ["one pass", "corner"])
def test_no_smaller_change_of_a_number_opens_a_way(name: str) -> None:
    out, answer = answered(REFUSED[name])
    assert answer.refusal is not None
    found = numbers(answer.refusal.openings)
    assert found, "a number is among what can be relaxed"
    for fact, value in found:
        back = 1 + 3 * TOLERANCE if fact in LESS_IS_EASIER else 1 - 3 * TOLERANCE
        assert not adviser().decide(out.job.with_value(fact, value * back)).stands, fact


def test_a_fluid_that_is_missing_is_added_to_those_at_hand() -> None:
    _, answer = answered(DUST)
    assert answer.refusal is not None
    added = [
        opening.change["machine.fluids"] for opening in answer.refusal.openings if "machine.fluids" in opening.change
    ]
    assert added
    assert all("air" in fluids and len(fluids) == 2 for fluids in added)


def test_a_refusal_names_what_binds() -> None:
    _, answer = answered(WIDE)
    assert answer.refusal is not None
    keys = {limit.key for limit in answer.refusal.limits}
    assert keys & {"one_pass", "changer_diameter", "taper_diameter"}
    _, answer = answered(CORNER)
    assert answer.refusal is not None
    assert answer.refusal.limits[0].key == "corner"
    assert read(CORNER).given["work.corner_radius_mm"].value == 0.3
