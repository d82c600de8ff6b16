"""The argument in the report: how the picks follow, why not others, how far they hold, what the assumptions change."""

from __future__ import annotations

from dataclasses import replace

from millreason.explain.why import tree_lines
from millreason.explain.words import option_words, value_words
from millreason.explanation_records import Alternative, Assumption, Because, Explanation, Interval, Options, WhyNot
from millreason.report.argument_picture import argument_picture
from millreason.report.holds_chart import holds_chart
from millreason.report.page import Fold, Item, Items, Picture, Say, Section, Table, present, section
from millreason.report.words import clean, count, fact_words, origin_text, recommends
from millreason.trace import Answer

_SPACE = "\N{EN SPACE}"
_RUN = "Every statement here about what would be was run."
_ENDS = (
    "Ends are found to one per cent and were run on both sides with the engine that made the answer; "
    "with a star the picks stay as far as it was run."
)
_OUTCOMES = {
    "chosen": "chosen",
    "ruled_out": "ruled out",
    "rejected": "rejected",
    "outweighed": "outweighed",
    "not_made": "not made",
}


def explanation_sections(answer: Answer) -> list[Section]:
    """Return the sections of the argument, each with its place in the report."""
    argued = answer.explanation
    if argued is None:
        return []
    made = [
        _because(answer, argued),
        why_not_section(answer, argued.why_not),
        holds_section(answer.units, argued.intervals, argued.options),
        assumptions_section(argued.assumptions, answer.units),
    ]
    return [part for part in made if part is not None]


def _placed(after: str, part: Section | None) -> Section | None:
    return None if part is None else replace(part, after=after)


# ---------------------------------------------------------------------- how the picks follow
def _because(answer: Answer, argued: Explanation) -> Section | None:
    if not recommends(answer):
        return None
    picture = argument_picture(answer)
    told = "From what is known, over the rules that decided, to the picks; red: what speaks against the next best"
    folds = tuple(Fold(clean(tree.text), (tree_items(tree),)) for tree in argued.why if tree.because)
    drawn = Picture(picture, told) if picture else None
    return _placed("why", section("because", "How the picks follow", (*present(drawn), *folds)))


def tree_items(tree: Because) -> Items:
    """Return a tree as a list: each reason with all its conditions down to the facts."""
    entries = []
    for part in tree.because:
        first, *rest = tree_lines(part, full=True)
        entries.append(Item(clean(first), tuple(_indented(line) for line in rest)))
    return Items(tuple(entries))


def _indented(line: str) -> str:
    """Keep the depth of a line where white space is not kept."""
    text = line.lstrip(" ")
    return _SPACE * (len(line) - len(text)) + clean(text)


# ---------------------------------------------------------------------- why not
def why_not_section(answer: Answer, cases: list[WhyNot]) -> Section | None:
    """Return why the other options are not the pick, with the ledgers side by side."""
    entries = tuple(why_not_item(case, answer.units) for case in cases)
    folds = [
        Fold(f"{option_words(case.pick, case.option, answer.units)}: the ledgers side by side", (sides_table(case),))
        for case in cases
        if len(case.sides) == 2
    ]
    title = "Why not another lead, pitch or rake"
    return _placed("lost", section("why-not", title, (*present(Items(entries)), *folds)))


def why_not_item(case: WhyNot, units: str) -> Item:
    """Return one option with how it lost, and the changes that would make it the pick."""
    reasons = [line.lstrip(" -") for part in case.because for line in tree_lines(part, depth=1)]
    changes = [f"It would be the pick with {change.text}; then: {change.then}" for change in case.nearest]
    return Item(clean(case.text), tuple(clean(line) for line in (*reasons, *changes)), _OUTCOMES[case.outcome])


def sides_table(case: WhyNot) -> Table:
    """Return the ledgers of the pick and of the option side by side."""
    ours, theirs = case.sides
    rules = dict.fromkeys(entry.rule for entry in (*ours.evidence, *theirs.evidence))
    rows = []
    for rule in rules:
        mine = next((entry for entry in ours.evidence if entry.rule == rule), None)
        other = next((entry for entry in theirs.evidence if entry.rule == rule), None)
        told = mine or other
        assert told is not None
        weights = tuple("" if entry is None else f"{entry.weight:+g}" for entry in (mine, other))
        rows.append((clean(told.why), rule, *weights))
    rows.append(("balance of the option", "", f"{ours.balance:+g}", f"{theirs.balance:+g}"))
    if theirs.tool:
        whole = tuple(f"{side.tool_evidence:+g}" for side in (ours, theirs))
        rows.append(("evidence of the best whole tool with it", "", *whole))
        rows.append(("taken off in judgement", "", *(f"{-side.lowered:+g}" for side in (ours, theirs))))
    heads = ("reason", "rule", clean(ours.option).replace("_", " "), clean(theirs.option).replace("_", " "))
    return Table(heads, tuple(rows), frozenset({2, 3}))


