"""The meaning of the inference interface, the same for every engine that works here."""

from __future__ import annotations

import pickle
import random
import sys
from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor

import pytest

from millreason.errors import MillreasonError, OutOfRangeError, RuleActionError, RuleSetLimitError
from millreason.inference import Fact, InferenceRule, RuleEngine, Test, engine_names, make_engine
from millreason.inference.matching import MOST_FACTS, MOST_FIRINGS

BRIEF = [
    InferenceRule("LONG", (Test("chip", "eq", "long"),)),
    InferenceRule("HEAVY", (Test("depth", "ge", 4), Test("chip", "ne", "short"))),
    InferenceRule("PITCH", (Test("room", "eq", "wide"), Test("depth", "between", (1, 9)))),
]
MAKES = {"LONG": [Fact("room", "wide")], "HEAVY": [Fact("room", "wide")], "PITCH": [Fact("pitch", "coarse")]}


def brief_action(rule: str, facts: tuple[Fact, ...]) -> list[Fact]:
    return MAKES[rule]


@pytest.fixture(params=engine_names())
def kind(request: pytest.FixtureRequest) -> str:
    return request.param


@pytest.fixture
def brief(kind) -> Iterator[RuleEngine]:
    engine = make_engine(BRIEF, kind)
    yield engine
    engine.close()


def fired(kind, test: Test, *facts: Fact) -> list[object]:
    """Return the values of the facts that meet a test."""
    engine = make_engine([InferenceRule("R", (test,))], kind)
    firings = engine.run(facts, lambda rule, chosen: [])
    engine.close()
    return [firing.facts[0].value for firing in firings]


def test_chained_facts_fire_further_rules_in_the_same_run(brief):
    firings = brief.run([Fact("chip", "long"), Fact("depth", 2)], brief_action)
    assert [firing.rule for firing in firings] == ["LONG", "PITCH"]
    assert firings[1].facts == (Fact("room", "wide"), Fact("depth", 2.0))
    assert firings[1].made == (Fact("pitch", "coarse"),)


def test_the_first_in_canonical_order_makes_a_fact_and_the_others_knew_it(brief):
    firings = brief.run([Fact("depth", 5), Fact("chip", "long")], brief_action)
    made = {firing.rule: (firing.made, firing.already_known) for firing in firings}
    wide = (Fact("room", "wide"),)
    assert made["HEAVY"] == (wide, ())
    assert made["LONG"] == ((), wide)


def test_given_facts_are_never_made(brief):
    firings = brief.run([Fact("chip", "long"), Fact("room", "wide"), Fact("pitch", "coarse")], brief_action)
    assert [(f.made, f.already_known) for f in firings] == [((), (Fact("room", "wide"),))]


def test_a_rule_fires_once_for_each_choice_of_facts(brief):
    facts = [
        Fact("depth", 5),
        Fact("depth", 6),
        Fact("depth", 0.5),
        Fact("chip", "long"),
        Fact("chip", "curled"),
    ]
    firings = brief.run(facts, lambda rule, chosen: [])
    heavy = [tuple(f.value for f in firing.facts) for firing in firings if firing.rule == "HEAVY"]
    assert heavy == [(5.0, "curled"), (5.0, "long"), (6.0, "curled"), (6.0, "long")]


def test_one_fact_may_meet_two_tests_of_a_rule(kind):
    engine = make_engine([InferenceRule("R", (Test("d", "ge", 2), Test("d", "le", 8)))], kind)
    firings = engine.run([Fact("d", 5), Fact("d", 9)], lambda rule, chosen: [])
    assert [tuple(f.value for f in firing.facts) for firing in firings] == [(5.0, 5.0), (9.0, 5.0)]


def test_rules_that_feed_each_other_come_to_rest(kind):
    rules = [InferenceRule("A", (Test("x", "eq", 1),)), InferenceRule("B", (Test("y", "eq", 1),))]
    makes = {"A": [Fact("y", 1)], "B": [Fact("x", 1)]}
    engine = make_engine(rules, kind)
    firings = engine.run([Fact("x", 1)], lambda rule, chosen: makes[rule])
    assert [(f.rule, f.made) for f in firings] == [("A", (Fact("y", 1),)), ("B", ())]


