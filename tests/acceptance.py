"""Scores answers against the acceptance cases, and prints the table: python tests/acceptance.py [-v] [ids].

`accept` is a hit, `tolerate` a hit with a remark, anything else a miss. A case passes when it has no miss.
"""

from __future__ import annotations

import argparse
import re
import sys
import tempfile
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import yaml

from acceptance_numbers import Facts, Note, consistency, machine_limits, short
from acceptance_terms import PLAN_PICKS, all_hold, holds, sentences, view
from millreason.errors import MillreasonError
from millreason.yaml_source import read_yaml

CASES = Path(__file__).resolve().parent.parent / "cases" / "accept"


Case = Facts
Answer = Facts


@dataclass(frozen=True)
class Score:
    """What an answer got right, what a reviewer would remark on, what is wrong."""

    case_id: str
    title: str
    verdict: str
    hits: tuple[str, ...]
    remarks: tuple[str, ...]
    misses: tuple[str, ...]

    @property
    def passed(self) -> bool:
        return not self.misses


def load_case(path: Path) -> Case:
    """Read a case; `path` is kept in it."""
    data: dict[str, Any] = read_yaml(path).data
    return {**data, "path": path}


def load_cases(ids: list[str] | None = None) -> list[Case]:
    """Read all cases, or those whose id or file name is asked for, in the order of their ids."""
    cases = [load_case(path) for path in sorted(CASES.glob("*.yaml"))]
    wanted = [case for case in cases if not ids or case["case"]["id"] in ids or case["path"].stem in ids]
    return sorted(wanted, key=lambda case: case["case"]["id"])


def score(case: Case, answer: Answer, expect: Facts | None = None) -> Score:
    """Score one answer against the expectations of a case (or other expectations)."""
    wanted = case["expect"] if expect is None else expect
    seen = view(answer)
    notes = [note for judge in _JUDGES for note in judge(wanted, seen, case["job"])]
    kinds = {kind: tuple(text for found, text in notes if found == kind) for kind in ("hit", "remark", "miss")}
    head = case["case"]
    return Score(head["id"], head["title"], str(answer.get("verdict")), kinds["hit"], kinds["remark"], kinds["miss"])


def _note(right: bool, text: str) -> Note:
    return ("hit" if right else "miss", text)


def _verdict(expect: Facts, seen: Facts, job: Facts) -> Iterator[Note]:
    verdict = seen.get("verdict")
    yield _note(verdict in expect["verdict"], f"verdict {verdict}, expected {' or '.join(expect['verdict'])}")
    if verdict in ("ask", "refuse") and (_says_something(seen["picks"]) or _says_something(seen["plan"])):
        yield "miss", f"{verdict}, and still names a cutter or cutting data"
    if verdict == "conditional" and seen["steps"]:
        yield "miss", "cutting data before the condition is confirmed"
    if verdict in ("recommend", "recommend_with_warnings") and not seen["steps"]:
        yield "miss", "recommends without a plan"


def _says_something(part: Facts) -> bool:
    return any(value not in (None, []) for value in part.values())


def _picks(expect: Facts, seen: Facts, job: Facts) -> Iterator[Note]:
    if seen.get("verdict") in ("ask", "refuse"):
        return
    for name, wanted in expect.get("picks", {}).items():
        if name in PLAN_PICKS and seen.get("verdict") == "conditional":
            continue
        value = seen["plan" if name in PLAN_PICKS else "picks"].get(name)
        yield _judged_pick(name, value, wanted)


def _judged_pick(name: str, value: Any, wanted: Facts) -> Note:
    if holds(wanted.get("must_not", []), value):
        return "miss", f"{name} {value} is ruled out ({wanted['must_not']})"
    if holds(wanted.get("accept", []), value):
        return "hit", f"{name} {value}"
    if holds(wanted.get("tolerate", []), value):
        return "remark", f"{name} {value} is tolerated; better {wanted['accept']}"
    return "miss", f"{name} {value} is neither accepted nor tolerated ({wanted.get('accept', [])})"


