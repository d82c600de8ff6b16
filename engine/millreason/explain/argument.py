"""The argument about an answer: why, why not, how far it holds, which assumption matters, how robust it is."""

from __future__ import annotations

from dataclasses import replace

from millreason.answer import write_answer
from millreason.choice import Adviser
from millreason.errors import MillreasonError, did_you_mean
from millreason.explain.reruns import Reruns, Tick
from millreason.explain.robustness import find_robustness
from millreason.explain.sensitivity import find_intervals, find_options, rank_questions, weigh_assumptions
from millreason.explain.why import Argument, why_caution, why_pick, why_verdict
from millreason.explain.why_not import SAME_PICK, find_why_not
from millreason.explain.why_plan import Workings
from millreason.explanation_records import (
    Assumption,
    Because,
    Explanation,
    Interval,
    Options,
    Robustness,
    WhyNot,
)
from millreason.job import Job
from millreason.report.words import pick_name
from millreason.trace import Answer

_MOST_QUESTIONS = 6
# Picks of which the report argues every other option.
_ARGUED = ("kappa_deg", "pitch", "rake")


def why(adviser: Adviser, answer: Answer, target: str = "verdict") -> Because:
    """Return why a pick, a plan value, a caution, a fact or the verdict is what it is.

    Raises
    ------
    MillreasonError
        if the answer holds nothing of that name; the message lists what it holds.
    """
    argument = Argument(adviser.vocabulary, answer)
    workings = Workings(argument, answer, adviser.vocabulary.adjustables)
    picks = {ledger.pick for ledger in answer.trace.ledgers if ledger.chosen}
    name = target.strip().lower().replace(" ", "_")
    pick = SAME_PICK.get(name, name)
    if pick == "verdict":
        return why_verdict(argument, answer)
    if pick in picks:
        return why_pick(argument, answer, pick)
    if any(caution.key == name for caution in answer.cautions):
        return why_caution(argument, answer, name)
    found = argument.fact(target.strip()) or workings.find(target)
    if found is None:
        known = ["verdict", *SAME_PICK, *sorted(picks), *(caution.key for caution in answer.cautions), *workings.names]
        raise MillreasonError(
            f"nothing here is called {target!r}.{did_you_mean(name, known)} Ask for: {', '.join(known)}."
        )
    return found


def why_all(adviser: Adviser, answer: Answer) -> list[Because]:
    """Return why the verdict and every pick are what they are."""
    argument = Argument(adviser.vocabulary, answer)
    chosen = [ledger.pick for ledger in answer.trace.ledgers if ledger.chosen and answer.picks is not None]
    return [why_verdict(argument, answer), *(why_pick(argument, answer, pick) for pick in chosen)]


def why_not(
    adviser: Adviser, job: Job, pick: str, option: str, *, nearest: bool = True, tick: Tick | None = None
) -> WhyNot:
    """Return why an option is not the pick, and the nearest changes of the job that would make it so.

    `pick` may also be 'cutter', with the id of a cutter on hand.

    Raises
    ------
    MillreasonError
        if there is no such pick or option.
    """
    return find_why_not(Reruns(adviser, job, tick), pick, option, nearest)


def holds_while(adviser: Adviser, job: Job, tick: Tick | None = None) -> tuple[list[Interval], list[Options]]:
    """Return how far every input may move while the picks stay: intervals of numbers, and options of words."""
    reruns = Reruns(adviser, job, tick)
    return find_intervals(reruns), find_options(reruns)


def assumptions(adviser: Adviser, job: Job, tick: Tick | None = None) -> list[Assumption]:
    """Return what each assumed fact would change, the one with the largest effect first."""
    return weigh_assumptions(Reruns(adviser, job, tick))


def robustness(adviser: Adviser, job: Job, tick: Tick | None = None) -> Robustness | None:
    """Return whether the picks survive the bands of force, wear and hardness; None where no cutter stands."""
    return find_robustness(Reruns(adviser, job, tick))


def explain(adviser: Adviser, job: Job, tick: Tick | None = None) -> Answer:
    """Answer a job with the whole argument, and its questions in the order of what they would change."""
    reruns = Reruns(adviser, job, tick)
    answer = write_answer(adviser, reruns.outcome)
    if answer.verdict == "conditional":
        return replace(answer, explanation=Explanation(why=why_all(adviser, answer)))
    found = weigh_assumptions(reruns)
    questions = rank_questions(reruns, answer.questions, found)[:_MOST_QUESTIONS]
    if answer.picks is None:
        argued = Explanation(why=why_all(adviser, answer), assumptions=found)
    else:
        argued = Explanation(
            why_all(adviser, answer),
            _argued_options(reruns),
            find_intervals(reruns),
            find_options(reruns),
            found,
            find_robustness(reruns),
        )
    argued = replace(argued, runs=reruns.runs, confirmed=reruns.confirmed_runs)
    line = argued.robustness.line if argued.robustness else ""
    told = f"{answer.robustness} {line}".strip()
    return replace(answer, questions=questions, robustness=told, explanation=argued)


def _argued_options(reruns: Reruns) -> list[WhyNot]:
    """Return why every other lead angle, pitch and rake is not the pick, without looking for changes."""
    picks = reruns.vocabulary.picks
    options = [
        (pick, f"{option:g}" if isinstance(option, int | float) else option)
        for pick in _ARGUED
        for option in picks[pick].options
    ]
    return [
        find_why_not(reruns, pick, option, nearest=False)
        for pick, option in options
        if reruns.base.picks.get(pick) != option
    ]


__all__ = ["assumptions", "explain", "holds_while", "pick_name", "robustness", "why", "why_all", "why_not"]