# ---------------------------------------------------------------------- holds while
def holds_section(units: str, intervals: list[Interval], options: list[Options]) -> Section | None:
    """Return how far every input may move while the picks stay."""
    heads = ("input", "now", "holds from", "to", "below it", "above it")
    rows = tuple(_interval_row(entry, units) for entry in intervals)
    numbers = Table(heads, rows, frozenset({1, 2, 3}), "Numbers")
    told = tuple(_options_row(entry, units) for entry in options if entry.other)
    words = Table(("input", "now", "another value", "then"), tuple(row for rows in told for row in rows), title="Words")
    quiet = [fact_words(entry.fact) for entry in options if entry.same and not entry.other]
    free = Say(f"No other value changes a pick: {', '.join(quiet)}.") if quiet else None
    chart = Picture(holds_chart(intervals, units), "Where the picks stay; the mark is the present value")
    blocks = present(numbers, chart if intervals else None, words, free)
    if not intervals and not options:
        return None
    how = Say(f"{_ENDS} {_RUN}")
    short = present(numbers, words, free)
    return _placed("margins", section("holds", "Holds while", (how, *blocks), (how, *short)))


def _name(fact: str, origin: str) -> str:
    return fact_words(fact) if origin == "given" else f"{fact_words(fact)} ({origin_text(origin)})"


def _interval_row(entry: Interval, units: str) -> tuple[str, ...]:
    def words(value: float) -> str:
        return value_words(value, entry.unit, units)

    low = words(entry.low.inside) if entry.low else f"{words(entry.bounds[0])} *"
    high = words(entry.high.inside) if entry.high else f"{words(entry.bounds[1])} *"
    below = f"at {words(entry.low.beyond)}: {entry.low.then}" if entry.low else ""
    above = f"at {words(entry.high.beyond)}: {entry.high.then}" if entry.high else ""
    name = _name(entry.fact, entry.origin)
    return name, words(entry.value), low, high, clean(below), clean(above)


def _options_row(entry: Options, units: str) -> list[tuple[str, ...]]:
    """Return a row for each outcome, with all values that lead to it."""
    by_outcome: dict[str, list[Alternative]] = {}
    for other in entry.other:
        by_outcome.setdefault(other.then, []).append(other)
    name = _name(entry.fact, entry.origin)
    now = value_words(entry.value, "", units)
    rows: list[tuple[str, ...]] = []
    for place, (then, values) in enumerate(by_outcome.items()):
        told = " / ".join(value_words(other.value, "", units) for other in values)
        rows.append((name if place == 0 else "", now if place == 0 else "", clean(told), clean(then)))
    return rows


# ---------------------------------------------------------------------- assumptions
def assumptions_section(assumptions: list[Assumption], units: str) -> Section | None:
    """Return which assumptions matter, the one with the largest effect first."""
    matter = tuple(_assumption_item(entry, units) for entry in assumptions if entry.effect)
    quiet = [f"{fact_words(entry.fact)} ({entry.varied})" for entry in assumptions if not entry.effect and entry.varied]
    free = Say(f"Varied, and changes nothing: {'; '.join(quiet)}.") if quiet else None
    blocks = present(Items(matter, numbered=True), free)
    return _placed("assumptions", section("assumption-effects", "Which assumption matters", blocks, blocks))


def _assumption_item(entry: Assumption, units: str) -> Item:
    now = value_words(entry.value, entry.unit, units)
    asked = f"Ask: {entry.question.text}" if entry.question else ""
    details = (f"varied over {entry.varied}", clean(entry.text), clean(asked))
    name = f"{fact_words(entry.fact)} {now} [{entry.rule}]"
    return Item(clean(name), tuple(line for line in details if line), f"effect {count(entry.effect)}")
