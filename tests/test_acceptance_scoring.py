"""The scorer is tested before it judges: it must pass a right answer and catch each kind of wrong one."""

from __future__ import annotations

import copy
import math
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from acceptance import Case, Score, load_cases, run_case, score, table
from acceptance_terms import holds, metric

CASES = {case["case"]["id"]: case for case in load_cases()}
PLATE, QUOTE, SEALING, MAGNESIUM = (CASES[name] for name in ("A01", "A09", "A08", "A10"))

JobAnswer = dict[str, Any]
Change = Callable[[JobAnswer], None]


def step(
    picks: dict[str, Any], speed: float, feed: float, depth: float, width: float, power: float, passes: int
) -> Any:
    """Return one step whose numbers agree with each other."""
    turns = 1000.0 * speed / (math.pi * picks["diameter_mm"])
    table_feed = turns * picks["teeth"] * feed
    return {
        "name": "roughing",
        "cutting_speed_m_min": speed,
        "spindle_speed_rpm": turns,
        "feed_per_tooth_mm": feed,
        "table_feed_mm_min": table_feed,
        "feed_per_rev_mm": feed * picks["teeth"],
        "depth_of_cut_mm": depth,
        "width_of_cut_mm": width,
        "hex_mm": feed * math.sin(math.radians(picks["kappa_deg"])),
        "removal_rate_cm3_min": depth * width * table_feed / 1000.0,
        "net_power_kw": power,
        "torque_nm": 60_000.0 * power / (2.0 * math.pi * turns),
        "passes": passes,
        "layers": 1,
    }


def plate_answer() -> JobAnswer:
    """Return an answer to the wide plate that a tooling engineer would sign."""
    picks = {
        "cutter_class": "face_mill",
        "diameter_mm": 80.0,
        "largest_diameter_mm": 92.0,
        "teeth": 6,
        "pitch": "fine",
        "rake": "positive_negative",
        "lead_deg": 45,
        "kappa_deg": 45,
        "corner": "facet",
        "edge": "honed_coated",
        "wiper": "none",
        "pockets": "fixed",
        "mounting": "shell_arbor",
        "hand": "right",
    }
    roughing = step(picks, speed=220.0, feed=0.15, depth=3.0, width=51.5, power=5.8, passes=4)
    plan = {
        "direction": "climb",
        "radial_passes": 4,
        "axial_passes": 1,
        "width_of_cut_mm": 51.5,
        "depth_of_cut_mm": 3.0,
        "steps": [roughing],
        "fluid": "air_blast",
        "time_min": 4 * (400 + 80 + 6) / roughing["table_feed_mm_min"] + 3 * 0.05,
    }
    keys = ("atc_diameter_neighbours", "pass_overlap_step", "skin_first_pass", "entry_roll_in")
    cautions = [{"key": key, "severity": "note", "text": "Mind this."} for key in keys]
    return {"verdict": "recommend", "picks": picks, "plan": plan, "cautions": cautions, "questions": []}


def magnesium_answer(confirmed: bool) -> JobAnswer:
    picks = dict(
        plate_answer()["picks"],
        diameter_mm=100.0,
        largest_diameter_mm=112.0,
        teeth=5,
        pitch="coarse",
        rake="double_positive",
        edge="sharp_polished_uncoated",
    )
    milling = step(picks, speed=400.0, feed=0.18, depth=1.5, width=76.0, power=0.8, passes=2)
    plan = {
        "direction": "climb",
        "radial_passes": 2,
        "axial_passes": 1,
        "depth_of_cut_mm": 1.5,
        "steps": [milling],
        "fluid": "dry",
        "time_min": 2 * (240 + 100 + 6) / milling["table_feed_mm_min"] + 0.05,
    }
    keys = ("fire_magnesium", "hydrogen_wet_mg", "no_fine_chips", "chip_housekeeping")
    facts = ("confirm.magnesium_fire_controls", "confirm.no_steel_inserts_cast_in")
    return {
        "verdict": "recommend" if confirmed else "conditional",
        "picks": picks,
        "plan": plan if confirmed else None,
        "cautions": [{"key": key, "text": "Never use water on burning chips."} for key in keys],
        "questions": [],
        "conditions": [] if confirmed else [{"fact": fact, "text": "?"} for fact in facts],
    }


