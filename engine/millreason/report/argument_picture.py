"""The trace as a picture: from what is known, over the rules that decided, to the picks."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from html import escape

from millreason.explain.words import value_words
from millreason.report import svg
from millreason.report.svg import INK, PALE, SIGN, TOOL, Point
from millreason.report.words import clean, fact_words, pick_words
from millreason.trace import Answer, ConditionRecord, Evidence, FactRecord, FiringRecord, Ledger, OptionLedger

# The picks in the order in which a reader meets them; the rest of the ledgers stands in the text.
_SHOWN = ("cutter_class", "kappa_deg", "diameter_mm", "pitch", "rake", "corner", "edge", "wiper", "direction", "fluid")
_FOR_EACH, _AGAINST_EACH = 2, 1
_ROW, _GAP, _TOP = 22.0, 8.0, 34.0
_COLUMNS = {"known": (0.0, 218.0), "concluded": (252.0, 168.0), "rule": (456.0, 330.0), "pick": (822.0, 178.0)}
_HEADS = {"known": "given, looked up, assumed", "concluded": "concluded", "rule": "rules that decided", "pick": "picks"}
_LETTER = 5.6
_MARKS = {"given": "", "looked_up": " (looked up)", "assumed": " (assumed)", "computed": " (computed)"}


@dataclass
class _Node:
    column: str
    words: str
    told: str
    against: bool = False
    height: float = 0.0
    below: list[_Node] = field(default_factory=list)

    @property
    def left(self) -> Point:
        return _COLUMNS[self.column][0], self.height + _ROW / 2

    @property
    def right(self) -> Point:
        x, width = _COLUMNS[self.column]
        return x + width, self.height + _ROW / 2


def argument_picture(answer: Answer) -> str:
    """Draw the argument of an answer; the empty text where no rule spoke for a pick."""
    graph = _Graph(answer)
    if not graph.picks:
        return ""
    graph.place()
    nodes = graph.nodes
    depth = max(node.height for node in nodes) + _ROW + 6
    told = "; ".join(f"{pick.words} by {', '.join(rule.words for rule in pick.below)}" for pick in graph.picks)
    body = [*_heads(), *(_link(low, node) for node in nodes for low in node.below), *(_box(node) for node in nodes)]
    return svg.drawing("argument", (1000, depth), "How the picks follow", told, body)


class _Graph:
    """The nodes of the picture, each with what stands beneath it."""

    def __init__(self, answer: Answer) -> None:
        self._answer = answer
        self._firings: dict[str, list[FiringRecord]] = {}
        for firing in answer.trace.firings:
            self._firings.setdefault(firing.rule, []).append(firing)
        self._facts = {record.name: record for record in answer.trace.facts}
        self._rules: dict[tuple[str, str], _Node] = {}
        self._known: dict[str, _Node] = {}
        ledgers = {ledger.pick: ledger for ledger in answer.trace.ledgers}
        made = [self._pick(ledgers[name]) for name in _SHOWN if name in ledgers]
        self.picks = [node for node in made if node is not None]

    @property
    def nodes(self) -> list[_Node]:
        """All nodes, column by column."""
        return [*self._known.values(), *self._rules.values(), *self.picks]

    def _pick(self, ledger: Ledger) -> _Node | None:
        chosen = next((entry for entry in ledger.options if entry.option == ledger.chosen), None)
        if chosen is None:
            return None
        second = next((entry for entry in ledger.options if entry is not chosen), None)
        told = [*_strongest(chosen), *(_hardest(second) if second else ())]
        rules = [self._rule(entry, ledger.pick, option) for option, entry in told]
        if not rules:
            return None
        name = pick_words(ledger.pick, chosen.option, self._answer.units)
        return _Node("pick", clean(name), clean(name), below=rules)

    def _rule(self, entry: Evidence, pick: str, option: OptionLedger) -> _Node:
        against = entry.stance != "for"
        about = f"D {option.option}" if pick == "diameter_mm" else ""
        firing = next((one for one in self._firings.get(entry.rule, []) if one.about in ("", about)), None)
        # One rule may speak for this pick and against the next best of that; each is a node of its own.
        key = entry.rule, option.option if against else ""
        if key not in self._rules:
            lead = f"against {pick_words(pick, option.option, self._answer.units)}: " if against else ""
            says = firing.says if firing else entry.why
            node = _Node("rule", f"{entry.rule} {lead}{clean(says)}", clean(f"{lead}{entry.why}"), against)
            node.below = [self._fact(condition) for condition in firing.conditions] if firing else []
            self._rules[key] = node
        return self._rules[key]

    def _fact(self, condition: ConditionRecord) -> _Node:
        """Return the node of a fact; one that a rule concluded stands on the facts of that rule."""
        if condition.fact in self._known:
            return self._known[condition.fact]
        record = self._facts.get(condition.fact)
        told = self._words(condition, record)
        by = self._firings.get(record.by, []) if record and record.origin == "concluded" else []
        mark = "" if by or condition.value is None else _MARKS.get(condition.origin, "")
        node = _Node("concluded" if by else "known", f"{told}{mark}", told)
        self._known[condition.fact] = node
        if by:
            node.told = clean(f"{told}: {by[0].why} [{by[0].rule}]")
            node.below = [self._fact(lower) for lower in by[0].conditions]
        return node

    def _words(self, condition: ConditionRecord, record: FactRecord | None) -> str:
        if condition.value is None:
            return f"{fact_words(condition.fact)}: not known"
        unit = record.unit if record else ""
        return clean(f"{fact_words(condition.fact)} {value_words(condition.value, unit, self._answer.units)}")

    def place(self) -> None:
        """Give every node its height: rules beside their picks, facts in the middle of what stands on them."""
        rules = list(self._rules.values())
        ends = {id(rule): [place for place, pick in enumerate(self.picks) if rule in pick.below] for rule in rules}
        _stack(sorted(rules, key=lambda rule: sum(ends[id(rule)]) / len(ends[id(rule)])))
        _stack(self.picks, [sum(rule.height for rule in pick.below) / len(pick.below) for pick in self.picks])
        for column in ("concluded", "known"):
            facts = [node for node in self._known.values() if node.column == column]
            wanted = [self._wanted(fact) for fact in facts]
            order = sorted(range(len(facts)), key=lambda place: (wanted[place], place))
            _stack([facts[place] for place in order], [wanted[place] for place in order])

    def _wanted(self, fact: _Node) -> float:
        above = [node.height for node in self.nodes if fact in node.below]
        return sum(above) / len(above) if above else _TOP


def _strongest(option: OptionLedger) -> Iterator[tuple[OptionLedger, Evidence]]:
    spoken = sorted((entry for entry in option.evidence if entry.stance == "for"), key=lambda entry: -entry.weight)
    return ((option, entry) for entry in spoken[:_FOR_EACH])


def _hardest(option: OptionLedger) -> Iterator[tuple[OptionLedger, Evidence]]:
    """Yield what rules the next best out, else what speaks most against it."""
    against = [entry for entry in option.evidence if entry.stance != "for"]
    ordered = sorted(against, key=lambda entry: (entry.stance != "rule_out", entry.weight))
    return ((option, entry) for entry in ordered[:_AGAINST_EACH])


def _stack(nodes: list[_Node], wanted: list[float] | None = None) -> None:
    """Set nodes below each other, each as near to the height it wants as those above it leave room for."""
    free = _TOP
    for place, node in enumerate(nodes):
        node.height = max(free, wanted[place] if wanted else free)
        free = node.height + _ROW + _GAP
    # What was pushed down too far moves up again where there is room.
    for place in range(len(nodes) - 2, -1, -1):
        most = nodes[place + 1].height - _ROW - _GAP
        nodes[place].height = min(nodes[place].height, most)


def _heads() -> list[str]:
    return [svg.text((_COLUMNS[name][0], 16), words, size=11) for name, words in _HEADS.items()]


def _box(node: _Node) -> str:
    x, width = _COLUMNS[node.column]
    room = int((width - 12) / _LETTER)
    words = node.words if len(node.words) <= room else f"{node.words[: room - 3].rstrip()}..."
    colour = SIGN if node.against else TOOL if node.column in ("rule", "pick") else INK
    box = svg.rectangle((x, node.height), (width, _ROW), PALE, colour)
    return f"<g><title>{escape(node.told)}</title>{box}{svg.text((x + 6, node.height + 15), words, size=10.5)}</g>"


def _link(low: _Node, high: _Node) -> str:
    (x1, y1), (x2, y2) = low.right, high.left
    if low.column == high.column:
        x2, y2 = high.right
        bend = x1 + 22
        commands = f"M{svg.points_text([(x1, y1)])} C{svg.points_text([(bend, y1), (bend, y2), (x2, y2)])}"
    else:
        middle = (x1 + x2) / 2
        commands = f"M{svg.points_text([(x1, y1)])} C{svg.points_text([(middle, y1), (middle, y2), (x2, y2)])}"
    against = low.against or high.against
    dash = ' stroke-dasharray="4 3"' if against else ""
    colour = SIGN if against else TOOL
    return f'<path d="{commands}" fill="none" stroke="{colour}" stroke-width="1" stroke-opacity="0.55"{dash}/>'
