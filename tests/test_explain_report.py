"""The argument in the report: its picture, bars and tables, and the commands that print it."""

from __future__ import annotations

import re
from functools import cache
from pathlib import Path
from xml.etree import ElementTree

import pytest
from click.testing import CliRunner

from example_jobs import IRON, PLATE, TITANIUM, WEAK, adviser, read
from millreason.cli import main
from millreason.explain.argument import explain
from millreason.report import render
from millreason.report.argument_picture import argument_picture
from millreason.report.holds_chart import holds_chart
from millreason.trace import Answer

JOBS = {"plate": PLATE, "iron": IRON, "titanium": TITANIUM, "weak": WEAK}
SVG = "{http://www.w3.org/2000/svg}"
WIDTH = 1000.0


@cache
def explained(text: str) -> Answer:
    return explain(adviser(), read(text))


def boxes(picture: str) -> list[tuple[float, float, float, float, str]]:
    """Every box of the picture: its corner, its size and the words in it."""
    found = []
    for group in ElementTree.fromstring(picture).iter(f"{SVG}g"):
        rectangle, words = group.find(f"{SVG}rect"), group.find(f"{SVG}text")
        assert rectangle is not None
        assert words is not None
        x, y, width, height = (float(rectangle.get(name, "nan")) for name in ("x", "y", "width", "height"))
        found.append((x, y, width, height, words.text or ""))
    return found


# ---------------------------------------------------------------------- the picture
@pytest.mark.parametrize("name", JOBS)
def test_the_picture_shows_the_rules_that_decided(name: str) -> None:
    answer = explained(JOBS[name])
    words = " ".join(box[4] for box in boxes(argument_picture(answer)))
    for ledger in answer.trace.ledgers:
        chosen = next((option for option in ledger.options if option.option == ledger.chosen), None)
        if chosen is None or ledger.pick not in ("kappa_deg", "pitch", "rake", "cutter_class"):
            continue
        spoken = sorted((e for e in chosen.evidence if e.stance == "for"), key=lambda entry: -entry.weight)
        if spoken:
            assert spoken[0].rule in words, ledger.pick


@pytest.mark.parametrize("name", JOBS)
def test_no_box_covers_another_and_all_stand_on_the_page(name: str) -> None:
    found = boxes(argument_picture(explained(JOBS[name])))
    assert len(found) > 10
    for place, (x, y, width, height, _) in enumerate(found):
        assert x >= 0
        assert x + width <= WIDTH
        for left, top, *_rest in found[place + 1 :]:
            assert left != x or abs(top - y) >= height


def test_the_picture_needs_no_more_than_a_page() -> None:
    for text in JOBS.values():
        deepest = max(y + height for _, y, _, height, _ in boxes(argument_picture(explained(text))))
        assert deepest <= WIDTH * 1.414


# ---------------------------------------------------------------------- the bars
def test_the_bars_begin_and_end_where_the_picks_change() -> None:
    told = explained(PLATE).explanation
    assert told is not None
    drawn = ElementTree.fromstring(holds_chart(told.intervals, "metric"))
    bars = list(drawn.iter(f"{SVG}rect"))
    assert len(bars) == 2 * len(told.intervals)
    for entry, whole, kept in zip(told.intervals, bars[::2], bars[1::2], strict=True):
        left, width = float(whole.get("x", "nan")), float(whole.get("width", "nan"))
        a = float(kept.get("x", "nan"))
        b = a + float(kept.get("width", "nan"))
        assert (a == pytest.approx(left)) == (entry.low is None)
        assert (b == pytest.approx(left + width, abs=0.02)) == (entry.high is None)


# ---------------------------------------------------------------------- the pages
@pytest.mark.parametrize("form", ["html", "markdown", "terminal"])
def test_every_form_prints_the_argument(form: str) -> None:
    text = render(explained(PLATE), form, full=True, width=100)  # type: ignore[arg-type]
    plain = text.lower()
    titles = ("how the picks follow", "why not another lead, pitch or rake", "holds while", "which assumption matters")
    assert all(title in plain for title in titles)
    assert "was run" in plain


def test_without_the_argument_the_report_is_as_before() -> None:
    text = render(adviser().choose(read(PLATE)), "html")
    assert 'id="holds"' not in text
    assert 'id="because"' not in text


def test_the_page_opens_detail_without_a_script() -> None:
    text = render(explained(PLATE), "html")
    section = text[text.index('id="because"') :]
    section = section[: section.index("</section>")]
    assert section.count("<details>") >= 10
    assert "<script" not in text
    assert not re.search(r'(?:src|href)="http', text)


# ---------------------------------------------------------------------- commands
@pytest.fixture
def job(tmp_path: Path) -> str:
    path = tmp_path / "job.yaml"
    path.write_text(PLATE, encoding="utf-8")
    return str(path)


def run(*arguments: str) -> str:
    result = CliRunner().invoke(main, [*arguments, "--engine", "twin"])
    assert result.exit_code == 0, result.output
    return result.output


def test_why_prints_the_tree(job: str) -> None:
    short = run("why", job, "pitch")
    assert short.startswith("pitch fine (balance")
    assert "because" in short
    assert len(run("why", job, "pitch", "--full")) > len(short)
    assert run("why", job).startswith("verdict: recommend")


def test_why_not_prints_reason_ledgers_and_change(job: str) -> None:
    text = run("why-not", job, "pitch=coarse")
    assert "outweighed" in text
    assert "It would be the pick with" in text
    assert "balance of the option" in text


def test_holds_and_assumptions_print_their_tables(job: str) -> None:
    text = run("holds", job)
    assert "HOLDS WHILE" in text
    assert "(assumed)" in text
    assert "The picks stay while the force lies between" in " ".join(text.split())
    assert "WHICH ASSUMPTION MATTERS" in run("assumptions", job)


@pytest.mark.parametrize("arguments", [("why", "pich"), ("why-not", "pitch"), ("why-not", "pitch=wide")])
def test_a_slip_is_a_line_and_not_a_traceback(job: str, arguments: tuple[str, str]) -> None:
    result = CliRunner().invoke(main, [arguments[0], job, arguments[1], "--engine", "twin"])
    assert result.exit_code == 2
    assert result.output.count("\n") == 1


def test_choose_with_argue_holds_the_argument_in_any_form(job: str) -> None:
    assert '"intervals"' in run("choose", job, "--argue", "--form", "json")
    assert 'id="holds"' in run("choose", job, "--argue", "--form", "html")


def test_what_is_held_back_stays_back_in_the_argument() -> None:
    answer = explained(PLATE.replace("C45, hardness: 190 HB", "AZ91"))
    assert answer.verdict == "conditional"
    assert answer.explanation is not None
    assert not answer.explanation.intervals
    text = render(answer, "html")
    assert 'id="because"' not in text
    assert 'id="holds"' not in text
