"""The report: a pure function of the answer, as a setup sheet, a review on paper, a quote line or data."""

from __future__ import annotations

import json
from collections.abc import Iterable
from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING, Literal

from millreason.report.page import Page, Section, Tone, insert_sections
from millreason.report.words import VERDICTS, clean
from millreason.trace import Answer, answer_schema

if TYPE_CHECKING:
    from jinja2 import Template

Form = Literal["terminal", "html", "markdown", "json", "quote"]
FORMS: tuple[Form, ...] = ("terminal", "html", "markdown", "json", "quote")
_TONES: dict[str, Tone] = {
    "recommend": "good",
    "recommend_with_warnings": "caution",
    "conditional": "stop",
    "ask": "note",
    "refuse": "warning",
}
DEFERENCE = (
    "Advice, not an order: local codes, the limits of the machine and of the tool as their makers state "
    "them, and a qualified person decide. Guards closed, eye protection on, work and tool clamped before "
    "the spindle turns."
)


def render(
    answer: Answer,
    form: Form,
    *,
    full: bool = False,
    width: int = 80,
    colour: bool = False,
    more: Iterable[Section] = (),
) -> str:
    """Return the answer in one of the forms; the same answer gives the same text.

    `full`, `width` and `colour` are for the terminal; `more` adds sections, each behind the one it names.
    """
    if form == "json":
        return answer.to_json()
    if form == "quote":
        from millreason.report.quote import quote

        return quote(answer)
    page = make_page(answer, more)
    if form == "terminal":
        from millreason.report.terminal import terminal

        return terminal(page, full, width, colour)
    return _template(form).render(page=page)


def schema() -> str:
    """Return the JSON Schema of an answer as text."""
    return json.dumps(answer_schema(), indent=2) + "\n"


def make_page(answer: Answer, more: Iterable[Section] = (), only: Iterable[Section] | None = None) -> Page:
    """Return the report as titled sections of plain blocks, which every printed form shares.

    With `only`, these sections stand under the head of the report in place of its own.
    """
    sections = tuple(only) if only is not None else _sections(answer, more)
    return Page(
        clean(answer.job),
        clean(answer.file),
        answer.verdict,
        VERDICTS[answer.verdict],
        _TONES[answer.verdict],
        clean(answer.summary),
        sections,
        footer(answer),
    )


def _sections(answer: Answer, more: Iterable[Section]) -> tuple[Section, ...]:
    from millreason.report.argument import argument_sections
    from millreason.report.buying import buying_section
    from millreason.report.explanation import explanation_sections
    from millreason.report.opening import opening_sections

    argued = explanation_sections(answer) if answer.explanation is not None else []
    bought = buying_section(answer) if answer.verdict in ("recommend", "recommend_with_warnings") else None
    return insert_sections(
        [*opening_sections(answer), *argument_sections(answer)], [*argued, *more, *([bought] if bought else [])]
    )


def footer(answer: Answer) -> tuple[str, ...]:
    """Return who made the answer from what, and who decides."""
    counts = ", ".join(f"{number} {kind.replace('_', ' ')}" for kind, number in sorted(answer.provenance.items()))
    made = (
        f"millreason {answer.version}, engine {answer.engine}, "
        f"rules and knowledge {answer.knowledge_hash[:16]}, from {clean(answer.file)}"
    )
    return (*((f"What the statements rest on: {counts}.",) if counts else ()), made, DEFERENCE)


@cache
def _template(form: str) -> Template:
    from jinja2 import Environment, FileSystemLoader, StrictUndefined

    from millreason.report.markdown import escape_markdown

    folder = Path(__file__).resolve().parent.parent / "templates"
    environment = Environment(
        loader=FileSystemLoader(folder),
        undefined=StrictUndefined,
        autoescape=form == "html",
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
    )
    environment.filters["md"] = escape_markdown
    name = {"html": "report.html.jinja", "markdown": "report.md.jinja"}[form]
    return environment.get_template(name)