def _cautions(expect: Facts, seen: Facts, job: Facts) -> Iterator[Note]:
    given = {caution["key"] for caution in seen.get("cautions") or []}
    due = list(expect.get("cautions", []))
    due += [entry["key"] for entry in expect.get("cautions_if", []) if _applies(entry, seen)]
    for key in due:
        names = key if isinstance(key, list) else [key]
        yield _note(not given.isdisjoint(names), f"caution {' or '.join(names)}")
    for key in expect.get("cautions_not", []):
        if key in given:
            yield "miss", f"caution {key} has no ground in this job"


def _applies(entry: Facts, seen: Facts) -> bool:
    spoken = any(re.search(entry["says"], text) for text in sentences(seen)) if "says" in entry else True
    return spoken and all_hold(entry.get("when", {}), seen)


def _questions(expect: Facts, seen: Facts, job: Facts) -> Iterator[Note]:
    ask = expect.get("ask")
    if not ask:
        return
    asked = _asked(seen)
    for fact in ask.get("must", []):
        names = fact if isinstance(fact, list) else [fact]
        yield _note(not set(names).isdisjoint(asked), f"asks for {' or '.join(names)} (asked: {', '.join(asked)})")
    for fact in set(asked).intersection(ask.get("must_not", [])):
        yield "miss", f"asks for {fact}, which the job states"
    if len(asked) > ask.get("most", 6):
        yield "miss", f"{len(asked)} questions at once; at most {ask.get('most', 6)}"


def _asked(answer: Answer) -> list[str]:
    """Return the facts that the answer wants to know, the conditions it waits for included."""
    wanted = [*(answer.get("conditions") or []), *(answer.get("questions") or [])]
    return list(dict.fromkeys(entry["fact"] for entry in wanted))


def _refusal(expect: Facts, seen: Facts, job: Facts) -> Iterator[Note]:
    wanted = expect.get("refusal")
    if not wanted:
        return
    refusal = seen.get("refusal") or {}
    limits = refusal.get("limits") or []
    for reason in wanted.get("limits", []):
        found = any(entry["key"] in reason.get("keys", []) or _says(entry, reason.get("says")) for entry in limits)
        yield _note(found, f"refusal names {reason['what']}")
    only = set(wanted.get("not_only", []))
    if limits and {entry["key"] for entry in limits} <= only:
        yield "miss", f"refused only for {' and '.join(sorted(only))}, which is not what binds"
    offered = " ".join(sentences({"refusal": [refusal.get("alternatives"), refusal.get("openings")]}))
    for offer in wanted.get("alternatives", []):
        yield _note(_says({"text": offered}, offer["says"]), f"offers {offer['what']}")


def _says(entry: Facts, pattern: str | None) -> bool:
    return bool(pattern) and re.search(str(pattern), str(entry.get("text", "")), re.IGNORECASE) is not None


_RANGE_OF = {
    "cutting_speed_m_min": "each",
    "feed_per_tooth_mm": "each",
    "hex_mm": "each",
    "unit_power_kw_per_cm3_min": "each",
    "net_power_kw": "most",
    "time_min": "whole",
}


def _ranges(expect: Facts, seen: Facts, job: Facts) -> Iterator[Note]:
    applies = bool(seen["steps"]) and all_hold(expect.get("ranges_when", {}), seen)
    for name, (low, high) in expect.get("ranges", {}).items() if applies else ():
        found = [step.get(name) for step in seen["steps"]]
        if _RANGE_OF[name] == "most":
            found = [max((value for value in found if value is not None), default=None)]
        if _RANGE_OF[name] == "whole":
            found = [seen["plan"].get(name)]
        for value in found:
            yield _note(holds({"between": [low, high]}, value), f"{name} {short(value)} in {low}-{high}")
    for name, rule in expect.get("data_rules", {}).items():
        for step in seen["steps"]:
            yield _note(holds(rule, step.get(name)), f"{name} {short(step.get(name))} against {rule}")


