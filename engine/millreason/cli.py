"""The command line: each command loads what it needs, prints, and ends with a documented exit code."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import click

from millreason import __version__
from millreason.cli_explain import COMMANDS, argued, progress
from millreason.cli_lists import machines, materials, rules
from millreason.console import SHOP, guarded, in_colour, load, page_width, say, write

HELP = """Which face mill, and why.

millreason reads a job (what is milled, on which machine) from a YAML file and answers with a complete
cutter, its position, speeds and feeds, checked against the machine, and every reason for them.

\b
Begin with:   millreason choose JOB.yaml
For paper:    millreason choose JOB.yaml --form html --out sheet.html
Argue it:     millreason why JOB.yaml, why-not JOB.yaml pitch=coarse, holds JOB.yaml, assumptions JOB.yaml

\b
Exit codes:
  0  there is an answer (also one that waits for a condition to be confirmed)
  2  something is wrong with the input; each finding is on a line of its own
  3  questions must be answered first
  4  it cannot be done as described; the limits that bind are named

Advice, not an order: local codes, the limits of the machine and the tool, and a qualified person decide.
"""


@click.group(help=HELP, context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100})
@click.version_option(__version__, prog_name="millreason")
def main() -> None:
    """Run the program."""


@main.command()
@click.argument("job", type=click.Path(exists=True, dir_okay=False, path_type=Path))
@click.option(
    "--form",
    type=click.Choice(["terminal", "html", "markdown", "json", "quote"]),
    default="terminal",
    show_default=True,
    help="For the screen, for paper, as text, as data, or as an estimator's block.",
)
@click.option("--out", type=click.Path(dir_okay=False, path_type=Path), help="Write to this file instead.")
@click.option("--full", is_flag=True, help="On the screen: the whole argument, with every rule and number.")
@click.option(
    "--argue",
    is_flag=True,
    help="In any form: why not another cutter, how far the choice holds, which assumption matters.",
)
@click.option(
    "--engine",
    type=click.Choice(["durable", "twin"]),
    help="Which inference engine runs the rules; both give the same answer.",
)
@SHOP
@guarded
def choose(
    job: Path, form: Any, out: Path | None, full: bool, argue: bool, engine: str | None, shop: Path | None
) -> None:
    """Choose a cutter for the job in JOB (a YAML file) and argue the choice.

    The exit code is 0 for an answer, 3 when questions come first, 4 for a refusal, 2 for bad input.
    """
    from millreason.report import render

    adviser = load(shop, engine)
    if argue or full:
        answer = argued(adviser, job)
    else:
        with progress():  # a refusal is run again with changed inputs, which may take some seconds
            answer = adviser.choose_file(job)
    colour = out is None and in_colour()
    text = render(answer, form, full=full, width=page_width(), colour=colour)
    if out is None:
        say(text.removesuffix("\n"))
    else:
        write(out, text)
    raise SystemExit(answer.exit_code)


@main.command()
@guarded
def schema() -> None:
    """Print the JSON Schema of `choose --form json`."""
    from millreason.report import schema as schema_text

    say(schema_text().removesuffix("\n"))


for command in (*COMMANDS, rules, materials, machines):
    main.add_command(command)


if __name__ == "__main__":
    main()
