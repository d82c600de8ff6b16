"""The generated pages say everything that the rules say, and every question has its answer."""

from __future__ import annotations

from functools import cache
from pathlib import Path

import pytest

import generated_pages
from generated_pages import Question, answering, catalogue, difference, groups, questions, unanswered
from millreason.choice import Adviser, load_adviser


@cache
def shipped() -> Adviser:
    return load_adviser()


@cache
def page() -> str:
    return catalogue(shipped())


def section(rule_id: str) -> str:
    after = page().split(f'<a id="{rule_id.lower()}"></a>')[1]
    return after.split("\n## ")[0].split("\n### ")[0]


@pytest.mark.parametrize("rule_id", sorted(load_adviser().rulebook.rules))
def test_rule_stands_whole_in_the_catalogue(rule_id: str) -> None:
    rule = shipped().rulebook.rules[rule_id]
    shown = section(rule_id)
    assert rule.says in shown
    assert rule.why in shown
    assert all(f"`{fact} " in shown for fact in (*rule.when, *rule.implied_missing))
    assert rule.basis.cited is None or rule.basis.cited.where in shown
    assert rule.then.caution is None or rule.then.caution.do in shown
    assert rule.then.offer is None or rule.then.offer in shown


def test_every_question_has_one_line_and_links_that_lead_somewhere() -> None:
    table = page().split("## Questions")[1].split("\n## ")[0]
    rows = [line for line in table.splitlines() if line.startswith("| ") and "| question |" not in line]
    assert len(rows) == len(questions()) + sum(
        letter in answering(shipped().rulebook.rules.values()) for letter in groups()
    )
    for rule_id in (link.split("]")[0] for row in rows for link in row.split("[")[1:]):
        assert f'<a id="{rule_id.lower()}"></a>' in page()


def test_sixty_five_questions_numbered_through_with_known_kinds() -> None:
    asked = questions()
    assert [question.number for question in asked] == list(range(1, 66))
    assert {question.kind for question in asked} == {"choice", "plan", "estimate", "safety", "other"}
    assert len({question.asks for question in asked}) == len(asked)
    assert all(question.asks.endswith("?") for question in asked)


def test_no_question_is_left_without_an_answer() -> None:
    left = unanswered(questions(), answering(shipped().rulebook.rules.values()))
    assert not left, [f"{question.number}: {question.asks}" for question in left]


def test_rules_answer_only_questions_that_are_asked() -> None:
    known = {question.number for question in questions()} | set(groups())
    assert set(answering(shipped().rulebook.rules.values())) <= known


def test_unanswered_questions_are_named() -> None:
    asked = [
        Question(1, "choice", "a?", by="the program"),
        Question(2, "other", "b?", by="the program"),
        Question(3, "safety", "c?"),
    ]
    assert [question.number for question in unanswered(asked, {})] == [1, 3]
    assert unanswered(asked, {1: ["PIT-001"], 3: ["PIT-002"]}) == []


def test_difference_names_the_lines(tmp_path: Path) -> None:
    (tmp_path / "RULES.md").write_text("one\ntwo\n")
    assert difference("RULES.md", "one\ntwo\n", tmp_path) == []
    told = difference("RULES.md", "one\nthree\nfour\n", tmp_path)
    assert "2 lines new, 1 gone" in told[0]
    assert {"-two", "+three", "+four"} <= set(told)
    assert difference("OTHER.md", "one\n", tmp_path), "a page that is missing is out of date"


def test_check_ends_with_one_where_a_page_is_out_of_date(tmp_path: Path, monkeypatch: pytest.MonkeyPatch,
                                                         capsys: pytest.CaptureFixture[str]) -> None:  # fmt: skip
    monkeypatch.setattr(generated_pages, "pages", lambda: {"RULES.md": page()})
    monkeypatch.setattr(generated_pages, "ROOT", tmp_path)
    monkeypatch.setattr(generated_pages, "questions", lambda: [])
    monkeypatch.setattr(generated_pages, "difference", lambda name, text: difference(name, text, tmp_path))
    assert generated_pages.main(["--check"]) == 1
    assert "out of date" in capsys.readouterr().out
    assert generated_pages.main([]) == 0
    assert (tmp_path / "RULES.md").read_text(encoding="utf-8") == page()
    assert generated_pages.main(["--check"]) == 0


def test_catalogue_is_the_same_every_time() -> None:
    assert catalogue(load_adviser()) == page()
