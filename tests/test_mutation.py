"""The tests of the rules notice small changes to them; and the measure itself can tell when they do not."""

from __future__ import annotations

import random
from dataclasses import replace
from functools import cache
from pathlib import Path
from typing import Any

import pytest

from acceptance import load_cases
from millreason.choice import Adviser, load_adviser
from millreason.rulebook import Rule, TestSpec
from mutants import KINDS, Mutant, opposites
from mutation import TARGET, Cases, Trials, all_mutants, noticed_by_cases, run, second_look
from rule_trials import Bench, Bound, Trial, beside, bounds, complete, covers, load_trials, missing_trials, short

SEED = 1
DRAWN = 40
LASTING = ("rule dropped", "conclusion swapped", "strength changed")
LEAST_BY_CASES = 0.25


@cache
def adviser() -> Adviser:
    return load_adviser(engine="twin")


@cache
def mutants_of_all() -> list[Mutant]:
    return all_mutants(adviser())


def rule(rule_id: str) -> Rule:
    return adviser().rulebook.rules[rule_id]


# ---------------------------------------------------------------------- the trials themselves
@pytest.mark.parametrize("trial", load_trials(), ids=lambda trial: trial.rule)
def test_trial_states_what_the_rule_gives(trial: Trial) -> None:
    assert trial.gives == short(rule(trial.rule).then), "run python tests/rule_trials.py to fill in what is missing"


def test_trials_stand_close_to_every_threshold() -> None:
    bench, trials = Bench(adviser().vocabulary), load_trials()
    open_ones = [
        made
        for one in adviser().rulebook.rules.values()
        for made in missing_trials(one, [t for t in trials if t.rule == one.id], adviser().vocabulary, bench)
    ]
    assert not open_ones, "run python tests/rule_trials.py"


@pytest.mark.parametrize(
    ("bound", "inside", "outside"),
    [
        (Bound("work.stock_mm", "above", 4.0, True, False), 4.04, 4.0),
        (Bound("work.stock_mm", "at_least", 4.0, True, True), 4.0, 3.96),
        (Bound("work.stock_mm", "below", 0.5, False, False), 0.495, 0.5),
        (Bound("plan.layers", "at_least", 8.0, True, True), 8.0, 7.0),
        (Bound("plan.power_use", "above", 0.0, True, False), 0.01, 0.0),
    ],
)
def test_values_beside_a_threshold(bound: Bound, inside: float, outside: float) -> None:
    assert beside(bound) == (inside, outside)
    assert covers(Trial("PIT-001", {bound.fact: inside}, {bound.fact: outside}), bound)
    assert not covers(Trial("PIT-001", {bound.fact: inside}, {bound.fact: inside}), bound)
    far = inside + 10 * (inside - outside)
    assert not covers(Trial("PIT-001", {bound.fact: far}, {bound.fact: outside}), bound)
    also_other = {bound.fact: outside, "work.feature": "slot"}
    assert not covers(Trial("PIT-001", {bound.fact: inside}, also_other), bound)


def test_filling_in_adds_what_is_missing_and_changes_nothing_else(tmp_path: Path) -> None:
    chosen = next(one for one in adviser().rulebook.rules.values() if len(list(bounds(one))) == 1)
    trial = next(one for one in load_trials() if one.rule == chosen.id)
    file = tmp_path / "some.yaml"
    file.write_text(
        f"# A remark.\n- {{rule: {chosen.id}, fires: {flow(trial.fires)}, misses: {{work.width_mm: 77}}}}\n"
    )
    assert complete(adviser().rulebook, adviser().vocabulary, tmp_path) == 2
    first, second = load_trials(tmp_path)
    assert first.misses == {"work.width_mm": 77}
    assert first.gives == second.gives == short(chosen.then)
    assert covers(second, next(bounds(chosen)))
    assert file.read_text().startswith("# A remark.\n")
    file.write_text(file.read_text().replace(first.gives, "something else", 1))
    assert complete(adviser().rulebook, adviser().vocabulary, tmp_path) == 0
    assert load_trials(tmp_path)[0].gives == "something else", "what stands there is not overwritten"


def flow(facts: dict[str, Any]) -> str:
    words = (f"{name}: {str(value).lower() if isinstance(value, bool) else value}" for name, value in facts.items())
    return "{" + ", ".join(words) + "}"