def _forbidden(expect: Facts, seen: Facts, job: Facts) -> Iterator[Note]:
    for entry in expect.get("must_not_say", []):
        if "when" in entry and all_hold(entry["when"], seen):
            yield "miss", f"must not say: {entry['what']}"
        for sentence in sentences(seen) if "says" in entry else ():
            spoken = re.search(entry["says"], sentence, re.IGNORECASE)
            if spoken and not ("unless" in entry and re.search(entry["unless"], sentence, re.IGNORECASE)):
                yield "miss", f"must not say: {entry['what']} ({sentence!r})"


_JUDGES: tuple[Callable[[Facts, Facts, Facts], Iterator[Note]], ...] = (
    _verdict,
    _picks,
    _cautions,
    _questions,
    _refusal,
    _ranges,
    _forbidden,
    consistency,
    machine_limits,
)


def answer_of(path: Path) -> Answer:
    """Run the program on a job file."""
    from millreason.choice import choose_file

    answer: Answer = choose_file(path).to_dict()
    return answer


def confirmed_job(case: Case, answer: Answer) -> Facts:
    """Return the job of a case with a yes to every condition that the answer waits for."""
    yes = {fact.removeprefix("confirm."): True for fact in _asked(answer) if fact.startswith("confirm.")}
    return {**case["job"], "confirm": {**case["job"].get("confirm", {}), **yes}}


def run_case(case: Case, solve: Callable[[Path], Answer] = answer_of) -> list[Score]:
    """Run and score a case, and once more with its conditions confirmed where it says what follows."""
    answer = solve(case["path"])
    scores = [score(case, answer)]
    if "after_confirm" in case["expect"]:
        with tempfile.TemporaryDirectory() as folder:
            path = Path(folder) / case["path"].name
            path.write_text(yaml.safe_dump({"job": confirmed_job(case, answer)}), encoding="utf-8")
            scores.append(score(case, solve(path), case["expect"]["after_confirm"]))
    return scores


def rejected(case: Case, error: MillreasonError) -> Score:
    """Return the score of a job file that the program would not read or could not answer."""
    return Score(case["case"]["id"], case["case"]["title"], "error", (), (), (str(error),))


def safely_run(case: Case) -> list[Score]:
    """Run a case; an error of the program is a miss of that case and does not hide the others."""
    try:
        return run_case(case)
    except MillreasonError as error:
        return [rejected(case, error)]


def table(scores: list[Score], verbose: bool = False) -> str:
    """Return the scores as lines: case, verdict, hits, remarks, misses, and what was missed."""
    lines = [f"{'case':<6}{'verdict':<26}{'hits':>5}{'remarks':>9}{'misses':>8}  title"]
    for entry in scores:
        counts = f"{len(entry.hits):>5}{len(entry.remarks):>9}{len(entry.misses):>8}"
        lines.append(f"{entry.case_id:<6}{entry.verdict:<26}{counts}  {entry.title}")
        lines += [f"      miss: {text}" for text in entry.misses]
        if verbose:
            lines += [f"      remark: {text}" for text in entry.remarks] + [f"      hit: {text}" for text in entry.hits]
    passed = sum(entry.passed for entry in scores)
    return "\n".join([*lines, f"{passed} of {len(scores)} pass"])


def main(arguments: list[str] | None = None) -> int:
    """Print the table of all cases or of those named; 1 if any fails."""
    parser = argparse.ArgumentParser(description="Score the program against the acceptance cases.")
    parser.add_argument("ids", nargs="*", help="case ids or file names; all if none is given")
    parser.add_argument("-v", "--verbose", action="store_true", help="show hits and remarks too")
    options = parser.parse_args(arguments)
    scores = [entry for case in load_cases(options.ids) for entry in safely_run(case)]
    print(table(scores, options.verbose))
    return 0 if scores and all(entry.passed for entry in scores) else 1


if __name__ == "__main__":
    sys.exit(main())
