"""A planted defect of each kind is found, located and explained; the mended rule base is left in peace."""

from __future__ import annotations

from dataclasses import replace
from functools import cache
from pathlib import Path
from typing import Any

import pytest
import yaml
from click.testing import CliRunner

from millreason.choice import Adviser, load_adviser
from millreason.cli import main
from millreason.errors import DataError
from millreason.facts import Situation
from millreason.rule_audit import CHECKS, Audit, audit
from millreason.rule_audit.conditions import check_conditions
from millreason.rule_audit.coverage import check_options, check_regions
from millreason.rule_audit.findings import AuditFinding, Subject
from millreason.rule_audit.pairs import check_contradictions
from millreason.rule_audit.texts import check_bases, check_trials
from millreason.rule_audit.usage import check_facts, check_knowledge, check_sources
from millreason.rulebook import load_rules
from millreason.stages import Stage
from planted_defects import IRON, PLANTED, STEEL, concludes, fine_pitch, rule, weigh


class WithoutAliases(yaml.SafeDumper):
    def ignore_aliases(self, data: Any) -> bool:
        return True


@cache
def shipped() -> Adviser:
    return load_adviser(engine="twin")


def subject(folder: Path, rules: list[dict[str, Any]], **changes: Any) -> Subject:
    """Return a small rule base on the shipped knowledge; `changes` go into the vocabulary."""
    (folder / "rules").mkdir(exist_ok=True)
    text = yaml.dump({"topic": "Planted", "rules": rules}, Dumper=WithoutAliases, sort_keys=False)
    (folder / "rules" / "planted.yaml").write_text(text)
    base = shipped()
    vocabulary = base.vocabulary.model_copy(update=changes)
    for cached in ("picks", "order", "job_keys"):
        vocabulary.__dict__.pop(cached, None)
    knowledge = replace(base.knowledge, root=folder)
    book = load_rules(folder, vocabulary, None, knowledge.sources, knowledge.strengths)
    return Subject(Adviser(knowledge, base.materials, vocabulary, book, "twin"))


def of_kind(found: list[AuditFinding], kind: str, severity: str) -> list[AuditFinding]:
    return [entry for entry in found if (entry.kind, entry.severity) == (kind, severity)]


@pytest.mark.parametrize("name", PLANTED)
def test_planted_defect_is_found_and_located(name: str, tmp_path: Path) -> None:
    check, rules, severity, kind, culprit, words, mended = PLANTED[name]
    planted = subject(tmp_path, rules)
    found = of_kind(list(check(planted)), kind, severity)
    assert [entry.finding.field for entry in found] == [culprit]
    finding = found[0].finding
    assert words in finding.message
    line = (tmp_path / finding.file).read_text().splitlines()[finding.line - 1]
    assert culprit in line, f"{finding.file}:{finding.line} is {line!r}"
    assert not of_kind(list(check(subject(tmp_path, mended))), kind, severity)


@pytest.mark.parametrize("name", ["for and against", "two judgements", "two assumptions", "least above most"])
def test_witness_of_a_contradiction_is_true(name: str, tmp_path: Path) -> None:
    planted = subject(tmp_path, PLANTED[name][1])
    first, second = planted.rules
    facts = planted.search.find(first, second)
    assert facts is not None
    situation = Situation(planted.vocabulary)
    for fact, value in facts.items():
        situation.set(fact, value, "given")
    fired = {firing.rule for firing in Stage(planted.rules, planted.book, planted.vocabulary, "twin").run(situation)}
    assert fired == {first.id, second.id}


def test_witness_traces_judgements_back_to_the_job(tmp_path: Path) -> None:
    rules = [
        concludes("SET-001", {"fixture.rigidity": "weak"}, setup__stiffness="weak"),
        concludes("SET-002", {"setup.stiffness": "weak", "machine.power_kw": {"below": 4}}, setup__power="low"),
        weigh("PIT-001", {"setup.power": "low"}, "for", "pitch", "coarse"),
    ]
    planted = subject(tmp_path, rules)
    facts = planted.search.find(planted.book.rules["PIT-001"])
    assert facts is not None
    assert set(facts) == {"fixture.rigidity", "machine.power_kw"}
    assert facts["fixture.rigidity"] == "weak"
    assert facts["machine.power_kw"] < 4


