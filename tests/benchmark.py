"""Times one warm choice with its whole trace, and the cold command: python tests/benchmark.py.

Machines differ and are shared, so read the medians, and the ratio to the work of the same run that stands beside them.
"""

from __future__ import annotations

import statistics
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

CASES = Path(__file__).resolve().parent.parent / "cases" / "accept"
JOBS = (
    "wide-steel-plate",
    "aluminium-blocks-small-machine",
    "titanium-plate-roughing",
    "sealing-face-no-overlap-line",
    "too-little-to-quote",
)
WARM_MARK_MS, COLD_MARK_S = 25.0, 0.7


def median_ms(work: Callable[[], object], rounds: int) -> float:
    """Median time of a piece of work in milliseconds."""
    times = []
    for _ in range(rounds):
        start = time.perf_counter()
        work()
        times.append((time.perf_counter() - start) * 1000)
    return statistics.median(times)


def yardstick() -> int:
    """A fixed piece of plain Python, to hold the other times against."""
    return sum(number * number % 7 for number in range(100_000))


def main() -> None:
    """Print warm times for each engine and job, and the cold command."""
    from millreason.choice import load_adviser
    from millreason.inference import engine_names
    from millreason.job import read_job

    yard = median_ms(yardstick, 15)
    print(f"yardstick (100,000 steps of plain Python): {yard:.1f} ms")
    for engine in engine_names():
        adviser = load_adviser(engine=engine)
        for name in JOBS:
            job = read_job(CASES / f"{name}.yaml", adviser.vocabulary, adviser.knowledge.interface_names)
            adviser.choose(job)
            warm = median_ms(lambda: adviser.choose(job), 15)  # noqa: B023 - called at once
            print(
                f"warm choice, {engine:8s} {name:34s} {warm:7.1f} ms  {warm / yard:5.1f} yardsticks"
                f" (mark {WARM_MARK_MS:g} ms)"
            )
    command = [sys.executable, "-m", "millreason.cli", "choose", str(CASES / f"{JOBS[0]}.yaml")]
    cold = median_ms(lambda: subprocess.run(command, capture_output=True, check=True), 7) / 1000
    print(f"cold command: {cold:.2f} s  {cold * 1000 / yard:.0f} yardsticks (mark {COLD_MARK_S:g} s)")


if __name__ == "__main__":
    main()