def asking(*facts: str) -> JobAnswer:
    questions = [{"fact": fact, "text": "?"} for fact in facts]
    cautions = [{"key": "missing_data", "text": "Some data are missing."}]
    return {"verdict": "ask", "picks": None, "plan": None, "cautions": cautions, "questions": questions}


FOUR_QUESTIONS = ("work.width_mm", "work.stock_mm", "work.material", "machine.interface")


def refusing() -> JobAnswer:
    limits = [
        {"key": "one_pass", "text": "One pass needs a cutter of 188 to 229 mm."},
        {"key": "changer_diameter", "text": "The changer takes 80 mm."},
        {"key": "changer_mass", "text": "The changer takes 3 kg."},
        {"key": "taper_diameter", "text": "The 30 taper is too slender for the overhung mass."},
    ]
    offers = [
        "Three overlapping passes with a stated witness step, if the customer agrees.",
        "A 50-taper machine.",
        "One continuous spiral path.",
        "Grinding.",
    ]
    keys = ("atc_diameter_neighbours", "atc_mass", "pass_overlap_step")
    return {
        "verdict": "refuse",
        "picks": None,
        "plan": None,
        "cautions": [{"key": key, "text": "Never loaded by hand."} for key in keys],
        "questions": [],
        "refusal": {"limits": limits, "openings": [], "alternatives": offers},
    }


def misses_of(case: Case, answer: JobAnswer, *changes: Change) -> str:
    changed = copy.deepcopy(answer)
    for change in changes:
        change(changed)
    return "\n".join(score(case, changed).misses)


def test_good_answers_pass() -> None:
    assert misses_of(PLATE, plate_answer()) == ""
    assert misses_of(QUOTE, asking(*FOUR_QUESTIONS)) == ""
    assert misses_of(SEALING, refusing()) == ""
    assert misses_of(MAGNESIUM, magnesium_answer(confirmed=False)) == ""


def put(path: str, value: Any) -> Change:
    """Return a change that sets one value; 'step.x' sets it in the first step."""

    def change(answer: JobAnswer) -> None:
        head, _, rest = path.partition(".")
        if not rest:
            answer[head] = value
        else:
            (answer["plan"]["steps"][0] if head == "step" else answer[head])[rest] = value

    return change


def drop_caution(key: str) -> Change:
    def change(answer: JobAnswer) -> None:
        answer["cautions"] = [caution for caution in answer["cautions"] if caution["key"] != key]

    return change


