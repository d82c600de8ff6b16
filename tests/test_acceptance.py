"""Every acceptance case, run through the program and scored."""

from __future__ import annotations

import pytest

from acceptance import Case, load_cases, run_case


@pytest.mark.parametrize("case", load_cases(), ids=lambda case: f"{case['case']['id']}-{case['path'].stem}")
def test_case_is_answered_as_a_tooling_engineer_would(case: Case) -> None:
    misses = [text for result in run_case(case) for text in result.misses]
    assert not misses, "\n".join(misses)
