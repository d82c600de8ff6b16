"""Writes the pages that are generated from rules and knowledge: python tests/generated_pages.py [--check]."""

from __future__ import annotations

import argparse
import difflib
import sys
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from pathlib import Path

from millreason.choice import Adviser, load_adviser
from millreason.facts import basis_record
from millreason.provenance import Basis
from millreason.report.words import basis_text
from millreason.rule_audit.counts import count_lines
from millreason.rule_audit.findings import Subject
from millreason.rulebook import Rule, describe
from millreason.stages import conclusion_text
from millreason.yaml_source import read_yaml

ROOT = Path(__file__).resolve().parent.parent
CATALOGUE = "RULES.md"
MUST_BE_ANSWERED = ("choice", "plan")
MOST_SHOWN = 40


@dataclass(frozen=True)
class Question:
    """A question of practice, and what answers it where no rule does."""

    number: int
    kind: str
    asks: str
    by: str = ""


def questions(root: Path = ROOT) -> list[Question]:
    """Return the questions of knowledge/questions.yaml in their order."""
    entries = read_yaml(root / "knowledge" / "questions.yaml", "knowledge/questions.yaml").data["questions"]
    return [Question(entry["id"], entry["kind"], entry["asks"], entry.get("by", "")) for entry in entries]


def groups(root: Path = ROOT) -> dict[str, str]:
    """Return what the letters in `answers` stand for."""
    named: dict[str, str] = read_yaml(root / "knowledge" / "questions.yaml", "knowledge/questions.yaml").data["groups"]
    return named


def answering(rules: Iterable[Rule]) -> dict[int | str, list[str]]:
    """Return the ids of the rules that answer each question."""
    found: dict[int | str, list[str]] = {}
    for rule in rules:
        for question in rule.answers:
            found.setdefault(question, []).append(rule.id)
    return found


def unanswered(asked: Iterable[Question], answers: dict[int | str, list[str]]) -> list[Question]:
    """Return the questions about choice and plan that no rule answers, and others that nothing does."""
    return [
        question
        for question in asked
        if question.number not in answers and (question.kind in MUST_BE_ANSWERED or not question.by)
    ]


# ---------------------------------------------------------------------- the catalogue
def catalogue(adviser: Adviser) -> str:
    """Return the rule catalogue as Markdown: by topic, and the questions with the rules behind them."""
    return "\n".join([*_head(adviser), *_question_table(adviser), *_topics(adviser)]).rstrip() + "\n"


def _head(adviser: Adviser) -> Iterator[str]:
    yield "# The rules"
    yield ""
    yield "Generated from `rules/` by `python tests/generated_pages.py`; do not edit it here. Each rule stands with"
    yield "its sentence, its conditions (all must hold), what it concludes, why, and what it rests on. Words in braces"
    yield "are filled with the job's own value. *Recalled* means quoted from memory of the source; *common practice*"
    yield "claims no source, and says when it does not hold."
    yield ""
    counts = [line for line in count_lines(Subject(adviser)) if not line.startswith("    ") and "by topic" not in line]
    yield from (f"* {line.strip()}" for line in counts)
    yield ""


def _question_table(adviser: Adviser) -> Iterator[str]:
    answers = answering(adviser.rulebook.rules.values())
    yield "## Questions and the rules that answer them"
    yield ""
    yield "| no. | question | kind | rules |"
    yield "|---|---|---|---|"
    for question in questions():
        told = [_link(rule) for rule in answers.get(question.number, [])] or [question.by or "**none**"]
        yield f"| {question.number} | {_cell(question.asks)} | {question.kind} | {_cell(', '.join(told))} |"
    for letter, title in groups().items():
        if letter in answers:
            yield f"| {letter} | {_cell(title)} | group | {', '.join(map(_link, answers[letter]))} |"
    yield ""


def _topics(adviser: Adviser) -> Iterator[str]:
    book = adviser.rulebook
    for topic in sorted(set(book.topics.values())):
        yield f"## {topic}"
        yield ""
        for rule in book.rules.values():
            if book.topics[rule.id] == topic:
                yield from _entry(rule)


def _entry(rule: Rule) -> Iterator[str]:
    conditions = [describe(fact, condition) for fact, condition in rule.when.items()]
    conditions += [f"{fact} is not known" for fact in rule.implied_missing]
    yield f'### <a id="{rule.id.lower()}"></a>{rule.id} {rule.name.replace("-", " ")}'
    yield ""
    yield f"{rule.says}"
    yield ""
    yield f"* when ({rule.stage}): {'; '.join(f'`{text}`' for text in conditions)}"
    yield f"* then: {conclusion(rule)}"
    yield f"* why: {rule.why}"
    yield f"* rests on: {_rests_on(rule.basis)}"
    yield ""


def conclusion(rule: Rule) -> str:
    """Return what a rule concludes, with the words a person reads where there are any."""
    told = conclusion_text(rule.then)
    if rule.then.caution:
        return f"{told}. {rule.then.caution.do}"
    return f"{told}: {rule.then.offer}" if rule.then.offer else told


def _rests_on(basis: Basis) -> str:
    return basis_text(basis_record(basis))


def _link(rule_id: str) -> str:
    return f"[{rule_id}](#{rule_id.lower()})"


def _cell(text: str) -> str:
    return text.replace("|", "\\|")


# ---------------------------------------------------------------------- writing and checking
def pages() -> dict[str, str]:
    """Return every generated page by its name."""
    return {CATALOGUE: catalogue(load_adviser())}


def difference(name: str, wanted: str, root: Path = ROOT) -> list[str]:
    """Return in which lines a page on disk differs from what would be written; nothing if it does not."""
    path = root / name
    found = path.read_text(encoding="utf-8") if path.is_file() else ""
    if found == wanted:
        return []
    lines = list(difflib.unified_diff(found.splitlines(), wanted.splitlines(), "on disk", "now", lineterm="", n=0))
    added = sum(line.startswith("+") for line in lines[2:])
    removed = sum(line.startswith("-") for line in lines[2:])
    rest = [f"... {len(lines) - MOST_SHOWN} more lines"] if len(lines) > MOST_SHOWN else []
    summary = f"{name}: out of date ({added} lines new, {removed} gone). Run python tests/generated_pages.py"
    return [summary, *lines[:MOST_SHOWN], *rest]


def main(arguments: list[str] | None = None) -> int:
    """Write the pages, or with --check say which are out of date; 1 if any is or if a question has no answer."""
    parser = argparse.ArgumentParser(description="Write the pages that are generated from rules and knowledge.")
    parser.add_argument("--check", action="store_true", help="write nothing; end with 1 if a page is out of date")
    options = parser.parse_args(arguments)
    stale = False
    for name, text in pages().items():
        if options.check:
            for line in (told := difference(name, text)):
                print(line)
            stale = stale or bool(told)
        else:
            (ROOT / name).write_text(text, encoding="utf-8", newline="\n")
    open_questions = unanswered(questions(), answering(load_adviser().rulebook.rules.values()))
    for question in open_questions:
        print(f"knowledge/questions.yaml: question {question.number} ({question.kind}) has no rule: {question.asks}")
    return 1 if stale or open_questions else 0


if __name__ == "__main__":
    sys.exit(main())
