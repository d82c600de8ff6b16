"""One rule held against the vocabulary, the sources and the strengths: every finding with its place and remedy."""

from __future__ import annotations

from collections.abc import Iterable

from millreason.errors import Finding, did_you_mean
from millreason.rulebook import PLACEHOLDER, Conclusion, Condition, RejectSpec, Rule, Scalar, tested_values
from millreason.vocabulary import FactDefinition, Vocabulary
from millreason.yaml_source import Document

_ALLOWED_IN: dict[str, tuple[str, ...]] = {
    "assume": ("assume", "ask"),
    "appraise": ("set", "adjust", "refuse", "condition", "ask"),
    "weigh": ("for_", "against", "rule_out"),
    "judge": ("reject", "lower"),
    "caution": ("caution", "offer"),
}


class RuleChecker:
    """Holds one rule against the vocabulary, the sources and the strengths."""

    def __init__(self, vocabulary: Vocabulary, sources: Iterable[str] | None, strengths: Iterable[str] | None) -> None:
        self._facts = vocabulary.facts
        self._picks = vocabulary.picks
        self._adjustables = vocabulary.adjustables
        self._sources = None if sources is None else set(sources)
        self._strengths = None if strengths is None else set(strengths)

    def check(self, document: Document, key: tuple[str | int, ...], rule: Rule) -> list[Finding]:
        """Return everything that is wrong with a rule."""
        found: list[Finding] = []

        def say(part: tuple[str | int, ...], message: str) -> None:
            found.append(document.finding(key + part, message, f"{rule.id} {'.'.join(map(str, part))}"))

        if not rule.when:
            say(("when",), "has no condition. A rule that always holds is a value of the knowledge.")
        for fact, condition in rule.when.items():
            for message in self._condition(fact, condition):
                say(("when", fact), message)
        kind = rule.then.kind
        if kind not in _ALLOWED_IN[rule.stage]:
            allowed = ", ".join(name.rstrip("_") for name in _ALLOWED_IN[rule.stage])
            say(
                ("then",),
                f"{kind.rstrip('_')!r} is not concluded in stage {rule.stage!r}. Allowed there: {allowed}.",
            )
        for message in self._conclusion(rule.then):
            say(("then",), message)
        for text in (
            rule.says,
            rule.why,
            rule.then.offer or "",
            rule.then.caution.do if rule.then.caution else "",
        ):
            for fact in PLACEHOLDER.findall(text):
                if fact not in self._facts:
                    say(("why",), f"names the unknown fact {fact!r}.{did_you_mean(fact, self._facts)}")
        source = rule.basis.cited.source if rule.basis.cited else None
        if source and self._sources is not None and source not in self._sources:
            hint = did_you_mean(source, self._sources)
            say(("basis", "cited"), f"unknown source {source!r}.{hint} Sources are in knowledge/sources.yaml.")
        return found

    def _condition(self, fact: str, condition: Condition) -> Iterable[str]:
        definition = self._facts.get(fact)
        if definition is None:
            yield f"unknown fact.{did_you_mean(fact, self._facts)} Facts are in knowledge/vocabulary.yaml."
            return
        for value in tested_values(condition):
            yield from self._value(definition, value)

    def _value(self, definition: FactDefinition, value: Scalar) -> Iterable[str]:
        if definition.kind in ("number", "numbers"):
            if isinstance(value, bool) or not isinstance(value, int | float):
                yield f"{value!r} is not a number, but the fact is one in {definition.unit or 'no unit'}."
            elif definition.range and not definition.range[0] <= value <= definition.range[1]:
                yield f"{value} lies outside the range of the fact, {definition.range[0]:g} to {definition.range[1]:g}."
        elif definition.kind in ("choice", "choices"):
            if value not in definition.options:
                options = list(map(str, definition.options))
                yield f"{value!r} is no option.{did_you_mean(str(value), options)} Options: {', '.join(options)}."
        elif definition.kind == "flag" and not isinstance(value, bool):
            yield f"{value!r} is neither true nor false."

    def _conclusion(self, then: Conclusion) -> Iterable[str]:
        for fact, value in {**(then.assume or {}), **(then.set or {})}.items():
            source = value.get("fact") if isinstance(value, dict) else None
            if fact not in self._facts:
                yield f"unknown fact {fact!r}.{did_you_mean(fact, self._facts)}"
            elif source is not None:
                if source not in self._facts:
                    yield f"unknown fact {source!r}.{did_you_mean(source, self._facts)}"
            elif not isinstance(value, dict):
                yield from (f"{fact}: {message}" for message in self._value(self._facts[fact], value))
        for fact in filter(None, (then.ask, then.condition)):
            definition = self._facts.get(fact)
            if definition is None or definition.ask is None:
                yield f"{fact!r} is no fact with a question in the vocabulary.{did_you_mean(fact, self._facts)}"
        for name in then.adjust or {}:
            if name not in self._adjustables:
                yield f"unknown adjustable {name!r}.{did_you_mean(name, self._adjustables)}"
        for pick, options in {**(then.for_ or {}), **(then.against or {}), **(then.rule_out or {})}.items():
            if pick not in self._picks:
                yield f"unknown pick {pick!r}.{did_you_mean(pick, self._picks)}"
                continue
            if self._picks[pick].options:
                for option in options if isinstance(options, list) else [options]:
                    if option not in self._picks[pick].options:
                        known = ", ".join(map(str, self._picks[pick].options))
                        yield f"{pick}: {option!r} is no option. Options: {known}."
        strength = then.strength or then.lower
        if strength and self._strengths is not None and strength not in self._strengths:
            known = ", ".join(sorted(self._strengths))
            yield f"unknown strength {strength!r}. Strengths are in knowledge/strengths.yaml: {known}."
        yield from self._limit(then.reject or then.refuse or then.limit)

    def _limit(self, spec: RejectSpec | None) -> Iterable[str]:
        if spec is None:
            return
        if spec.limit not in self._facts["answer.limits"].options:
            yield f"unknown limit {spec.limit!r}. Limits are the options of answer.limits in the vocabulary."
        for fact in (spec.value, spec.against, *spec.relax):
            if isinstance(fact, str) and fact not in self._facts:
                yield f"unknown fact {fact!r}.{did_you_mean(fact, self._facts)}"
