"""Why a computed value is what it is: the formulas behind it, down to facts, picks and the rules that tuned it."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping

from millreason.explain.why import Argument
from millreason.explain.words import value_words
from millreason.explanation_records import Because
from millreason.report.words import fact_words
from millreason.trace import Answer, Calculation, Plain
from millreason.vocabulary import Adjustable

_NAME = re.compile(r"[a-z]{3,}")
# Words in names of quantities that say nothing of what they are: units, and which of several.
_EMPTY = frozenset({"plan", "rpm", "deg", "min", "mm", "most", "least", "roughing", "finishing", "the", "per"})


def _words(text: str) -> frozenset[str]:
    return frozenset(_NAME.findall(text.lower())) - _EMPTY


class Workings:
    """The calculations of an answer, and how one feeds the next."""

    def __init__(self, argument: Argument, answer: Answer, adjustables: Mapping[str, Adjustable]) -> None:
        self._adjustables = adjustables
        self._argument = argument
        self._answer = answer
        self._uses = list({(use.result_of, str(use.inputs)): use for use in answer.trace.calculations}.values())

    @property
    def names(self) -> list[str]:
        """The results that can be asked for."""
        return list(dict.fromkeys(use.result_of.removeprefix("plan.") for use in self._uses))

    def find(self, target: str) -> Because | None:
        """Return how a value was computed: the calculation that shares most words with the target, and no others."""
        wanted = _words(target.replace("_", " "))
        found = [use for use in self._uses if wanted and wanted <= _words(use.result_of.replace("_", " "))]
        if not found:
            return None
        best = min(found, key=lambda use: len(_words(use.result_of.replace("_", " "))))
        same = [use for use in found if use.result_of == best.result_of]
        return self._tree(same[-1], frozenset())

    def _tree(self, use: Calculation, seen: frozenset[str]) -> Because:
        seen |= {use.result_of}
        below = [part for name, value in use.inputs.items() for part in self._input(use, name, value, seen)]
        shown = value_words(use.value, use.unit, self._answer.units)
        name = fact_words(use.result_of) if "." in use.result_of else use.result_of
        how = f"{use.formula}; {', '.join(use.references)}" if use.references else use.formula
        return Because(f"{name} {shown}", "calculation", use.result_of, "computed", how, because=below)

    def _input(self, use: Calculation, name: str, value: Plain, seen: frozenset[str]) -> Iterator[Because]:
        source = self._source(use, name, value)
        if source is not None and source.result_of not in seen:
            yield self._tree(source, seen)
            return
        fact = self._fact(name, value)
        if fact is not None:
            yield fact
            return
        tuned = list(self._tuning(name, value))
        yield Because(
            f"{name.replace('_', ' ')} {value_words(value, '', self._answer.units)}", "note", name, because=tuned
        )

    def _source(self, use: Calculation, name: str, value: Plain) -> Calculation | None:
        """Return the earlier calculation whose result is the very number of an input and shares a word of its name."""
        if isinstance(value, bool) or not isinstance(value, int | float):
            return None
        step = use.result_of.rpartition(", ")[2]
        for earlier in reversed(self._uses[: self._uses.index(use)]):
            part = f"{name} {value:.6g}"
            inside = isinstance(earlier.value, str) and part in earlier.value.split("; ")
            same = earlier.value == value and _words(name.replace("_", " ")) & _words(earlier.result_of)
            other_step = ", " in earlier.result_of and not earlier.result_of.endswith(step)
            if (inside or same) and not other_step:
                return earlier
        return None

    def _fact(self, name: str, value: Plain) -> Because | None:
        """Return the fact that is named like an input and holds the same number."""
        for record in self._answer.trace.facts:
            if record.name.rpartition(".")[2] == name and record.value == value:
                return self._argument.fact(record.name)
        return None

    def _tuning(self, name: str, value: Plain) -> Iterator[Because]:
        """Yield the rules that tuned what an input is named after."""
        for firing in self._answer.trace.firings:
            told = firing.conclusion.removeprefix("tunes ")
            if told != firing.conclusion and any(self._acts(tuned, name, value) for tuned in told.split("; ")):
                yield self._argument.rule(firing, f"{told}: ")

    def _acts(self, tuned: str, name: str, value: Plain) -> bool:
        """Whether a rule tuned an input: by a factor on it, or by the very bound that it stands at."""
        words, _, number = tuned.rpartition(" ")
        adjustable = self._adjustables.get(words.replace(" ", "_"))
        same = _words(words) <= _words(name.replace("_", " "))
        return same and adjustable is not None and (adjustable.how == "factor" or value == float(number))
