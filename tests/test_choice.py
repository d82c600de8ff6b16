"""The choice: the best candidate of all, the same on both engines, in any order, and byte for byte."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import pytest

from example_jobs import CASES, IRON, PLATE, ROOT, SHOULDER, TITANIUM, WEAK, adviser, answered, case, decided, read
from millreason.answer import write_answer
from millreason.candidates import Catalogue
from millreason.inference import engine_names
from millreason.outcome import Outcome, Tried
from millreason.search import Search

FINE = PLATE.replace("3.2 um", "0.8 um, finish_only: yes").replace("3 mm", "0.5 mm")
# Each job is searched in a part of the catalogue that is small enough to try every tool of.
PARTS = {
    "plate": (PLATE, {"rake": "positive_negative", "wiper": "none"}),
    "shoulder": (SHOULDER, {"rake": "double_positive", "wiper": "none"}),
    "iron": (IRON, {"corner": "facet", "pitch": "fine"}),
    "titanium": (TITANIUM, {"wiper": "none", "pitch": "coarse"}),
    "weak": (WEAK, {"rake": "double_positive", "wiper": "none"}),
    "finishing": (FINE, {"rake": "double_positive", "corner": "facet"}),
}  # fmt: skip
MOST_IN_FULL = 2500


def tried_in_full(out: Outcome, only: dict[str, str]) -> list[Tried]:
    """Try every candidate there is, with no shortcut."""
    knowledge = adviser().knowledge
    offered = knowledge.interfaces[out.situation.value("machine.interface")].mountings.options
    assert out.ledgers is not None
    assert out.spindle is not None
    search = Search(adviser(), out, out.spindle)
    everything = list(Catalogue(knowledge.cutters, out.ledgers, out.job.units, offered, only).best_first())
    wanted = [one for one in everything if all(one.options[pick] == option for pick, option in only.items())]
    assert 0 < len(wanted) < MOST_IN_FULL
    return [search._try(candidate) for candidate in wanted]


@pytest.mark.parametrize("name", PARTS)
def test_the_search_finds_the_best_of_all(name: str) -> None:
    text, only = PARTS[name]
    out = adviser().decide(read(text), only)
    full = tried_in_full(out, only)
    standing = [tried.standing for tried in full if not tried.limits]
    assert (max(standing) if standing else None) == (out.stands[0].standing if out.stands else None)
    assert all(tried.lowered >= 0 for tried in full), "judging never raises a candidate"
    stands = {tried.candidate.label + str(tried.candidate.options) for tried in full if not tried.limits}
    assert all(tried.candidate.label + str(tried.candidate.options) in stands for tried in out.stands)


def test_a_refusal_is_true_of_every_candidate() -> None:
    text = PLATE.replace("changer_full: 90 mm", "changer_full: 36 mm").replace("quantity: 10", "one_pass: yes")
    only = {"rake": "positive_negative", "wiper": "none"}
    out = adviser().decide(read(text), only)
    assert not out.stands
    assert all(tried.limits for tried in tried_in_full(out, only))


@pytest.mark.skipif("durable" not in engine_names(), reason="the compiled engine is not installed here")
@pytest.mark.parametrize("path", CASES, ids=lambda path: path.stem)
def test_both_engines_answer_alike(path: Path) -> None:
    texts = []
    for engine in ("durable", "twin"):
        by = adviser(engine)
        answer = write_answer(by, by.decide(case(path, by)), openings=False).to_dict()
        assert answer.pop("engine") == engine
        texts.append(answer)
    assert texts[0] == texts[1]


def test_fields_in_another_order_answer_alike() -> None:
    turned = "\n".join(
        [
            "fixture: {hold: vise, rigidity: normal}",
            "machine: {fluids: [air, flood], changer_state: full, changer_mass: 7 kg, changer_empty: 150 mm,",
            "  changer_full: 90 mm, speed_max: 8000 rpm, torque: 95 N.m, power: 11 kW, interface: 7/24-40,",
            "  class: machining_centre_vertical}",
            "require: {quantity: 10, finish: 3.2 um}",
            "work: {stock: 3 mm, width: 120 mm, length: 300 mm, feature: open_face, skin: [none], hardness: 190 HB,",
            "  material: C45}",
        ]
    )
    assert answered(turned).to_json() == answered(PLATE).to_json()


@pytest.mark.parametrize("stem", ["wide-steel-plate", "nickel-without-fluid", "magnesium-not-confirmed"])
def test_the_same_job_gives_the_same_bytes(stem: str) -> None:
    path = ROOT / "cases" / "accept" / f"{stem}.yaml"
    code = (
        "import sys; from millreason.choice import load_adviser; from pathlib import Path\n"
        "sys.stdout.write(load_adviser().choose_file(Path(sys.argv[1])).to_json())"
    )
    made = []
    for seed in ("0", "4711"):
        run = subprocess.run(
            [sys.executable, "-c", code, str(path)],
            capture_output=True, check=True, env={**os.environ, "PYTHONHASHSEED": seed}, cwd="/",
        )  # fmt: skip
        made.append(run.stdout)
    assert made[0] == made[1]
    assert len(made[0]) > 1000


def test_only_keeps_to_the_named_options() -> None:
    out = adviser().decide(read(PLATE), {"pitch": "coarse", "kappa_deg": "90"})
    assert out.stands
    assert {(one.candidate.pitch, one.candidate.family.kappa_deg) for one in out.stands} == {("coarse", 90.0)}


def test_a_large_count_is_no_doubt_about_a_unit() -> None:
    assert not decided(PLATE.replace("quantity: 10", "quantity: 20000")).unit_doubts
    assert decided(PLATE.replace("length: 300 mm", "length: 25000 mm")).unit_doubts
