"""What comes before a setup sheet or stands in its place: contradictions, conditions, questions, refusal."""

from __future__ import annotations

from collections.abc import Sequence

from millreason.report.page import Box, Item, Items, Say, Section, Table, present
from millreason.report.sheet import setup_sheet
from millreason.report.words import clean, fact_words, job_key, limit_number, listing, option, recommends
from millreason.trace import Answer, LimitRecord, Question, Refusal


def opening_sections(answer: Answer) -> list[Section]:
    """Return what the report opens with, by the verdict."""
    sections = [_contradictions(answer)] if answer.contradictions else []
    if answer.conditions:
        sections.append(_conditions(answer))
    if answer.verdict == "ask":
        sections.append(questions(answer, "Please answer these first"))
    if answer.refusal:
        sections.append(_refusal(answer, answer.refusal))
    if answer.picks and answer.plan and recommends(answer):
        sections.append(setup_sheet(answer, answer.picks, answer.plan))
    return sections


def _contradictions(answer: Answer) -> Section:
    box = Box("The job contradicts itself", tuple(clean(text) for text in answer.contradictions), "warning")
    return Section("contradictions", "Contradictions", (box,), (box,))


def _conditions(answer: Answer) -> Section:
    lines = tuple(f"{clean(each.text)} {clean(each.because)}".strip() for each in answer.conditions)
    box = Box("Cutting data are held back until this is confirmed", lines, "stop")
    names = listing(f"{each.fact.partition('.')[2]}: yes" for each in answer.conditions)
    how = Say(
        f"When a qualified person has confirmed it, write under 'confirm:' in the job file: {names}. Then run it again."
    )
    return Section("conditions", "Condition", (box, how), (box, how))


def questions(answer: Answer, title: str) -> Section:
    """Return the questions, most valuable first, each with why it is asked."""
    held = {question.fact for question in answer.conditions}
    asked = [question for question in answer.questions if question.fact not in held]
    blocks = (Items(tuple(_question(question) for question in asked), numbered=True),)
    return Section("questions", title, blocks, blocks)


def _question(question: Question) -> Item:
    effect = f"It would change: {clean(question.effect)}" if question.effect else ""
    rules = f" [{listing(question.rules)}]" if question.rules else ""
    details = (f"Why: {clean(question.because)}{rules}", effect, f"In the job file: {job_key(question.fact)}")
    mark = "" if question.need == "must" else "useful"
    return Item(clean(question.text), tuple(line for line in details if line), mark)


def _refusal(answer: Answer, refusal: Refusal) -> Section:
    opened = tuple(
        Item(clean(way.text), (f"Then: {clean(way.then)}",) if way.then else (), "verified") for way in refusal.openings
    )
    others = tuple(Item(clean(text)) for text in refusal.alternatives)
    blocks = present(
        Table(
            ("what binds", "value", "limit", "rule", "could be relaxed"),
            _limit_rows(refusal.limits, answer.units),
            frozenset({1, 2}),
            "Limits that bind",
        ),
        Items(opened, title="What would open a way (each was run)"),
        None if opened else Say("No single change that was tried opens a way."),
        Items(others, title="Other ways"),
    )
    return Section("refusal", "Why it cannot be done as described", blocks, blocks)


def _limit_rows(limits: Sequence[LimitRecord], units: str) -> tuple[tuple[str, ...], ...]:
    return tuple(
        (
            clean(limit.text) or option(limit.key),
            limit_number(limit.value, units, limit.unit),
            limit_number(limit.limit, units, limit.unit),
            clean(limit.rule),
            ", ".join(fact_words(name) for name in limit.relax),
        )
        for limit in limits
    )
