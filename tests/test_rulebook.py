"""The rules as YAML: what a rule may say, and faults found with their line and remedy."""

from __future__ import annotations

from copy import deepcopy
from pathlib import Path
from typing import Any

import pytest
import yaml

from millreason.errors import DataError
from millreason.inference import Fact, make_engine
from millreason.knowledge import load_knowledge
from millreason.rulebook import Rule, RuleBook, compile_rules, describe, load_rules
from millreason.vocabulary import load_vocabulary

KNOWLEDGE = load_knowledge()
VOCABULARY = load_vocabulary(KNOWLEDGE.root)
GOOD: dict[str, Any] = {
    "id": "TRY-001", "name": "long-chips", "says": "Long chips need room.", "stage": "weigh",
    "when": {"material.chip_form": "long"}, "then": {"for": {"pitch": "coarse"}, "strength": "strong"},
    "why": "They pack.", "basis": {"common_practice": "always"},
}  # fmt: skip


def load(tmp_path: Path, *rules: dict[str, Any]) -> RuleBook:
    (tmp_path / "rules").mkdir(exist_ok=True)
    text = yaml.safe_dump({"topic": "trial", "rules": [deepcopy(rule) for rule in rules]}, sort_keys=False)
    (tmp_path / "rules" / "trial.yaml").write_text(text, encoding="utf-8")
    return load_rules(tmp_path, VOCABULARY, None, KNOWLEDGE.sources, KNOWLEDGE.strengths)


def test_a_good_rule_loads_with_its_place(tmp_path: Path) -> None:
    book = load(tmp_path, GOOD)
    assert book.places["TRY-001"] == "rules/trial.yaml:3"
    assert book.topics["TRY-001"] == "trial"
    assert [rule.id for rule in book.stage("weigh")] == ["TRY-001"]
    assert book.stage("judge") == []


@pytest.mark.parametrize(
    ("changes", "words"),
    [
        ({"when": {"material.chipform": "long"}}, "Did you mean 'material.chip_form'"),
        ({"when": {"material.chip_form": "longg"}}, "Options: long, segmented, short"),
        ({"when": {"work.width_mm": "wide"}}, "is not a number"),
        ({"when": {"work.width_mm": {"above": -1.0}}}, "outside the range"),
        ({"when": {"cut.skin": "yes, some"}}, "neither true nor false"),
        ({"when": {}}, "has no condition"),
        ({"when": {"work.width_mm": {"above": 1.0, "below": 2.0}}}, "exactly one test"),
        ({"then": {"for": {"pich": "coarse"}, "strength": "strong"}}, "pich"),
        ({"then": {"for": {"pitch": "course"}, "strength": "strong"}}, "coarse"),
        ({"then": {"for": {"pitch": "coarse"}, "strength": "huge"}}, "huge"),
        ({"then": {"for": {"pitch": "coarse"}}}, "'strength' goes with"),
        ({"then": {"rule_out": {"pitch": "coarse"}, "strength": "strong"}}, "'strength' goes with"),
        ({"then": {}}, "exactly one thing"),
        ({"then": {"lower": "slight"}}, "is not concluded in stage 'weigh'"),
        ({"stage": "judge", "then": {"reject": {"limit": "luck", "value": "plan.hex_mm"}}}, "unknown limit 'luck'"),
        ({"stage": "judge", "then": {"reject": {"limit": "power", "value": "plan.hexx"}}}, "plan.hexx"),
        ({"stage": "assume", "then": {"ask": "work.width_mm"}}, "'need' (must or useful)"),
        ({"stage": "appraise", "then": {"adjust": {"speedd": 0.8}}}, "unknown adjustable"),
        ({"why": "Because of {work.widht_mm}."}, "unknown fact 'work.widht_mm'"),
        ({"basis": {"cited": {"source": "iso-999", "where": "p. 1", "seen": "checked"}}}, "unknown source 'iso-999'"),
        ({"id": "try1"}, "id"),
        ({"colour": "red"}, "unknown key"),
    ],
)  # fmt: skip
def test_a_fault_is_found_with_its_remedy(tmp_path: Path, changes: dict[str, Any], words: str) -> None:
    with pytest.raises(DataError) as caught:
        load(tmp_path, {**GOOD, **changes})
    told = str(caught.value)
    assert words in told
    assert told.startswith("rules/trial.yaml:")