@pytest.mark.parametrize(
    ("test", "met"),
    [
        (Test("a", "eq", 3), [3.0]),
        (Test("a", "ne", 3), [True, 0.0, 7.5, "3", "x"]),
        (Test("a", "eq", "3"), ["3"]),
        (Test("a", "eq", True), [True]),
        (Test("a", "eq", -0.0), [0.0]),
        (Test("a", "in", (3, "x", False)), [3.0, "x"]),
        (Test("a", "not_in", (3, "x", 1)), [True, 0.0, 7.5, "3"]),
        (Test("a", "lt", 3), [0.0]),
        (Test("a", "le", 3), [0.0, 3.0]),
        (Test("a", "gt", 3), [7.5]),
        (Test("a", "ge", 3), [3.0, 7.5]),
        (Test("a", "between", (0, 3)), [0.0, 3.0]),
        (Test("a", "eq", "", "missing"), []),
        (Test("a", "eq", "x", "lacks"), ["x"]),
    ],
    ids=lambda value: f"{value.op}-{value.value}-{value.kind}" if isinstance(value, Test) else "",
)
def test_operators_are_strict_about_types(kind, test, met):
    facts = [Fact("a", value) for value in (3, 0, 7.5, True, "3", "x")]
    others = [Fact("b", 3), Fact("b", "", "missing"), Fact("a", "x", "lacks")]
    assert fired(kind, test, *facts, *others) == met


def test_missing_facts_meet_only_tests_for_them(kind):
    test = Test("a", "eq", "", "missing")
    assert fired(kind, test, Fact("a", "", "missing"), Fact("a", "")) == [""]


@pytest.mark.parametrize("low", [-1e300, -2.5, -1e-300, 0, 5e-324, 1e-05, 0.1, 1e16, 1.7e308])
def test_numbers_of_any_size_keep_their_order(kind, low):
    numbers = [-1.7e308, -1e16, -2.5, -2.4999999999999996, -1e-300, 0, 5e-324, 1e-05, 0.1, 0.1 + 2e-17, 1e16]
    facts = [Fact("a", number) for number in numbers]
    assert fired(kind, Test("a", "ge", low), *facts) == sorted({float(n) for n in numbers if n >= low})


@pytest.mark.parametrize("error", [ValueError("no such table"), KeyError("x"), ZeroDivisionError(), MillreasonError()])
def test_an_error_in_an_action_comes_out_with_the_rule_id(kind, brief, error):
    def fail(rule, chosen):
        raise error

    with pytest.raises(RuleActionError, match="rule HEAVY") as caught:
        brief.run([Fact("depth", 5), Fact("chip", "curled")], fail)
    assert caught.value.rule_id == "HEAVY"
    assert caught.value.__cause__ is error
    assert len(brief.run([Fact("chip", "long")], brief_action)) == 1


@pytest.mark.parametrize("stop", [KeyboardInterrupt, SystemExit])
def test_an_interrupt_in_an_action_stays_what_it_is(brief, stop):
    def interrupt(rule, chosen):
        raise stop

    with pytest.raises(stop):
        brief.run([Fact("chip", "long")], interrupt)
    assert len(brief.run([Fact("chip", "long")], brief_action)) == 1


def test_an_error_while_the_action_yields_its_facts_is_caught_too(brief):
    def fail(rule, chosen):
        yield Fact("room", "wide")
        raise ValueError("half way")

    with pytest.raises(RuleActionError, match="half way"):
        brief.run([Fact("chip", "long")], fail)


def test_a_rule_that_feeds_itself_is_stopped(kind):
    engine = make_engine([InferenceRule("COUNT", (Test("n", "ge", 0),))], kind)
    with pytest.raises(RuleSetLimitError, match=rf"COUNT: .* at most {MOST_FACTS} .* feed themselves"):
        engine.run([Fact("n", 0)], lambda rule, chosen: [Fact("n", chosen[0].value + 1)])


def test_a_rule_with_too_many_choices_is_stopped(kind):
    engine = make_engine([InferenceRule("PAIRS", (Test("n", "ge", 0), Test("n", "ge", 0)))], kind)
    facts = [Fact("n", number) for number in range(150)]
    with pytest.raises(RuleSetLimitError, match=rf"PAIRS: {MOST_FIRINGS + 1} firings, .* feed themselves"):
        engine.run(facts, lambda rule, chosen: [])


def test_more_facts_than_a_session_bears_are_refused(kind):
    engine = make_engine([InferenceRule("R", (Test("n", "lt", 0),))], kind)
    with pytest.raises(RuleSetLimitError, match=rf"run: {MOST_FACTS + 1} facts, but at most {MOST_FACTS}"):
        engine.run([Fact("n", number) for number in range(MOST_FACTS + 1)], lambda rule, chosen: [])


def test_many_threads_may_share_an_engine(brief):
    jobs = [[Fact("depth", n % 11), Fact("chip", ("long", "short", "curled")[n % 3])] for n in range(400)]
    expected = [brief.run(job, brief_action) for job in jobs]
    switch = sys.getswitchinterval()
    sys.setswitchinterval(1e-5)
    try:
        with ThreadPoolExecutor(8) as pool:
            assert list(pool.map(lambda job: brief.run(job, brief_action), jobs)) == expected
    finally:
        sys.setswitchinterval(switch)
    assert len({len(firings) for firings in expected}) > 2


