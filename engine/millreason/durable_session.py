"""The inference engine on durable_rules; the only module that imports it.

The extension is fast, but ordinary calls of it can end the process or lose facts without a word. This wrapper
stays inside the part that was shown to be safe, and calls the extension itself, without the Python host around it
(whose timer threads, swallowed exceptions and ten-second limit have no use here):

* conjunctions of single-fact patterns only; no join, negation, arithmetic, expression, array or null;
* no number reaches its parser: values are sent as text with their type, numbers as 16 hex digits that sort as
  the numbers do. So neither the locale, nor exponents, nor the mixing of types can change a comparison;
* ids, session ids and property names are its own, short, and free of collisions in the 32-bit hashes it compares;
* a session starts with an action of its own (the boot rule), which makes deleting the session safe at any time,
  and ends with another, at the lowest priority, which proves that no fact was dropped and the agenda is empty.
"""

from __future__ import annotations

import json
import struct
import threading
import weakref
from collections.abc import Iterable
from hashlib import sha256
from math import isqrt
from typing import cast

import durable_rules_engine as durable

from millreason.errors import MillreasonError, RuleSetLimitError
from millreason.inference import Action, CompiledTest, Fact, Firing, Ledger, RuleSet, Scalar

MOST_SESSIONS = 1_000
MOST_GROUPS = 480
MOST_TESTS_AT_ONCE = 32
MOST_USES_OF_A_NODE = 250
LONGEST_TEXT = 200
REMEMBERED_FACTS = 20_000
LOWEST_PRIORITY = 65_535
OPENING, CLOSING = "open", "close"
OPERATORS = {"lt": "$lt", "le": "$lte", "gt": "$gt", "ge": "$gte"}

Pattern = dict[str, object]
Node = tuple[int, int]


def encode(value: Scalar) -> str:
    """Return a short text for a value; equal texts mean the same type and the same value."""
    if isinstance(value, bool):
        return f"b{int(value)}"
    if isinstance(value, float):
        return f"n{order_key(value)}"
    if len(value) > LONGEST_TEXT:  # from 65 536 bytes on, the extension compares nothing at all
        return f"h{sha256(value.encode('utf-8', 'surrogatepass')).hexdigest()}"
    return f"t{value}"


def order_key(number: float) -> str:
    """Return 16 hex digits that sort as the numbers do."""
    bits: int = struct.unpack(">Q", struct.pack(">d", number))[0]
    return f"{bits ^ ((1 << 64) - 1 if bits >> 63 else 1 << 63):016x}"


