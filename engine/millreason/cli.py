"""The command line: each command loads what it needs, prints, and ends with a documented exit code."""

from __future__ import annotations

import os
import sys
from collections.abc import Callable
from functools import wraps
from pathlib import Path
from typing import TYPE_CHECKING, Any, ParamSpec

import click

from millreason import __version__
from millreason.errors import DataError, MillreasonError, did_you_mean

if TYPE_CHECKING:
    from millreason.choice import Adviser
    from millreason.rulebook import Rule
    from millreason.trace import Answer

BAD_INPUT = 2
WIDEST, NARROWEST = 120, 60
Given = ParamSpec("Given")

HELP = """Which face mill, and why.

millreason reads a job (what is milled, on which machine) from a YAML file and answers with a complete
cutter, its position, speeds and feeds, checked against the machine, and every reason for them.

\b
Begin with:   millreason choose JOB.yaml
For paper:    millreason choose JOB.yaml --form html --out sheet.html

\b
Exit codes:
  0  there is an answer (also one that waits for a condition to be confirmed)
  2  something is wrong with the input; each finding is on a line of its own
  3  questions must be answered first
  4  it cannot be done as described; the limits that bind are named

Advice, not an order: local codes, the limits of the machine and the tool, and a qualified person decide.
"""


def guarded(command: Callable[Given, None]) -> Callable[Given, None]:
    """Turn the errors a person can mend into lines on stderr and exit code 2."""

    @wraps(command)
    def run(*args: Given.args, **named: Given.kwargs) -> None:
        try:
            command(*args, **named)
        except DataError as problem:
            for finding in problem.findings:
                _say(str(finding), err=True)
            raise SystemExit(BAD_INPUT) from None
        except MillreasonError as problem:
            _say(str(problem), err=True)
            raise SystemExit(BAD_INPUT) from None
        except BrokenPipeError:
            # The reader (such as `head`) has gone; what is left unsaid is not an error.
            os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())

    return run


def _say(text: str, err: bool = False) -> None:
    """Print a text; letters the terminal's encoding lacks are replaced rather than refused."""
    stream = sys.stderr if err else sys.stdout
    encoding = stream.encoding or "utf-8"
    click.echo(text.encode(encoding, "replace").decode(encoding), err=err)


def _adviser(shop: Path | None, engine: str | None = None) -> Adviser:
    from millreason.choice import load_adviser

    return load_adviser(shop, engine)


SHOP = click.option("--shop", type=click.Path(exists=True, file_okay=False, path_type=Path),
                    help="Folder with your own machines, cutters and rules, laid over what is shipped.")  # fmt: skip


@click.group(help=HELP, context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100})
@click.version_option(__version__, prog_name="millreason")
def main() -> None:
    """Run the program."""


# ---------------------------------------------------------------------- choose
@main.command()
@click.argument("job", type=click.Path(exists=True, dir_okay=False, path_type=Path))
@click.option("--form", type=click.Choice(["terminal", "html", "markdown", "json", "quote"]), default="terminal", show_default=True,
              help="How the answer is written: for the screen, for paper, as text, as data, or as an estimator's block.")  # fmt: skip
@click.option("--out", type=click.Path(dir_okay=False, path_type=Path), help="Write to this file instead of the screen.")
@click.option("--full", is_flag=True, help="On the screen: the whole argument, with every rule and number.")
@click.option("--engine", type=click.Choice(["durable", "twin"]), help="Which inference engine runs the rules; both give the same answer.")
@SHOP
@guarded
def choose(job: Path, form: Any, out: Path | None, full: bool, engine: str | None, shop: Path | None) -> None:
    """Choose a cutter for the job in JOB (a YAML file) and argue the choice.

    The exit code is 0 for an answer, 3 when questions come first, 4 for a refusal, 2 for bad input.
    """
    answer = _adviser(shop, engine).choose_file(job)
    text = _rendered(answer, form, full, out is not None)
    if out is None:
        _say(text.removesuffix("\n"))
    else:
        _write(out, text)
    raise SystemExit(answer.exit_code)


def _rendered(answer: Answer, form: Any, full: bool, to_file: bool) -> str:
    from millreason.report import render

    return render(answer, form, full=full, width=_width(), colour=not to_file and _colour())


def _write(out: Path, text: str) -> None:
    try:
        out.write_text(text, encoding="utf-8", newline="\n")
    except OSError as problem:
        raise MillreasonError(f"{out}: cannot be written: {problem.strerror}. Choose another file with --out.") from problem
    _say(f"written: {out}", err=True)


