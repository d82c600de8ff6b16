"""Changes every rule in every small way and counts how many changes the tests of the rules notice.

python tests/mutation.py              every mutant against the trials in tests/rules, survivors against a few cases
python tests/mutation.py --all        survivors against every case in cases/accept
python tests/mutation.py --by-cases N besides, N mutants drawn by lot against the cases alone

A trial notices a mutant if the rule no longer fires where it should, fires on the near miss, or gives something
else. A case notices it if what it hits, remarks or misses changes, or if a pick does.
"""

from __future__ import annotations

import argparse
import random
import sys
import time
from collections import Counter, defaultdict
from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any

from acceptance import Case, load_cases, run_case
from millreason.choice import Adviser, load_adviser
from millreason.rulebook import Rule
from millreason.stages import Stage
from mutants import KINDS, Mutant, mutants
from rule_trials import Bench, Trial, load_trials, short

TARGET = 0.95
FEW_CASES = 6
SLOW_S = 2.0


class Trials:
    """Holds mutants against the trials in tests/rules."""

    def __init__(self, adviser: Adviser, trials: Iterable[Trial]) -> None:
        self._bench = Bench(adviser.vocabulary)
        self._by_rule: dict[str, list[Trial]] = defaultdict(list)
        for trial in trials:
            self._by_rule[trial.rule].append(trial)

    def hold(self, rule: Rule) -> bool:
        """Say whether every trial of a rule comes out as it is written."""
        return all(self._holds(rule, trial) for trial in self._by_rule[rule.id])

    def notice(self, mutant: Mutant) -> bool:
        """Say whether some trial comes out differently for the mutant."""
        if mutant.rule is None:
            return bool(self._by_rule[mutant.rule_id])
        return not self.hold(mutant.rule)

    def _holds(self, rule: Rule, trial: Trial) -> bool:
        if trial.gives and short(rule.then) != trial.gives:
            return False
        return self._bench.fires(rule, trial.fires) and not self._bench.fires(rule, trial.misses)


class Cases:
    """Holds mutants against the acceptance cases, the quickest first."""

    def __init__(self, adviser: Adviser, cases: Iterable[Case], slowest_s: float = SLOW_S) -> None:
        self._adviser = adviser
        self._baseline: list[tuple[float, Case, Any]] = []
        for case in cases:
            begun = time.perf_counter()
            outcome = self._outcome(adviser, case)
            taken = time.perf_counter() - begun
            if taken <= slowest_s:
                self._baseline.append((taken, case, outcome))
        self._baseline.sort(key=lambda entry: entry[0])

    @property
    def names(self) -> list[str]:
        """The cases that are used."""
        return [case["path"].stem for _, case, _ in self._baseline]

    def notice(self, mutant: Mutant, most: int | None = None) -> str:
        """Return the first case whose score or picks change, or the empty text."""
        changed = self._mutated(mutant)
        for _, case, before in self._baseline[:most]:
            if self._outcome(changed, case) != before:
                return str(case["path"].stem)
        return ""

    @staticmethod
    def _outcome(adviser: Adviser, case: Case) -> Any:
        picks: list[Any] = []

        def solve(path: Path) -> dict[str, Any]:
            answer = adviser.choose_file(path).to_dict()
            picks.append((answer.get("verdict"), answer.get("picks")))
            return answer

        return run_case(case, solve), picks

    def _mutated(self, mutant: Mutant) -> Adviser:
        """Return an adviser with the mutant; the stages that it does not touch are shared."""
        before, book = self._adviser, self._adviser.rulebook
        rules = dict(book.rules)
        touched = rules[mutant.rule_id]
        if mutant.rule is None:
            del rules[mutant.rule_id]
        else:
            rules[mutant.rule_id] = mutant.rule
        after = Adviser(
            before.knowledge, before.materials, before.vocabulary, replace(book, rules=rules), before.engine
        )
        stage = "size" if touched.stage == "weigh" and touched.about_size else touched.stage
        wanted = after.rulebook.stage(touched.stage, about_size=stage == "size")
        changed = Stage(wanted, after.rulebook, after.vocabulary, before.engine)
        after.__dict__["stages"] = {**before.stages, stage: changed}
        return after


