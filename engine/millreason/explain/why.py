"""Why: the tree from a conclusion down to what was given, looked up, assumed or computed."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from typing import TYPE_CHECKING

from millreason.explain.words import option_words, value_words
from millreason.explanation_records import Because
from millreason.report.words import basis_text, fact_words, option, origin_text, pick_option
from millreason.rulebook import RuleBook, describe
from millreason.trace import Answer, ConditionRecord, Evidence, FactRecord, FiringRecord, LimitRecord
from millreason.vocabulary import Vocabulary

if TYPE_CHECKING:
    from millreason.facts import Situation
    from millreason.outcome import Outcome

_STANCES = {"for": "for {}", "against": "against {}", "rule_out": "rules {} out"}
_DEEPEST = 12


class Argument:
    """Makes trees of statements from the facts and firings of a trace."""

    def __init__(self, vocabulary: Vocabulary, source: Answer | Outcome) -> None:
        from millreason.trace import Answer

        self._vocabulary = vocabulary
        if isinstance(source, Answer):
            facts, firings, self._units = source.trace.facts, source.trace.firings, source.units
        else:
            facts, firings, self._units = source.situation.records(), source.firings, source.job.units
        self._facts = {record.name: record for record in facts}
        self._firings: dict[str, list[FiringRecord]] = {}
        for firing in firings:
            self._firings.setdefault(firing.rule, []).append(firing)

    # ------------------------------------------------------------------ rules
    def evidence(self, entry: Evidence, about: str, whose: str = "it") -> Because:
        """Return one rule's word for or against an option with what it rests on."""
        strength = "" if entry.stance == "rule_out" else f" ({entry.strength} {entry.weight:+g})"
        found = self._firing(entry.rule, about)
        lead = f"{_STANCES[entry.stance].format(whose)}{strength}: "
        if found is None:
            return Because(f"{lead}{entry.why}", "rule", entry.rule)
        return self.rule(found, lead)

    def rule(self, firing: FiringRecord, lead: str = "", seen: frozenset[str] = frozenset()) -> Because:
        """Return a firing: its reason, and under it the facts that met its conditions."""
        seen |= {firing.rule}
        facts = [self._condition(condition, seen) for condition in firing.conditions]
        return Because(f"{lead}{firing.why}", "rule", firing.rule, basis=firing.basis, because=facts)

    def rules(self, names: Iterable[str]) -> list[Because]:
        """Return the firings of several rules."""
        return [self.rule(found) for name in names if (found := self._firing(name, "")) is not None]

    def _firing(self, rule: str, about: str) -> FiringRecord | None:
        firings = self._firings.get(rule, [])
        return next((firing for firing in firings if not about or firing.about in ("", about)), None)

    def rejection(self, limit: LimitRecord, situation: Situation, book: RuleBook | None = None) -> Because:
        """Return a limit that rejects a candidate: the value against the limit, and the facts the rule looked at."""
        sides = ""
        if limit.value is not None and limit.limit is not None:
            reached, most = (value_words(number, limit.unit, self._units) for number in (limit.value, limit.limit))
            sides = f" ({reached} against {most})"
        rule = book.rules.get(limit.rule) if book is not None else None
        facts = []
        for fact, condition in rule.when.items() if rule else ():
            record = situation.record(fact)
            told = describe(fact, condition)
            value = record.value if record else None
            facts.append(
                self._condition(ConditionRecord(fact, told, value, record.origin if record else "absent"), frozenset())
            )
        return Because(f"{limit.text}{sides}", "limit", limit.rule, because=facts)

    # ------------------------------------------------------------------ facts
    def _condition(self, condition: ConditionRecord, seen: frozenset[str]) -> Because:
        test = condition.test.removeprefix(condition.fact).strip()
        if condition.origin == "absent" or condition.value is None:
            return Because(f"{fact_words(condition.fact)}: {test}", "fact", condition.fact, "absent")
        unit = self._vocabulary.facts[condition.fact].unit if condition.fact in self._vocabulary.facts else ""
        value = value_words(condition.value, unit, self._units)
        record = self._facts.get(condition.fact)
        compared = isinstance(condition.value, int | float) and not isinstance(condition.value, bool)
        text = f"{fact_words(condition.fact)} {value}" + (f", {test}" if compared else "")
        if record is None:
            return Because(text, "fact", condition.fact, "computed", "computed")
        return self._fact(record, text, seen)

    def fact(self, name: str) -> Because | None:
        """Return a fact of the trace with what it rests on."""
        record = self._facts.get(name)
        if record is None:
            return None
        return self._fact(
            record, f"{fact_words(name)} {value_words(record.value, record.unit, self._units)}", frozenset()
        )

    def _fact(self, record: FactRecord, text: str, seen: frozenset[str]) -> Because:
        below: list[Because] = []
        by = record.by
        if record.origin in ("assumed", "concluded"):
            if by not in seen and len(seen) < _DEEPEST:
                below = [self.rule(firing, "", seen) for firing in self._firings.get(by, [])[:1]]
        elif record.origin == "computed":
            below = [found for name in self._named_in(record.text) if (found := self.fact(name)) is not None]
        source = basis_text(record.basis)
        how = {
            "given": f"given as {record.text}" if record.text else "given",
            "looked_up": f"looked up: {by}" + (f"; {source}" if source else ""),
            "assumed": f"assumed by {by}",
            "concluded": f"concluded by {by}",
            "computed": f"computed: {record.text or by}",
        }[record.origin]
        return Because(text, "fact", record.name, record.origin, how, record.basis, below)

    def _named_in(self, text: str) -> Iterator[str]:
        return (word for word in text.split() if word in self._facts)


