"""The job file: what it may say, and every fault found at once with its line."""

from __future__ import annotations

import math
from pathlib import Path

import pytest

from millreason.errors import DataError
from millreason.job import Job, parse_job, read_job
from millreason.knowledge import load_knowledge
from millreason.vocabulary import load_vocabulary

KNOWLEDGE = load_knowledge()
VOCABULARY = load_vocabulary(KNOWLEDGE.root)
ROOT = Path(__file__).resolve().parent.parent


def read(text: str) -> Job:
    return parse_job(text, VOCABULARY, KNOWLEDGE.interface_names, "job.yaml")


def value(text: str, fact: str) -> object:
    return read(text).given[fact].value


def faults(text: str) -> list[str]:
    with pytest.raises(DataError) as caught:
        read(text)
    return [str(finding) for finding in caught.value.findings]


@pytest.mark.parametrize(
    ("section", "line", "fact", "stored"),
    [
        ("work", "width: 8 in", "work.width_mm", 203.2),
        ("work", "stock: 2.5 mm", "work.stock_mm", 2.5),
        ("require", "finish: 63 uin", "require.finish_ra_um", 1.6002),
        ("require", "quantity: 12", "require.quantity", 12.0),
        ("machine", "power: 15 hp", "machine.power_kw", 11.185498),
        ("machine", "torque: 70 lbf.ft", "machine.torque_nm", 94.907256),
        ("machine", "speed_max: 8000 rpm", "machine.speed_max_rpm", 8000.0),
        ("machine", "changer_mass: 15 lb", "machine.changer_mass_kg", 6.803886),
        ("machine", "backlash: 0.015 in", "machine.backlash_mm", 0.381),
        ("machine", "feed_max: 400 in/min", "machine.feed_max_mm_min", 10160.0),
        ("machine", "stiffness: 40 N/um", "machine.stiffness_n_um", 40.0),
        ("machine", "efficiency: 0.8", "machine.efficiency", 0.8),
        ("fixture", "overhang: 5 in", "fixture.overhang_mm", 127.0),
        ("fixture", "clamp_force: 2 kN", "fixture.clamp_force_n", 2000.0),
        ("costs", "machine_rate: 80 /h", "costs.machine_rate_per_h", 80.0),
        ("costs", "edge: 4.5", "costs.edge", 4.5),
        ("require", "tool_life: 1 h", "require.tool_life_min", 60.0),
    ],
)
def test_a_number_is_stored_in_the_unit_of_its_fact(section: str, line: str, fact: str, stored: float) -> None:
    given = read(f"{section}: {{{line}}}").given[fact]
    assert isinstance(given.value, float)
    assert math.isclose(given.value, stored, rel_tol=1e-6)
    assert given.text == line.split(": ")[1]
    assert given.line == 1


def test_words_lists_flags_steps_and_curves() -> None:
    assert value("work: {feature: open face}", "work.feature") == "open_face"
    assert value("work: {skin: mill_scale}", "work.skin") == ("mill_scale",)
    assert value("work: {skin: [weld, mill scale, weld]}", "work.skin") == ("weld", "mill_scale")
    assert value("require: {one_pass: yes}", "require.one_pass") is True
    assert value("require: {one_pass: no}", "require.one_pass") is False
    assert value("machine: {speed_steps: [660 rpm, 80 rpm]}", "machine.speed_steps_rpm") == (80.0, 660.0)
    points = "[{speed: 3000 rpm, torque: 20 N.m}, {speed: 500 rpm, torque: 70 N.m}]"
    assert value(f"machine: {{curve: {points}}}", "machine.curve") == ((500.0, 70.0), (3000.0, 20.0))


@pytest.mark.parametrize("name", ["CAT40", "40 taper", "7/24-40", "BT40", "SK40"])
def test_an_interface_is_found_by_what_people_call_it(name: str) -> None:
    assert value(f"machine: {{interface: {name}}}", "machine.interface") == "7/24-40"


def test_hardness_keeps_the_scale_it_was_given_on() -> None:
    given = read("work: {hardness: 52 HRC}").given["work.hardness_hb"]
    assert (given.value, given.unit) == (52.0, "HRC")


def test_the_units_follow_what_most_values_are_written_in() -> None:
    assert read("work: {width: 3 in, length: 5 in, stock: 2 mm}").units == "inch"
    assert read("work: {width: 3 in, stock: 2 mm, length: 50 mm}").units == "metric"
    assert read("work: {width: 3 in, stock: 2 mm}").units == "metric"
    assert read("work: {width: 3 in}\nmachine: {speed_steps: [80 rpm, 660 rpm, 2720 rpm]}").units == "inch"


