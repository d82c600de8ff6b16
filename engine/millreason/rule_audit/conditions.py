"""Conditions that nothing meets or that everything meets, and rules that cannot fire."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterator

from millreason.rule_audit.findings import Found, Subject
from millreason.rule_audit.values import demand, plain, universe
from millreason.rulebook import Condition, Rule, Scalar, TestSpec, describe

# Facts that exist only from a stage on; all others are there from the beginning.
FIRST_STAGE = {
    "job.": "appraise", "machine.coolants": "appraise", "setup.": "appraise", "cut.": "appraise",
    "size.": "weigh", "pick.": "judge", "plan.": "judge", "answer.": "caution",
}  # fmt: skip
ORDER = ("assume", "appraise", "weigh", "judge", "caution")


def check_conditions(subject: Subject) -> Found:
    """Yield impossible and always-true conditions, and rules that cannot fire."""
    settable = _settable(subject)
    for rule in subject.rules:
        grave = [
            *_impossible(subject, rule),
            *_too_early(subject, rule),
            *_never_concluded(subject, rule, settable),
            *_never_made(subject, rule),
        ]
        yield from grave
        yield from _always(subject, rule)
        if not grave and subject.search.find(rule) is None:
            message = (
                "no facts were found on which it fires: the judgements it asks for exclude each other or its "
                "other conditions. Loosen a condition, or drop the rule."
            )
            yield subject.in_rule("warning", "cannot fire", rule, message)


def _settable(subject: Subject) -> dict[str, set[Scalar]]:
    """Return every value that some rule concludes for each fact."""
    settable: dict[str, set[Scalar]] = defaultdict(set)
    for rule in subject.rules:
        for fact, value in (rule.then.set or {}).items():
            settable[fact].add(plain(value))
    return settable


def _impossible(subject: Subject, rule: Rule) -> Found:
    for fact, condition in rule.when.items():
        definition = subject.facts[fact]
        if not demand(condition, definition).possible:
            allowed = _range_text(subject, fact)
            message = f"no value meets '{describe(fact, condition)}' (allowed: {allowed}). Correct the condition."
            yield subject.in_rule("error", "impossible condition", rule, message)


def _always(subject: Subject, rule: Rule) -> Found:
    for fact, condition in rule.when.items():
        whole = universe(subject.facts[fact])
        needs = demand(condition, subject.facts[fact])
        if _says_known(condition) or whole.text or len(whole.listed or "ab") == 1:
            continue
        if needs.any_of and whole.within(needs.any_of[0]):
            message = (
                f"every value meets '{describe(fact, condition)}'. Say '{fact}: {{known: true}}' if it only "
                "matters that it is known, or leave the condition out."
            )
            yield subject.in_rule("warning", "always true", rule, message)
    for fact in _tested_missing(rule):
        if subject.facts[fact].from_ == "rules" and rule.stage in ("assume", "appraise"):
            message = (
                f"'{fact} is not known' always holds in stage {rule.stage}: negation looks at the state "
                "before the stage began, when no rule has concluded it yet. Name the conditions themselves."
            )
            yield subject.in_rule("warning", "always true", rule, message)


def _says_known(condition: Condition) -> bool:
    return isinstance(condition, TestSpec) and condition.known is not None


def _tested_missing(rule: Rule) -> Iterator[str]:
    for fact, condition in rule.when.items():
        if isinstance(condition, TestSpec) and (condition.known is False or condition.lacks is not None):
            yield fact


def _too_early(subject: Subject, rule: Rule) -> Found:
    absent = set(_tested_missing(rule))
    for fact in rule.when:
        first = next((stage for prefix, stage in FIRST_STAGE.items() if fact.startswith(prefix)), ORDER[0])
        if ORDER.index(rule.stage) >= ORDER.index(first):
            continue
        if fact in absent:
            message = f"'{fact}' is never known before stage {first}, so the condition always holds. Drop it."
            yield subject.in_rule("warning", "always true", rule, message)
        else:
            message = f"'{fact}' is not known before stage {first}; a rule of stage {rule.stage} cannot test it."
            yield subject.in_rule("error", "cannot fire", rule, message)


def _never_concluded(subject: Subject, rule: Rule, settable: dict[str, set[Scalar]]) -> Found:
    for fact, condition in rule.when.items():
        needs = demand(condition, subject.facts[fact])
        if subject.facts[fact].from_ != "rules" or not needs.any_of or not needs.possible:
            continue
        concluded = settable.get(fact, set())
        if not any(needs.accepts(value) for value in concluded):
            values = ", ".join(sorted(map(str, concluded))) or "nothing"
            message = (
                f"no rule concludes what '{describe(fact, condition)}' asks for (rules conclude: {values}). "
                "Write a rule that concludes it, or correct the condition."
            )
            yield subject.in_rule("error", "cannot fire", rule, message)


def _never_made(subject: Subject, rule: Rule) -> Found:
    assumed = {fact for other in subject.rules for fact in other.then.assume or {}}
    absent = set(_tested_missing(rule))
    for fact in rule.when:
        made_by_program = subject.facts[fact].from_ in ("computed", "looked_up")
        if made_by_program and fact not in absent | assumed and not subject.source_words.makes(fact):
            message = f"nothing in the program sets '{fact}'. Compute it, or test another fact."
            yield subject.in_rule("error", "cannot fire", rule, message)


def _range_text(subject: Subject, fact: str) -> str:
    definition = subject.facts[fact]
    if definition.options:
        return ", ".join(map(str, definition.options))
    if definition.range:
        return f"{definition.range[0]:g} to {definition.range[1]:g}"
    return definition.kind