WRONG_PLATES: dict[str, tuple[Change, str]] = {
    "verdict": (put("verdict", "ask"), "verdict ask"),
    "class ruled out": (put("picks.cutter_class", "fly_cutter"), "cutter_class fly_cutter is ruled out"),
    "pick unknown to the case": (put("picks.wiper", "all"), "wiper all is neither accepted nor tolerated"),
    "pick not made": (put("picks.corner", None), "corner None"),
    "too large": (put("picks.diameter_mm", 125.0), "diameter_mm 125.0 is ruled out"),
    "too few passes": (put("plan.radial_passes", 2), "radial_passes 2 is ruled out"),
    "caution left out": (drop_caution("skin_first_pass"), "caution skin_first_pass"),
    "speed": (put("step.spindle_speed_rpm", 900.0), "spindle_speed_rpm 900"),
    "table feed": (put("step.table_feed_mm_min", 1200.0), "table_feed_mm_min 1200"),
    "feed per revolution": (put("step.feed_per_rev_mm", 0.15), "feed_per_rev_mm"),
    "removal rate": (put("step.removal_rate_cm3_min", 60.0), "removal_rate_cm3_min"),
    "torque": (put("step.torque_nm", 20.0), "torque_nm 20"),
    "chip thickness": (put("step.hex_mm", 0.15), "hex_mm 0.15"),
    "no chip thickness": (put("step.hex_mm", None), "hex_mm None"),
    "lead": (put("picks.lead_deg", 15), "lead 15"),
    "time of the length alone": (put("plan.time_min", 2.03), "time 2.03"),
    "time out of the band": (put("plan.time_min", 9.0), "time_min 9 in"),
    "face not covered": (put("step.width_of_cut_mm", 45.0), "do not cover 200 mm"),
    "stock left": (put("step.depth_of_cut_mm", 2.0), "of the 3 mm stock"),
    "more power than there is": (put("step.net_power_kw", 9.5), "available"),
    "power out of the band": (put("step.net_power_kw", 2.0), "net_power_kw 2 in"),
    "unit power": (put("step.net_power_kw", 2.7), "unit_power_kw_per_cm3_min"),
    "cutting speed": (put("step.cutting_speed_m_min", 300.0), "cutting_speed_m_min 300 in"),
    "never fits the changer": (put("picks.largest_diameter_mm", 151.0), "never fits a changer"),
    "outermost smaller than it can be": (put("picks.largest_diameter_mm", 82.0), "which the depth needs"),
    "width equal to diameter": (put("step.width_of_cut_mm", 80.0), "a cutter as wide as its pass"),
    "step half told": (put("step.table_feed_mm_min", None), "step 1 without table_feed_mm_min"),
    "teeth not told": (put("picks.teeth", None), "plan without teeth"),
    "recommends nothing": (put("plan.steps", []), "recommends without a plan"),
}


@pytest.mark.parametrize(("change", "caught"), WRONG_PLATES.values(), ids=WRONG_PLATES.keys())
def test_wrong_answer_is_caught(change: Change, caught: str) -> None:
    assert caught in misses_of(PLATE, plate_answer(), change)


def test_layers_of_a_step_count_as_passes() -> None:
    answer = plate_answer()
    answer["plan"]["steps"] = [step(answer["picks"], 220.0, 0.15, 1.5, 51.5, 2.9, passes=4) | {"layers": 2}]
    assert "time 2.618 min against 5.285" in misses_of(PLATE, answer)
    answer["plan"]["time_min"] = 5.285
    assert misses_of(PLATE, answer) == ""


def test_neighbours_not_emptied_is_caught() -> None:
    untold = misses_of(
        PLATE, plate_answer(), put("picks.largest_diameter_mm", 96.0), drop_caution("atc_diameter_neighbours")
    )
    assert "needs empty neighbours above 95" in untold


def test_tolerated_pick_is_a_remark_and_no_miss() -> None:
    answer = plate_answer()
    answer["picks"]["pitch"] = "coarse"
    result = score(PLATE, answer)
    assert result.passed
    assert any("pitch coarse is tolerated" in remark for remark in result.remarks)


def bracket(text: str) -> JobAnswer:
    return {**asking(*FOUR_QUESTIONS), "assumptions": [{"text": text}]}


WRONG_QUOTES: dict[str, tuple[JobAnswer, str]] = {
    "a question left out": (asking(*FOUR_QUESTIONS[1:]), "asks for work.width_mm"),
    "asks what is known": (asking(*FOUR_QUESTIONS, "work.length_mm"), "work.length_mm, which the job states"),
    "too many": (asking(*FOUR_QUESTIONS, "a", "b", "c"), "7 questions at once"),
    "a time all the same": ({**asking(*FOUR_QUESTIONS), "plan": {"time_min": 3.0}}, "still names"),
    "a cutter all the same": ({**asking(*FOUR_QUESTIONS), "picks": {"diameter_mm": 80}}, "still names"),
    "travel left out": (bracket("Between 3 and 15 min a part."), "caution time_includes_travel"),
}


@pytest.mark.parametrize(("answer", "caught"), WRONG_QUOTES.values(), ids=WRONG_QUOTES.keys())
def test_wrong_way_of_asking_is_caught(answer: JobAnswer, caught: str) -> None:
    assert caught in misses_of(QUOTE, answer)


