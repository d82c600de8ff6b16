"""Why, why not, holds while, assumptions and robustness on small jobs: what is said was run, and is so."""

from __future__ import annotations

import math
from functools import cache

import jsonschema
import pytest

from example_jobs import CASES, IRON, PLATE, SHOULDER, TITANIUM, WEAK, adviser, case, read
from millreason.choice import Adviser
from millreason.errors import DataError, MillreasonError
from millreason.explain.argument import assumptions, explain, holds_while, robustness, why, why_all, why_not
from millreason.explain.quick import quick_and_sure
from millreason.explain.reruns import changed_job, result_of, run
from millreason.explain.sensitivity import effect_of
from millreason.explain.variations import Input, Span, other_values, rule_lines, tidy
from millreason.explain.why import tree_lines
from millreason.explanation_records import Because, Explanation, Interval, Result
from millreason.job import Job
from millreason.trace import Answer, answer_schema

ON_HAND = f"""{PLATE}
cutters:
  - {{id: A, diameter: 80 mm, teeth: 6, kappa: 45 deg}}
  - {{id: B, diameter: 63 mm, teeth: 8, kappa: 90 deg}}
"""
REFUSED = SHOULDER.replace("corner_radius: 1 mm", "corner_radius: 0.3 mm")
ASKED = PLATE.replace(", stock: 3 mm", "")
JOBS = {"plate": PLATE, "shoulder": SHOULDER, "iron": IRON, "titanium": TITANIUM, "weak": WEAK}


@cache
def explained(text: str) -> Answer:
    return explain(adviser(), read(text))


def argument(text: str) -> Explanation:
    found = explained(text).explanation
    assert found is not None
    return found


def rerun(job: Job, fact: str, value: object) -> Result:
    """Run a changed job without anything the explanation remembers."""
    return result_of(adviser().decide(changed_job(job, {fact: value}, adviser().vocabulary)))  # type: ignore[dict-item]


def nodes(tree: Because) -> list[Because]:
    return [tree, *(below for part in tree.because for below in nodes(part))]


# ---------------------------------------------------------------------- the quick adviser decides alike
@pytest.mark.parametrize("path", CASES, ids=lambda path: path.stem)
def test_a_quick_run_ends_like_a_full_one(path: object) -> None:
    try:
        job = case(path)  # type: ignore[arg-type]
    except DataError:
        pytest.skip("the case is about a file with errors")
    quick, sure = quick_and_sure(adviser())
    full = result_of(adviser().decide(job))
    assert result_of(quick.decide(job)) == full
    assert result_of(sure.decide(job)) == full
    # A second run answers from what is remembered.
    assert result_of(quick.decide(job)) == full


CHANGES = [
    {"work.stock_mm": 4.5},
    {"work.width_mm": 61.0},
    {"machine.power_kw": 3.0, "machine.torque_nm": 25.0},
    {"fixture.rigidity": "weak"},
    {"work.skin": ("cast_skin", "weld")},
    {"work.hardness_hb": 310.0},
    {"require.finish_ra_um": None},
    {"machine.speed_steps_rpm": (200.0, 400.0, 800.0)},
]


@pytest.mark.parametrize("changes", CHANGES, ids=lambda changes: "+".join(changes))
@pytest.mark.parametrize("name", JOBS)
def test_a_changed_job_ends_alike_on_every_adviser(name: str, changes: dict[str, object]) -> None:
    job = changed_job(read(JOBS[name]), changes, adviser().vocabulary)  # type: ignore[arg-type]
    quick, sure = quick_and_sure(adviser())
    full = run(adviser(), job)
    assert run(quick, job) == full
    assert run(sure, job) == full


def test_the_durable_engine_confirms_what_the_plain_one_finds() -> None:
    durable = adviser("durable")
    for text in (PLATE, WEAK):
        job = read(text)
        plain = holds_while(adviser(), job)
        assert holds_while(durable, job) == plain


# ---------------------------------------------------------------------- why
@pytest.mark.parametrize("name", JOBS)
def test_every_pick_goes_down_to_facts(name: str) -> None:
    answer = explained(JOBS[name])
    for tree in why_all(adviser(), answer):
        assert tree.because, tree.text
        for node in nodes(tree):
            if node.kind == "rule":
                assert node.name in adviser().rulebook.rules
                assert node.because, f"{node.name} rests on nothing"
            if node.kind == "fact" and not node.because:
                assert node.origin in ("given", "looked_up", "assumed", "computed", "absent", "concluded")


def test_a_looked_up_fact_names_its_source() -> None:
    tree = why(adviser(), explained(IRON), "pitch")
    group = [node for node in nodes(tree) if node.name == "material.iso_group"]
    assert group
    assert all(node.origin == "looked_up" and node.basis is not None for node in group)