def test_everything_wrong_is_found_at_once_and_in_its_line() -> None:
    text = """\
work:
  widht: 3 in
  stock: 2
  feature: openface
  skin: [rust]
machin: {power: 3 kW}
machine:
  power: 3 mm
  efficiency: 1.4
require: {one_pass: 3, quantity: 3 pieces}
"""
    found = faults(text)
    lines = [int(fault.split(":")[1]) for fault in found]
    assert lines == [2, 3, 4, 5, 6, 8, 9, 10, 10]
    told = "\n".join(found)
    assert "job.yaml:2: work.widht: unknown field. Did you mean 'width'" in told
    assert "Write the unit behind the number: mm, in" in told
    assert "Did you mean 'open_face'?" in told
    assert "unknown section. Did you mean 'machine'" in told
    assert "'mm' is no unit for this. Allowed: kW, hp" in told
    assert "0.2 to 1" in told


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("work: {width: 0.2 mm}", "outside what is possible here, 1 to 10000 mm"),
        ("machine: {power: 5000 kW}", "0.1 to 400 kW"),
        ("machine: {speed_steps: [80 rpm, 1 rpm]}", "outside"),
        ("machine: {curve: []}", "holds no points"),
        ("machine: {curve: [{speed: 3 rpm}]}", "is not a point"),
        ("[1, 2]", "holds no job"),
        ("work: 3", "must hold named values"),
        ("cutters: {id: a}", "must be a list of cutters"),
        ("cutters: [{id: a, teeth: 0}]", "no number of teeth"),
        ("cutters: [{id: a, diameter: 0 mm}]", "above zero"),
        ("cutters: [{id: a, diametr: 3 mm}]", "Did you mean 'diameter'"),
        ("case: {id: X}\njob: {work: {}}\nexpct: {}", "Did you mean 'expect'"),
    ],
)
def test_a_fault_says_what_is_allowed(text: str, words: str) -> None:
    assert words in "\n".join(faults(text))


@pytest.mark.parametrize(
    ("fields", "kappa"),
    [
        ("lead: 45 deg", 45.0), ("kappa: 75 deg", 75.0), ("lead: 15 deg, lead_convention: lead", 75.0),
        ("lead: 15 deg, lead_convention: kappa", 15.0), ("lead: 15 deg, kappa: 75 deg", 75.0),
    ],
)  # fmt: skip
def test_a_lead_angle_is_read_only_where_it_cannot_be_misread(fields: str, kappa: float) -> None:
    (cutter,) = read(f"cutters: [{{id: a, {fields}}}]").cutters
    assert cutter.values["kappa_deg"] == kappa
    assert not {"lead_deg", "lead_convention"} & set(cutter.values)


@pytest.mark.parametrize(
    ("fields", "words"),
    [
        ("lead: 15 deg", "Write 'kappa: 75 deg' or 'kappa: 15 deg'"),
        ("lead: 15 deg, kappa: 60 deg", "do not add up to 90"),
        ("lead: 15 deg, lead_convention: iso", "is not known"),
    ],
)
def test_a_lead_angle_that_can_be_misread_is_asked_back(fields: str, words: str) -> None:
    assert words in "\n".join(faults(f"cutters: [{{id: a, {fields}}}]"))


def test_cutters_on_hand_carry_their_fields() -> None:
    text = "cutters: [{id: A1, cutter_class: face mill, diameter: 2 in, teeth: 4, speed_limit: 9000 rpm, note: worn}]"
    (cutter,) = read(text).cutters
    assert cutter.id == "A1"
    assert cutter.values == {
        "cutter_class": "face_mill",
        "diameter_mm": 50.8,
        "teeth": 4.0,
        "speed_limit_rpm": 9000.0,
        "note": "worn",
    }


def test_a_case_file_is_read_for_its_job() -> None:
    job = read_job(ROOT / "cases/accept/wide-steel-plate.yaml", VOCABULARY, KNOWLEDGE.interface_names)
    assert job.title == "Plate, top face"
    assert job.given["work.width_mm"].value == 200.0
    assert job.given["work.width_mm"].line == 14


def test_a_value_can_be_set_or_left_blank() -> None:
    job = read("work: {width: 50 mm, stock: 2 mm}")
    assert job.with_value("work.width_mm", 60.0).given["work.width_mm"].value == 60.0
    assert "work.width_mm" not in job.with_value("work.width_mm", None).given
    assert job.given["work.width_mm"].value == 50.0
