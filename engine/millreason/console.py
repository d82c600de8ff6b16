"""What all commands share: printing that cannot fail, errors as lines on stderr, the shop option, loading."""

from __future__ import annotations

import os
import sys
from collections.abc import Callable
from functools import wraps
from pathlib import Path
from typing import TYPE_CHECKING, ParamSpec

import click

from millreason.errors import DataError, MillreasonError

if TYPE_CHECKING:
    from millreason.choice import Adviser

BAD_INPUT = 2
WIDEST, NARROWEST = 120, 60
Given = ParamSpec("Given")

SHOP = click.option(
    "--shop",
    type=click.Path(exists=True, file_okay=False, path_type=Path),
    help="Folder with your own machines, cutters and rules, laid over what is shipped.",
)


def guarded(command: Callable[Given, None]) -> Callable[Given, None]:
    """Turn the errors a person can mend into lines on stderr and exit code 2."""

    @wraps(command)
    def run(*args: Given.args, **named: Given.kwargs) -> None:
        try:
            command(*args, **named)
        except DataError as problem:
            for finding in problem.findings:
                say(str(finding), err=True)
            raise SystemExit(BAD_INPUT) from None
        except MillreasonError as problem:
            say(str(problem), err=True)
            raise SystemExit(BAD_INPUT) from None

    return run


def say(text: str, err: bool = False) -> None:
    """Print a text; letters that the terminal's encoding lacks are replaced rather than refused."""
    stream = sys.stderr if err else sys.stdout
    encoding = stream.encoding or "utf-8"
    click.echo(text.encode(encoding, "replace").decode(encoding), err=err)


def write(out: Path, text: str) -> None:
    """Write a file, and say so."""
    try:
        out.write_text(text, encoding="utf-8", newline="\n")
    except OSError as problem:
        raise MillreasonError(f"{out}: cannot be written: {problem.strerror}. Choose another --out.") from problem
    say(f"written: {out}", err=True)


def load(shop: Path | None, engine: str | None = None) -> Adviser:
    """Load knowledge and rules; only commands that need them pay for it."""
    from millreason.choice import load_adviser

    return load_adviser(shop, engine)


def in_colour() -> bool:
    """Whether to colour: only on a terminal that has not declined it."""
    return sys.stdout.isatty() and not os.environ.get("NO_COLOR") and os.environ.get("TERM") != "dumb"


def page_width() -> int:
    """Width of the terminal within what reads well; 80 columns where there is none."""
    from shutil import get_terminal_size

    return max(NARROWEST, min(get_terminal_size((80, 24)).columns, WIDEST))
