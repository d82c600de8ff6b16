from __future__ import annotations

import json

import jsonschema
import pytest

import answers
from millreason.report import FORMS, render, schema
from millreason.trace import Answer

ANSWERS = {
    "recommended": answers.recommended,
    "inches": answers.in_inches,
    "asking": answers.asking,
    "refused": answers.refused,
    "held": answers.held_back,
}


@pytest.fixture(params=ANSWERS)
def answer(request: pytest.FixtureRequest) -> Answer:
    return ANSWERS[request.param]()


@pytest.mark.parametrize("form", FORMS)
def test_the_same_answer_gives_the_same_bytes(answer: Answer, form: str) -> None:
    assert render(answer, form) == render(answer, form)


def test_json_follows_the_published_schema(answer: Answer) -> None:
    jsonschema.validate(json.loads(render(answer, "json")), json.loads(schema()))
