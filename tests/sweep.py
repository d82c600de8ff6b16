"""Runs thousands of sampled jobs and holds every answer to what no answer may do: python tests/sweep.py --count 20000.

Every job must end in an answer, questions or a refusal. Some are run again with a better machine, with their values
written in inches, or with their fields in another order.
"""

from __future__ import annotations

import argparse
import json
import sys
import time
import traceback
from collections import Counter
from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field, replace
from functools import cache
from multiprocessing import get_context
from random import Random
from typing import Any

import yaml

from hard_limits import breaches
from millreason.answer import write_answer
from millreason.choice import Adviser, load_adviser
from millreason.job import Job, parse_job
from millreason.outcome import Outcome
from millreason.trace import Answer
from sweep_jobs import Sampler, in_inches, shuffled

CHUNK = 50
SLOW_S = 3.0
# What makes a machine or set-up better, and by how much.
BETTER = {
    "machine.power_kw": 1.5, "machine.torque_nm": 1.5, "machine.stiffness_n_um": 2.0, "machine.changer_full_mm": 1.3,
    "machine.changer_empty_mm": 1.3, "machine.changer_mass_kg": 1.5, "machine.changer_moment_nm": 1.5,
}  # fmt: skip
RECOMMENDED = ("recommend", "recommend_with_warnings", "conditional")


@dataclass
class Result:
    """What one sampled job came to."""

    number: int
    verdict: str
    seconds: float
    limits: tuple[str, ...] = ()
    faults: list[str] = field(default_factory=list)
    tried: int = 0
    raw: dict[str, Any] = field(default_factory=dict)
    also: tuple[str, ...] = ()


@cache
def adviser() -> Adviser:
    """Return the adviser on the twin engine, loaded once in each process."""
    return load_adviser(engine="twin")


def read(raw: dict[str, Any]) -> Job:
    """Read a sampled job the way a file is read."""
    text = yaml.safe_dump(raw, sort_keys=False, allow_unicode=True)
    return parse_job(text, adviser().vocabulary, adviser().knowledge.interface_names, "sampled")


def answer_to(job: Job) -> tuple[Outcome, Answer]:
    """Decide a job and write the answer, without the search for what would open a way."""
    out = adviser().decide(job)
    return out, write_answer(adviser(), out, openings=False)


def run_one(number: int, raw: dict[str, Any]) -> Result:
    """Run one sampled job, and by turns one of its relatives."""
    begun = time.perf_counter()
    try:
        job = read(raw)
        out, answer = answer_to(job)
        result = Result(number, answer.verdict, time.perf_counter() - begun)
        result.tried = len(out.stands) + len(out.rejected)
        result.faults += breaches(answer.to_dict())
        if answer.refusal:
            result.limits = tuple(dict.fromkeys(limit.key for limit in answer.refusal.limits))
        also, more = _relative(number, raw, job, out, answer)
        result.faults += more
        result.also = (also,) if also else ()
    except Exception:
        result = Result(number, "exception", time.perf_counter() - begun, faults=[traceback.format_exc(limit=-3)])
    if result.faults or result.seconds > SLOW_S:
        result.raw = raw
    return result


def _relative(number: int, raw: dict[str, Any], job: Job, out: Outcome, answer: Answer) -> tuple[str, list[str]]:
    turn = number % 5
    if turn in (0, 1, 2) and answer.verdict in RECOMMENDED:
        return "better machine", list(_better(number, job, out, answer))
    if turn == 3 and job.units == "metric":
        return "in inches", list(_in_inches(raw, answer))
    if turn == 4:
        other = answer_to(read(shuffled(raw, Random(number))))[1]
        same = other.to_json() == answer.to_json()
        return "reordered", [] if same else ["another order of the fields, another answer"]
    return "", []


def _better(number: int, job: Job, out: Outcome, answer: Answer) -> Iterator[str]:
    can_grow = [fact for fact in BETTER if out.situation.record(fact) and _settled(out, fact)]
    if not can_grow:
        return
    fact = can_grow[number % len(can_grow)]
    better = job.with_value(fact, out.situation.value(fact) * BETTER[fact])
    if fact == "machine.changer_full_mm" and (empty := out.situation.value("machine.changer_empty_mm")):
        better = better.with_value("machine.changer_empty_mm", empty * BETTER[fact])
    verdict = answer_to(better)[1].verdict
    if verdict not in RECOMMENDED:
        yield f"{answer.verdict}, but with {fact} {out.situation.value(fact)} times {BETTER[fact]}: {verdict}"


