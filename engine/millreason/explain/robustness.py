"""Whether a choice survives the bands of its data: force constant, wear and hardness, by running it."""

from __future__ import annotations

from millreason.explain.reruns import Reruns
from millreason.explain.sensitivity import find_interval
from millreason.explain.variations import Input, rule_lines, tidy
from millreason.explain.words import picks_changed, result_words, same_picks, value_words
from millreason.explanation_records import Alternative, Robustness
from millreason.job import Value

FORCE = "material.kc11_n_mm2"
HARDNESS = "work.hardness_hb"
_SEARCHED = 3.0


def find_robustness(reruns: Reruns) -> Robustness | None:
    """Return whether the picks stay over the bands of force, wear and hardness, and how far force could move."""
    fact, practice = reruns.outcome.situation.value, reruns.adviser.knowledge.practice
    force = fact(FORCE)
    if force is None or not reruns.base.stands:
        return None
    band, wear = practice["force_band"].number, practice["wear_factor"]
    low, high = fact("material.kc_low_ratio", 1 - band), fact("material.kc_high_ratio", 1 + band)
    worn = (wear.high or wear.number) / wear.number
    hardness = [value for name in ("low", "high") if (value := fact(f"material.hardness_{name}_hb")) is not None]
    changes: dict[str, dict[str, Value]] = {
        "force at the low end of its band": {FORCE: tidy(force * low)},
        "force at the high end of its band": {FORCE: tidy(force * high)},
        "force at the high end, edges worn to the last": {FORCE: tidy(force * high * worn)},
        **{f"hardness {value_words(value, 'HB', reruns.job.units)}": {HARDNESS: value} for value in hardness},
    }
    runs = [_run(reruns, name, change) for name, change in changes.items()]
    holds = all(not run.changed and run.verdict in ("recommend", "recommend_with_warnings") for run in runs)
    below, above = _margins(reruns, force)
    line = _line(runs, (low, high, worn), (below, above), holds, hardness)
    return Robustness(holds, line, low, high * worn, below, above, hardness, runs)


def _run(reruns: Reruns, name: str, change: dict[str, Value]) -> Alternative:
    after = reruns.confirmed(change)
    if same_picks(reruns.base, after):
        return Alternative(name, "the same picks", {}, after.verdict)
    told = result_words(reruns.base, after, reruns.job.units)
    return Alternative(name, told, picks_changed(reruns.base, after), after.verdict)


def _margins(reruns: Reruns, force: float) -> tuple[float | None, float | None]:
    """Return how far the force may move, as a ratio, before the picks change; None for as far as it was searched."""
    entry = Input(FORCE, reruns.vocabulary.facts[FORCE], force, "looked_up")
    least, most = entry.definition.range or [0.0, force * _SEARCHED]
    low, high = max(force / _SEARCHED, least), min(force * _SEARCHED, most)
    lines = rule_lines(reruns.adviser.rulebook).get(FORCE, ())
    found = find_interval(reruns, entry, lines, (tidy(low), tidy(high)))
    return (found.low.inside / force if found.low else None, found.high.inside / force if found.high else None)


def _line(
    runs: list[Alternative],
    band: tuple[float, float, float],
    margins: tuple[float | None, float | None],
    holds: bool,
    hardness: list[float],
) -> str:
    low, high, worn = band
    span = f"force from {low:.2f} to {high:.2f} of its nominal value, edges worn to {worn:.2f} of the usual wear"
    over = f"{span}, and {hardness[0]:g} to {hardness[1]:g} HB" if len(hardness) == 2 else span
    below, above = margins
    down = f"{below:.2f}" if below is not None else f"below {1 / _SEARCHED:.2f}"
    up = f"{above:.2f}" if above is not None else f"above {_SEARCHED:.0f}"
    margin = f"The picks stay while the force lies between {down} and {up} of its nominal value."
    if holds:
        return f"The choice holds over {over}. {margin}"
    lost = "; ".join(f"{run.value}: {run.then}" for run in runs if run.then != "the same picks")
    return f"The choice does not hold over {over}: {lost}. {margin}"
