"""Defects planted in small rule books, each with what is found of it, and the mended rules."""

from __future__ import annotations

from typing import Any

from millreason.rule_audit.conditions import check_conditions
from millreason.rule_audit.pairs import check_contradictions, check_repetitions
from millreason.rule_audit.texts import check_texts
from millreason.rule_audit.usage import check_circles

PRACTICE = {"common_practice": "not in the tests"}


def rule(name: str, stage: str, when: dict[str, Any], then: dict[str, Any], **more: Any) -> dict[str, Any]:
    plain = {"says": "A planted rule.", "why": "Because the test planted it.", "basis": PRACTICE}
    return {"id": name, "name": "planted", "stage": stage, "when": when, "then": then, **plain, **more}


def weigh(
    name: str, when: dict[str, Any], stance: str, pick: str, option: Any, strength: str = "strong"
) -> dict[str, Any]:
    weight = {} if stance == "rule_out" else {"strength": strength}
    return rule(name, "weigh", when, {stance: {pick: option}, **weight})


def fine_pitch(**more: Any) -> dict[str, Any]:
    return rule("PIT-001", "weigh", IRON, {"for": {"pitch": "fine"}, "strength": "strong"}, **more)


def concludes(name: str, when: dict[str, Any], **values: Any) -> dict[str, Any]:
    return rule(name, "appraise", when, {"set": {fact.replace("__", "."): value for fact, value in values.items()}})


IRON, STEEL = {"material.iso_group": "K"}, {"material.iso_group": "P"}
HEAVY = concludes("CUT-001", {"work.stock_mm": {"above": 4}}, cut__depth_class="heavy")
VOIDS = ["none", "holes", "slots", "large_voids"]

