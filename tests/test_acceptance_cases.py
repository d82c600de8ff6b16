"""The acceptance cases themselves: well formed, in the words of the vocabulary, free of contradiction."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

from acceptance import Case, load_cases
from acceptance_terms import CAUTIONS, STEP_VALUES, TESTS, VERDICTS, holds
from millreason.vocabulary import load_vocabulary

ROOT = Path(__file__).resolve().parent.parent
RARE = {"weld", "hardened_skin", "other"}  # not yet the point of a case
PICK_OPTIONS = {name: set(fact.options) for name, fact in load_vocabulary(ROOT).picks.items()}
PLAIN_PICKS = {"largest_diameter_mm", "lead_deg", "radial_passes", "axial_passes"}
_EXPECT_KEYS = """
verdict picks ranges ranges_when data_rules limits ask refusal cautions cautions_if cautions_not must_not_say
after_confirm
"""
EXPECT_KEYS = set(_EXPECT_KEYS.split())


def literals(condition: Any) -> list[Any]:
    """Return the plain words and numbers of a condition, checking the words of its tests."""
    if isinstance(condition, list):
        return [word for entry in condition for word in literals(entry)]
    if isinstance(condition, dict):
        assert set(condition) <= TESTS, f"unknown test in {condition}"
        return [*condition.get("one_of", []), *condition.get("none_of", [])]
    return [condition]


def check_paths(conditions: dict[str, Any]) -> None:
    for path, condition in conditions.items():
        head, _, rest = path.partition(".")
        assert head in ("picks", "plan", "steps", "first_step", "verdict"), path
        if head in ("steps", "first_step"):
            assert rest in STEP_VALUES, path
        if rest in PICK_OPTIONS:
            check_words(rest, condition)
        literals(condition)


def check_words(name: str, condition: Any) -> None:
    words = {word for word in literals(condition) if isinstance(word, str)}
    known = PICK_OPTIONS.get(name, set()) | ({"round"} if name == "kappa_deg" else set())
    assert words <= known, f"{name}: {sorted(words - known)} not among {sorted(map(str, known))}"


def check_expectations(expect: dict[str, Any]) -> None:
    assert set(expect) <= EXPECT_KEYS, set(expect) - EXPECT_KEYS
    assert set(expect["verdict"]) <= VERDICTS
    for name, wanted in expect.get("picks", {}).items():
        assert name in PICK_OPTIONS or name in PLAIN_PICKS, name
        assert set(wanted) <= {"accept", "tolerate", "must_not"}, name
        for condition in wanted.values():
            check_words(name, condition)
        for word in literals(wanted.get("accept", [])) + literals(wanted.get("tolerate", [])):
            assert not holds(wanted.get("must_not", []), word), f"{name}: {word} both accepted and ruled out"
    named = expect.get("cautions", []) + expect.get("cautions_not", [])
    named += [entry["key"] for entry in expect.get("cautions_if", [])]
    flat = [key for entry in named for key in (entry if isinstance(entry, list) else [entry])]
    assert set(flat) <= CAUTIONS, set(flat) - CAUTIONS
    for entry in expect.get("cautions_if", []):
        check_paths(entry.get("when", {}))
    for entry in expect.get("must_not_say", []):
        assert entry["what"]
        assert "when" in entry or "says" in entry
        check_paths(entry.get("when", {}))
    for name, (low, high) in expect.get("ranges", {}).items():
        assert name in STEP_VALUES
        assert 0 < low < high


@pytest.mark.parametrize("case", load_cases(), ids=lambda case: case["path"].stem)
def test_case_file_is_well_formed(case: Case) -> None:
    head, expect = case["case"], case["expect"]
    assert set(case) == {"case", "job", "expect", "path"}
    assert set(head) == {"id", "title", "persona", "why", "confidence", "invented"}
    assert head["invented"] is True
    assert head["confidence"] in ("high", "medium")
    assert head["persona"] in ("junior_machinist", "process_engineer", "estimator")
    assert len(head["why"].split()) >= 12
    check_expectations(expect)
    if "after_confirm" in expect:
        check_expectations(expect["after_confirm"])
    if not {"ask", "refuse"} & set(expect["verdict"]):
        assert {"cutter_class", "diameter_mm", "rake"} <= set(expect["picks"])


def test_no_id_is_used_twice() -> None:
    ids = [case["case"]["id"] for case in load_cases()]
    assert len(ids) == len(set(ids)) == len(list((ROOT / "cases" / "accept").glob("*.yaml")))


@pytest.mark.parametrize(
    "fact", ["work.feature", "work.interruptions", "work.skin", "machine.class", "machine.control"]
)
def test_cases_reach_every_kind_of_job(fact: str) -> None:
    section, name = fact.split(".")
    values = [case["job"].get(section, {}).get(name) for case in load_cases()]
    used = {value for found in values for value in (found if isinstance(found, list) else [found])}
    unused = set(load_vocabulary(ROOT).facts[fact].options) - used - RARE
    assert not unused, f"no case has {fact} {sorted(map(str, unused))}"


def test_cases_reach_every_verdict() -> None:
    assert {verdict for case in load_cases() for verdict in case["expect"]["verdict"]} == VERDICTS
