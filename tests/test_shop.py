"""A shop's own folder laid over the shipped knowledge: used, marked as the shop's, and checked like the rest."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest

from example_jobs import ROOT
from millreason.choice import Adviser, load_adviser
from millreason.errors import DataError
from millreason.trace import Answer

SHOP = ROOT / "cases" / "shop-example"


@pytest.fixture(scope="module")
def shop() -> Adviser:
    return load_adviser(SHOP, "twin")


@pytest.fixture(scope="module")
def answer(shop: Adviser) -> Answer:
    return shop.choose_file(SHOP / "job.yaml")


def test_the_example_shop_gets_an_answer_from_its_shelf(shop: Adviser, answer: Answer) -> None:
    assert answer.verdict in ("recommend", "recommend_with_warnings")
    assert answer.picks is not None
    assert answer.picks.own_cutter in shop.knowledge.on_hand


def test_the_answer_says_what_came_from_the_shop(answer: Answer) -> None:
    facts = {record.name: record for record in answer.trace.facts}
    for name in ("machine.power_kw", "machine.changer_full_mm", "work.hardness_hb", "material.kc11_n_mm2"):
        basis = facts[name].basis
        assert basis is not None
        assert basis.kind == "shop", name
    assert facts["material.kc11_n_mm2"].value == 1850
    rules = {firing.rule: firing.from_shop for firing in answer.trace.firings}
    assert rules["ACF-001"]
    assert sum(rules.values()) == 1


def test_the_speed_limit_on_the_shelf_binds(answer: Answer, shop: Adviser) -> None:
    assert answer.plan is not None
    assert answer.picks is not None
    limit = shop.knowledge.on_hand[str(answer.picks.own_cutter)].speed_limit_rpm
    assert limit is not None
    assert all(step.spindle_speed_rpm <= limit for step in answer.plan.steps)


def test_without_the_shop_its_names_are_unknown() -> None:
    with pytest.raises(DataError, match="alder-north"):
        load_adviser(engine="twin").choose_file(SHOP / "job.yaml")


def test_the_hash_tells_the_shop_apart(answer: Answer) -> None:
    assert answer.knowledge_hash != load_adviser(engine="twin").knowledge.content_hash


def test_a_rule_of_the_shop_moves_the_choice(tmp_path: Path) -> None:
    folder = tmp_path / "shop"
    shutil.copytree(SHOP, folder)
    before = load_adviser(folder, "twin").choose_file(folder / "job.yaml")
    (folder / "rules" / "house.yaml").unlink()
    after = load_adviser(folder, "twin").choose_file(folder / "job.yaml")
    ledgers = [
        {o.option: o.balance for o in ledger.options}
        for a in (before, after)
        for ledger in a.trace.ledgers
        if ledger.pick == "fluid"
    ]
    assert ledgers[0]["air_blast"] - ledgers[1]["air_blast"] == 3


@pytest.mark.parametrize(
    ("file", "old", "new", "words"),
    [
        ("machines.yaml", "power_kw: 15", "power_kw: 15 kW", "machines.yaml:9"),
        ("machines.yaml", "power_kw: 15", "powr_kw: 15", "power_kw"),
        ("cutters.yaml", "teeth: 5", "teeth: 0", "cutters.yaml:5"),
        ("rules/house.yaml", "fluid: air_blast", "fluid: air", "rules/house.yaml"),
        ("rules/house.yaml", "ACF-001", "DIR-001", "the id is taken"),
        ("materials/own.yaml", "structural_steel", "structural_stel", "materials/own.yaml:6"),
    ],
)
def test_a_fault_in_a_shop_file_is_located(tmp_path: Path, file: str, old: str, new: str, words: str) -> None:
    folder = tmp_path / "shop"
    shutil.copytree(SHOP, folder)
    text = (folder / file).read_text(encoding="utf-8")
    assert old in text
    (folder / file).write_text(text.replace(old, new, 1), encoding="utf-8")
    with pytest.raises(DataError) as caught:
        load_adviser(folder, "twin")
    assert words in str(caught.value)
