"""What would open a way where a job is refused: the smallest single changes, each verified by running it."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from itertools import combinations
from typing import TYPE_CHECKING, Any

from millreason.job import Job
from millreason.trace import LimitRecord, Opening
from millreason.units import show

if TYPE_CHECKING:
    from millreason.choice import Adviser
    from millreason.outcome import Outcome

STEPS = 24
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
    facts = list(dict.fromkeys(fact for limit in limits for fact in limit.relax))
    found = [opening for fact in facts if (opening := _single(adviser, out, fact)) is not None]
    if not found:
        found.extend(_pairs(adviser, out, facts))
    return found[:MOST_OPENINGS] + list(_machines(adviser, out))


def _opens(adviser: Adviser, job: Job) -> str | None:
    """Return what a changed job would get, or None while it is still refused or asked about."""
    outcome = adviser.decide(job)
    if outcome.must_ask or not outcome.stands:
        return None
    return outcome.stands[0].candidate.label


def _single(adviser: Adviser, out: Outcome, fact: str) -> Opening | None:
    changed = _smallest(adviser, out.job, out, fact)
    if changed is None:
        return None
    value, then = changed
    return Opening({fact: value}, _text(adviser, out, {fact: value}), then)


def _smallest(adviser: Adviser, job: Job, out: Outcome, fact: str) -> tuple[Any, str] | None:
    """Return the smallest change of one fact that opens a way, to one per cent, and what it gives."""
    current = out.situation.value(fact)
    definition = adviser.vocabulary.facts[fact]
    if definition.kind == "flag":
        then = _opens(adviser, job.with_value(fact, not current)) if current is not None else None
        return None if then is None else (not current, then)
    if definition.kind == "choice":
        for option in definition.options:
            if option != current and (then := _opens(adviser, job.with_value(fact, option))) is not None:
                return option, then
        return None
    if not isinstance(current, int | float):
        return None
    return _bisect(adviser, job, fact, float(current), definition.range or [0.0, float("inf")])


def _bisect(adviser: Adviser, job: Job, fact: str, current: float, limits: list[float]) -> tuple[float, str] | None:
    factor = 0.8 if fact in LESS_IS_EASIER else 1.25
    shut, value = current, current
    for _ in range(STEPS):
        value = min(max(value * factor, limits[0]), limits[1])
        then = _opens(adviser, job.with_value(fact, value))
        if then is not None:
            break
        if value in limits:
            return None
        shut = value
    else:
        return None
    while abs(value - shut) > TOLERANCE * abs(value):
        middle = (value + shut) / 2
        label = _opens(adviser, job.with_value(fact, middle))
        if label is None:
            shut = middle
        else:
            value, then = middle, label
    return value, then


def _pairs(adviser: Adviser, out: Outcome, facts: list[str]) -> Iterator[Opening]:
    """Yield pairs of changes where none alone is enough: one fact freed as far as it goes, the other as little as needed."""
    for first, second in combinations(facts, 2):
        freed = _freed(adviser, out, first)
        if freed is None:
            continue
        job = out.job.with_value(first, freed)
        changed = _smallest(adviser, job, out, second)
        if changed is None:
            continue
        back = _smallest(adviser, out.job.with_value(second, changed[0]), out, first)
        if back is not None:
            changes = {first: back[0], second: changed[0]}
            yield Opening(changes, _text(adviser, out, changes), back[1])


def _freed(adviser: Adviser, out: Outcome, fact: str) -> Any:
    current = out.situation.value(fact)
    if isinstance(current, bool):
        return not current
    if isinstance(current, int | float):
        return current / 4 if fact in LESS_IS_EASIER else current * 4
    return None


def _machines(adviser: Adviser, out: Outcome) -> Iterator[Opening]:
    """Yield the first machine classes of the knowledge on which the same job is possible."""
    kept = {
        name: entry
        for name, entry in out.job.given.items()
        if not name.startswith("machine.") or name == "machine.fluids"
    }
    found = 0
    for name, machine in adviser.knowledge.machines.items():
        job = replace(out.job, given=kept, machine_name=name)
        if found < 2 and (then := _opens(adviser, job)) is not None:
            found += 1
            yield Opening({"machine.name": name}, f"on a machine such as '{machine.title}'", then)


def _text(adviser: Adviser, out: Outcome, changes: dict[str, Any]) -> str:
    parts = []
    for fact, value in changes.items():
        definition = adviser.vocabulary.facts[fact]
        before = out.situation.value(fact)
        now = _shown(value, definition.unit, out.job.units)
        parts.append(
            f"{definition.means[0].lower()}{definition.means[1:]}: {now} instead of {_shown(before, definition.unit, out.job.units)}"
        )
    return "; and ".join(parts)


def _shown(value: Any, unit: str, system: str) -> str:
    if isinstance(value, bool):
        return "yes" if value else "no"
    return show(float(value), unit, system) if isinstance(value, int | float) else str(value).replace("_", " ")
