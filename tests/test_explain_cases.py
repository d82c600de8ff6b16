"""The shipped cases argued: every other option answers, every change and every end is true when it is run again."""

from __future__ import annotations

from functools import cache
from pathlib import Path

import pytest
import yaml

from example_jobs import CASES, adviser, case
from millreason.explain.argument import explain, why_not
from millreason.explain.reruns import Reruns, changed_job, run
from millreason.explain.why_not import find_why_not
from millreason.explanation_records import Explanation, Result, WhyNot
from millreason.job import Job
from millreason.trace import Answer

SCENARIOS = {
    path.stem: path for path in CASES if yaml.safe_load(path.read_text(encoding="utf-8"))["case"]["id"].startswith("A")
}
SAMPLE = sorted(SCENARIOS)[::4]
PICKS = ("kappa_deg", "pitch", "rake")


def options(name: str) -> list[tuple[str, str]]:
    """Every lead, pitch and rake pair, and every diameter of the series of the job."""
    picks, units = adviser().vocabulary.picks, case(SCENARIOS[name]).units
    words = [
        (pick, f"{option:g}" if isinstance(option, int | float) else option)
        for pick in PICKS
        for option in picks[pick].options
    ]
    sizes = [size.nominal_mm for size in adviser().knowledge.cutters.sizes if size.series == units]
    return words + [("diameter_mm", f"{size:g}") for size in sizes]


@cache
def argued(name: str) -> tuple[Job, Answer, Explanation, Result]:
    job = case(SCENARIOS[name])
    answer = explain(adviser(), job)
    assert answer.explanation is not None
    return job, answer, answer.explanation, run(adviser(), job)


def check_case(found: WhyNot, base: Result) -> None:
    """Hold one answer to what its outcome promises."""
    assert found.text
    if found.outcome == "chosen":
        assert base.picks[found.pick] == found.option
    elif found.outcome == "outweighed":
        assert len(found.sides) == 2
        assert [side.option for side in found.sides] == [base.picks[found.pick], found.option]
    elif found.outcome == "rejected":
        assert found.limits
    elif found.outcome == "ruled_out":
        assert found.because


@pytest.mark.parametrize("name", SCENARIOS)
def test_every_other_option_answers(name: str) -> None:
    job = case(SCENARIOS[name])
    base = run(adviser(), job)
    for pick, option in options(name):
        check_case(why_not(adviser(), job, pick, option, nearest=False), base)


def check_changes(name: str, found: WhyNot) -> None:
    job = case(SCENARIOS[name])
    for change in found.nearest:
        assert change.text
        after = run(adviser(), changed_job(job, change.values, adviser().vocabulary))  # type: ignore[arg-type]
        assert after.picks.get(found.pick) == found.option, (found.pick, found.option, change)
        assert after.picks == change.picks


@pytest.mark.parametrize(("pick", "option"), [("pitch", "coarse"), ("rake", "double_positive"), ("diameter_mm", "50")])
def test_nearest_changes_of_a_sample_are_true(pick: str, option: str) -> None:
    found = why_not(adviser(), case(SCENARIOS["wide-steel-plate"]), pick, option)
    assert found.nearest or found.outcome == "chosen"
    check_changes("wide-steel-plate", found)


@pytest.mark.slow
@pytest.mark.parametrize("name", SCENARIOS)
def test_every_nearest_change_is_true(name: str) -> None:
    # One set of re-runs serves all options: every changed job is run once.
    reruns = Reruns(adviser(), case(SCENARIOS[name]))
    for pick, option in options(name):
        check_changes(name, find_why_not(reruns, pick, option))


def check_argument(name: str) -> None:
    """Run every end and every word of an argument again, without anything that was remembered."""
    job, answer, told, base = argued(name)
    if answer.picks is None or answer.verdict == "conditional":
        assert not told.intervals
        assert told.why
        return
    vocabulary = adviser().vocabulary
    for entry in told.intervals:
        for end in (entry.low, entry.high):
            if end is None:
                continue
            if end.inside != entry.value:
                assert run(adviser(), changed_job(job, {entry.fact: end.inside}, vocabulary)).picks == base.picks
            after = run(adviser(), changed_job(job, {entry.fact: end.beyond}, vocabulary))
            assert after.picks != base.picks, entry.fact
            assert after.verdict == end.verdict
    for words in told.options:
        for other in words.other:
            value = tuple(other.value) if isinstance(other.value, list) else other.value
            after = run(adviser(), changed_job(job, {words.fact: value}, vocabulary))  # type: ignore[dict-item]
            assert after.picks != base.picks, words.fact


@pytest.mark.parametrize("name", SAMPLE)
def test_the_argument_of_a_sample_is_true(name: str) -> None:
    check_argument(name)


@pytest.mark.slow
@pytest.mark.parametrize("name", SCENARIOS)
def test_every_argument_is_true(name: str) -> None:
    check_argument(name)


@pytest.mark.slow
@pytest.mark.parametrize("path", CASES, ids=lambda path: path.stem)
def test_every_case_can_be_argued(path: Path) -> None:
    from millreason.errors import DataError

    try:
        job = case(path)
    except DataError:
        pytest.skip("the case is about a file with errors")
    answer = explain(adviser(), job)
    assert answer.explanation is not None
    assert answer.explanation.why
