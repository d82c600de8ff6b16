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
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import Any

from acceptance import Case, load_cases, run_case
from millreason.choice import Adviser, load_adviser
from millreason.facts import Situation
from millreason.inference import Firing
from millreason.rulebook import Rule, RuleBook
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


@dataclass(frozen=True)
class Baseline:
    """A case as the rules answer it unchanged: how long it takes, what comes out, which rules fired."""

    case: Case
    taken_s: float
    outcome: Any
    fired: frozenset[str]


class Recorder:
    """A stage that notes which of its rules fire."""

    def __init__(self, stage: Stage, fired: set[str]) -> None:
        self._stage = stage
        self._fired = fired

    def run(self, situation: Situation) -> list[Firing]:
        firings = self._stage.run(situation)
        self._fired.update(firing.rule for firing in firings)
        return firings

    def __getattr__(self, name: str) -> Any:
        return getattr(self._stage, name)


class Cases:
    """Holds mutants against the acceptance cases, the quickest first."""

    def __init__(self, adviser: Adviser, cases: Iterable[Case], slowest_s: float = SLOW_S) -> None:
        self._adviser = adviser
        timed = sorted((self._run_unchanged(case) for case in cases), key=lambda entry: entry.taken_s)
        self._baseline = [entry for entry in timed if entry.taken_s <= slowest_s]

    @property
    def names(self) -> list[str]:
        """The cases that are used."""
        return [entry.case["path"].stem for entry in self._baseline]

    @property
    def fired(self) -> frozenset[str]:
        """Every rule that fires in some case."""
        return frozenset().union(*(entry.fired for entry in self._baseline))

    def notice(self, mutant: Mutant, most: int | None = None) -> str:
        """Return the first case whose score or picks change, or the empty text."""
        changed = self._mutated(mutant)
        may_fire_anew = mutant.kind in ("condition flipped", "threshold moved")
        # A rule that did not fire, and whose conditions are as before, cannot change the answer.
        touched = [entry for entry in self._baseline if may_fire_anew or mutant.rule_id in entry.fired]
        for entry in touched[:most]:
            if _outcome(changed, entry.case) != entry.outcome:
                return str(entry.case["path"].stem)
        return ""

    def _run_unchanged(self, case: Case) -> Baseline:
        fired: set[str] = set()
        watched = _copy(self._adviser, {name: Recorder(stage, fired) for name, stage in self._adviser.stages.items()})
        begun = time.perf_counter()
        outcome = _outcome(watched, case)
        return Baseline(case, time.perf_counter() - begun, outcome, frozenset(fired))

    def _mutated(self, mutant: Mutant) -> Adviser:
        """Return an adviser with the mutant; the stages that it does not touch are shared."""
        before, book = self._adviser, self._adviser.rulebook
        rules = dict(book.rules)
        touched = rules[mutant.rule_id]
        if mutant.rule is None:
            del rules[mutant.rule_id]
        else:
            rules[mutant.rule_id] = mutant.rule
        after = replace(book, rules=rules)
        stage = "size" if touched.stage == "weigh" and touched.about_size else touched.stage
        wanted = after.stage(touched.stage, about_size=stage == "size")
        changed = Stage(wanted, after, before.vocabulary, before.engine)
        return _copy(before, {**before.stages, stage: changed}, after)


def _copy(adviser: Adviser, stages: Mapping[str, Any], book: RuleBook | None = None) -> Adviser:
    """Return an adviser with the same knowledge and the given stages, which are not compiled again."""
    rules = book or adviser.rulebook
    copied = Adviser(adviser.knowledge, adviser.materials, adviser.vocabulary, rules, adviser.engine)
    copied.__dict__["stages"] = dict(stages)
    return copied


def _outcome(adviser: Adviser, case: Case) -> Any:
    """Return the score of a case, and verdict and picks of each of its answers."""
    picks: list[Any] = []

    def solve(path: Path) -> dict[str, Any]:
        answer = adviser.choose_file(path).to_dict()
        picks.append((answer.get("verdict"), answer.get("picks")))
        return answer

    return run_case(case, solve), picks


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
        return rows + [f"survivor: {mutant} ({WHY_IT_LIVES[mutant.kind]})" for mutant in self.survivors]


WHY_IT_LIVES = {
    "rule dropped": "no trial fires the rule",
    "condition flipped": "no trial fires the rule on a value of this fact",
    "threshold moved": "no trial stands close to this threshold",
    "conclusion swapped": "no trial states what the rule gives in words that differ",
    "strength changed": "no trial states what the rule gives",
}


def run(trials: Trials, chosen: Sequence[Mutant]) -> Tally:
    """Hold mutants against the trials."""
    tally = Tally()
    for mutant in chosen:
        tally.tried[mutant.kind] += 1
        if trials.notice(mutant):
            tally.by_trials[mutant.kind] += 1
        else:
            tally.survivors.append(mutant)
    return tally


def second_look(tally: Tally, cases: Cases, most: int | None) -> None:
    """Hold the survivors against the cases."""
    left = [mutant for mutant in tally.survivors if not cases.notice(mutant, most)]
    tally.by_cases.update(mutant.kind for mutant in tally.survivors if mutant not in left)
    tally.survivors = left


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
    tally = run(Trials(adviser, load_trials()), found)
    cases = Cases(adviser, load_cases()) if tally.survivors or options.by_cases else None
    if cases is not None:
        second_look(tally, cases, None if options.all else FEW_CASES)
    print("\n".join(tally.lines()))
    if cases is not None and options.by_cases:
        told = noticed_by_cases(cases, random.Random(options.seed).sample(found, options.by_cases))
        print(f"by the cases alone: {sum(bool(case) for _, case in told)} of {len(told)} drawn by lot")
    return 0 if tally.share >= TARGET else 1


if __name__ == "__main__":
    sys.exit(main())
