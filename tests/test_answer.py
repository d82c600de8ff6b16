"""The answer: its published schema, and what each verdict holds back."""

from __future__ import annotations

import json
from functools import cache
from pathlib import Path

import jsonschema
import pytest

from example_jobs import CASES, PLATE, adviser, answered, case
from hard_limits import breaches
from millreason.answer import write_answer
from millreason.trace import Answer, answer_schema


@cache
def answer_to(path: Path) -> Answer:
    return write_answer(adviser(), adviser().decide(case(path)), openings=False)


def test_the_schema_is_a_schema_and_refuses_what_is_no_answer() -> None:
    schema = dict(answer_schema())
    jsonschema.Draft202012Validator.check_schema(schema)
    good = json.loads(answered(PLATE).to_json())
    for broken in ({**good, "verdict": "maybe"}, {**good, "picks": 3}, {k: v for k, v in good.items() if k != "trace"}):
        with pytest.raises(jsonschema.ValidationError):
            jsonschema.validate(broken, schema)


@pytest.mark.parametrize("path", CASES, ids=lambda path: path.stem)
def test_every_shipped_case_is_valid_and_within_hard_limits(path: Path) -> None:
    answer = json.loads(answer_to(path).to_json())
    jsonschema.Draft202012Validator(dict(answer_schema())).validate(answer)
    assert breaches(answer) == []


@pytest.mark.parametrize("path", CASES, ids=lambda path: path.stem)
def test_everything_said_rests_on_something(path: Path) -> None:
    answer = answer_to(path)
    for firing in answer.trace.firings:
        assert firing.basis.kind, firing.rule
        assert firing.basis.kind not in ("checked", "recalled") or firing.basis.source, firing.rule
    fired = {firing.rule for firing in answer.trace.firings}
    for caution in answer.cautions:
        assert set(caution.rules) <= fired
        assert caution.do
    if answer.plan is not None:
        assert all(calculation.references for calculation in answer.trace.calculations)
        ledgers = {ledger.pick: ledger for ledger in answer.trace.ledgers}
        assert answer.picks is not None
        for pick in ("cutter_class", "pitch", "rake", "corner", "wiper"):
            assert ledgers[pick].chosen == getattr(answer.picks, pick)


def test_exit_codes_follow_the_verdict() -> None:
    codes = {answer_to(path).verdict: answer_to(path).exit_code for path in CASES}
    expected = {"recommend": 0, "recommend_with_warnings": 0, "conditional": 0, "ask": 3, "refuse": 4}
    assert codes == {verdict: expected[verdict] for verdict in codes}
    assert set(codes) == set(expected)


def test_a_condition_holds_the_data_back_until_it_is_confirmed() -> None:
    magnesium = PLATE.replace("C45, hardness: 190 HB", "AZ91D").replace("[air, flood]", "[air, mineral_oil]")
    held = answered(magnesium)
    assert held.verdict == "conditional"
    assert held.plan is None
    assert not held.checks
    assert not held.trace.calculations
    assert not held.runners_up
    confirmed = answered(magnesium + "confirm: {magnesium_fire_controls: yes, no_steel_inserts_cast_in: yes}")
    assert confirmed.verdict == "recommend_with_warnings"
    assert confirmed.plan is not None
    assert answered(magnesium + "confirm: {magnesium_fire_controls: no}").verdict == "refuse"


def test_questions_are_few_and_the_needed_ones_come_first() -> None:
    answer = answered("work: {feature: open_face}")
    assert answer.verdict == "ask"
    assert 1 <= len(answer.questions) <= 6
    needs = [question.need for question in answer.questions]
    assert needs == sorted(needs)
    assert {"work.material", "work.width_mm", "work.length_mm", "work.stock_mm"} <= {q.fact for q in answer.questions}
