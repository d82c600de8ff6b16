from __future__ import annotations

import io
import json
import subprocess
import sys
from pathlib import Path

import pytest
import yaml
from click.testing import CliRunner, Result

import answers
from millreason import __version__, console
from millreason.cli import main
from millreason.errors import DataError, Finding, MillreasonError
from millreason.trace import Answer

ANSWERS = {"asking": 3, "refused": 4, "recommended": 0, "held_back": 0}


class FakeAdviser:
    """Answers every job with one answer, or fails with one error."""

    def __init__(self, outcome: Answer | Exception) -> None:
        self.outcome = outcome

    def choose_file(self, path: Path) -> Answer:
        if isinstance(self.outcome, Exception):
            raise self.outcome
        return self.outcome


def run(*arguments: str) -> Result:
    return CliRunner().invoke(main, list(arguments))


@pytest.fixture
def job(tmp_path: Path) -> Path:
    path = tmp_path / "job.yaml"
    path.write_text("work: {material: C45}\n", encoding="utf-8")
    return path


def answered_with(monkeypatch: pytest.MonkeyPatch, outcome: Answer | Exception) -> None:
    monkeypatch.setattr("millreason.cli.load", lambda shop, engine=None: FakeAdviser(outcome))


# ---------------------------------------------------------------------- help and version
def test_help_tells_a_newcomer_where_to_begin_and_what_exit_codes_mean() -> None:
    result = run("--help")
    assert result.exit_code == 0
    for words in (
        "millreason choose JOB.yaml",
        "Exit codes:",
        "3  questions must be answered first",
        "qualified person",
    ):
        assert words in result.output


@pytest.mark.parametrize("command", ["choose", "rules", "materials", "machines", "schema"])
def test_every_command_has_help_of_its_own(command: str) -> None:
    result = run(command, "--help")
    assert result.exit_code == 0
    assert "Usage:" in result.output


def test_version() -> None:
    assert __version__ in run("--version").output


