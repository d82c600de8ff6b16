"""Candidates: complete, best first, and only combinations that exist; evidence weighed without hidden ties."""

from __future__ import annotations

from itertools import pairwise, product

import pytest

from example_jobs import IRON, PLATE, SHOULDER, WEAK, adviser, decided
from millreason.candidates import Candidate, Catalogue, Ledgers, kappa_key, size_key
from millreason.outcome import Outcome
from millreason.trace import Evidence

JOBS = {"plate": PLATE, "shoulder": SHOULDER, "iron": IRON, "weak": WEAK}


def evidence(rule: str, weight: float, stance: str = "for") -> Evidence:
    return Evidence(rule, stance, "strong", weight, "")  # type: ignore[arg-type]


def test_a_ledger_weighs_and_rules_out() -> None:
    ledgers = Ledgers({"pitch": ["coarse", "fine", "extra_fine"]})
    ledgers.add("pitch", "coarse", evidence("A", 3))
    ledgers.add("pitch", "coarse", evidence("B", -1, "against"))
    ledgers.add("pitch", "fine", evidence("C", 9))
    ledgers.add("pitch", "fine", evidence("D", 0, "rule_out"))
    assert ledgers.balance("pitch", "coarse") == 2
    assert ledgers.scores("pitch") == {"coarse": 2, "fine": None, "extra_fine": 0}
    assert ledgers.best("pitch") == "coarse"
    assert ledgers.best("pitch", ["extra_fine", "fine"]) == "extra_fine"
    assert ledgers.best("pitch", ["fine"]) is None
    (record,) = ledgers.records({"pitch": "coarse"})
    assert [line.option for line in record.options] == ["coarse", "extra_fine", "fine"]


def catalogue(out: Outcome) -> Catalogue:
    knowledge = adviser().knowledge
    offered = knowledge.interfaces[out.situation.value("machine.interface")].mountings.options
    assert out.ledgers is not None
    return Catalogue(knowledge.cutters, out.ledgers, out.job.units, offered)


def identity(candidate: Candidate) -> tuple[str, ...]:
    return (candidate.family.id, *candidate.options.values())


@pytest.mark.parametrize("name", JOBS)
def test_the_catalogue_is_complete_and_best_first(name: str) -> None:
    """Hold the search order against a plain enumeration of everything that exists and is not ruled out."""
    out = decided(JOBS[name])
    assert out.ledgers is not None
    ledgers = out.ledgers
    found = list(catalogue(out).best_first())
    scores = [candidate.evidence for candidate in found]
    assert all(one >= other - 1e-9 for one, other in pairwise(scores))
    assert len({identity(candidate) for candidate in found}) == len(found)
    expected = set()
    cutters = adviser().knowledge.cutters
    interface = adviser().knowledge.interfaces[out.situation.value("machine.interface")]
    sizes = [size for size in cutters.sizes if size.series == out.job.units]
    for family, size, pitch in product(cutters.families, sizes, ("coarse", "fine", "extra_fine")):
        made = any(
            row.mounting in interface.mountings.options and not ledgers.ruled_out("mounting", row.mounting)
            for row in cutters.mountings_for(family, size)
        )
        if family.teeth_for(size, pitch) is None or not made:
            continue
        for rake, corner, wiper in product(family.rakes, family.corners, family.wipers_for(size)):
            for edge in rake.edges:
                named = {
                    "cutter_class": family.cutter_class, "kappa_deg": kappa_key(family.kappa_deg),
                    "diameter_mm": size_key(size.nominal_mm), "pitch": pitch, "rake": rake.rake, "edge": edge,
                    "corner": corner.corner, "wiper": wiper,
                }  # fmt: skip
                if not any(ledgers.ruled_out(pick, option) for pick, option in named.items()):
                    expected.add((family.id, *named.values()))
    assert {identity(candidate)[:9] for candidate in found} == expected


@pytest.mark.parametrize("name", JOBS)
def test_evidence_is_the_sum_of_the_ledgers(name: str) -> None:
    out = decided(JOBS[name])
    assert out.ledgers is not None
    for candidate in list(catalogue(out).best_first())[::97]:
        options = {pick: option for pick, option in candidate.options.items() if pick not in ("pockets", "mounting")}
        total = sum(out.ledgers.balance(pick, option) for pick, option in options.items())
        assert candidate.evidence == pytest.approx(total)
