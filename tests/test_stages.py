"""Stages: texts filled with values, tunings combined, and rules whose order never matters."""

from __future__ import annotations

from dataclasses import replace
from random import Random

import pytest

from example_jobs import IRON, PLATE, SHOULDER, TITANIUM, WEAK, adviser, read
from millreason.answer import write_answer
from millreason.choice import Adviser
from millreason.facts import Situation
from millreason.rulebook import Conclusion
from millreason.stages import Tuning, conclusion_text, fill, shown


def test_placeholders_are_filled_with_value_and_unit() -> None:
    situation = Situation(adviser().vocabulary)
    situation.set("work.width_mm", 76.2, "given")
    situation.set("work.skin", ("mill_scale", "weld"), "given")
    text = "{work.width_mm} wide, {work.skin}, {work.stock_mm}"
    assert fill(text, situation, adviser().vocabulary, "metric") == "76.2 mm wide, mill scale, weld, an unknown value"
    assert fill("{work.width_mm}", situation, adviser().vocabulary, "inch") == "3 in (76.2 mm)"
    assert shown(True, "", "metric") == "yes"


def test_the_first_value_of_a_fact_stays() -> None:
    situation = Situation(adviser().vocabulary)
    assert situation.set("work.width_mm", 50.0, "given")
    assert not situation.set("work.width_mm", 60.0, "assumed", "DEF-001")
    assert not situation.set("work.stock_mm", None, "given")
    other = situation.copy()
    assert other.set("work.stock_mm", 2.0, "given")
    assert situation.value("work.width_mm") == 50.0
    assert situation.value("work.stock_mm") is None


def test_tunings_multiply_and_keep_the_strictest() -> None:
    tuning = Tuning({"feed": "factor", "hex_least_mm": "at_least", "depth_most_mm": "at_most"}, {}, {})
    tuning.apply("A", {"feed": 0.8, "hex_least_mm": 0.08, "depth_most_mm": 3.0})
    tuning.apply("B", {"feed": 0.5, "hex_least_mm": 0.05, "depth_most_mm": 4.0})
    tuning.apply("C", {"hex_least_mm": 0.1, "depth_most_mm": 2.0})
    assert tuning.values == {"feed": pytest.approx(0.4), "hex_least_mm": 0.1, "depth_most_mm": 2.0}
    assert tuning.rules["feed"] == ["A", "B"]


def test_conclusions_are_told_in_words() -> None:
    told = conclusion_text(Conclusion.model_validate({"rule_out": {"pitch": ["fine", "extra_fine"]}}))
    assert told == "rules out pitch fine or extra fine"
    assert conclusion_text(Conclusion.model_validate({"lower": "slight"})) == "lowers the candidate (slight)"


@pytest.mark.parametrize(
    "text", [PLATE, SHOULDER, IRON, TITANIUM, WEAK], ids=["plate", "shoulder", "iron", "titanium", "weak"]
)
@pytest.mark.parametrize("seed", [1, 2])
def test_shuffled_rules_choose_the_same(text: str, seed: int) -> None:
    plain = adviser()
    ids = list(plain.rulebook.rules)
    Random(seed).shuffle(ids)
    book = replace(plain.rulebook, rules={name: plain.rulebook.rules[name] for name in ids})
    other = Adviser(plain.knowledge, plain.materials, plain.vocabulary, book, "twin")
    here = write_answer(plain, plain.decide(read(text)), openings=False)
    there = write_answer(other, other.decide(read(text)), openings=False)
    assert (here.verdict, here.picks, here.plan, here.checks) == (there.verdict, there.picks, there.plan, there.checks)
    assert sorted(caution.key for caution in here.cautions) == sorted(caution.key for caution in there.cautions)
    assert [question.fact for question in here.questions] == [question.fact for question in there.questions]
    assert sorted(firing.rule for firing in here.trace.firings) == sorted(firing.rule for firing in there.trace.firings)