def test_an_assumed_fact_names_the_rule_that_assumed_it() -> None:
    answer = explained(PLATE)
    for record in answer.assumptions:
        tree = why(adviser(), answer, record.name)
        assert tree.origin == "assumed"
        assert [part.name for part in tree.because] == [record.by]


def test_a_computed_value_goes_down_to_the_force_data() -> None:
    answer = explained(PLATE)
    names = {node.name for node in nodes(why(adviser(), answer, "net power"))}
    assert "material.kc11_n_mm2" in names
    assert any(name.startswith("specific cutting force") for name in names)


def test_an_input_of_a_formula_comes_from_the_very_number_before() -> None:
    answer = explained(PLATE)
    results = {use.result_of: use.value for use in answer.trace.calculations}
    tree = why(adviser(), answer, "mean torque")
    power = next(node for node in tree.because if node.name.startswith("net power"))
    torque = next(use for use in answer.trace.calculations if use.result_of == tree.name)
    assert torque.inputs["power_kw"] == results[power.name]


def test_a_caution_and_the_verdict_have_their_reasons() -> None:
    answer = explained(TITANIUM)
    assert answer.cautions
    for caution in answer.cautions:
        tree = why(adviser(), answer, caution.key)
        assert {part.name for part in tree.because} <= set(caution.rules)
        assert tree.because
    assert why(adviser(), explained(ASKED)).because[0].name == "work.stock_mm"
    refusal = explained(REFUSED).refusal
    assert refusal is not None
    assert {part.name for part in why(adviser(), explained(REFUSED)).because} == {
        limit.rule for limit in refusal.limits
    }


def test_what_is_not_there_is_said_with_what_is() -> None:
    with pytest.raises(MillreasonError, match="Did you mean 'pitch'"):
        why(adviser(), explained(PLATE), "pich")


def test_the_short_form_is_shorter_and_keeps_the_reasons() -> None:
    tree = why(adviser(), explained(PLATE), "lead")
    short, full = tree_lines(tree), tree_lines(tree, full=True)
    assert len(short) < len(full)
    for part in tree.because:
        assert any(part.text in line for line in short)


# ---------------------------------------------------------------------- why not
def test_the_pick_itself_is_said_to_be_the_pick() -> None:
    assert why_not(adviser(), read(PLATE), "lead", "45").outcome == "chosen"


def test_an_outweighed_option_has_both_ledgers() -> None:
    found = why_not(adviser(), read(PLATE), "rake", "double negative", nearest=False)
    assert found.outcome == "outweighed"
    ours, theirs = found.sides
    assert ours.tool_evidence - ours.lowered >= theirs.tool_evidence - theirs.lowered
    assert math.isclose(ours.balance, sum(entry.weight for entry in ours.evidence))
    assert math.isclose(theirs.balance, sum(entry.weight for entry in theirs.evidence))


def test_an_option_ruled_out_names_the_rule_and_its_facts() -> None:
    found = why_not(adviser(), read(SHOULDER), "lead", "45", nearest=False)
    assert found.outcome == "ruled_out"
    rules = adviser().rulebook.rules
    for reason in found.because:
        assert rules[reason.name].then.rule_out
        assert {node.name for node in reason.because} <= {*rules[reason.name].when, *rules[reason.name].implied_missing}


def test_a_rejected_option_gives_the_value_against_the_limit() -> None:
    found = why_not(adviser(), read(PLATE), "diameter", "125 mm", nearest=False)
    assert found.outcome == "rejected"
    assert found.limits
    assert any(isinstance(limit.value, int | float) and limit.limit is not None for limit in found.limits)


def test_a_cutter_on_hand_is_argued_by_its_name() -> None:
    chosen = explained(ON_HAND).picks
    assert chosen is not None
    other = "B" if chosen.own_cutter == "A" else "A"
    found = why_not(adviser(), read(ON_HAND), "cutter", other, nearest=False)
    assert found.outcome in ("outweighed", "rejected", "ruled_out")
    with pytest.raises(MillreasonError, match="On hand: A, B"):
        why_not(adviser(), read(ON_HAND), "cutter", "C")


def test_a_diameter_that_is_not_made_names_the_nearest() -> None:
    found = why_not(adviser(), read(PLATE), "diameter", "90", nearest=False)
    assert found.outcome == "not_made"
    assert "80 mm" in found.text