def test_witness_keeps_to_what_is_looked_up(tmp_path: Path) -> None:
    large = {"machine.taper_size": "large", "machine.interface": "7/24-30"}
    planted = subject(tmp_path, [weigh("PIT-001", large, "for", "pitch", "coarse")])
    assert planted.search.find(planted.book.rules["PIT-001"]) is None


def test_ratio_needs_what_it_is_computed_from(tmp_path: Path) -> None:
    slender = {"job.floor_slenderness": {"above": 15}}
    rules = [
        concludes("SET-001", slender, setup__axial_support="thin_floor"),
        concludes("SET-002", {"work.unsupported_span_mm": {"known": False}}, setup__axial_support="full"),
        concludes("SET-003", {"work.unsupported_span_mm": {"below": 100}, **slender}, setup__rim="none"),
    ]
    planted = subject(tmp_path, rules)
    assert not of_kind(list(check_contradictions(planted)), "contradiction", "error")
    assert planted.search.find(planted.book.rules["SET-003"]) is not None
    both = [*rules[:1], concludes("SET-002", {"work.unsupported_span_mm": {"above": 100}}, setup__axial_support="full")]
    assert of_kind(list(check_contradictions(subject(tmp_path, both))), "contradiction", "error")


def test_ratio_follows_from_its_parts_where_all_are_given(tmp_path: Path) -> None:
    parts = {"work.stock_mm": {"below": 1}, "work.thickness_mm": {"above": 10}}
    rules = [concludes("SET-001", {**parts, "job.thickness_to_stock": {"above": 0.5}}, setup__rim="none")]
    planted = subject(tmp_path, rules)
    assert [entry.kind for entry in check_conditions(planted)] == ["cannot fire"]
    loose = [concludes("SET-001", {**parts, "job.thickness_to_stock": {"below": 0.5}}, setup__rim="none")]
    assert not list(check_conditions(subject(tmp_path, loose)))


def test_trials_for_unknown_rules_and_rules_without_trials(tmp_path: Path) -> None:
    rules = [weigh("PIT-001", IRON, "for", "pitch", "fine"), weigh("PIT-002", STEEL, "for", "pitch", "fine")]
    planted = subject(tmp_path, rules)
    assert not list(check_trials(planted)), "without tests/rules there is nothing to hold against"
    folder = tmp_path / "tests" / "rules"
    folder.mkdir(parents=True)
    entries = [{"rule": "PIT-001", "fires": IRON}, {"rule": "PIT-009", "fires": IRON, "misses": STEEL}]
    (folder / "planted.yaml").write_text(yaml.dump(entries, Dumper=WithoutAliases))
    found = {(entry.finding.field, entry.kind): entry.finding.message for entry in check_trials(planted)}
    assert set(found) == {
        ("PIT-001", "not shown by facts"), ("PIT-002", "not shown by facts"), ("rule", "facts for no rule"),
    }  # fmt: skip
    assert "no near miss" in found["PIT-001", "not shown by facts"]
    assert "no facts that fire it and no near miss" in found["PIT-002", "not shown by facts"]
    assert "PIT-009" in found["rule", "facts for no rule"]


def test_file_of_trials_that_cannot_be_read(tmp_path: Path) -> None:
    planted = subject(tmp_path, [weigh("PIT-001", IRON, "for", "pitch", "fine")])
    folder = tmp_path / "tests" / "rules"
    folder.mkdir(parents=True)
    (folder / "broken.yaml").write_text("- {rule: PIT-001, fires")
    (folder / "words.yaml").write_text("- just a word\n")
    kinds = {entry.kind for entry in check_trials(planted) if entry.finding.file.startswith("tests/")}
    assert kinds == {"unreadable", "facts for no rule"}