class Layout:
    """Where each test sits: one below the other, groups, and in them the tests of some subjects.

    The extension bears at most 64 pending tests for a fact, about 500 nodes below one node, and 255 uses of one
    node. So a subject's tests are cut into chunks, each in another group, and a busy test gets several nodes.
    """

    def __init__(self, rules: RuleSet) -> None:
        self.subjects = {subject: number for number, subject in enumerate(sorted(rules.subjects))}
        uses = [0] * len(rules.tests)
        self.nodes: list[list[Node]] = []
        for tests in rules.conditions:
            self.nodes.append([(test, (uses[test] + at) // MOST_USES_OF_A_NODE) for at, test in enumerate(tests)])
            for test in tests:
                uses[test] += 1
        self.groups = self._group(self._chunks(rules.tests))

    def _chunks(self, tests: tuple[CompiledTest, ...]) -> list[tuple[int, list[Node]]]:
        chunks: dict[int, list[list[Node]]] = {}
        for test, copy in sorted({node for nodes in self.nodes for node in nodes}):
            own = chunks.setdefault(self.subjects[tests[test].subject], [])
            for chunk in own:
                if len(chunk) < MOST_TESTS_AT_ONCE and all(other != test for other, _ in chunk):
                    chunk.append((test, copy))
                    break
            else:
                own.append([(test, copy)])
        return [(subject, chunk) for subject, own in sorted(chunks.items()) for chunk in own]

    def _group(self, chunks: list[tuple[int, list[Node]]]) -> dict[Node, int]:
        room = max(8, isqrt(sum(len(chunk) for _, chunk in chunks)))
        filled: list[int] = []
        held: list[set[int]] = []
        groups: dict[Node, int] = {}
        for subject, chunk in chunks:
            for number, count in enumerate(filled):
                if subject not in held[number] and count + len(chunk) <= room:
                    break
            else:
                number = len(filled)
                filled.append(0)
                held.append(set())
            filled[number] += len(chunk)
            held[number].add(subject)
            groups.update(dict.fromkeys(chunk, number))
        if len(filled) > MOST_GROUPS:
            raise RuleSetLimitError(
                f"rule set: its tests need {len(filled)} groups, but at most {MOST_GROUPS} are carried safely. "
                "Split the rules into stages of their own."
            )
        return groups


def pattern(test: CompiledTest, number: int, subject: int, group: int) -> Pattern:
    """Return the pattern for one test on a fact of a subject, in a group."""
    tests: list[Pattern] = [{"$ex": {f"g{group}": 1}}]
    bounds = [order_key(cast(float, value)) for _, value in test.values] if is_ordered(test) else []
    if test.op in ("in", "not_in"):
        tests.append({"$ex": {f"s{number}": 1}})
    elif test.op == "between":
        tests += [{"$gte": {f"n{subject}": bounds[0]}}, {"$lte": {f"n{subject}": bounds[1]}}]
    elif is_ordered(test):
        tests.append({OPERATORS[test.op]: {f"n{subject}": bounds[0]}})
    else:
        operand = {f"v{subject}": encode(test.values[0][1])}
        tests.append(operand if test.op == "eq" else {"$neq": operand})
    return {"$and": tests}


def is_ordered(test: CompiledTest) -> bool:
    """Say whether a test compares sizes."""
    return test.op in OPERATORS or test.op == "between"


def write_rules(rules: RuleSet, layout: Layout) -> str:
    """Return the rules in the extension's notation; rules and conditions are named by their numbers."""
    written: dict[str, object] = {}
    for rule, nodes in enumerate(layout.nodes):
        conditions = []
        for place, node in enumerate(nodes):
            test = rules.tests[node[0]]
            subject = layout.subjects[test.subject]
            conditions.append({str(place): pattern(test, node[0], subject, layout.groups[node])})
        written[str(rule)] = {"all": conditions, "dist": 0}
    written["boot"] = {"all": [{"0": {"$ex": {"boot": 1}}}], "pri": LOWEST_PRIORITY}
    return json.dumps(written)


class FactWriter:
    """Turns facts into the extension's notation."""

    def __init__(self, rules: RuleSet, layout: Layout) -> None:
        self._subjects = layout.subjects
        self._groups: dict[int, set[int]] = {}
        self._sets: dict[int, list[tuple[int, CompiledTest]]] = {}
        self._ordered: set[int] = set()
        for node, group in layout.groups.items():
            test = rules.tests[node[0]]
            subject = layout.subjects[test.subject]
            self._groups.setdefault(subject, set()).add(group)
            if test.op in ("in", "not_in"):
                self._sets.setdefault(subject, []).append((node[0], test))
            elif is_ordered(test):
                self._ordered.add(subject)
        self._written: dict[Fact, str] = {}

    def write(self, fact: Fact) -> str:
        """Return the properties of a fact, without its ids, as the inside of a JSON object."""
        written = self._written.get(fact)
        if written is None:
            if len(self._written) >= REMEMBERED_FACTS:
                self._written.clear()
            written = self._written[fact] = json.dumps(self._properties(fact))[1:-1]
        return written

    def _properties(self, fact: Fact) -> dict[str, object]:
        subject = self._subjects[fact.attribute, fact.kind]
        properties: dict[str, object] = {f"v{subject}": encode(fact.value)}
        if isinstance(fact.value, float) and subject in self._ordered:
            properties[f"n{subject}"] = order_key(fact.value)
        for number, test in self._sets.get(subject, ()):
            if test.met_by(fact.value):
                properties[f"s{number}"] = 1
        properties.update({f"g{group}": 1 for group in sorted(self._groups[subject])})
        return properties


class DurableEngine:
    """A rule set compiled for durable_rules."""

    name = "durable"

    def __init__(self, rules: RuleSet) -> None:
        layout = Layout(rules)
        self._rules = rules
        self._writer = FactWriter(rules, layout)
        self._handle: int = durable.create_ruleset("rules", write_rules(rules, layout))
        self._free = [str(number) for number in range(MOST_SESSIONS)]
        self._lock = threading.Lock()
        self._closed = False
        self._release = weakref.finalize(self, durable.delete_ruleset, self._handle)

    def run(self, facts: Iterable[Fact], action: Action) -> list[Firing]:
        """Fire every rule on every choice of facts that meets it."""
        ledger = Ledger(self._rules, facts, action)
        sid = self._take()
        try:
            _Session(self._handle, sid, self._writer).run(ledger)
        finally:
            self._give_back(sid)
        return ledger.firings()

    def close(self) -> None:
        """Free the compiled rules as soon as no session uses them."""
        with self._lock:
            self._closed = True
            if len(self._free) == MOST_SESSIONS:
                self._release()

    def _take(self) -> str:
        with self._lock:
            if self._closed:
                raise RuntimeError("This rule engine is closed. Make a new one.")
            if not self._free:
                raise RuleSetLimitError(
                    f"rule engine: {MOST_SESSIONS + 1} sessions at once, but at most {MOST_SESSIONS} are carried "
                    "safely. Run fewer at a time, or do not run the engine inside its own actions."
                )
            return self._free.pop()

    def _give_back(self, sid: str) -> None:
        with self._lock:
            self._free.append(sid)
            if self._closed and len(self._free) == MOST_SESSIONS:
                self._release()


class _Session:
    """One run: facts go in, started actions come out, until the closing fact comes out last."""

    def __init__(self, handle: int, sid: str, writer: FactWriter) -> None:
        self._handle = handle
        self._sid = sid
        self._writer = writer
        self._facts: list[Fact] = []

    def run(self, ledger: Ledger) -> None:
        opening = f'{{"id":"{OPENING}","sid":"{self._sid}","boot":1}}'
        _, state = durable.assert_fact(self._handle, opening)
        if durable.start_action_for_state(self._handle, state) is None:
            raise MillreasonError("The inference engine did not start. Use the other engine.")
        try:
            self._fire_all(ledger, state)
        finally:
            durable.delete_state(self._handle, self._sid)

    def _fire_all(self, ledger: Ledger, state: int) -> None:
        self._assert(ledger.opening_facts(), f',{{"id":"{CLOSING}","sid":"{self._sid}","boot":1}}')
        last = ""
        while started := durable.complete_and_start_action(self._handle, state):
            [(rule, chosen)] = json.loads(started).items()
            if rule == "boot":
                last = chosen["0"]["id"]
                continue
            last = rule
            facts = tuple(self._facts[int(chosen[str(place)]["id"])] for place in range(len(chosen)))
            self._assert(ledger.fire(int(rule), facts))
        if last != CLOSING:
            raise MillreasonError("The inference engine lost facts. Report this, and use the other engine.")

    def _assert(self, facts: list[Fact], closing: str = "") -> None:
        written = []
        for fact in facts:
            written.append(f'{{"id":"{len(self._facts)}","sid":"{self._sid}",{self._writer.write(fact)}}}')
            self._facts.append(fact)
        batch = ",".join(written) + closing
        if batch:
            durable.assert_facts(self._handle, f"[{batch.lstrip(',')}]")