# ---------------------------------------------------------------------- conclusions
def why_pick(argument: Argument, answer: Answer, pick: str) -> Because:
    """Return why a pick has the option it has: what spoke for and against it, and better tools that were rejected."""
    ledger = next(entry for entry in answer.trace.ledgers if entry.pick == pick)
    chosen = next(entry for entry in ledger.options if entry.option == ledger.chosen)
    about = f"D {chosen.option}" if pick == "diameter_mm" else ""
    rules = [argument.evidence(entry, about) for entry in sorted(chosen.evidence, key=lambda entry: -entry.weight)]
    others = [entry for entry in ledger.options if entry.option != ledger.chosen and not entry.ruled_out]
    better = [entry.option for entry in others if entry.balance > chosen.balance]
    rejected = list(_rejected(answer, pick, better)) if better else []
    if better and not rejected:
        names = ", ".join(pick_option(pick, name, answer.units) for name in better)
        rejected = [Because(f"{names}: more speaks for it alone, but less for a whole tool that has it", "note")]
    if not rules and not rejected:
        rules = [Because("nothing speaks for or against it; it is the usual one", "note")]
    name = option_words(pick, chosen.option, answer.units)
    next_best = f"; next {pick_option(pick, others[0].option, answer.units)} {others[0].balance:+g}" if others else ""
    return Because(f"{name} (balance {chosen.balance:+g}{next_best})", "conclusion", pick, because=[*rules, *rejected])


def _rejected(answer: Answer, pick: str, options: list[str]) -> Iterator[Because]:
    """Yield the tools with a better option of the pick that were rejected, and by which limit."""
    seen: set[tuple[str, str]] = set()
    for candidate in answer.trace.candidates:
        value = candidate.picks.get(pick)
        name = f"{value:g}" if isinstance(value, int | float) else str(value)
        for limit in candidate.limits:
            if candidate.outcome == "rejected" and name in options and (name, limit.rule) not in seen:
                seen.add((name, limit.rule))
                told = f"{pick_option(pick, name, answer.units)} is rejected: {limit.text}"
                yield Because(told, "limit", limit.rule)


def why_caution(argument: Argument, answer: Answer, key: str) -> Because:
    """Return why a caution is given."""
    caution = next(entry for entry in answer.cautions if entry.key == key)
    rules = argument.rules(caution.rules)
    return Because(f"{caution.severity}: {caution.do}", "conclusion", key, basis=caution.basis, because=rules)


def why_verdict(argument: Argument, answer: Answer) -> Because:
    """Return what the verdict rests on: questions, limits, conditions, warnings, or that a cutter stands."""
    below: list[Because] = [Because(text, "note") for text in answer.contradictions]
    if answer.verdict == "ask":
        for question in answer.questions:
            if question.need == "must":
                below.append(Because(question.text, "note", question.fact, because=argument.rules(question.rules)))
    elif answer.verdict == "conditional":
        for condition in answer.conditions:
            below.append(Because(condition.text, "note", condition.fact, because=argument.rules(condition.rules)))
    elif answer.refusal is not None:
        for limit in answer.refusal.limits:
            rules = argument.rules(limit.rule.split(", "))
            many = f" ({limit.candidates} tools)" if limit.candidates > 1 else ""
            below.append(Because(f"{limit.text}{many}", "limit", limit.rule, because=rules))
    else:
        graves = [caution.key for caution in answer.cautions if caution.severity == "warning"]
        below += [why_caution(argument, answer, key) for key in graves]
        if not graves:
            below.append(Because(f"a cutter stands within every limit: {answer.summary}", "note"))
    return Because(f"verdict: {option(answer.verdict)}", "conclusion", "verdict", because=below)


def tree_lines(tree: Because, full: bool = False, depth: int = 0) -> list[str]:
    """Return a tree as indented lines: short, each reason with its facts in one line; full, every step of its own."""
    mark = f" [{tree.name}]" if tree.kind in ("rule", "limit") and tree.name else ""
    how = f" ({tree.how})" if tree.how else ""
    rests = f" <{basis_text(tree.basis)}>" if full and tree.kind == "rule" and tree.basis else ""
    lines = [f"{'  ' * depth}{'- ' if depth else ''}{tree.text}{mark}{how}{rests}"]
    if full or tree.kind in ("conclusion", "note") or depth == 0:
        for part in tree.because:
            lines += tree_lines(part, full, depth + 1)
    elif tree.because:
        facts = "; ".join(dict.fromkeys(_in_short(part) for part in tree.because))
        lines.append(f"{'  ' * (depth + 1)}because {facts}")
    return lines


def _in_short(tree: Because) -> str:
    """Return a fact in a few words, with what was given, looked up or assumed beneath it."""
    if not tree.because or tree.origin == "assumed":
        known = tree.origin and tree.origin != "absent"
        return f"{tree.text} ({origin_text(tree.origin)})" if known else tree.text
    leaves = dict.fromkeys(leaf for part in tree.because for leaf in _leaves(part))
    return f"{tree.text} (from {', '.join(leaves)})" if leaves else tree.text


def _leaves(tree: Because) -> Iterator[str]:
    if tree.because and tree.origin != "assumed":
        for part in tree.because:
            yield from _leaves(part)
    elif tree.origin != "absent":
        yield f"{tree.text}, {origin_text(tree.origin)}" if tree.origin else tree.text


__all__ = ["Argument", "tree_lines", "why_caution", "why_pick", "why_verdict"]