@dataclass
class Tally:
    """How many mutants of each kind there were and were noticed, and which were not."""

    tried: Counter[str] = field(default_factory=Counter)
    by_trials: Counter[str] = field(default_factory=Counter)
    by_cases: Counter[str] = field(default_factory=Counter)
    survivors: list[Mutant] = field(default_factory=list)

    @property
    def share(self) -> float:
        """Share of the mutants that were noticed."""
        noticed = self.by_trials.total() + self.by_cases.total()
        return noticed / self.tried.total() if self.tried else 0.0

    def lines(self) -> list[str]:
        """Return the table, and the survivors with the reason why each may live."""
        rows = [f"{'change':<22}{'mutants':>9}{'by trials':>11}{'by cases':>10}{'noticed':>10}"]
        for kind in KINDS:
            tried, trials, cases = self.tried[kind], self.by_trials[kind], self.by_cases[kind]
            share = f"{(trials + cases) / tried:.1%}" if tried else "-"
            rows.append(f"{kind:<22}{tried:>9}{trials:>11}{cases:>10}{share:>10}")
        rows.append(f"{'all':<22}{self.tried.total():>9}{'':>21}{self.share:>10.1%}")
        return rows + [f"survivor: {mutant}" for mutant in self.survivors]


def run(adviser: Adviser, trials: Trials, cases: Cases | None, few: int | None, chosen: Sequence[Mutant]) -> Tally:
    """Hold mutants against the trials, and those that survive against cases."""
    tally = Tally()
    for mutant in chosen:
        tally.tried[mutant.kind] += 1
        if trials.notice(mutant):
            tally.by_trials[mutant.kind] += 1
        elif cases is not None and cases.notice(mutant, few):
            tally.by_cases[mutant.kind] += 1
        else:
            tally.survivors.append(mutant)
    return tally


def all_mutants(adviser: Adviser) -> list[Mutant]:
    """Return every mutant of the shipped rules."""
    strengths = sorted(adviser.knowledge.strengths.values(), key=lambda strength: strength.weight)
    return list(mutants(adviser.rulebook, adviser.vocabulary, [strength.id for strength in strengths]))


def noticed_by_cases(cases: Cases, chosen: Sequence[Mutant]) -> list[tuple[Mutant, str]]:
    """Return each mutant with the case that notices it, if any does."""
    return [(mutant, cases.notice(mutant)) for mutant in chosen]


def main(arguments: list[str] | None = None) -> int:
    """Print the share noticed and the survivors; 1 if the share is below the target."""
    parser = argparse.ArgumentParser(description="Count the small changes to rules that their tests notice.")
    parser.add_argument("--all", action="store_true", help="hold survivors against every case")
    parser.add_argument("--by-cases", type=int, default=0, metavar="N", help="N mutants against the cases alone")
    parser.add_argument("--seed", type=int, default=1, help="for the mutants drawn by lot")
    options = parser.parse_args(arguments)
    adviser = load_adviser(engine="twin")
    found = all_mutants(adviser)
    cases = Cases(adviser, load_cases())
    tally = run(adviser, Trials(adviser, load_trials()), cases, None if options.all else FEW_CASES, found)
    print("\n".join(tally.lines()))
    if options.by_cases:
        drawn = random.Random(options.seed).sample(found, options.by_cases)
        told = noticed_by_cases(cases, drawn)
        print(f"by the cases alone: {sum(bool(case) for _, case in told)} of {len(told)} drawn by lot")
    return 0 if tally.share >= TARGET else 1


if __name__ == "__main__":
    sys.exit(main())