# ---------------------------------------------------------------------- the mutants
@pytest.mark.parametrize(
    ("fact", "condition", "values"),
    [
        ("work.stock_mm", TestSpec(above=4), [3, 4, 5, None]),
        ("work.stock_mm", TestSpec(at_most=4), [3, 4, 5, None]),
        ("work.stock_mm", TestSpec(between=[2, 4]), [1, 2, 3, 4, 5, None]),
        ("work.stock_mm", TestSpec(known=True), [3, None]),
        ("work.feature", "slot", ["slot", "shoulder", None]),
        ("work.feature", ["slot", "shoulder"], ["slot", "shoulder", "open_face", None]),
        ("work.feature", TestSpec(none_of=["slot"]), ["slot", "shoulder", None]),
        ("machine.worn", True, [True, False, None]),
    ],
)
def test_flipped_condition_holds_where_the_other_does_not(fact: str, condition: Any, values: list[Any]) -> None:
    bench, plain = Bench(adviser().vocabulary), rule("PIT-001")
    flipped = list(opposites(condition, adviser().vocabulary.facts[fact]))
    for value in values:
        facts = {} if value is None else {fact: value}
        held = bench.fires(plain.model_copy(update={"when": {fact: condition}}), facts)
        others = [bench.fires(plain.model_copy(update={"when": {fact: other}}), facts) for other in flipped]
        about_presence = isinstance(condition, TestSpec) and condition.known is not None
        assert held + sum(others) == (1 if value is not None or about_presence else 0), (value, held, others)


def test_every_rule_is_dropped_and_every_condition_flipped() -> None:
    kinds: dict[str, set[str]] = {kind: {m.rule_id for m in mutants_of_all() if m.kind == kind} for kind in KINDS}
    rules = adviser().rulebook.rules
    assert kinds["rule dropped"] == kinds["condition flipped"] == set(rules)
    assert kinds["threshold moved"] == {one.id for one in rules.values() if list(bounds(one))}
    with_strength = {one.id for one in rules.values() if one.then.strength or one.then.lower}
    assert kinds["strength changed"] == with_strength


def test_no_mutant_is_the_rule_itself() -> None:
    assert [str(m) for m in mutants_of_all() if m.rule == adviser().rulebook.rules[m.rule_id]] == []


# ---------------------------------------------------------------------- what is noticed
def test_trials_hold_for_the_rules_as_they_are() -> None:
    trials = Trials(adviser(), load_trials())
    assert [one.id for one in adviser().rulebook.rules.values() if not trials.hold(one)] == []


def test_trials_notice_nearly_every_mutant() -> None:
    tally = run(Trials(adviser(), load_trials()), mutants_of_all())
    print("\n".join(tally.lines()))
    assert tally.share >= TARGET, "\n".join(tally.lines())
    for kind in KINDS:
        assert tally.by_trials[kind] >= TARGET * tally.tried[kind], kind


def test_poor_trials_are_seen_to_be_poor() -> None:
    without_conclusions = [replace(trial, gives="") for trial in load_trials()]
    tally = run(Trials(adviser(), without_conclusions), mutants_of_all())
    assert tally.by_trials["strength changed"] == 0
    assert tally.share < TARGET
    assert len(tally.survivors) == tally.tried.total() - tally.by_trials.total()
    nothing = run(Trials(adviser(), []), mutants_of_all())
    assert nothing.share == 0


def test_cases_take_a_second_look_at_survivors() -> None:
    cases = [case for case in load_cases() if case["path"].stem in ("wide-steel-plate", "titanium-plate-roughing")]
    held = Cases(adviser(), cases, slowest_s=60)
    gone = [m for m in mutants_of_all() if m.kind == "rule dropped"]
    fired, never = [m for m in gone if m.rule_id in held.fired], [m for m in gone if m.rule_id not in held.fired][:2]
    tally = run(Trials(adviser(), []), [*fired[::8], *never])
    tried = len(tally.survivors)
    second_look(tally, held, None)
    assert set(never) <= set(tally.survivors), "a rule that fires in no case is missed by none"
    assert tally.by_cases["rule dropped"] == tried - len(tally.survivors) > 0
    assert all("no trial fires the rule" in line for line in tally.lines() if line.startswith("survivor"))


@pytest.mark.slow
def test_cases_alone_notice_their_part_of_a_sample() -> None:
    """What the rules are for is the answer: the cases must notice mutants without the help of the trials."""
    cases = Cases(adviser(), load_cases())
    lasting = [m for m in mutants_of_all() if m.kind in LASTING and m.rule_id in cases.fired]
    drawn = random.Random(SEED).sample(lasting, DRAWN)
    told = noticed_by_cases(cases, drawn)
    for mutant, case in told:
        print(f"{case or 'unnoticed':<40}{mutant}")
    assert sum(bool(case) for _, case in told) >= LEAST_BY_CASES * DRAWN
    unchanged = [Mutant(m.rule_id, m.kind, "put back as it was", rule(m.rule_id)) for m, case in told if case]
    assert [case for _, case in noticed_by_cases(cases, unchanged[:3]) if case] == []
    unused = [m for m in mutants_of_all() if m.kind == KINDS[0] and m.rule_id not in cases.fired]
    assert all(case == "" for _, case in noticed_by_cases(cases, unused[:3]))
