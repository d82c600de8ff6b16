"""Published worked examples: the program's formulas give what the books print.

Each example of worked_examples.yaml names its source, whether it was read in a copy or is recalled from
memory, and its tolerance.
"""

from pathlib import Path
from typing import Any

import pytest
import yaml

from outside.example_work import UNITS, WORK, Given

EXAMPLES = yaml.safe_load(Path(__file__).with_name("worked_examples.yaml").read_text(encoding="utf-8"))["examples"]


def in_unit_of(computed: Any, published: Any) -> tuple[float, float]:
    """Return computed and published number in the published unit."""
    if isinstance(published, str):
        stated = UNITS.Quantity(published)
        return computed.to(stated.units).magnitude, stated.magnitude
    return float(computed), float(published)


def test_every_example_is_worked_once():
    assert [example["id"] for example in EXAMPLES] == sorted(WORK, key=[e["id"] for e in EXAMPLES].index)
    assert len(EXAMPLES) == len(WORK) == 35


@pytest.mark.parametrize("example", EXAMPLES, ids=lambda e: f"{e['id']}-{e['seen']}")
def test_worked_example(example):
    assert example["seen"] in ("checked", "recalled"), example["source"]
    computed = WORK[example["id"]](Given(example["given"]))
    for name, published in example["result"].items():
        ours, theirs = in_unit_of(computed[name], published)
        within = example.get("within_each", {}).get(name, example["within"])
        assert ours == pytest.approx(theirs, rel=within), f"{name} of {example['source']}"


@pytest.mark.parametrize("example", [e for e in EXAMPLES if "range" in e], ids=lambda e: e["id"])
def test_official_range(example):
    computed = WORK[example["id"]](Given(example["given"]))
    for name, ends in example["range"].items():
        low, high = (in_unit_of(computed[name], end) for end in ends)
        assert low[1] <= low[0] <= high[1], f"{name} of {example['source']}"