def _colour() -> bool:
    """Colour only where a person looks: on a terminal that has not declined it."""
    return sys.stdout.isatty() and not os.environ.get("NO_COLOR") and os.environ.get("TERM") != "dumb"


def _width() -> int:
    from shutil import get_terminal_size

    return max(NARROWEST, min(get_terminal_size((80, 24)).columns, WIDEST))


# ---------------------------------------------------------------------- rules
@main.group()
def rules() -> None:
    """Check, list and show the rules behind the answers."""


@rules.command("check")
@SHOP
@guarded
def rules_check(shop: Path | None) -> None:
    """Load every rule and all knowledge, and report everything that is wrong."""
    adviser = _adviser(shop)
    _say(f"{len(adviser.rulebook.rules)} rules in {len(set(adviser.rulebook.topics.values()))} topics: no findings.")


@rules.command("list")
@click.option("--topic", help="Only the rules of one topic.")
@SHOP
@guarded
def rules_list(topic: str | None, shop: Path | None) -> None:
    """List every rule with the sentence that says it."""
    book = _adviser(shop).rulebook
    topics = sorted(set(book.topics.values()))
    if topic is not None and topic not in topics:
        raise MillreasonError(f"unknown topic {topic!r}.{did_you_mean(topic, topics)} Topics: {', '.join(topics)}.")
    for name in topics if topic is None else [topic]:
        _say(f"{name}:")
        for rule in book.rules.values():
            if book.topics[rule.id] == name:
                _say(f"  {rule.id:<9} {rule.says}")


@rules.command("show")
@click.argument("rule_id", metavar="ID")
@SHOP
@guarded
def rules_show(rule_id: str, shop: Path | None) -> None:
    """Show one rule whole: conditions, conclusion, reason and what it rests on."""
    book = _adviser(shop).rulebook
    rule = book.rules.get(rule_id.upper())
    if rule is None:
        raise MillreasonError(f"unknown rule {rule_id!r}.{did_you_mean(rule_id.upper(), book.rules)} See 'millreason rules list'.")
    for line in _rule_lines(rule, book.places[rule.id], book.topics[rule.id]):
        _say(line)


def _rule_lines(rule: Rule, place: str, topic: str) -> list[str]:
    from millreason.facts import basis_record
    from millreason.report.words import basis_text
    from millreason.rulebook import describe

    conclusion = rule.then.model_dump(by_alias=True, exclude_none=True, exclude_defaults=True)
    told = "; ".join(f"{name} {_flat(value)}" for name, value in conclusion.items())
    return [
        f"{rule.id} {rule.name}", rule.says, "", f"topic:  {topic} ({place})", f"stage:  {rule.stage}",
        *(f"{'when:' if place == 0 else '  and'}   {describe(name, condition)}" for place, (name, condition) in enumerate(rule.when.items())),
        f"then:   {told}", f"why:    {rule.why}", f"rests:  {basis_text(basis_record(rule.basis))}",
    ]  # fmt: skip


def _flat(value: object) -> str:
    if isinstance(value, dict):
        return ", ".join(f"{name} = {_flat(inner)}" for name, inner in value.items())
    return ", ".join(map(str, value)) if isinstance(value, list) else str(value)


# ---------------------------------------------------------------------- materials and machines
@main.group()
def materials() -> None:
    """List, find and show the materials that are known."""


@main.group()
def machines() -> None:
    """List and show the machines that a job can name."""


@machines.command("list")
@SHOP
@guarded
def machines_list(shop: Path | None) -> None:
    """List every machine by the name a job gives it."""
    knowledge = _adviser(shop).knowledge
    for machine in knowledge.machines.values():
        _say(f"{machine.id:<28} {machine.title}")


@machines.command("show")
@click.argument("name", metavar="ID")
@SHOP
@guarded
def machines_show(name: str, shop: Path | None) -> None:
    """Show every figure of one machine."""
    known = _adviser(shop).knowledge.machines
    if name not in known:
        raise MillreasonError(f"unknown machine {name!r}.{did_you_mean(name, known)} See 'millreason machines list'.")
    _show(known[name].model_dump(by_alias=True, exclude_none=True))


def _show(fields: dict[str, Any]) -> None:
    for field, value in fields.items():
        if value not in ((), [], {}, ""):
            _say(f"{field:<22} {_flat(list(value) if isinstance(value, tuple) else value)}")


# ---------------------------------------------------------------------- schema
@main.command()
@guarded
def schema() -> None:
    """Print the JSON Schema of `choose --form json`."""
    from millreason.report import schema as schema_text

    _say(schema_text().removesuffix("\n"))


if __name__ == "__main__":
    main()
