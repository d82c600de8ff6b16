"""Facts, knowledge and sources that nothing uses, missing sources, and rules that argue in a circle."""

from __future__ import annotations

import re
from collections import defaultdict
from collections.abc import Iterator

from millreason.rule_audit.findings import Found, Subject
from millreason.rulebook import PLACEHOLDER, Rule, TestSpec
from millreason.yaml_source import Key

VOCABULARY = "knowledge/vocabulary.yaml"

CITED = re.compile(r"\bsource: *['\"]?([a-z0-9][a-z0-9-]*)['\"]?\s*,?\s*where:")
REFERENCES = re.compile(r"^ +References\n +-+\n(.*?)(?=\n\s*\n|\n *\"\"\")", re.MULTILINE | re.DOTALL)
SOURCE_ID = re.compile(r"[a-z0-9]+(?:-[a-z0-9]+)+")


# ---------------------------------------------------------------------- facts
def check_facts(subject: Subject) -> Found:
    """Yield facts that no rule looks at and the program does not read."""
    used = {fact for rule in subject.rules for fact in _facts_of(rule)}
    concluded = {fact for rule in subject.rules for fact in rule.then.set or {}}
    for fact, definition in subject.facts.items():
        if fact in used or subject.source_words.reads(fact):
            continue
        if definition.from_ == "rules":
            what = "rules conclude it" if fact in concluded else "no rule concludes it"
            message = f"{what}, and nothing tests it. Use it, or take it away."
            yield subject.in_vocabulary("warning", "unused fact", fact, message)
        elif fact.startswith("pick."):
            continue  # its ledger uses it
        else:
            message = "no rule tests it and the program does not read it. Use it, or take it away."
            yield subject.in_vocabulary("note", "unused fact", fact, message)


def _facts_of(rule: Rule) -> Iterator[str]:
    then = rule.then
    yield from rule.when
    texts = (rule.says, rule.why, then.offer or "", then.caution.do if then.caution else "")
    yield from (fact for text in texts for fact in PLACEHOLDER.findall(text))
    yield from (value["fact"] for value in (then.assume or {}).values() if isinstance(value, dict))
    spec = then.reject or then.refuse
    if spec:
        yield from (fact for fact in (spec.value, spec.against, *spec.relax) if isinstance(fact, str))
    yield from (fact for fact in (then.ask, then.condition) if fact)


# ---------------------------------------------------------------------- knowledge
def check_knowledge(subject: Subject) -> Found:
    """Yield figures, fluids, strengths, adjustables and limits that neither rules nor program use."""
    quoted = subject.source_words.quoted
    for name in subject.adviser.knowledge.practice:
        if name not in quoted:
            message = "the program does not read it. Use it, or take it away."
            yield subject.in_file("warning", "unused knowledge", "knowledge/practice.yaml", ("values", name), message)
    for kind, file, key, names, used in _named(subject):
        for place, name in enumerate(names):
            if name not in used:
                message = f"no rule uses the {kind} {name!r}. Use it, or take it away."
                where = (*key, place, name) if file != VOCABULARY else (*key, name)
                yield subject.in_file("warning", "unused knowledge", file, where, message)


Named = tuple[str, str, Key, list[str], set[str]]


def _named(subject: Subject) -> Iterator[Named]:
    """Yield kinds of names with their file, their key in it, the names, and those that are used."""
    rules = list(subject.rules)
    words = {str(value) for rule in rules for value in _words(rule)}
    yield "fluid", "knowledge/practice.yaml", ("fluids",), list(subject.adviser.knowledge.fluids), words
    levels = {rule.then.strength or rule.then.lower or "" for rule in rules}
    strengths = list(subject.adviser.knowledge.strengths)
    yield "strength", "knowledge/strengths.yaml", ("strengths",), strengths, levels
    tuned = {name for rule in rules for name in rule.then.adjust or {}}
    yield "adjustable", VOCABULARY, ("adjustables",), list(subject.vocabulary.adjustables), tuned
    named = {spec.limit for rule in rules if (spec := rule.then.reject or rule.then.refuse)}
    limits = list(map(str, subject.facts["answer.limits"].options))
    yield "limit", VOCABULARY, ("facts", "answer.limits"), limits, named | subject.source_words.quoted


