"""What every rule must say and show: a reason, what it rests on, facts that fire it, and a near miss."""

from __future__ import annotations

import re

from millreason.errors import DataError
from millreason.rule_audit.findings import Found, Subject
from millreason.rulebook import Rule
from millreason.yaml_source import read_yaml

NO_PLACE = re.compile(r"\W*|n/?a|none|unknown|tbd|todo|to do|somewhere", re.IGNORECASE)
TRIALS = "tests/rules"


def check_texts(subject: Subject) -> Found:
    """Yield rules without a reason, and bases that say nothing."""
    for rule in subject.rules:
        if not rule.says.strip():
            yield subject.in_rule("error", "missing sentence", rule, "says nothing. Say the rule in a sentence.")
        if not rule.why.strip():
            yield subject.in_rule("error", "missing why", rule, "gives no reason. Write the why that is printed.")
        elif _plain(rule.why) == _plain(rule.says):
            message = "gives its own sentence as the reason. Say why it is so."
            yield subject.in_rule("warning", "missing why", rule, message)
        yield from _basis(subject, rule)


def _plain(text: str) -> str:
    return re.sub(r"\W+", " ", text).strip().casefold()


def _basis(subject: Subject, rule: Rule) -> Found:
    basis = rule.basis
    if basis.cited and NO_PLACE.fullmatch(basis.cited.where.strip()):
        message = f"cites {basis.cited.source} without a place in it. Name the clause, page, table or chapter."
        yield subject.in_rule("error", "citation without place", rule, message)
    elif not basis.cited and not basis.remark.strip():
        message = "rests on common practice without a remark. Say when it does not hold."
        yield subject.in_rule("warning", "basis without remark", rule, message)


def check_bases(subject: Subject) -> Found:
    """Yield bases of the knowledge that cite a source without a place in it."""
    for name, file in subject.adviser.knowledge.files.items():
        for label, basis in file.bases.items():
            if basis.cited and NO_PLACE.fullmatch(basis.cited.where.strip()):
                message = f"cites {basis.cited.source} without a place in it. Name the clause, page or table."
                yield subject.in_file("error", "citation without place", name, ("bases", label), message)


def check_trials(subject: Subject) -> Found:
    """Yield rules for which a checkout has no firing facts or no near miss, and facts for unknown rules."""
    folder = subject.root / TRIALS
    if not folder.is_dir():
        return
    fires: set[str] = set()
    misses: set[str] = set()
    for path in sorted(folder.glob("*.yaml")):
        name = f"{TRIALS}/{path.name}"
        try:
            document = read_yaml(path, name)
        except DataError as problem:
            yield subject.in_file("error", "unreadable", name, ("file",), str(problem))
            continue
        for place, entry in enumerate(document.data or []):
            named = str(entry.get("rule")) if isinstance(entry, dict) else str(entry)
            if named not in subject.book.rules:
                message = f"no rule has the id {named!r}. Correct it, or drop the entry."
                yield subject.in_file("error", "facts for no rule", name, (place, "rule"), message)
            fires.update([named] if "fires" in entry else [])
            misses.update([named] if "misses" in entry else [])
    for rule_id, rule in subject.book.rules.items():
        if rule_id in subject.book.from_shop:
            continue
        shown = (("no facts that fire it", fires), ("no near miss", misses))
        lacking = [text for text, having in shown if rule_id not in having]
        if lacking:
            message = f"{TRIALS} has {' and '.join(lacking)}. Add them to the file of its topic."
            yield subject.in_rule("error", "not shown by facts", rule, message)