def test_help_loads_no_rules_no_units_and_no_inference() -> None:
    code = (
        "import sys\n"
        "from millreason.cli import main\n"
        "heavy = {'pint', 'pydantic', 'jinja2', 'rich.table', 'durable', 'yaml'} & set(sys.modules)\n"
        "print(sorted(heavy))\n"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"


# ---------------------------------------------------------------------- choose
@pytest.mark.parametrize(("name", "code"), ANSWERS.items())
def test_the_exit_code_is_that_of_the_verdict(name: str, code: int, job: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    answered_with(monkeypatch, getattr(answers, name)())
    assert run("choose", str(job)).exit_code == code


def test_each_form_is_written(job: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    answered_with(monkeypatch, answers.recommended())
    monkeypatch.setattr("millreason.cli.argued", lambda adviser, path: adviser.choose_file(path))
    assert "SETUP SHEET" in run("choose", str(job)).output
    assert "EVERY RULE THAT FIRED" in run("choose", str(job), "--full").output
    assert run("choose", str(job), "--form", "html").output.startswith("<!DOCTYPE html>")
    assert run("choose", str(job), "--form", "markdown").output.startswith("# ")
    assert json.loads(run("choose", str(job), "--form", "json").output)["picks"]["diameter_mm"] == 80
    assert yaml.safe_load(run("choose", str(job), "--form", "quote").output)["passes_across"] == 4


def test_out_writes_the_file_and_keeps_the_exit_code(
    job: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    answered_with(monkeypatch, answers.refused())
    out = tmp_path / "answer.html"
    result = run("choose", str(job), "--form", "html", "--out", str(out))
    assert result.exit_code == 4
    assert result.stdout == ""
    assert f"written: {out}" in result.stderr
    assert out.read_text(encoding="utf-8").endswith("</html>\n")


def test_a_file_that_cannot_be_written_is_told(job: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    answered_with(monkeypatch, answers.recommended())
    result = run("choose", str(job), "--out", str(tmp_path / "missing" / "answer.txt"))
    assert result.exit_code == 2
    assert "cannot be written" in result.stderr
    assert "--out" in result.stderr


def test_findings_stand_one_a_line_on_stderr_with_exit_code_2(job: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    findings = [Finding("job.yaml", 3, "work.width", "has no unit."), Finding("job.yaml", 1, "work", "unknown field.")]
    answered_with(monkeypatch, DataError(findings))
    result = run("choose", str(job))
    assert result.exit_code == 2
    assert result.stdout == ""
    assert result.stderr.splitlines() == ["job.yaml:1: work: unknown field.", "job.yaml:3: work.width: has no unit."]


def test_any_error_of_the_program_is_a_line_without_a_traceback(job: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    answered_with(monkeypatch, MillreasonError("the engine cannot be imported."))
    result = run("choose", str(job))
    assert (result.exit_code, result.stderr) == (2, "the engine cannot be imported.\n")


def test_a_job_that_is_not_there_is_bad_input(tmp_path: Path) -> None:
    result = run("choose", str(tmp_path / "none.yaml"))
    assert result.exit_code == 2
    assert "none.yaml" in result.stderr


def test_colour_needs_a_terminal_that_wants_it(monkeypatch: pytest.MonkeyPatch) -> None:
    class Terminal(io.StringIO):
        def isatty(self) -> bool:
            return True

    monkeypatch.setattr(sys, "stdout", Terminal())
    monkeypatch.delenv("NO_COLOR", raising=False)
    monkeypatch.setenv("TERM", "xterm")
    assert console.in_colour()
    monkeypatch.setenv("NO_COLOR", "1")
    assert not console.in_colour()
    monkeypatch.delenv("NO_COLOR")
    monkeypatch.setenv("TERM", "dumb")
    assert not console.in_colour()
    monkeypatch.setenv("TERM", "xterm")
    monkeypatch.setattr(sys, "stdout", io.StringIO())
    assert not console.in_colour()


@pytest.mark.parametrize(("columns", "width"), [("40", 60), ("97", 97), ("400", 120)])
def test_the_width_follows_the_terminal_within_what_reads_well(
    columns: str, width: int, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("COLUMNS", columns)
    assert console.page_width() == width


def test_letters_that_the_terminal_lacks_are_replaced(tmp_path: Path) -> None:
    code = "from millreason.console import say; say('gr\\u00f6\\u00dfe \\u2500 D')"
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, env={"PYTHONIOENCODING": "ascii", "PATH": ""}, check=True
    )
    assert done.stdout == b"gr??e ? D\n"


# ---------------------------------------------------------------------- lists, on the shipped knowledge
def test_rules_are_listed_and_shown() -> None:
    listed = run("rules", "list")
    assert listed.exit_code == 0
    first = next(line.split()[0] for line in listed.output.splitlines() if line.startswith("  "))
    shown = run("rules", "show", first.lower())
    assert shown.exit_code == 0
    for part in ("stage:", "when:", "then:", "why:", "rests:"):
        assert part in shown.output
    topic = listed.output.splitlines()[0].rstrip(":")
    only = run("rules", "list", "--topic", topic)
    assert 1 < len(only.output.splitlines()) < len(listed.output.splitlines())


def test_machines_are_listed_and_shown() -> None:
    listed = run("machines", "list")
    assert listed.exit_code == 0
    name = listed.output.split()[0]
    shown = run("machines", "show", name)
    assert shown.exit_code == 0
    assert f"id                     {name}" in shown.output
    assert "interface" in shown.output


def test_materials_are_listed_found_and_shown() -> None:
    listed = run("materials", "list")
    assert listed.exit_code == 0
    iron = run("materials", "list", "--group", "K")
    assert 0 < len(iron.output.splitlines()) < len(listed.output.splitlines())
    found = run("materials", "find", "4140")
    assert found.exit_code == 0
    name = found.output.split()[1]
    shown = run("materials", "show", name)
    assert shown.exit_code == 0
    assert "kc11" in shown.output


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (("rules", "show", "ZZZ-999"), "rules list"),
        (("rules", "list", "--topic", "nowhere"), "Topics:"),
        (("machines", "show", "no-such-machine"), "machines list"),
        (("materials", "show", "no-such-material"), "materials find"),
        (("materials", "find", "unobtainium"), "materials list"),
    ],
)
def test_what_is_not_known_is_bad_input_with_what_to_do(arguments: tuple[str, ...], words: str) -> None:
    result = run(*arguments)
    assert result.exit_code == 2
    assert words in result.stderr
    assert "Traceback" not in result.stderr


def test_schema_is_json_schema() -> None:
    schema = json.loads(run("schema").output)
    assert "verdict" in schema["properties"]
