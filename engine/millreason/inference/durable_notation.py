"""How rules and facts are written for the durable engine, so that it cannot misread or choke on them.

* Only conjunctions of single-fact patterns: no join, negation, arithmetic, expression, array or null.
* No number reaches its parser: values are sent as text with their type, numbers as 16 hex digits that sort
  as the numbers do, so that neither locale, exponent nor mixed types can change a comparison.
* Names are short, made here, and free of collisions in the 32-bit hashes that the extension compares.
* Tests are spread over groups, so that none of its fixed tables overflows.
"""

from __future__ import annotations

import json
import struct
from collections.abc import Callable
from hashlib import sha256
from math import isqrt
from typing import cast

from millreason.errors import RuleSetLimitError
from millreason.inference.matching import CompiledTest, Fact, RuleSet, Scalar

MOST_GROUPS = 480
MOST_TESTS_AT_ONCE = 32
MOST_USES_OF_A_NODE = 250
LONGEST_TEXT = 200
REMEMBERED_FACTS = 20_000
LOWEST_PRIORITY = 65_535
BOOT = "boot"
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
    """Where each test sits: groups below the root, and in each group the tests of some subjects.

    The extension bears at most 64 pending tests for a fact, about 500 nodes below one node, and 255 uses of
    one node. So a subject's tests are cut into chunks, each in another group, and a busy test gets several
    nodes.
    """

    def __init__(self, rules: RuleSet) -> None:
        self.subjects = {subject: number for number, subject in enumerate(sorted(rules.subjects))}
        uses = [0] * len(rules.tests)
        self.nodes: list[list[Node]] = []
        for tests in rules.conditions:
            nodes = []
            for test in tests:
                nodes.append((test, uses[test] // MOST_USES_OF_A_NODE))
                uses[test] += 1
            self.nodes.append(nodes)
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
                f"rule set: its tests need {len(filled)} groups, but at most {MOST_GROUPS} are "
                "carried safely. Split the rules into stages of their own."
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
        operand: Pattern = {f"v{subject}": encode(test.values[0][1])}
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
    written[BOOT] = {"all": [{"0": {"$ex": {BOOT: 1}}}], "pri": LOWEST_PRIORITY}
    return json.dumps(written)


class FactWriter:
    """Turns facts into the extension's notation."""

    def __init__(self, rules: RuleSet, layout: Layout) -> None:
        self._subjects = layout.subjects
        self._groups: dict[int, set[int]] = {}
        self._sets: dict[int, list[tuple[int, Callable[[Fact], bool]]]] = {}
        self._ordered: set[int] = set()
        for node, group in layout.groups.items():
            test = rules.tests[node[0]]
            subject = layout.subjects[test.subject]
            self._groups.setdefault(subject, set()).add(group)
            if test.op in ("in", "not_in"):
                self._sets.setdefault(subject, []).append((node[0], test.predicate()))
            elif is_ordered(test):
                self._ordered.add(subject)
        self._written: dict[Fact, str] = {}

    def write(self, fact: Fact) -> str:
        """Return the properties of a fact, without its ids, as the inside of a JSON object."""
        written = self._written.get(fact)
        if written is None:
            if len(self._written) >= REMEMBERED_FACTS:
                self._written.clear()
            written = self._written[fact] = json.dumps(self._properties(fact), separators=(",", ":"))[1:-1]
        return written

    def _properties(self, fact: Fact) -> dict[str, object]:
        subject = self._subjects[fact.attribute, fact.kind]
        properties: dict[str, object] = {f"v{subject}": encode(fact.value)}
        if isinstance(fact.value, float) and subject in self._ordered:
            properties[f"n{subject}"] = order_key(fact.value)
        for number, holds in self._sets.get(subject, ()):
            if holds(fact):
                properties[f"s{number}"] = 1
        properties.update({f"g{group}": 1 for group in sorted(self._groups[subject])})
        return properties