def test_wrong_refusals_are_caught() -> None:
    only_power = refusing()
    only_power["refusal"]["limits"] = [{"key": "power", "text": "Not enough power."}]
    found = misses_of(SEALING, only_power)
    assert "refusal names the mass limit of the changer" in found
    assert "refused only for power and torque" in found
    by_hand = misses_of(
        SEALING, refusing(), put("refusal", {"limits": [], "alternatives": ["Load a 200 mm cutter by hand."]})
    )
    assert "must not say: a large cutter loaded by hand" in by_hand
    assert "offers one continuous spiral or contour path" in by_hand


def test_data_before_the_condition_is_confirmed_is_caught() -> None:
    early = {**magnesium_answer(confirmed=True), "verdict": "conditional"}
    assert "cutting data before the condition is confirmed" in misses_of(MAGNESIUM, early)


def test_dangerous_sentence_is_caught_and_its_denial_is_not() -> None:
    advice = magnesium_answer(confirmed=False)
    advice["cautions"][0]["text"] = "Put water on a fire."
    assert "must not say: water or carbon dioxide on a fire" in misses_of(MAGNESIUM, advice)
    advice["cautions"][0]["text"] = "Never put water on a fire."
    assert misses_of(MAGNESIUM, advice) == ""


def test_conditional_case_is_run_again_with_its_conditions_confirmed() -> None:
    jobs: list[str] = []

    def solve(path: Path) -> JobAnswer:
        jobs.append(path.read_text(encoding="utf-8"))
        return magnesium_answer(confirmed="magnesium_fire_controls: true" in jobs[-1])

    first, second = run_case(MAGNESIUM, solve)
    assert (first.verdict, second.verdict) == ("conditional", "recommend")
    assert first.misses == second.misses == ()
    assert "no_steel_inserts_cast_in: true" in jobs[-1]


def test_finer_chips_after_confirmation_are_caught() -> None:
    fine = magnesium_answer(confirmed=True)
    fine["plan"]["steps"][0]["feed_per_tooth_mm"] = 0.05
    scores = run_case(MAGNESIUM, lambda path: fine if path != MAGNESIUM["path"] else magnesium_answer(confirmed=False))
    assert any("feed_per_tooth_mm 0.05 against" in miss for miss in scores[1].misses)


def test_round_insert_reads_as_round_angle() -> None:
    case = {**PLATE, "expect": {"verdict": ["recommend"], "picks": {"kappa_deg": {"accept": ["round"]}}}}
    answer = plate_answer()
    answer["picks"].update(cutter_class="round_insert_mill", kappa_deg=0)
    assert "kappa_deg" not in "\n".join(score(case, answer).misses)
    assert "kappa_deg 45" in misses_of(case, plate_answer())


def test_table_shows_verdict_counts_and_misses() -> None:
    shown = table([Score("A99", "A title", "refuse", ("a",), (), ("wrong pitch",)), score(PLATE, plate_answer())])
    assert "A99" in shown
    assert "miss: wrong pitch" in shown
    assert shown.endswith("1 of 2 pass")


@pytest.mark.parametrize(
    ("condition", "value", "right"),
    [
        ({"between": [63, 80]}, 80.0, True),
        ({"between": [63, 80]}, 81, False),
        ([{"above": 95}, {"below": 40}], 30, True),
        ({"above": 10, "below": 20}, 25, False),
        ({"at_least": 1}, None, False),
        ({"at_most": 20}, "round", False),
        ({"none_of": ["cbn"]}, "honed_coated", True),
        ({"none_of": ["cbn"]}, None, False),
        ({"known": False}, None, True),
        ([45, "round"], 45.0, True),
        ([1], True, False),
        (["left"], "right", False),
    ],
)
def test_conditions(condition: Any, value: Any, right: bool) -> None:
    assert holds(condition, value) is right


def test_quantities_are_read_apart_from_the_program() -> None:
    assert metric("2.36 in") == pytest.approx(59.944)
    assert metric(["80 rpm", "135 rpm"]) == [80.0, 135.0]
    assert metric("2 hp") == pytest.approx(1.4914, abs=1e-4)
    with pytest.raises(ValueError, match="not a quantity known here"):
        metric("3 cubits")
