"""Random rule bases: every engine against a brute-force fixpoint and against CLIPS, through clipspy."""

from __future__ import annotations

import random
from itertools import product

import clips
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from millreason.inference import Fact, Firing, InferenceRule, Test, engine_names, make_engine

NUMBERS = (0, -0.0, 1, 2, 2.5, -3, 1e-05, 1e16)
TEXTS = ("", "1", "2.5", "long", "longer", 'say "so"', "back\\slash", "gr\u00f6\u00dfe", "true")
VALUES = st.sampled_from((*NUMBERS, *TEXTS, True, False))
ATTRIBUTES = st.sampled_from(("a", "b"))
KINDS = st.sampled_from(("value",) * 6 + ("missing", "lacks"))
Base = tuple[list[InferenceRule], dict[str, list[Fact]], list[Fact]]
COMMON = {"deadline": None, "derandomize": True, "database": None, "suppress_health_check": list(HealthCheck)}


@st.composite
def conditions(draw: st.DrawFn) -> Test:
    op = draw(st.sampled_from(("eq", "ne", "in", "not_in", "lt", "le", "gt", "ge", "between")))
    if op in ("eq", "ne"):
        value = draw(VALUES)
    elif op in ("in", "not_in"):
        value = tuple(draw(st.lists(VALUES, min_size=1, max_size=4)))
    elif op == "between":
        value = tuple(sorted(draw(st.tuples(st.sampled_from(NUMBERS), st.sampled_from(NUMBERS)))))
    else:
        value = draw(st.sampled_from(NUMBERS))
    return Test(draw(ATTRIBUTES), op, value, draw(KINDS))


FACT = st.builds(Fact, ATTRIBUTES, VALUES, KINDS)


@st.composite
def bases(draw: st.DrawFn) -> Base:
    drawn = draw(st.lists(st.lists(conditions(), min_size=1, max_size=3), min_size=4, max_size=9))
    rules = [InferenceRule(f"R{number}", tuple(tests)) for number, tests in enumerate(drawn)]
    makes = {rule.id: draw(st.lists(FACT, min_size=1, max_size=3)) for rule in rules}
    return rules, makes, draw(st.lists(FACT, min_size=4, max_size=9))


def meets(fact: Fact, test: Test) -> bool:
    """Say what a test means, in the plainest words."""
    if (fact.attribute, fact.kind) != (test.attribute, test.kind):
        return False
    values = test.value if isinstance(test.value, tuple) else (test.value,)
    same = any(fact.value == v and isinstance(fact.value, bool) is isinstance(v, bool) for v in values)
    if test.op in ("eq", "in"):
        return same
    if test.op in ("ne", "not_in"):
        return not same
    if isinstance(fact.value, str | bool):
        return False
    number = fact.value
    return {
        "lt": number < values[0],
        "le": number <= values[0],
        "gt": number > values[0],
        "ge": number >= values[0],
        "between": values[0] <= number <= values[-1],
    }[test.op]


def brute_force(base: Base) -> set[tuple[str, tuple[Fact, ...]]]:
    rules, makes, facts = base
    known = set(facts)
    while True:
        fired = {
            (rule.id, chosen)
            for rule in rules
            for chosen in product(*([fact for fact in known if meets(fact, test)] for test in rule.tests))
        }
        made = {fact for rule, _ in fired for fact in makes[rule]}
        if made <= known:
            return fired
        known |= made


def run(base: Base, kind: str) -> list[Firing]:
    rules, makes, facts = base
    engine = make_engine(rules, kind)
    firings = engine.run(facts, lambda rule, chosen: makes[rule])
    engine.close()
    return firings


def pairs(firings: list[Firing]) -> set[tuple[str, tuple[Fact, ...]]]:
    assert len(firings) == len({(firing.rule, firing.facts) for firing in firings})
    return {(firing.rule, firing.facts) for firing in firings}


@settings(max_examples=600, **COMMON)
@given(bases(), st.randoms(use_true_random=False))
def test_all_engines_agree_with_a_brute_force_fixpoint(base: Base, dice: random.Random):
    expected = brute_force(base)
    rules, makes, facts = base
    shuffled = (dice.sample(rules, len(rules)), makes, dice.sample(facts, len(facts)))
    results = [run(base, kind) for kind in engine_names()] + [run(shuffled, kind) for kind in engine_names()]
    assert pairs(results[0]) == expected
    assert all(firings == results[0] for firings in results)
    assert_argument_is_grounded(results[0], facts)