# name: the check, the rules, what is found how grave and of which kind at which rule, its words, the mended rules
PLANTED: dict[str, tuple[Any, list[dict[str, Any]], str, str, str, str, list[dict[str, Any]]]] = {
    "above the range": (
        check_conditions,
        [weigh("PIT-001", {"work.hardness_hb": {"above": 760}}, "for", "pitch", "fine")],
        "error", "impossible condition", "PIT-001", "15 to 760",
        [weigh("PIT-001", {"work.hardness_hb": {"above": 700}}, "for", "pitch", "fine")],
    ),
    "none of all": (
        check_conditions,
        [weigh("PIT-001", {"work.interruptions": {"none_of": VOIDS}}, "for", "pitch", "fine")],
        "error", "impossible condition", "PIT-001", "none, holes, slots, large_voids",
        [weigh("PIT-001", {"work.interruptions": {"none_of": ["none", "holes"]}}, "for", "pitch", "fine")],
    ),
    "every option": (
        check_conditions,
        [weigh("PIT-001", {"fixture.rigidity": ["rigid", "normal", "weak"]}, "for", "pitch", "fine")],
        "warning", "always true", "PIT-001", "known: true",
        [weigh("PIT-001", {"fixture.rigidity": ["rigid", "normal"]}, "for", "pitch", "fine")],
    ),
    "whole range": (
        check_conditions,
        [weigh("PIT-001", {"work.hardness_hb": {"at_least": 15}}, "for", "pitch", "fine")],
        "warning", "always true", "PIT-001", "every value meets",
        [weigh("PIT-001", {"work.hardness_hb": {"above": 15}}, "for", "pitch", "fine")],
    ),
    "absence of what the stage itself concludes": (
        check_conditions,
        [HEAVY, concludes("CUT-002", {"cut.depth_class": {"known": False}, **IRON}, cut__depth_class="light")],
        "warning", "always true", "CUT-002", "before the stage began",
        [HEAVY, concludes("CUT-002", {"work.stock_mm": {"at_most": 4}}, cut__depth_class="light")],
    ),
    "no rule concludes it": (
        check_conditions,
        [HEAVY, weigh("PIT-001", {"cut.depth_class": "light"}, "for", "pitch", "fine")],
        "error", "cannot fire", "PIT-001", "rules conclude: heavy",
        [HEAVY, weigh("PIT-001", {"cut.depth_class": "heavy"}, "for", "pitch", "fine")],
    ),
    "judgement and number exclude each other": (
        check_conditions,
        [HEAVY, weigh("PIT-001", {"cut.depth_class": "heavy", "work.stock_mm": {"below": 4}}, "for", "pitch", "fine")],
        "warning", "cannot fire", "PIT-001", "exclude each other",
        [HEAVY, weigh("PIT-001", {"cut.depth_class": "heavy", "work.stock_mm": {"below": 5}}, "for", "pitch", "fine")],
    ),
    "tested before it is known": (
        check_conditions,
        [weigh("PIT-001", {"plan.power_use": {"above": 1}}, "for", "pitch", "coarse")],
        "error", "cannot fire", "PIT-001", "not known before stage judge",
        [rule("JUD-001", "judge", {"plan.power_use": {"above": 1}}, {"lower": "strong"})],
    ),
    "same conditions and conclusion": (
        check_repetitions,
        [weigh("PIT-001", {"material.iso_group": ["P", "M"]}, "for", "pitch", "fine"),
         weigh("PIT-002", {"material.iso_group": {"one_of": ["M", "P"]}}, "for", "pitch", "fine")],
        "error", "said twice", "PIT-002", "PIT-001",
        [weigh("PIT-001", STEEL, "for", "pitch", "fine"), weigh("PIT-002", IRON, "for", "pitch", "fine")],
    ),
    "narrower with the same conclusion": (
        check_repetitions,
        [concludes("CUT-001", {"work.stock_mm": {"above": 4}}, cut__depth_class="heavy"),
         concludes("CUT-002", {"work.stock_mm": {"between": [5, 6]}, **IRON}, cut__depth_class="heavy")],
        "warning", "contained in another", "CUT-002", "CUT-001",
        [HEAVY, concludes("CUT-002", {"work.stock_mm": {"between": [3, 6]}, **IRON}, cut__depth_class="heavy")],
    ),
    "factor made twice": (
        check_repetitions,
        [rule("FEE-001", "appraise", IRON, {"adjust": {"feed": 0.8}}),
         rule("FEE-002", "appraise", {**IRON, "fixture.rigidity": "weak"}, {"adjust": {"feed": 0.8}})],
        "warning", "contained in another", "FEE-002", "factors multiply",
        [rule("FEE-001", "appraise", IRON, {"adjust": {"feed": 0.8}}),
         rule("FEE-002", "appraise", {**IRON, "fixture.rigidity": "weak"}, {"adjust": {"feed": 0.7}})],
    ),
    "for and against": (
        check_contradictions,
        [weigh("PIT-001", IRON, "for", "pitch", "fine"),
         weigh("PIT-002", {**IRON, "work.stock_mm": {"above": 4}}, "against", "pitch", ["fine", "coarse"])],
        "error", "contradiction", "PIT-002", "Both fire on: material.iso_group K, work.stock_mm ",
        [weigh("PIT-001", IRON, "for", "pitch", "fine"),
         weigh("PIT-002", {**IRON, "work.stock_mm": {"above": 4}}, "against", "pitch", "fine", "decisive")],
    ),
    "two judgements": (
        check_contradictions,
        [HEAVY, concludes("CUT-002", {"work.stock_mm": {"at_least": 1}, **IRON}, cut__depth_class="medium")],
        "error", "contradiction", "CUT-001", "CUT-002",
        [HEAVY, concludes("CUT-002", {"work.stock_mm": {"between": [1, 4]}}, cut__depth_class="medium")],
    ),
    "two assumptions": (
        check_contradictions,
        [rule("DEF-001", "assume", IRON, {"assume": {"work.skin": "cast_skin"}}),
         rule("DEF-002", "assume", {"work.stock_mm": {"below": 1}}, {"assume": {"work.skin": "none"}})],
        "error", "contradiction", "DEF-001", "DEF-002",
        [rule("DEF-001", "assume", {**IRON, "work.stock_mm": {"at_least": 1}}, {"assume": {"work.skin": "cast_skin"}}),
         rule("DEF-002", "assume", {"work.stock_mm": {"below": 1}}, {"assume": {"work.skin": "none"}})],
    ),
    "least above most": (
        check_contradictions,
        [rule("FEE-001", "appraise", IRON, {"adjust": {"hex_least_mm": 0.2}}),
         rule("FEE-002", "appraise", {"fixture.rigidity": "weak"}, {"adjust": {"hex_most_mm": 0.1}})],
        "warning", "contradiction", "FEE-001", "FEE-002",
        [rule("FEE-001", "appraise", IRON, {"adjust": {"hex_least_mm": 0.1}}),
         rule("FEE-002", "appraise", {"fixture.rigidity": "weak"}, {"adjust": {"hex_most_mm": 0.1}})],
    ),
    "for what is ruled out": (
        check_contradictions,
        [weigh("PIT-001", {**IRON, "work.feature": "slot"}, "for", "pitch", "extra_fine"),
         weigh("PIT-002", {"work.feature": ["slot", "closed_pocket"]}, "rule_out", "pitch", "extra_fine")],
        "error", "without effect", "PIT-001", "PIT-002",
        [weigh("PIT-001", IRON, "for", "pitch", "extra_fine"),
         weigh("PIT-002", {"work.feature": ["slot", "closed_pocket"]}, "rule_out", "pitch", "extra_fine")],
    ),
    "different reasons on the same job": (
        check_contradictions,
        [weigh("PIT-001", IRON, "for", "pitch", "fine"),
         weigh("PIT-002", {"fixture.rigidity": "weak"}, "against", "pitch", "fine")],
        "note", "equal strength", "PIT-001", "cancel out on: fixture.rigidity weak, material.iso_group K",
        [weigh("PIT-001", {**IRON, "fixture.rigidity": "rigid"}, "for", "pitch", "fine"),
         weigh("PIT-002", {"fixture.rigidity": "weak"}, "against", "pitch", "fine")],
    ),
    "circle": (
        check_circles,
        [concludes("SET-001", {"setup.stiffness": "weak"}, setup__power="low"),
         concludes("SET-002", {"setup.power": "low"}, setup__stiffness="weak")],
        "error", "circle", "SET-002", "setup.power -> setup.stiffness -> setup.power",
        [concludes("SET-001", {"fixture.rigidity": "weak"}, setup__stiffness="weak"),
         concludes("SET-002", {"setup.stiffness": "weak"}, setup__power="low")],
    ),
    "no reason": (
        check_texts,
        [fine_pitch(why=" ")],
        "error", "missing why", "PIT-001", "no reason",
        [weigh("PIT-001", IRON, "for", "pitch", "fine")],
    ),
    "reason that only repeats": (
        check_texts,
        [fine_pitch(why="a planted rule")],
        "warning", "missing why", "PIT-001", "own sentence",
        [weigh("PIT-001", IRON, "for", "pitch", "fine")],
    ),
    "citation without a place": (
        check_texts,
        [fine_pitch(basis={"cited": {"source": "stephenson-agapiou", "where": "n/a", "seen": "recalled"}})],
        "error", "citation without place", "PIT-001", "stephenson-agapiou",
        [fine_pitch(basis={"cited": {"source": "stephenson-agapiou", "where": "chapter 4", "seen": "recalled"}})],
    ),
    "practice without a remark": (
        check_texts,
        [fine_pitch(basis={"common_practice": ""})],
        "warning", "basis without remark", "PIT-001", "when it does not hold",
        [weigh("PIT-001", IRON, "for", "pitch", "fine")],
    ),
}  # fmt: skip
