"""Sampled jobs over the whole input space; the full size is run by hand, see tests/sweep.py."""

from __future__ import annotations

import os
from random import Random

import pytest

from hard_limits import breaches
from sweep import Result, adviser, answer_to, in_inches, read, run_one, shuffled, summary, sweep
from sweep_jobs import Sampler

CI_COUNT = 1600
VERDICTS = {"recommend", "recommend_with_warnings", "conditional", "ask", "refuse"}


def told(results: list[Result]) -> str:
    return "\n".join(f"job {result.number}: {result.faults} {result.raw}" for result in results if result.faults)


def test_a_few_sampled_jobs_end_as_they_must() -> None:
    sampler = Sampler(adviser(), 20)
    results = [run_one(number, sampler.job()) for number in range(40)]
    assert not told(results)
    assert len({result.verdict for result in results} & VERDICTS) >= 3


@pytest.mark.slow
def test_sampled_jobs_end_as_they_must() -> None:
    results = [result for batch in sweep(CI_COUNT, 11, min(2, os.cpu_count() or 1)) for result in batch]
    print(summary(results))
    assert not told(results)
    assert {result.verdict for result in results} == VERDICTS


def test_the_sampler_covers_the_input_space_and_repeats_itself() -> None:
    one, other = Sampler(adviser(), 3), Sampler(adviser(), 3)
    jobs = [one.job() for _ in range(400)]
    assert jobs == [other.job() for _ in range(400)]
    seen = {
        (section, name)
        for job in jobs
        for section, fields in job.items()
        if isinstance(fields, dict)
        for name in fields
    }
    keys = {tuple(key.split(".")) for key in adviser().vocabulary.job_keys}
    left_out = (
        keys - seen - {("machine", name) for name in ("curve", "efficiency", "changer", "speed_min", "wet_iron_chips")}
    )
    assert not {key for key in left_out if key[0] == "work" and key[1] != "condition"}
    features = {job["work"].get("feature") for job in jobs}
    assert features >= {"open_face", "shoulder", "closed_pocket", "both_sides", "slot", None}


def test_a_job_in_inches_or_another_order_is_the_same_job() -> None:
    raw = {"work": {"width": "50.8 mm", "stock": "2 mm"}, "machine": {"power": "10 kW"}}
    assert in_inches(raw)["work"]["width"] == "2.0 in"
    here, there = read(raw), read(in_inches(raw))
    assert there.units == "inch"
    for fact, given in here.given.items():
        assert there.given[fact].value == pytest.approx(given.value)
    assert shuffled(raw, Random(1)) == raw


PLATE = {
    "work": {
        "material": "C45", "hardness": "190 HB", "feature": "open_face",
        "length": "300 mm", "width": "120 mm", "stock": "3 mm",
    },
    "machine": {"name": "vertical-40"},
}  # fmt: skip


@pytest.mark.parametrize(
    ("part", "field", "value", "words"),
    [
        ("picks", "largest_diameter_mm", 400.0, "changer takes"),
        ("picks", "teeth", 99, "the other numbers give"),
        ("picks", "edge", "diamond", "diamond in a ferrous metal"),
        ("picks", "mounting", "straight_shank_collet", "straight shank"),
        ("plan", "fluid", "mql", "where the machine has"),
        ("plan", "radial_passes", 1, "cover"),
        ("plan", "mass_kg", 900.0, "in a changer"),
        ("step", "spindle_speed_rpm", 99999.0, "on a spindle of"),
        ("step", "net_power_worn_kw", 900.0, "with worn edges"),
        ("step", "depth_of_cut_mm", 40.0, "the layers take"),
        ("step", "table_feed_mm_min", 90000.0, "table feed"),
    ],
)
def test_the_hard_limits_find_what_is_planted(part: str, field: str, value: object, words: str) -> None:
    answer = answer_to(read(PLATE))[1].to_dict()
    assert breaches(answer) == []
    holder = answer["plan"]["steps"][0] if part == "step" else answer[part]
    assert field in holder
    holder[field] = value
    assert any(words in breach for breach in breaches(answer))
