"""The facts in tests/rules on which rules fire or just miss, and what each rule gives: python tests/rule_trials.py.

Run as a script it fills in what is missing: the conclusion (`gives`), and trials close to both sides of every
threshold. What stands there already is never changed, so that a rule which changes is noticed.
"""

from __future__ import annotations

import json
import re
import sys
from collections.abc import Iterator
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from millreason.facts import Situation, subjects_of
from millreason.inference import RuleEngine, make_engine
from millreason.rulebook import Conclusion, Rule, RuleBook, Scalar, TestSpec, compile_rules, load_rules
from millreason.stages import conclusion_text
from millreason.vocabulary import Vocabulary, load_vocabulary
from millreason.yaml_source import read_yaml

ROOT = Path(__file__).resolve().parent.parent
FOLDER = ROOT / "tests" / "rules"
NEAR = 0.01  # how far beside a threshold a trial is written
CLOSE = 0.04  # how far beside it one may stand and still count as close
OFFER_WORDS = 6
# Facts that count things: their thresholds move by one, not by a share.
WHOLE = frozenset(
    {
        "plan.layers",
        "plan.layers_for_power",
        "plan.passes_across",
        "size.passes_across",
        "require.quantity",
        "pick.teeth",
    }
)
Facts = dict[str, Any]


@dataclass(frozen=True)
class Trial:
    """Facts on which a rule fires, facts on which it just does not, and what it gives."""

    rule: str
    fires: Facts
    misses: Facts
    gives: str = ""
    file: str = field(default="", compare=False)


def load_trials(folder: Path = FOLDER) -> list[Trial]:
    """Return every trial of every file."""
    return [
        Trial(entry["rule"], entry["fires"], entry["misses"], entry.get("gives", ""), path.name)
        for path in sorted(folder.glob("*.yaml"))
        for entry in read_yaml(path, path.name).data or []
    ]


def short(then: Conclusion) -> str:
    """Return a conclusion as a trial states it; an offer by its first words."""
    told = conclusion_text(then)
    return f"{told}: {' '.join(then.offer.split()[:OFFER_WORDS])}" if then.offer else told


class Bench:
    """Runs one rule alone on facts, as its stage would see them."""

    def __init__(self, vocabulary: Vocabulary) -> None:
        self._vocabulary = vocabulary

    def fires(self, rule: Rule, facts: Facts) -> bool:
        """Say whether the rule fires on the facts."""
        situation = Situation(self._vocabulary)
        for name, value in facts.items():
            situation.set(name, tuple(value) if isinstance(value, list) else value, "given")
        compiled = compile_rules([rule])
        engine: RuleEngine = make_engine(compiled, prefer="twin")
        return bool(engine.run(situation.for_inference(subjects_of(compiled)), lambda _rule, _facts: ()))


# ---------------------------------------------------------------------- thresholds
@dataclass(frozen=True)
class Bound:
    """One threshold of a condition: where it lies, on which side the rule fires, and whether it fires on it."""

    fact: str
    test: str
    value: float
    fires_above: bool
    included: bool


def bounds(rule: Rule) -> Iterator[Bound]:
    """Yield every threshold of a rule."""
    for fact, condition in rule.when.items():
        if not isinstance(condition, TestSpec):
            continue
        for test in ("at_least", "above", "at_most", "below"):
            value = getattr(condition, test)
            if value is not None:
                yield Bound(fact, test, float(value), test in ("at_least", "above"), test.startswith("at_"))
        if condition.between is not None:
            yield Bound(fact, "between", float(condition.between[0]), True, True)
            yield Bound(fact, "between", float(condition.between[1]), False, True)


def beside(bound: Bound) -> tuple[float, float]:
    """Return a value just inside a bound, where the rule fires, and one just outside; one of them is the bound."""
    step = 1.0 if bound.fact in WHOLE else abs(bound.value) * NEAR or NEAR
    outward = -step if bound.fires_above else step
    inside, outside = (bound.value, bound.value + outward) if bound.included else (bound.value - outward, bound.value)
    return _tidy(inside), _tidy(outside)


def _tidy(value: float) -> float:
    rounded = float(f"{value:.6g}")
    return int(rounded) if rounded.is_integer() else rounded