def assert_argument_is_grounded(firings: list[Firing], given_facts: list[Fact]) -> None:
    known = set(given_facts)
    for firing in firings:
        assert set(firing.facts) <= known, "a firing rests on facts that were given or made before it"
        assert not known & set(firing.made), "a fact is made once"
        known.update(firing.made)
        assert set(firing.already_known) <= known


def literal(value: object) -> str:
    if isinstance(value, bool):
        return str(value).upper()
    if isinstance(value, str):
        escaped = value.replace("\\", "\\\\").replace('"', '\\"')
        return f'"{escaped}"'
    return repr(float(value) + 0.0)


def constraint(test: Test, name: str) -> str:
    values = test.value if isinstance(test.value, tuple) else (test.value,)
    same = "(or FALSE " + " ".join(f"(eq {name} {literal(value)})" for value in values) + ")"
    if test.op in ("eq", "in"):
        return same
    if test.op in ("ne", "not_in"):
        return f"(not {same})"
    if test.op == "between":
        return f"(and (floatp {name}) (<= {literal(values[0])} {name} {literal(values[1])}))"
    sign = {"lt": "<", "le": "<=", "gt": ">", "ge": ">="}[test.op]
    return f"(and (floatp {name}) ({sign} {name} {literal(values[0])}))"


def clips_pattern(test: Test, number: int) -> str:
    subject = f'(attribute "{test.attribute}") (kind "{test.kind}")'
    return f"?f{number} <- (fact {subject} (value ?v{number}&:{constraint(test, f'?v{number}')}))"


def clips_rule(rule: InferenceRule) -> str:
    patterns = " ".join(clips_pattern(test, number) for number, test in enumerate(rule.tests))
    bound = " ".join(f"?f{number}" for number in range(len(rule.tests)))
    return f'(defrule {rule.id} {patterns} => (fire "{rule.id}" {bound}))'


def run_clips(base: Base) -> list[tuple[str, tuple[Fact, ...]]]:
    rules, makes, facts = base
    environment = clips.Environment()
    environment.build("(deftemplate fact (slot attribute) (slot kind) (slot value))")
    template = environment.find_template("fact")
    stated: dict[int, Fact] = {}
    fired: list[tuple[str, tuple[Fact, ...]]] = []

    def state(new: list[Fact]) -> None:
        for fact in dict.fromkeys(new):
            if fact not in stated.values():
                slots = {"attribute": fact.attribute, "kind": fact.kind, "value": fact.value}
                stated[template.assert_fact(**slots).index] = fact

    def fire(rule: str, *chosen: clips.Fact) -> None:
        fired.append((rule, tuple(stated[fact.index] for fact in chosen)))
        state(makes[rule])

    environment.define_function(fire)
    for rule in rules:
        environment.build(clips_rule(rule))
    environment.reset()
    state(facts)
    environment.run()
    return fired


@pytest.mark.parametrize("kind", engine_names())
@settings(max_examples=250, **COMMON)
@given(base=bases())
def test_engines_agree_with_clips(kind: str, base: Base):
    fired = run_clips(base)
    assert pairs(run(base, kind)) == set(fired)
    assert len(fired) == len(set(fired))


def test_the_random_bases_are_worth_running():
    """Chains of firings, joins and multi-valued attributes do occur in them."""
    seen = {"firings": 0, "chained": 0, "joined": 0, "bases": 0}

    @settings(max_examples=100, **COMMON)
    @given(bases())
    def look(base: Base) -> None:
        firings = run(base, "twin")
        given_facts = set(base[2])
        seen["bases"] += 1
        seen["firings"] += len(firings)
        seen["chained"] += sum(not set(firing.facts) <= given_facts for firing in firings)
        seen["joined"] += sum(len(firing.facts) > 1 for firing in firings)

    look()
    assert seen["firings"] > 3 * seen["bases"]
    assert seen["chained"] > seen["bases"]
    assert seen["joined"] > seen["bases"]
