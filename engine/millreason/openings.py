"""What would open a way where a job is refused: the smallest single changes, each verified by running it."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import replace
from itertools import combinations
from typing import TYPE_CHECKING, Any

from millreason.explain.variations import DIGITS, Input, other_values, tidy
from millreason.explain.words import value_words
from millreason.job import Job
from millreason.stages import plain_value
from millreason.trace import LimitRecord, Opening

if TYPE_CHECKING:
    from millreason.choice import Adviser
    from millreason.outcome import Outcome

FAR = 32.0
MOST_MACHINES = 2
# Candidates tried before the search for openings ends with what it has; most refusals need less.
MOST_TRIED = 6_000
TOLERANCE = 0.01
MOST_OPENINGS = 6
# Facts of which less makes a job easier; of all others more does.
LESS_IS_EASIER = frozenset(
    {
        "work.stock_mm",
        "work.width_mm",
        "work.hardness_hb",
        "fixture.overhang_mm",
        "work.step_height_mm",
        "work.wall_height_mm",
        "work.unsupported_span_mm",
    }
)


def find_openings(adviser: Adviser, out: Outcome, limits: list[LimitRecord]) -> list[Opening]:
    """Return the smallest changes that turn the refusal into an answer: single ones, else pairs, and other machines."""
    return _Openings(adviser, out).find(list(dict.fromkeys(fact for limit in limits for fact in limit.relax)))


class _Openings:
    """Looks for openings on a quick adviser; what is returned has been run on the adviser that answers."""

    def __init__(self, adviser: Adviser, out: Outcome) -> None:
        from millreason.explain.quick import quick_and_sure

        self._adviser = adviser
        self._quick, _ = quick_and_sure(adviser)
        self._out = out
        self._left = MOST_TRIED

    def find(self, facts: list[str]) -> list[Opening]:
        single = [opening for fact in facts if (opening := self._single(fact)) is not None]
        found = single or list(self._pairs(facts))
        return found[:MOST_OPENINGS] + list(self._machines())

    def _opens(self, job: Job) -> str | None:
        """Return what a changed job would get, or None while it is still refused or asked about."""
        if self._left <= 0:
            return None
        outcome = self._quick.decide(job)
        self._left -= len(outcome.rejected) + len(outcome.stands)
        if outcome.must_ask or outcome.limits or not outcome.stands:
            return None
        return outcome.stands[0].candidate.label

    def _verified(self, changes: dict[str, Any], job: Job, text: str) -> Opening | None:
        """Return the opening if the adviser that answers agrees."""
        outcome = self._adviser.decide(job)
        if outcome.must_ask or outcome.limits or not outcome.stands:
            return None
        told = {fact: plain_value(value) for fact, value in changes.items()}
        return Opening(told, text, outcome.stands[0].candidate.label)

    def _single(self, fact: str) -> Opening | None:
        value = self._smallest(self._out.job, fact)
        return None if value is None else self._changed({fact: value})

    def _changed(self, changes: dict[str, Any]) -> Opening | None:
        job = self._out.job
        for fact, value in changes.items():
            job = job.with_value(fact, value)
        return self._verified(changes, job, _text(self._adviser, self._out, changes))

    def _smallest(self, job: Job, fact: str) -> Any:
        """Return the smallest change of one fact that opens a way, numbers to one per cent, or None."""
        current = self._out.situation.value(fact)
        definition = self._adviser.vocabulary.facts[fact]
        if definition.kind == "flag":
            turned = not current
            return turned if current is not None and self._opens(job.with_value(fact, turned)) else None
        if definition.kind in ("choice", "choices"):
            options = other_values(Input(fact, definition, current, "given"))
            # What is added to the things at hand comes before what takes their place.
            options.sort(key=lambda option: not (isinstance(option, tuple) and set(current or ()) < set(option)))
            return next((option for option in options if self._opens(job.with_value(fact, option))), None)
        if not isinstance(current, int | float) or isinstance(current, bool):
            return None
        low, high = definition.range or (0.0, float("inf"))
        return self._bisect(job, fact, float(current), max(low, 1e-6), high)

    def _bisect(self, job: Job, fact: str, current: float, low: float, high: float) -> float | None:
        far = max(current / FAR, low) if fact in LESS_IS_EASIER else min(current * FAR, high)
        if current <= 0 or far == current or not self._opens(job.with_value(fact, far)):
            return None
        shut, open_at = current, far
        while abs(open_at - shut) > TOLERANCE * abs(open_at):
            middle = (shut * open_at) ** 0.5
            if self._opens(job.with_value(fact, middle)):
                open_at = middle
            else:
                shut = middle
        return _printable(open_at, fact)

    def _pairs(self, facts: list[str]) -> Iterator[Opening]:
        """Yield pairs where no change alone is enough: one fact freed far, the other changed as little as needed."""
        for first, second in combinations(facts, 2):
            freed = self._freed(first)
            if freed is None:
                continue
            value = self._smallest(self._out.job.with_value(first, freed), second)
            if value is None:
                continue
            back = self._smallest(self._out.job.with_value(second, value), first)
            if back is not None and (opening := self._changed({first: back, second: value})) is not None:
                yield opening

    def _freed(self, fact: str) -> Any:
        current = self._out.situation.value(fact)
        if isinstance(current, bool):
            return not current
        if isinstance(current, int | float):
            return current / FAR if fact in LESS_IS_EASIER else current * FAR
        return None

    def _machines(self) -> Iterator[Opening]:
        """Yield the first machines of the knowledge on which the same job is possible."""
        job = self._out.job
        kept = {
            name: entry
            for name, entry in job.given.items()
            if not name.startswith("machine.") or name == "machine.fluids"
        }
        found = 0
        for name, machine in self._adviser.knowledge.machines.items():
            changed = replace(job, given=kept, machine_name=name)
            if found < MOST_MACHINES and self._opens(changed):
                text = f"on a machine such as '{machine.title}'"
                opening = self._verified({"machine.name": name}, changed, text)
                if opening is not None:
                    found += 1
                    yield opening


def _printable(value: float, fact: str) -> float:
    """Return the number that is printed, rounded to the side that is easier still: what is printed is what is run."""
    scale = 10.0 ** (DIGITS - 1 - math.floor(math.log10(value)))
    rounded = math.floor(value * scale) if fact in LESS_IS_EASIER else math.ceil(value * scale)
    return tidy(rounded / scale)


def _text(adviser: Adviser, out: Outcome, changes: dict[str, Any]) -> str:
    parts = []
    for fact, value in changes.items():
        definition = adviser.vocabulary.facts[fact]
        before = out.situation.value(fact)
        now, was = (value_words(entry, definition.unit, out.job.units) for entry in (value, before))
        parts.append(f"{definition.means[0].lower()}{definition.means[1:]}: {now} instead of {was}")
    return "; and ".join(parts)