def test_all_faults_of_all_rules_are_found_at_once_and_an_id_is_taken_once(tmp_path: Path) -> None:
    wrong = {**GOOD, "id": "TRY-002", "when": {"material.chip_form": "longg"}}
    with pytest.raises(DataError) as caught:
        load(tmp_path, GOOD, wrong, {**GOOD, "why": "{no.such}"})
    told = str(caught.value)
    assert "longg" in told
    assert "the id is taken by rules/trial.yaml:3" in told


def fires(when: dict[str, Any], *facts: Fact) -> bool:
    rule = Rule.model_validate({**GOOD, "when": when})
    return bool(make_engine(compile_rules([rule]), prefer="twin").run(facts, lambda *_: ()))


def test_the_meaning_of_every_test() -> None:
    width = "work.width_mm"
    at = {number: Fact(width, float(number)) for number in (9, 10, 11)}
    table = {
        "at_least": [False, True, True], "above": [False, False, True],
        "at_most": [True, True, False], "below": [True, False, False],
    }  # fmt: skip
    for name, expected in table.items():
        assert [fires({width: {name: 10.0}}, at[n]) for n in (9, 10, 11)] == expected, name
    assert [fires({width: {"between": [9.5, 10.0]}}, at[n]) for n in (9, 10, 11)] == [False, True, False]
    assert fires({width: 10.0}, at[10])
    chip = "material.chip_form"
    assert fires({chip: ["long", "short"]}, Fact(chip, "short"))
    assert not fires({chip: ["long", "short"]}, Fact(chip, "segmented"))
    assert fires({chip: {"none_of": ["long"]}}, Fact(chip, "short"))
    assert not fires({chip: {"none_of": ["long"]}}, Fact(chip, "long"))


def test_an_unknown_fact_meets_only_unknown() -> None:
    width = "work.width_mm"
    for condition in ({"below": 10.0}, {"none_of": [3.0]}, 10.0, {"known": True}):
        assert not fires({width: condition})
    assert fires({width: {"known": False}}, Fact(width, "", "missing"))
    assert fires({width: {"known": True}}, Fact(width, True, "known"))


def test_an_assumption_needs_its_target_unknown() -> None:
    rule = Rule.model_validate({**GOOD, "stage": "assume", "then": {"assume": {"work.feature": "open_face"}}})
    assert rule.implied_missing == ("work.feature",)
    engine = make_engine(compile_rules([rule]), prefer="twin")
    long = Fact("material.chip_form", "long")
    assert engine.run([long, Fact("work.feature", "", "missing")], lambda *_: ())
    assert not engine.run([long, Fact("work.feature", "slot")], lambda *_: ())


def test_conditions_are_told_in_words() -> None:
    rule = Rule.model_validate({**GOOD, "when": {"work.width_mm": {"between": [1.0, 2.0]}, "cut.skin": True}})
    told = [describe(*entry) for entry in rule.when.items()]
    assert told == ["work.width_mm between 1.0 and 2.0", "cut.skin is yes"]


def test_a_shop_rule_is_marked(tmp_path: Path) -> None:
    shop = tmp_path / "shop"
    (tmp_path / "rules").mkdir()
    shop.mkdir()
    load(shop, GOOD)
    book = load_rules(tmp_path, VOCABULARY, shop, KNOWLEDGE.sources, KNOWLEDGE.strengths)
    assert book.from_shop == {"TRY-001"}
    assert book.places["TRY-001"].startswith("shop/rules/trial.yaml")