def _words(rule: Rule) -> Iterator[object]:
    """Yield the options that a rule tests or speaks of."""
    then = rule.then
    for condition in rule.when.values():
        values = [part for _, part in condition if part is not None] if isinstance(condition, TestSpec) else [condition]
        for value in values:
            yield from value if isinstance(value, list) else [value]
    for options in (then.for_ or then.against or then.rule_out or {}).values():
        yield from options if isinstance(options, list) else [options]


# ---------------------------------------------------------------------- sources
def check_sources(subject: Subject) -> Found:
    """Yield sources that are cited and not listed, and sources that are listed and cited nowhere."""
    known = list(subject.adviser.knowledge.sources)
    cited = citations(subject)
    for source, places in sorted(cited.items()):
        if source not in known:
            message = f"source {source!r} is not in knowledge/sources.yaml. Add it there, or correct the citation."
            yield subject.in_file("error", "missing source", places[0], (source,), message)
    for place, source in enumerate(known):
        if source not in cited:
            message = "nothing cites it: no knowledge, no rule, no formula, no check. Cite it, or take it away."
            key = ("sources", place, source)
            yield subject.in_file("warning", "unused source", "knowledge/sources.yaml", key, message)


def citations(subject: Subject) -> dict[str, list[str]]:
    """Return every cited source with the files that cite it; a checkout's tests count too."""
    found: dict[str, list[str]] = defaultdict(list)
    known = subject.adviser.knowledge.sources
    for folder in ("knowledge", "rules"):
        for path in sorted((subject.root / folder).rglob("*.yaml")):
            name = path.relative_to(subject.root).as_posix()
            for source in CITED.findall(path.read_text(encoding="utf-8")):
                found[source].append(name)
    for path in subject.formula_files():
        for block in REFERENCES.findall(path.read_text(encoding="utf-8")):
            for source in SOURCE_ID.findall(block):
                found[source].append(f"formulas/{path.name}")
    for path in sorted((subject.root / "tests").rglob("*.py")):
        for source in SOURCE_ID.findall(path.read_text(encoding="utf-8")):
            if source in known:
                found[source].append(path.relative_to(subject.root).as_posix())
    return dict(found)


# ---------------------------------------------------------------------- circles
def check_circles(subject: Subject) -> Found:
    """Yield chains of conclusions within a stage that come back to where they began."""
    for stage in ("assume", "appraise"):
        after: dict[str, dict[str, Rule]] = defaultdict(dict)
        for rule in subject.rules:
            if rule.stage == stage:
                for made in {**(rule.then.assume or {}), **(rule.then.set or {})}:
                    for fact in _positive(rule):
                        after[fact].setdefault(made, rule)
        for circle in _circles(after):
            rules = [after[one][other] for one, other in zip(circle, [*circle[1:], circle[0]], strict=True)]
            chain = " -> ".join([*circle, circle[0]])
            named = ", ".join(subject.place(rule) for rule in rules)
            message = f"argues in a circle: {chain} ({named}). Let one of them rest on facts of the job alone."
            yield subject.in_rule("error" if stage == "appraise" else "note", "circle", rules[0], message)


def _positive(rule: Rule) -> Iterator[str]:
    """Yield the facts whose values, not whose absence, a rule rests on."""
    for fact, condition in rule.when.items():
        negative = isinstance(condition, TestSpec) and (condition.known is False or condition.lacks is not None)
        if not negative:
            yield fact
    yield from (value["fact"] for value in (rule.then.assume or {}).values() if isinstance(value, dict))


def _circles(after: dict[str, dict[str, Rule]]) -> Iterator[list[str]]:
    """Yield each circle once, beginning with its first fact by name."""
    for start in sorted(after):
        stack = [[start]]
        seen: set[str] = set()
        while stack:
            path = stack.pop()
            for made in sorted(after.get(path[-1], {})):
                if made == start:
                    yield path
                    stack.clear()
                    break
                if made > start and made not in seen:
                    seen.add(made)
                    stack.append([*path, made])