def test_options_without_a_voice(tmp_path: Path) -> None:
    rules = [
        weigh("PIT-001", IRON, "for", "pitch", "fine"),
        weigh("PIT-002", IRON, "against", "pitch", "coarse"),
        weigh("PIT-003", STEEL, "for", "pitch", "coarse"),
    ]
    found = [entry for entry in check_options(subject(tmp_path, rules)) if entry.finding.field == "pick.pitch"]
    assert [(entry.kind, entry.finding.message.split(";")[0].split(",")[0].split(".")[0]) for entry in found] == [
        ("nothing against an option", "no rule speaks against fine"),
        ("option without a voice", "no rule speaks for or against extra_fine"),
    ]


def test_kinds_of_jobs_without_advice(tmp_path: Path) -> None:
    rules = [weigh("PIT-001", {"material.iso_group": ["P", "M", "K", "N", "S"]}, "for", "pitch", "fine")]
    rules += [weigh("RAK-001", {"fixture.rigidity": {"known": True}}, "for", "rake", "double_positive")]
    found = {entry.finding.field: entry.finding.message for entry in check_regions(subject(tmp_path, rules))}
    assert "pick.rake" not in found
    assert "work.material" in found["pick.pitch"], "the hardened group is left out"
    assert "all of them" in found["pick.edge"]


def test_unused_facts(tmp_path: Path) -> None:
    facts = shipped().vocabulary.facts
    spare = facts["work.stock_mm"].model_copy(update={"key": "work.spare"})
    judged = facts["setup.power"]
    planted = {**facts, "work.spare_mm": spare, "setup.spare": judged, "setup.idle": judged}
    rules = [concludes("SET-001", IRON, setup__spare="low")]
    found = {entry.finding.field: entry for entry in check_facts(subject(tmp_path, rules, facts=planted))}
    assert found["work.spare_mm"].severity == "note"
    assert "rules conclude it, and nothing tests it" in found["setup.spare"].finding.message
    assert "no rule concludes it" in found["setup.idle"].finding.message
    assert "work.width_mm" not in found, "the program reads it"
    tests_it = [*rules, weigh("PIT-001", {"setup.spare": "low", "work.spare_mm": {"above": 1}}, "for", "pitch", "fine")]
    left = {entry.finding.field for entry in check_facts(subject(tmp_path, tests_it, facts=planted))}
    assert left.isdisjoint({"work.spare_mm", "setup.spare"})


def test_fact_that_nothing_sets(tmp_path: Path) -> None:
    facts = shipped().vocabulary.facts
    planted = {**facts, "plan.never_computed": facts["plan.power_use"]}
    rules = [
        rule(
            "JUD-001",
            "judge",
            {"plan.never_computed": {"above": 1}, "plan.power_use": {"above": 1}},
            {"lower": "strong"},
        )
    ]
    found = of_kind(list(check_conditions(subject(tmp_path, rules, facts=planted))), "cannot fire", "error")
    assert [("plan.never_computed" in entry.finding.message) for entry in found] == [True]


def test_unused_knowledge(tmp_path: Path) -> None:
    rules = [weigh("FLU-001", IRON, "for", "fluid", "dry", "slight")]
    planted = subject(tmp_path, rules)
    spare = planted.adviser.knowledge.practice["wear_factor"]
    knowledge = replace(
        planted.adviser.knowledge, practice={**planted.adviser.knowledge.practice, "spare_share": spare}
    )
    planted.adviser.knowledge = knowledge
    found = {entry.finding.field for entry in check_knowledge(planted)}
    assert "spare_share" in found
    assert "wear_factor" not in found
    assert {"moderate", "strong", "decisive"} <= found
    assert "slight" not in found
    assert "cutting_speed" in found, "no rule tunes it"


