"""The vocabulary: every fact says what it means, and job keys are its names without the unit."""

from __future__ import annotations

import pytest

from millreason.knowledge import data_root
from millreason.units import UNITS_ALLOWED
from millreason.vocabulary import FactDefinition, load_vocabulary

VOCABULARY = load_vocabulary(data_root())
FACTS = VOCABULARY.facts
# Units that never come from a person, and so need no spelling.
COMPUTED_ONLY = {"", "HRC", "J/mm3", "N/mm2", "mm3"}


def test_job_keys_are_short_and_taken_once() -> None:
    keys = VOCABULARY.job_keys
    assert keys["work.width"] == "work.width_mm"
    assert keys["require.finish"] == "require.finish_ra_um"
    assert keys["costs.machine_rate"] == "costs.machine_rate_per_h"
    assert len(keys) == sum(1 for fact in FACTS.values() if fact.from_ == "job")


@pytest.mark.parametrize("name", FACTS)
def test_a_fact_is_defined_as_far_as_its_kind_needs(name: str) -> None:
    fact = FACTS[name]
    assert fact.means[0].isupper() or fact.means[0].isdigit() or fact.means.startswith("ISO")
    assert (fact.kind in ("choice", "choices")) <= bool(fact.options)
    assert len(set(map(str, fact.options))) == len(fact.options)
    if fact.kind in ("number", "numbers"):
        assert fact.range is not None
        assert fact.range[0] < fact.range[1]
        assert fact.unit in UNITS_ALLOWED or fact.unit in COMPUTED_ONLY
        assert fact.plausible is None or fact.range[0] <= fact.plausible[0] < fact.plausible[1] <= fact.range[1]
    if fact.ask is not None:
        assert fact.ask.rstrip().endswith(("?", "."))
        assert fact.because, "a question says why it is asked"


def test_only_a_person_is_asked() -> None:
    asked = {name for name, fact in FACTS.items() if fact.ask and fact.from_ != "job"}
    assert asked <= {"material.id"}


def test_order_follows_the_file() -> None:
    order = VOCABULARY.order
    assert order["work.material"] < order["require.quantity"] < order["machine.power_kw"] < order["pick.pitch"]


def test_an_unknown_key_in_a_definition_is_refused() -> None:
    with pytest.raises(ValueError, match="extra"):
        FactDefinition.model_validate({"means": "x", "kind": "flag", "from": "job", "units": "mm"})


def test_picks_are_named_without_their_section() -> None:
    assert {"cutter_class", "diameter_mm", "pitch", "rake", "kappa_deg", "corner", "edge", "wiper", "fluid"} <= set(
        VOCABULARY.picks
    )