@pytest.mark.parametrize(
    ("pick", "option", "said"),
    [
        ("lead", "17", "Known: lead 0, 15"),
        ("pitch", "loose", "Options: fine, coarse"),
        ("diameter", "80 kg", "Allowed: mm"),
        ("colour", "red", "Picks: lead"),
    ],
)
def test_an_option_that_is_none_is_an_error_with_what_is(pick: str, option: str, said: str) -> None:
    with pytest.raises(MillreasonError, match=said):
        why_not(adviser(), read(PLATE), pick, option)


def test_lead_and_kappa_are_the_same_angle_from_two_sides() -> None:
    by_lead = why_not(adviser(), read(PLATE), "lead", "0", nearest=False)
    by_kappa = why_not(adviser(), read(PLATE), "kappa", "90", nearest=False)
    assert by_lead == by_kappa


@pytest.mark.parametrize(("pick", "option"), [("lead", "0"), ("pitch", "coarse")])
def test_the_nearest_change_makes_the_option_the_pick(pick: str, option: str) -> None:
    job = read(PLATE)
    found = why_not(adviser(), job, pick, option)
    assert found.nearest
    for change in found.nearest:
        after = run(adviser(), changed_job(job, change.values, adviser().vocabulary))  # type: ignore[arg-type]
        assert after.picks[found.pick] == found.option
        assert after.picks == change.picks


def test_half_of_the_nearest_change_of_a_number_is_not_enough() -> None:
    job = read(PLATE)
    single = [change for change in why_not(adviser(), job, "pitch", "coarse").nearest if len(change.values) == 1]
    numbers = [(fact, value) for change in single for fact, value in change.values.items() if isinstance(value, float)]
    known = [(fact, value) for fact, value in numbers if fact in job.given]
    assert known
    for fact, value in known:
        now = job.given[fact].value
        assert isinstance(now, float)
        assert rerun(job, fact, tidy(math.sqrt(now * value))).picks["pitch"] != "coarse"


# ---------------------------------------------------------------------- holds while
def numbers_of(text: str) -> list[Interval]:
    return argument(text).intervals


@pytest.mark.parametrize("name", JOBS)
def test_every_end_is_true_on_both_sides(name: str) -> None:
    job, base = read(JOBS[name]), run(adviser(), read(JOBS[name]))
    ends = [(entry, end) for entry in numbers_of(JOBS[name]) for end in (entry.low, entry.high) if end is not None]
    assert ends
    for entry, end in ends:
        assert abs(end.inside - end.beyond) <= 0.0101 * max(abs(end.inside), abs(end.beyond)), entry.fact
        if end.inside != entry.value:
            assert rerun(job, entry.fact, end.inside).picks == base.picks
        after = rerun(job, entry.fact, end.beyond)
        assert after.picks != base.picks
        assert {pick: after.picks[pick] for pick in end.changed} == end.changed
        assert end.verdict == after.verdict


def test_the_picks_hold_at_the_bounds_where_no_end_was_met() -> None:
    job, base = read(PLATE), run(adviser(), read(PLATE))
    for entry in numbers_of(PLATE):
        for end, bound in ((entry.low, entry.bounds[0]), (entry.high, entry.bounds[1])):
            if end is None and bound != entry.value:
                assert rerun(job, entry.fact, bound).picks == base.picks, entry.fact


def test_an_end_that_a_rule_draws_is_found_on_its_line() -> None:
    """Where a threshold of a rule moves the picks, the two sides of the end embrace it."""
    lines = rule_lines(adviser().rulebook)
    embraced = [
        entry.fact
        for text in JOBS.values()
        for entry in numbers_of(text)
        for end in (entry.low, entry.high)
        if end is not None
        and any(
            min(end.inside, end.beyond) <= line <= max(end.inside, end.beyond) for line in lines.get(entry.fact, ())
        )
    ]
    assert embraced


def test_every_other_word_does_what_is_said() -> None:
    job, base = read(WEAK), run(adviser(), read(WEAK))
    told = argument(WEAK).options
    assert any(entry.other for entry in told)
    for entry in told:
        for value in entry.same:
            settled = tuple(value) if isinstance(value, list) else value
            assert rerun(job, entry.fact, settled).picks == base.picks, (entry.fact, value)
        for other in entry.other:
            settled = tuple(other.value) if isinstance(other.value, list) else other.value
            after = rerun(job, entry.fact, settled)
            assert after.picks != base.picks, (entry.fact, other.value)
            assert other.verdict == after.verdict


# ---------------------------------------------------------------------- assumptions
@pytest.mark.parametrize("name", JOBS)
def test_every_assumption_is_weighed_and_ranked_by_effect(name: str) -> None:
    answer = explained(JOBS[name])
    told = argument(JOBS[name]).assumptions
    facts = adviser().vocabulary.facts
    varied = {
        entry.name for entry in answer.assumptions if facts[entry.name].kind in ("number", "choice", "choices", "flag")
    }
    assert {entry.fact for entry in told} == varied
    effects = [entry.effect for entry in told]
    assert effects == sorted(effects, reverse=True)
    for entry in told:
        assert (entry.question is None) == (entry.effect == 0)