def test_an_action_may_run_the_engine_itself(brief):
    inner = []

    def nest(rule, chosen):
        inner.append(brief.run([Fact("depth", 5), Fact("chip", "curled")], brief_action))
        return brief_action(rule, chosen)

    outer = brief.run([Fact("chip", "long"), Fact("depth", 2)], nest)
    assert [firing.rule for firing in outer] == ["LONG", "PITCH"]
    assert [[firing.rule for firing in firings] for firings in inner] == [["HEAVY", "PITCH"]] * 2


def test_the_order_of_rules_and_facts_does_not_matter(kind):
    facts = [
        Fact("depth", 5),
        Fact("depth", 6),
        Fact("chip", "long"),
        Fact("chip", "curled"),
        Fact("room", "x"),
    ]
    expected = make_engine(BRIEF, kind).run(facts, brief_action)
    dice = random.Random(7)
    for _ in range(30):
        rules, shuffled = dice.sample(BRIEF, len(BRIEF)), dice.sample(facts, len(facts))
        assert make_engine(rules, kind).run(shuffled, brief_action) == expected


def test_facts_compare_by_type_and_value():
    assert Fact("a", 1) == Fact("a", 1.0)
    assert len({Fact("a", 1), Fact("a", True), Fact("a", "1"), Fact("a", 1, "lacks"), Fact("b", 1)}) == 5
    assert pickle.loads(pickle.dumps(Fact("a", 1))) == Fact("a", 1)


@pytest.mark.parametrize("value", [float("nan"), float("inf"), -float("inf"), 10**400])
def test_numbers_that_are_not_finite_are_refused(value):
    with pytest.raises(OutOfRangeError, match=r"depth is .* a finite number"):
        Fact("depth", value)
    with pytest.raises(RuleSetLimitError, match=r"rule R: depth eq .* a finite number"):
        make_engine([InferenceRule("R", (Test("depth", "eq", value),))])


@pytest.mark.parametrize("value", [None, [1], {"a": 1}, b"x"])
def test_values_that_are_not_scalars_are_refused(value):
    with pytest.raises(TypeError, match=r"depth: .* only text, numbers and bools"):
        Fact("depth", value)
    with pytest.raises(RuleSetLimitError, match=r"rule R: depth eq .* only text, numbers and bools"):
        make_engine([InferenceRule("R", (Test("depth", "eq", value),))])


@pytest.mark.parametrize(
    ("tests", "message"),
    [
        ((), "rule R: 0 tests, but at least 1"),
        ((Test("a", "in", ()),), "rule R: a in .* the list is empty"),
        ((Test("a", "eq", (1, 2)),), "rule R: a eq .* takes one value"),
        ((Test("a", "lt", "x"),), "rule R: a lt 'x': only numbers have an order"),
        ((Test("a", "ge", True),), "only numbers have an order"),
        ((Test("a", "between", (3, 1)),), "the lower bound lies above the upper"),
        ((Test("a", "between", 3),), "1 bounds; 'between' takes 2"),
        ((Test("a", "like", "x"),), "unknown operator; allowed are eq, ne"),
    ],
)
def test_rules_that_cannot_be_meant_are_refused(kind, tests, message):
    with pytest.raises(RuleSetLimitError, match=message):
        make_engine([InferenceRule("R", tests)], kind)


def test_a_repeated_rule_id_is_refused():
    with pytest.raises(RuleSetLimitError, match="rule LONG: the id is used twice"):
        make_engine([*BRIEF, BRIEF[0]])


def test_an_unknown_engine_is_refused():
    with pytest.raises(MillreasonError, match=r"'abacus' does not work here; available: .*twin"):
        make_engine(BRIEF, "abacus")


def test_the_durable_engine_is_the_default_where_it_works():
    assert make_engine(BRIEF).name == engine_names()[0]
    assert engine_names()[-1] == "twin"


def test_without_the_extension_the_twin_serves(monkeypatch):
    monkeypatch.setitem(sys.modules, "durable_rules_engine", None)
    monkeypatch.delitem(sys.modules, "millreason.inference.durable_session", raising=False)
    assert engine_names() == ("twin",)
    engine = make_engine(BRIEF)
    assert engine.name == "twin"
    assert [firing.rule for firing in engine.run([Fact("chip", "long")], brief_action)] == ["LONG"]
    with pytest.raises(MillreasonError, match="'durable' does not work here"):
        make_engine(BRIEF, "durable")


def test_no_rules_no_firings(kind):
    assert make_engine([], kind).run([Fact("a", 1)], brief_action) == []