def covers(trial: Trial, bound: Bound) -> bool:
    """Say whether a trial stands close to both sides of a bound, and differs in nothing else."""
    sides = [facts.get(bound.fact) for facts in (trial.fires, trial.misses)]
    inside, outside = (value if type(value) in (int, float) else None for value in sides)
    if inside is None or outside is None:
        return False
    if {**trial.fires, bound.fact: None} != {**trial.misses, bound.fact: None}:
        return False
    beyond = outside < bound.value if bound.fires_above else outside > bound.value
    if not beyond and (bound.included or outside != bound.value):
        return False
    room = 1.0 if bound.fact in WHOLE else abs(bound.value) * CLOSE or CLOSE
    return all(abs(value - bound.value) <= room + 1e-12 for value in (inside, outside))


def missing_trials(rule: Rule, trials: list[Trial], vocabulary: Vocabulary, bench: Bench) -> Iterator[Trial]:
    """Yield trials for the bounds of a rule that none of its trials stands close to."""
    base = next((trial for trial in trials if bench.fires(rule, trial.fires)), None)
    for bound in bounds(rule):
        definition = vocabulary.facts[bound.fact]
        if base is None or any(covers(trial, bound) for trial in trials):
            continue
        inside, outside = beside(bound)
        low, high = definition.range or (float("-inf"), float("inf"))
        if low <= inside <= high and low <= outside <= high:
            made = Trial(
                rule.id, {**base.fires, bound.fact: inside}, {**base.fires, bound.fact: outside}, short(rule.then)
            )
            if bench.fires(rule, made.fires) and not bench.fires(rule, made.misses):
                yield made


# ---------------------------------------------------------------------- writing
def line(trial: Trial) -> str:
    """Return a trial as one entry of a file."""
    return (
        f"- rule: {trial.rule}\n  gives: {_text(trial.gives)}\n"
        f"  fires: {_flow(trial.fires)}\n  misses: {_flow(trial.misses)}\n"
    )


def _flow(facts: Facts) -> str:
    return "{" + ", ".join(f"{name}: {_value(value)}" for name, value in facts.items()) + "}"


def _value(value: Scalar | list[Scalar]) -> str:
    if isinstance(value, list):
        return "[" + ", ".join(map(_value, value)) + "]"
    if isinstance(value, bool):
        return "true" if value else "false"
    return _text(value) if isinstance(value, str) else f"{value:.10g}"


def _text(text: str) -> str:
    """Quote a text where plain YAML would read something else."""
    plain = re.fullmatch(r"[A-Za-z][\w .()/+-]*(: [\w .()/+-]+)?", text) and ": " not in text
    word = text.casefold() in ("yes", "no", "true", "false", "null", "on", "off", "none")
    return (
        text
        if plain and (not word or text == "none") and text == text.strip()
        else json.dumps(text, ensure_ascii=False)
    )


def complete(book: RuleBook, vocabulary: Vocabulary, folder: Path = FOLDER) -> int:
    """Fill in what is missing in every file, and return how many entries were added or changed."""
    bench, changed = Bench(vocabulary), 0
    for path in sorted(folder.glob("*.yaml")):
        trials = [trial for trial in load_trials(folder) if trial.file == path.name]
        filled: list[Trial] = []
        for rule_id in dict.fromkeys(trial.rule for trial in trials):
            own = [trial for trial in trials if trial.rule == rule_id]
            rule = book.rules.get(rule_id)
            if rule is None:
                filled += own
                continue
            given = [
                trial if trial.gives else Trial(rule_id, trial.fires, trial.misses, short(rule.then)) for trial in own
            ]
            more = list(missing_trials(rule, own, vocabulary, bench))
            changed += sum(not trial.gives for trial in own) + len(more)
            filled += given + more
        head = "".join(text + "\n" for text in path.read_text(encoding="utf-8").splitlines() if text.startswith("#"))
        path.write_text(head + "".join(map(line, filled)), encoding="utf-8", newline="\n")
    return changed


def load_book() -> tuple[RuleBook, Vocabulary]:
    """Return the rules and the vocabulary of the checkout."""
    vocabulary = load_vocabulary(ROOT)
    return load_rules(ROOT, vocabulary), vocabulary


def main() -> int:
    """Fill in what is missing, and say how much it was."""
    count = complete(*load_book())
    print(f"{count} entries added or completed in {FOLDER.relative_to(ROOT)}")
    return 0


if __name__ == "__main__":
    sys.exit(main())