def test_an_assumption_without_effect_changes_no_pick_anywhere() -> None:
    job, base = read(PLATE), run(adviser(), read(PLATE))
    quiet = [entry for entry in argument(PLATE).assumptions if not entry.effect]
    assert quiet
    for entry in quiet:
        definition = adviser().vocabulary.facts[entry.fact]
        known = Input(entry.fact, definition, entry.value, "assumed")  # type: ignore[arg-type]
        values = Span(known, ()).samples if known.is_number else other_values(known)
        for value in values:
            assert rerun(job, entry.fact, value).picks == base.picks, (entry.fact, value)


def test_questions_come_in_the_order_of_what_they_change() -> None:
    answer = explained(PLATE)
    effect = {entry.fact: entry.effect for entry in argument(PLATE).assumptions}
    ranks = [effect[question.fact] for question in answer.questions if question.fact in effect]
    assert ranks == sorted(ranks, reverse=True)
    assert ranks
    for question in answer.questions:
        assert question.effect or question.fact not in effect


def test_the_one_missing_fact_is_tried_over_what_it_could_be() -> None:
    answer = explained(ASKED)
    assert answer.verdict == "ask"
    assert answer.questions[0].fact == "work.stock_mm"
    assert "diameter" in answer.questions[0].effect


def test_effects_count_picks_verdict_and_time() -> None:
    base = Result("recommend", {"pitch": "fine", "rake": "double_positive"}, [], [], time_min=2.0)
    other = Result("recommend", {"pitch": "coarse", "rake": "double_positive"}, [], [], time_min=4.0)
    gone = Result("refuse", {}, ["power"], [])
    assert effect_of(base, [base, base]) == 0
    assert effect_of(base, [other]) == pytest.approx(1 + math.log(2) + 1)
    assert effect_of(base, [gone, base]) == pytest.approx(2 + 1 + 0.5)


# ---------------------------------------------------------------------- robustness
def test_the_margin_of_force_is_true_on_both_sides() -> None:
    job, base = read(WEAK), run(adviser(), read(WEAK))
    found = robustness(adviser(), job)
    assert found is not None
    force = adviser().decide(job).situation.value("material.kc11_n_mm2")
    margins = [margin for margin in (found.force_margin_low, found.force_margin_high) if margin is not None]
    for margin, way in zip(margins, (0.97, 1.03) if len(margins) == 2 else (1.03,), strict=True):
        assert rerun(job, "material.kc11_n_mm2", tidy(force * margin)).picks == base.picks
        assert rerun(job, "material.kc11_n_mm2", tidy(force * margin * way)).picks != base.picks


def test_robust_means_that_every_run_of_the_bands_ends_alike() -> None:
    for text in JOBS.values():
        found = robustness(adviser(), read(text))
        assert found is not None
        assert found.holds == all(entry.then == "the same picks" for entry in found.runs)
        assert ("does not hold" in found.line) == (not found.holds)
        assert found.force_low <= 1 <= found.force_high


def test_an_unknown_hardness_is_run_over_its_range() -> None:
    found = robustness(adviser(), read(PLATE.replace(", hardness: 190 HB", "")))
    assert found is not None
    low, high = found.hardness
    assert low < high
    assert sum(str(entry.value).startswith("hardness") for entry in found.runs) == 2


def test_without_a_cutter_there_is_nothing_to_be_robust() -> None:
    assert robustness(adviser(), read(REFUSED)) is None


# ---------------------------------------------------------------------- the whole
def test_the_argument_is_part_of_the_published_answer() -> None:
    answer = explained(PLATE)
    jsonschema.validate(answer.to_dict(), dict(answer_schema()))
    assert answer.to_json() == explain(fresh(), read(PLATE)).to_json()


def fresh() -> Adviser:
    """Return an adviser for which nothing is remembered."""
    known = adviser()
    return Adviser(known.knowledge, known.materials, known.vocabulary, known.rulebook, "twin")


def test_the_answer_itself_is_the_same_with_the_argument() -> None:
    plain, argued = adviser().choose(read(PLATE)), explained(PLATE)
    assert plain.picks == argued.picks
    assert plain.plan == argued.plan
    assert argued.robustness.startswith(plain.robustness)


def test_assumptions_alone_are_those_of_the_whole() -> None:
    assert assumptions(adviser(), read(PLATE)) == argument(PLATE).assumptions