def _settled(out: Outcome, fact: str) -> bool:
    record = out.situation.record(fact)
    return record is not None and record.origin in ("given", "looked_up")


def _in_inches(raw: dict[str, Any], answer: Answer) -> Iterator[str]:
    written = replace(read(in_inches(raw)), units="metric")
    other = answer_to(written)[1]
    if other.verdict != answer.verdict:
        yield f"{answer.verdict} in millimetres, {other.verdict} in inches"
    elif answer.picks is not None and other.picks is not None:
        here, there = vars(answer.picks), vars(other.picks)
        yield from (
            f"{name} {here[name]} in millimetres, {there[name]} in inches"
            for name in here
            if not _same(here[name], there[name])
        )


def _same(one: object, other: object) -> bool:
    if isinstance(one, float) and isinstance(other, float):
        return abs(one - other) <= 1e-6 * max(abs(one), 1.0)
    return one == other


def run_chunk(chunk: tuple[int, int, int]) -> list[Result]:
    """Run one stretch of a seed's jobs."""
    seed, first, count = chunk
    sampler = Sampler(adviser(), seed * 1_000_003 + first)
    return [run_one(first + number, sampler.job()) for number in range(count)]


def sweep(count: int, seed: int, processes: int) -> Iterable[list[Result]]:
    """Run `count` jobs on several processes."""
    chunks = [(seed, first, min(CHUNK, count - first)) for first in range(0, count, CHUNK)]
    if processes == 1:
        yield from map(run_chunk, chunks)
        return
    with get_context("spawn").Pool(processes) as pool:
        yield from pool.imap(run_chunk, chunks)


def summary(results: list[Result]) -> str:
    """Return the table of verdicts, limits, relatives and times."""
    verdicts = Counter(result.verdict for result in results)
    limits = Counter(limit for result in results for limit in result.limits)
    alone = Counter(result.limits[0] for result in results if len(result.limits) == 1)
    also = Counter(name for result in results for name in result.also)
    times = sorted(result.seconds for result in results)
    lines = [f"{len(results)} jobs, {sum(1 for result in results if result.faults)} with a fault"]
    tables = {"verdicts": verdicts, "limits that refuse": limits, "limits that refuse alone": alone, "run again": also}
    for title, table in tables.items():
        lines.append(f"{title}: " + ", ".join(f"{name} {count}" for name, count in table.most_common()))
    marks = {"median": 0.5, "19 of 20": 0.95, "999 of 1000": 0.999}
    shown = [f"{name} {times[int(share * (len(times) - 1))] * 1000:.0f} ms" for name, share in marks.items()]
    lines.append(f"time a job: {', '.join(shown)}, longest {times[-1] * 1000:.0f} ms")
    tried = sorted(result.tried for result in results)
    lines.append(f"candidates tried: median {tried[len(tried) // 2]}, most {tried[-1]}")
    return "\n".join(lines)


def main() -> int:
    """Run from the command line and print faults as they come."""
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("--count", type=int, default=20000)
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--processes", type=int, default=2)
    parser.add_argument("--faults", help="write the jobs at fault to this file, one JSON a line")
    options = parser.parse_args()
    results: list[Result] = []
    for batch in sweep(options.count, options.seed, options.processes):
        results += batch
        for result in batch:
            if result.raw:
                slow = f"{result.seconds:.1f} s, {result.tried} tried" if result.seconds > SLOW_S else ""
                print(f"job {result.number}: {'; '.join([*result.faults, *([slow] if slow else [])])}", flush=True)
    print(summary(results))
    if options.faults:
        with open(options.faults, "w", encoding="utf-8") as out:  # noqa: PTH123
            for result in results:
                if result.raw:
                    out.write(json.dumps({"number": result.number, "faults": result.faults, "job": result.raw}) + "\n")
    return 1 if any(result.faults for result in results) else 0


if __name__ == "__main__":
    sys.exit(main())
