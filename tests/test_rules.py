"""Every rule has facts that fire it and facts that just miss it, and every text can be filled and read."""

from __future__ import annotations

import re
from functools import cache
from pathlib import Path
from typing import Any

import pytest
import yaml

from millreason.facts import Situation, subjects_of
from millreason.inference import make_engine
from millreason.rulebook import PLACEHOLDER, Rule, RuleBook, TestSpec, compile_rules, load_rules
from millreason.vocabulary import Vocabulary, load_vocabulary
from millreason.yaml_source import read_yaml

ROOT = Path(__file__).resolve().parent.parent
MOST_WORDS = 60


@cache
def vocabulary() -> Vocabulary:
    return load_vocabulary(ROOT)


@cache
def book() -> RuleBook:
    sources = [entry["id"] for entry in read_yaml(ROOT / "knowledge" / "sources.yaml").data["sources"]]
    strengths = [entry["id"] for entry in read_yaml(ROOT / "knowledge" / "strengths.yaml").data["strengths"]]
    return load_rules(ROOT, vocabulary(), sources=sources, strengths=strengths)


def trials() -> list[dict[str, Any]]:
    loaded = (
        yaml.safe_load(path.read_text(encoding="utf-8")) for path in sorted((ROOT / "tests" / "rules").glob("*.yaml"))
    )
    return [entry for content in loaded for entry in content or ()]


def rule_ids() -> list[str]:
    """Return the ids as plain YAML has them, so that one broken rule does not hide all tests."""
    loaded = (yaml.safe_load(path.read_text(encoding="utf-8")) for path in (ROOT / "rules").glob("*.yaml"))
    return sorted(rule["id"] for content in loaded for rule in content["rules"])


TRIALS = trials()


def fires(rule: Rule, facts: dict[str, Any]) -> bool:
    """Run one rule alone on facts, as a stage would see them."""
    situation = Situation(vocabulary())
    for name, value in facts.items():
        situation.set(name, tuple(value) if isinstance(value, list) else value, "given")
    compiled = compile_rules([rule])
    engine = make_engine(compiled, prefer="twin")
    return bool(engine.run(situation.for_inference(subjects_of(compiled)), lambda _rule, _facts: ()))


def wrong_value(name: str, value: Any) -> str | None:
    """Say why a value cannot be that of a fact; None if it can."""
    definition = vocabulary().facts.get(name)
    if definition is None:
        return f"{name} is no fact"
    items = value if isinstance(value, list) else [value]
    if definition.kind in ("choice", "choices") and not set(items) <= set(definition.options):
        return f"{name}: {value!r} is no option"
    if definition.kind == "number":
        low, high = definition.range or (float("-inf"), float("inf"))
        if isinstance(value, bool) or not isinstance(value, int | float) or not low <= value <= high:
            return f"{name}: {value!r} is outside {low} to {high}"
    if definition.kind == "flag" and not isinstance(value, bool):
        return f"{name}: {value!r} is no flag"
    return None


@pytest.mark.parametrize("trial", TRIALS, ids=lambda trial: trial["rule"])
def test_rule_fires_and_nearly_misses(trial: dict[str, Any]) -> None:
    rule = book().rules[trial["rule"]]
    for facts in (trial["fires"], trial["misses"]):
        assert [problem for name, value in facts.items() if (problem := wrong_value(name, value))] == []
    assert fires(rule, trial["fires"]), f"{rule.id} does not fire on {trial['fires']}"
    assert not fires(rule, trial["misses"]), f"{rule.id} fires on {trial['misses']}"


@pytest.mark.parametrize("trial", TRIALS, ids=lambda trial: trial["rule"])
def test_near_miss_is_near(trial: dict[str, Any]) -> None:
    fired, missed = trial["fires"], trial["misses"]
    differing = [name for name in {*fired, *missed} if fired.get(name) != missed.get(name)]
    assert 1 <= len(differing) <= 2, differing


def test_every_rule_is_tried() -> None:
    tried = {trial["rule"] for trial in TRIALS}
    assert sorted(set(book().rules) - tried) == []


def test_names_are_taken_once() -> None:
    names = [rule.name for rule in book().rules.values()]
    assert sorted({name for name in names if names.count(name) > 1}) == []


def texts(rule: Rule) -> dict[str, str]:
    caution = rule.then.caution
    return {
        "says": rule.says,
        "why": rule.why,
        "do": caution.do if caution else "",
        "offer": rule.then.offer or "",
    }


@pytest.mark.parametrize("rule_id", rule_ids())
def test_texts_are_sentences(rule_id: str) -> None:
    for part, text in texts(book().rules[rule_id]).items():
        if not text:
            continue
        assert text[-1] in ".!?", f"{part} does not end a sentence: {text}"
        assert text[0].isupper() or text[0] in "{'" or text[0].isdigit(), f"{part} begins in the middle: {text}"
        assert len(text.split()) <= MOST_WORDS, f"{part} is too long to be read at once: {text}"
        assert not re.search(r"\s{2}", text), f"{part} has a gap: {text}"


# A stage after the questions runs only on jobs in which these are known.
ALWAYS_KNOWN = {
    "work.width_mm", "work.length_mm", "work.stock_mm", "material.name", "material.iso_group",
    "machine.interface",
    "machine.power_kw", "machine.largest_usual_diameter_mm", "job.one_pass_least_mm", "job.one_pass_most_mm",
    "require.finish_ra_um",
}  # fmt: skip
# A ratio is known only where its limit is; a judgement only where what it rests on is.
RESTS_ON = {
    "plan.changer_full_use": {"machine.changer_full_mm"},
    "plan.changer_empty_use": {"machine.changer_empty_mm"},
    "plan.mass_use": {"machine.changer_mass_kg"},
    "plan.moment_use": {"machine.changer_moment_nm"},
    "plan.feed_use": {"machine.feed_max_mm_min"},
    "plan.flatness_use": {"require.flatness_mm"},
    "plan.corner_use": {"work.corner_radius_mm"},
    "cut.interrupted": {"work.interruptions"},
    "material.kind": {"work.material"},
}


def is_known(fact: str, rule: Rule) -> bool:
    """Tell whether a fact must be known when a rule fires."""
    condition = rule.when.get(fact)
    if condition is not None:
        return not (isinstance(condition, TestSpec) and condition.known is False)
    beside_a_plan = rule.stage == "judge" or any(name.startswith(("pick.", "plan.")) for name in rule.when)
    if fact.startswith(("pick.", "plan.")):
        return beside_a_plan
    return fact in ALWAYS_KNOWN or any(fact in RESTS_ON.get(name, ()) for name in rule.when)


@pytest.mark.parametrize("rule_id", rule_ids())
def test_placeholders_are_known_when_the_rule_fires(rule_id: str) -> None:
    rule = book().rules[rule_id]
    for part, text in texts(rule).items():
        for fact in PLACEHOLDER.findall(text):
            assert is_known(fact, rule), f"{part} of {rule_id} prints {fact}, which may be unknown"
