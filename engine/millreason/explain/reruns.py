"""Re-runs of one job with changed inputs: quickly at first, and once more on the answer's own engine."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import replace
from typing import TYPE_CHECKING

from millreason.answer import verdict_of
from millreason.choice import Adviser
from millreason.errors import MillreasonError
from millreason.explain.quick import quick_and_sure
from millreason.explanation_records import Result
from millreason.job import Given, Job, Value
from millreason.limits import binding_limits
from millreason.vocabulary import Vocabulary

if TYPE_CHECKING:
    from millreason.outcome import Outcome

Changes = Mapping[str, Value | None]
Tick = Callable[[int], None]
_Key = tuple[tuple[str, Value | None], ...]


class Reruns:
    """Runs one job with changed inputs and remembers every result."""

    def __init__(self, adviser: Adviser, job: Job, tick: Tick | None = None) -> None:
        self.adviser = adviser
        self.job = job
        self.vocabulary = adviser.vocabulary
        self._quick, self._sure = quick_and_sure(adviser)
        self._tick = tick
        self._results: dict[_Key, Result] = {}
        self._confirmed: dict[_Key, Result] = {}
        self.outcome = adviser.decide(job)
        self.base = self._confirmed[()] = result_of(self.outcome)

    @property
    def runs(self) -> int:
        """How many changed jobs have been run on the quick engine."""
        return len(self._results)

    @property
    def confirmed_runs(self) -> int:
        """How many have been run on the answer's own engine."""
        return len(self._confirmed)

    def at(self, changes: Changes) -> Result:
        """Return what the changed job comes to, from the quick engine."""
        return self._run(self._quick, changes, self._results)

    def confirmed(self, changes: Changes) -> Result:
        """Return what the changed job comes to, from the engine that made the answer."""
        return self._run(self._sure, changes, self._confirmed)

    def gap(self, changes: Changes, pick: str, option: str) -> tuple[int, float]:
        """Return how far an option is from being the pick: the kind of hindrance, then how much of it there is.

        0: it stands, short of some evidence; 1: rejected in judgement; 2: not made up; 3: ruled out; 4: no search.
        """
        job = changed_job(self.job, changes, self.vocabulary)
        try:
            out = self._quick.decide(job, {pick: option})
        except MillreasonError:
            return 4, 0.0
        if out.ledgers is None:
            return 4, float(len(out.limits) + len(out.questions))
        ruled_out = out.ledgers.ruled_out(pick, option)
        if ruled_out:
            return 3, float(len(ruled_out))
        if pick in out.separate:
            return 0, out.ledgers.balance(pick, out.separate[pick]) - out.ledgers.balance(pick, option)
        if out.stands:
            return 0, self.at(changes).standing - out.stands[0].standing
        return (1, min(float(len(tried.limits)) for tried in out.rejected)) if out.rejected else (2, 0.0)

    def _run(self, adviser: Adviser, changes: Changes, known: dict[_Key, Result]) -> Result:
        key = tuple(sorted(changes.items()))
        if key not in known:
            if self._tick is not None:
                self._tick(len(self._results) + len(self._confirmed))
            known[key] = run(adviser, changed_job(self.job, changes, self.vocabulary))
        return known[key]


def changed_job(job: Job, changes: Changes, vocabulary: Vocabulary) -> Job:
    """Return a job with facts set to values in their stored unit, or left blank for None."""
    given = {name: entry for name, entry in job.given.items() if name not in changes}
    for fact, value in changes.items():
        if value is not None:
            given[fact] = Given(value, str(value), vocabulary.facts[fact].unit)
    return replace(job, given=given)


def run(adviser: Adviser, job: Job) -> Result:
    """Return what a job comes to; where a formula does not cover an input, that is what stops it."""
    try:
        return result_of(adviser.decide(job))
    except MillreasonError as problem:
        return Result("refuse", {}, [str(problem)], [])


def result_of(out: Outcome) -> Result:
    """Return what a choice has come to."""
    verdict = verdict_of(out)
    cautions = sorted({then.caution.key for _, then in out.cautions if then.caution})
    against = len(out.contradictions)
    if verdict == "ask":
        asked = [fact for fact, question in out.questions.items() if question.need == "must"]
        return Result(verdict, {}, sorted(asked), cautions, contradictions=against)
    if verdict == "refuse":
        limits = list(dict.fromkeys(limit.key for limit in binding_limits(out)))
        return Result(verdict, {}, limits, cautions, contradictions=against)
    best = out.stands[0]
    return Result(
        verdict,
        {**best.candidate.options, **out.separate},
        [],
        cautions,
        float(best.plan.layout.passes),
        float(best.plan.layers),
        float(best.facts["plan.time_min"]),
        best.standing,
        against,
    )
