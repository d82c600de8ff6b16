"""Rules said twice, rules contained in others, and rules that contradict each other."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Callable
from dataclasses import replace
from itertools import combinations

from millreason.rule_audit.findings import AuditFinding, Found, Severity, Subject
from millreason.rule_audit.values import implies, one_value_each, plain, together
from millreason.rule_audit.witness import told
from millreason.rulebook import Conclusion, Rule, Scalar

Voice = tuple[Rule, str, str]  # the rule, its stance, its strength
Option = tuple[str, Scalar]


def check_repetitions(subject: Subject) -> Found:
    """Yield rules whose conditions are those of another, or are contained in them, with one conclusion."""
    groups: dict[object, list[Rule]] = defaultdict(list)
    for rule in subject.rules:
        groups[_conclusion_key(rule)].append(rule)
    for rules in groups.values():
        for first, second in combinations(rules, 2):
            yield from _repetition(subject, first, second)


def _conclusion_key(rule: Rule) -> object:
    """Return what makes two conclusions the same; the words of a caution or of an offer do not."""
    then = rule.then
    if then.caution:
        return rule.stage, "caution", then.caution.key, then.caution.severity
    if then.reject or then.refuse:
        spec = then.reject or then.refuse
        return rule.stage, then.kind, spec.limit if spec else "", spec.value if spec else ""
    return rule.stage, repr(then)


def _repetition(subject: Subject, first: Rule, second: Rule) -> Found:
    mine, theirs = subject.search.demands(first), subject.search.demands(second)
    forward, backward = implies(mine, theirs), implies(theirs, mine)
    if forward and backward:
        message = f"says the same as {subject.place(first)} under the same conditions. Keep one of the two."
        yield subject.in_rule("error", "said twice", second, message)
    elif forward or backward:
        narrow, wide = (first, second) if forward else (second, first)
        severity, effect = _effect_of_repeating(narrow.then)
        message = f"wherever it fires {subject.place(wide)} fires too with the same conclusion; {effect}."
        yield subject.in_rule(severity, "contained in another", narrow, message)


def _effect_of_repeating(then: Conclusion) -> tuple[Severity, str]:
    if then.for_ or then.against:
        return "note", "the ledger counts both. Keep both only if each has a reason of its own"
    if then.lower:
        return "note", "both lower the candidate. Keep both only if each has a reason of its own"
    if then.caution or then.offer:
        return "note", "the person reads both. Keep both only if each says something of its own"
    if then.adjust:
        return (
            "warning",
            "factors multiply, so the change is made twice. Make the narrow rule's own share clear",
        )
    return "warning", "it adds nothing. Drop it, or conclude something else"


# ---------------------------------------------------------------------- contradictions
def check_contradictions(subject: Subject) -> Found:
    """Yield rules that cannot both be right, with facts on which both fire."""
    yield from _evidence(subject)
    yield from _values(subject, "set", lambda rule: rule.then.set)
    yield from _values(subject, "assume", lambda rule: rule.then.assume)
    yield from _bounds(subject)


def voices(subject: Subject) -> dict[Option, list[Voice]]:
    """Return who speaks for, against or rules out each option of each pick."""
    found: dict[Option, list[Voice]] = defaultdict(list)
    for rule in subject.rules:
        then = rule.then
        for stance, part in (("for", then.for_), ("against", then.against), ("rule_out", then.rule_out)):
            for pick, options in (part or {}).items():
                for option in options if isinstance(options, list) else [options]:
                    found[pick, plain(option)].append((rule, stance, then.strength or ""))
    return found


def _evidence(subject: Subject) -> Found:
    for (pick, option), speakers in voices(subject).items():
        meet: list[tuple[Rule, Rule]] = []
        for first, second in combinations(speakers, 2):
            stances = {first[1], second[1]}
            if stances == {"for", "against"} and first[2] == second[2]:
                yield from _for_and_against(subject, pick, option, first, second, meet)
            elif len(stances) == 2 and "rule_out" in stances:
                yield from _idle(subject, pick, option, first, second)
        yield from _trade_offs(subject, pick, option, meet)


def _for_and_against(
    subject: Subject, pick: str, option: Scalar, first: Voice, second: Voice, meet: list[tuple[Rule, Rule]]
) -> Found:
    mine, theirs = subject.search.demands(first[0]), subject.search.demands(second[0])
    if not (implies(mine, theirs) or implies(theirs, mine)):
        if together(mine, theirs) is not None:
            meet.append((first[0], second[0]))
        return
    facts = subject.search.find(first[0], second[0])
    if facts is not None:
        narrow, wide = (first, second) if implies(mine, theirs) else (second, first)
        message = (
            f"speaks {narrow[1]} {pick} {_name(option)} ({narrow[2]}), and {subject.place(wide[0])} speaks "
            f"{wide[1]} it with the same strength whenever this rule fires. Both fire on: {told(facts)}. "
            "Let the narrower one be stronger, exclude its case from the other, or drop one."
        )
        yield subject.in_rule("error", "contradiction", narrow[0], message)


def _trade_offs(subject: Subject, pick: str, option: Scalar, meet: list[tuple[Rule, Rule]]) -> Found:
    """Say once per option that rules of equal strength can meet, with the first facts on which they do."""
    confirmed = ((pair, subject.search.find(*pair)) for pair in meet)
    first = next(((pair, facts) for pair, facts in confirmed if facts is not None), None)
    if first is None:
        return
    (one, other), facts = first
    more = f"; {len(meet) - 1} more such pairs may meet" if len(meet) > 1 else ""
    message = (
        f"and {subject.place(other)} speak for and against {pick} {_name(option)} with equal strength, for "
        f"different reasons, and cancel out on: {told(facts)}{more}. A trade-off, if others decide it."
    )
    yield subject.in_rule("note", "equal strength", one, message)


def _idle(subject: Subject, pick: str, option: Scalar, first: Voice, second: Voice) -> Found:
    out, voice = (first, second) if first[1] == "rule_out" else (second, first)
    if implies(subject.search.demands(voice[0]), subject.search.demands(out[0])):
        severity: Severity = "error" if voice[1] == "for" else "note"
        message = (
            f"speaks {voice[1]} {pick} {_name(option)}, but whenever it fires {subject.place(out[0])} rules "
            "the option out, so it never counts. Narrow one of the two, or drop this one."
        )
        yield subject.in_rule(severity, "without effect", voice[0], message)


def _values(subject: Subject, verb: str, part: Callable[[Rule], object]) -> Found:
    """Yield pairs of rules that give one fact two values on the same facts."""
    by_fact: dict[str, list[tuple[Rule, object]]] = defaultdict(list)
    for rule in subject.rules:
        values = part(rule)
        for fact, value in values.items() if isinstance(values, dict) else ():
            by_fact[fact].append((rule, value))
    for fact, entries in by_fact.items():
        mixed: list[AuditFinding] = []
        for (first, one), (second, other) in combinations(entries, 2):
            both = together(subject.search.demands(first), subject.search.demands(second))
            if one == other or both is None or (facts := subject.search.find(first, second)) is None:
                continue
            told_pair = f"{verb}s {fact} {_name(one)}, and {subject.place(second)} {verb}s it {_name(other)}."
            message = f"{told_pair} Both fire on: {told(facts)}. Make their conditions exclude each other."
            if one_value_each(both):
                yield subject.in_rule("error", "contradiction", first, message)
            else:
                mixed.append(subject.in_rule("warning", "contradiction", first, message))
        yield from _folded(mixed)


def _folded(findings: list[AuditFinding]) -> Found:
    """Yield one finding for all pairs that meet only where a fact holds several values at once."""
    if findings:
        first = findings[0]
        message = f"{first.finding.message} So do {len(findings) - 1} more pairs where several values meet."
        yield replace(first, finding=replace(first.finding, message=message)) if findings[1:] else first


def _bounds(subject: Subject) -> Found:
    """Yield pairs of rules that tune a least value above the largest of the same quantity."""
    limits = [(rule, name, value) for rule in subject.rules for name, value in (rule.then.adjust or {}).items()]
    for least, low_name, low in limits:
        for most, high_name, high in limits:
            if "_least" not in low_name or low_name.replace("_least", "_most") != high_name or low <= high:
                continue
            facts = subject.search.find(least, most) if _may_meet(subject, least, most) else None
            if facts is not None:
                message = (
                    f"asks for {low_name} {low:g}, and {subject.place(most)} for {high_name} {high:g}. Both "
                    f"fire on: {told(facts)}. Make their conditions exclude each other, or move a bound."
                )
                yield subject.in_rule("warning", "contradiction", least, message)


def _may_meet(subject: Subject, first: Rule, second: Rule) -> bool:
    return together(subject.search.demands(first), subject.search.demands(second)) is not None


def _name(value: object) -> str:
    if isinstance(value, dict):
        return f"as {value['fact']}"
    if isinstance(value, bool):
        return "yes" if value else "no"
    return f"{value:g}" if isinstance(value, int | float) else str(value).replace("_", " ")