def test_sources_missing_and_unused(tmp_path: Path) -> None:
    cited = {"cited": {"source": "stephenson-agapiou", "where": "chapter 4", "seen": "recalled"}}
    planted = subject(tmp_path, [fine_pitch(basis=cited)])
    (tmp_path / "knowledge").mkdir()
    (tmp_path / "knowledge" / "more.yaml").write_text('a: {source: never-heard-of, where: "p. 1", seen: recalled}\n')
    found = list(check_sources(planted))
    missing = of_kind(found, "missing source", "error")
    assert [entry.finding.field for entry in missing] == ["never-heard-of"]
    assert missing[0].finding.file == "knowledge/more.yaml"
    unused = {entry.finding.field for entry in of_kind(found, "unused source", "warning")}
    assert "stephenson-agapiou" not in unused
    assert "astm-e140" in unused, "the small rule base does not cite it"
    assert "altintas-automation" not in unused, "a formula cites it"


def test_base_of_the_knowledge_without_a_place(tmp_path: Path) -> None:
    planted = subject(tmp_path, [weigh("PIT-001", IRON, "for", "pitch", "fine")])
    name = "knowledge/practice.yaml"
    file = planted.adviser.knowledge.files[name]
    cited = next(basis for basis in file.bases.values() if basis.cited)
    vague = cited.model_copy(update={"cited": cited.cited.model_copy(update={"where": "?"})})  # type: ignore[union-attr]
    changed = {name: replace(file, bases={**file.bases, "vague": vague})}
    planted.adviser.knowledge = replace(planted.adviser.knowledge, files=changed)
    assert [entry.finding.field for entry in check_bases(planted)] == ["vague"]


@pytest.mark.parametrize(
    ("when", "words"),
    [
        ({"work.stok_mm": {"above": 1}}, "Did you mean 'work.stock_mm'"),
        ({"work.feature": "open_fase"}, "Did you mean 'open_face'"),
        ({"work.hardness_hb": {"above": 7000}}, "outside the range"),
    ],
)
def test_unknown_facts_and_options_are_refused_at_loading(when: dict[str, Any], words: str, tmp_path: Path) -> None:
    with pytest.raises(DataError) as caught:
        subject(tmp_path, [weigh("PIT-001", when, "for", "pitch", "fine")])
    assert words in str(caught.value)
    assert "rules/planted.yaml:" in str(caught.value)


# ---------------------------------------------------------------------- the whole
def test_every_check_runs_and_the_gravest_comes_first(tmp_path: Path) -> None:
    chosen = [entry for name in ("for and against", "circle", "no reason") for entry in PLANTED[name][1]]
    rules = [{**entry, "id": f"TST-{place:03d}"} for place, entry in enumerate(chosen)]
    result = audit(subject(tmp_path, rules).adviser)
    kinds = {finding.kind for finding in result.findings}
    assert {"contradiction", "circle", "missing why", "no advice", "unused source", "option without a voice"} <= kinds
    assert not result.sound
    ranks = [("error", "warning", "note").index(finding.severity) for finding in result.findings]
    assert ranks == sorted(ranks)
    assert len(CHECKS) == len(set(CHECKS)) == 12


@cache
def shipped_audit() -> Audit:
    return audit(shipped())


def test_shipped_rule_base_is_sound() -> None:
    result = shipped_audit()
    assert result.sound, "\n".join(map(str, result.of("error")))


def test_shipped_findings_lead_to_real_lines() -> None:
    root = shipped().knowledge.root
    for entry in shipped_audit().findings:
        lines = (root / entry.finding.file).read_text(encoding="utf-8").splitlines()
        assert 1 <= entry.finding.line <= len(lines)


def test_command_prints_findings_and_counts() -> None:
    run = CliRunner().invoke(main, ["rules", "check", "--notes"])
    result = shipped_audit()
    assert run.exit_code == (0 if result.sound else 2)
    for words in ("by stage:", "by basis:", "by topic:", "values of the knowledge", "findings:"):
        assert words in run.output
    assert all(str(entry) in run.output for entry in result.findings)
