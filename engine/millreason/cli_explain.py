"""Commands that argue an answer: why, why not, how far it holds, and which assumption matters."""

from __future__ import annotations

import sys
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING

import click

from millreason.console import SHOP, guarded, in_colour, load, page_width, say
from millreason.errors import MillreasonError

if TYPE_CHECKING:
    from millreason.choice import Adviser
    from millreason.explain.reruns import Tick
    from millreason.job import Job
    from millreason.report.page import Section
    from millreason.trace import Answer

JOB = click.argument("job", type=click.Path(exists=True, dir_okay=False, path_type=Path))
ENGINE = click.option("--engine", type=click.Choice(["durable", "twin"]), help="Which inference engine runs the rules.")


@click.command()
@JOB
@click.argument("target", required=False)
@click.option(
    "--full", is_flag=True, help="Every condition down to what was given, looked up or assumed, with sources."
)
@ENGINE
@SHOP
@guarded
def why(job: Path, target: str | None, full: bool, engine: str | None, shop: Path | None) -> None:
    """Say why the answer to JOB is what it is.

    TARGET is a pick (pitch, lead, diameter ...), a caution, a fact (machine.power_kw), a computed value
    ('net power'), or the verdict; without it, the verdict and every pick.
    """
    from millreason.explain.argument import why as ask_why
    from millreason.explain.argument import why_all
    from millreason.explain.why import tree_lines

    adviser = load(shop, engine)
    answer = adviser.choose_file(job)
    trees = why_all(adviser, answer) if target is None else [ask_why(adviser, answer, target)]
    for tree in trees:
        say("\n".join(tree_lines(tree, full)))


@click.command("why-not")
@JOB
@click.argument("choice", metavar="PICK=OPTION")
@ENGINE
@SHOP
@guarded
def why_not(job: Path, choice: str, engine: str | None, shop: Path | None) -> None:
    """Say why PICK is not OPTION for JOB, and the nearest change of the job that would make it so.

    Write lead=15, pitch=coarse, rake=double_positive, class=high_feed_mill, diameter="3 in", or cutter=ID for
    a cutter on hand.
    """
    from millreason.explain.argument import why_not as ask_why_not
    from millreason.report.explanation import sides_table, why_not_item
    from millreason.report.page import Items, Say, Section, present

    pick, separator, option = choice.partition("=")
    if not separator or not option.strip():
        raise MillreasonError(f"{choice!r} names no option. Write the pick and the option, such as pitch=coarse.")
    adviser, read = _adviser_and_job(job, shop, engine)
    with progress() as tick:
        case = ask_why_not(adviser, read, pick.strip(), option.strip(), tick=tick)
    ledgers = sides_table(case) if len(case.sides) == 2 else None
    none = f"No change of one input, or of two, made it the pick in {case.runs} runs."
    missed = Say(none) if case.runs and not case.nearest else None
    blocks = present(Items((why_not_item(case, read.units),)), missed, ledgers)
    _show(adviser.choose(read), Section("why-not", f"Why not {choice}", blocks))


@click.command()
@JOB
@ENGINE
@SHOP
@guarded
def holds(job: Path, engine: str | None, shop: Path | None) -> None:
    """Show how far every input of JOB may move while the picks stay, and what they become beyond."""
    from millreason.explain.argument import holds_while, robustness
    from millreason.report.explanation import holds_section
    from millreason.report.page import Say, Section

    adviser, read = _adviser_and_job(job, shop, engine)
    with progress() as tick:
        intervals, options = holds_while(adviser, read, tick)
        robust = robustness(adviser, read, tick)
    section = holds_section(read.units, intervals, options)
    if section is None:
        section = Section("holds", "Holds while", (Say("Nothing is known of this job that could be moved."),))
    parts = [section, Section("robust", "Data", (Say(robust.line),))] if robust else [section]
    _show(adviser.choose(read), *parts)


@click.command()
@JOB
@ENGINE
@SHOP
@guarded
def assumptions(job: Path, engine: str | None, shop: Path | None) -> None:
    """Show what each assumption behind the answer to JOB would change, the most important first."""
    from millreason.explain.argument import assumptions as weigh
    from millreason.report.explanation import assumptions_section
    from millreason.report.page import Say, Section

    adviser, read = _adviser_and_job(job, shop, engine)
    with progress() as tick:
        found = weigh(adviser, read, tick)
    section = assumptions_section(found, read.units)
    _show(adviser.choose(read), section or Section("assumptions", "Assumptions", (Say("Nothing was assumed."),)))


COMMANDS = [why, why_not, holds, assumptions]


def argued(adviser: Adviser, path: Path) -> Answer:
    """Return the answer to a job file with the whole argument."""
    from millreason.explain.argument import explain
    from millreason.job import read_job

    job = read_job(path, adviser.vocabulary, adviser.knowledge.interface_names)
    with progress() as tick:
        return explain(adviser, job, tick)


@contextmanager
def progress() -> Iterator[Tick | None]:
    """Show on stderr how many runs were made, where a person watches."""
    if not sys.stderr.isatty():
        yield None
        return
    from rich.console import Console

    with Console(stderr=True).status("running the job with changed inputs") as status:
        yield lambda runs: status.update(f"running the job with changed inputs: {runs}")


def _adviser_and_job(path: Path, shop: Path | None, engine: str | None) -> tuple[Adviser, Job]:
    from millreason.job import read_job

    adviser = load(shop, engine)
    return adviser, read_job(path, adviser.vocabulary, adviser.knowledge.interface_names)


def _show(answer: Answer, *sections: Section) -> None:
    """Print sections under the head of the answer."""
    from millreason.report import make_page
    from millreason.report.terminal import terminal

    page = make_page(answer, only=sections)
    say(terminal(page, True, page_width(), in_colour()).removesuffix("\n"))
