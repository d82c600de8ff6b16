"""What the durable extension bears badly: each case is refused at load, or cannot come about.

Cases that could end or hang the process run in a process of their own.
"""

from __future__ import annotations

import json
import os
import subprocess
import sys
import time
from itertools import pairwise
from pathlib import Path

import pytest

import millreason
from millreason.errors import MillreasonError, RuleSetLimitError
from millreason.inference import Fact, InferenceRule, Test, engine_names, make_engine
from millreason.inference.durable_notation import (
    MOST_GROUPS,
    MOST_TESTS_AT_ONCE,
    MOST_USES_OF_A_NODE,
    FactWriter,
    Layout,
    order_key,
    write_rules,
)
from millreason.inference.matching import (
    MOST_FACTS,
    MOST_RULES,
    MOST_TESTS,
    MOST_TESTS_PER_ATTRIBUTE,
    MOST_TESTS_PER_RULE,
    MOST_USES_PER_TEST,
    compile_rules,
)

needs_durable = pytest.mark.skipif("durable" not in engine_names(), reason="durable-rules is not installed")
PRELUDE = """
import threading
from millreason.errors import RuleActionError, RuleSetLimitError
from millreason.inference import Fact, InferenceRule, Test, make_engine
def nothing(rule, facts): return []
def fired(rules, facts):
    firings = make_engine(rules, "durable").run(facts, nothing)
    assert firings == make_engine(rules, "twin").run(facts, nothing)
    return len(firings)
"""
DEADLY = {
    "a session deleted before an action completed": """
        def fail(rule, facts): raise ValueError
        engine = make_engine([InferenceRule("R", (Test("a", "eq", 1),))], "durable")
        for _ in range(200):
            try: engine.run([Fact("a", 1)], fail)
            except RuleActionError: pass
            else: raise AssertionError
            assert engine.run([Fact("a", 2)], nothing) == []
        print(len(engine.run([Fact("a", 1)], nothing)))
    """,
    "an empty batch": """
        engine = make_engine([InferenceRule("R", (Test("a", "eq", 1),))], "durable")
        assert engine.run([], nothing) == []
        assert engine.run([Fact("b", 1)], nothing) == []
        print(len(engine.run([Fact("a", 1)], nothing)))
    """,
    "a batch whose first fact is hard to parse": r"""
        values = ['"', "\\", "\\\"", "{", "}],", "\x00", "a\x00b", "\ud800", "\n", "\u2028"]
        values += [1e-05, 1e16, 5e-324, 1.7e308]
        rules = [InferenceRule(f"R{n}", (Test("a", "eq", v),)) for n, v in enumerate(values)]
        for first in values:
            assert fired(rules, [Fact("a", first), *(Fact("a", v) for v in values)]) == len(values)
        print(1)
    """,
    "very many rules on one pattern": """
        rules = [InferenceRule(f"R{n}", (Test("a", "eq", 1),)) for n in range(4000)]
        assert fired(rules, [Fact("a", 1), Fact("a", 2)]) == 4000
        rules = [InferenceRule(f"R{n}", (Test("a", "eq", 1),) * 8) for n in range(256)]
        assert fired(rules, [Fact("a", 1)]) == 256
        print(1)
    """,
    "very many different tests": """
        rules = [InferenceRule(f"R{n}", (Test(f"a{n % 20}", "le", n),)) for n in range(4000)]
        assert fired(rules, [Fact(f"a{n}", 3000) for n in range(20)]) == 1000
        rules = [InferenceRule(f"R{n}", (Test(f"a{n}", "le", n),)) for n in range(4000)]
        assert fired(rules, [Fact(f"a{n}", n) for n in range(4000)]) == 4000
        print(1)
    """,
    "more sessions at once than it can find again": """
        threading.stack_size(256 * 1024)
        engine = make_engine([InferenceRule("R", (Test("a", "eq", 1),))], "durable")
        gate, arrived, results = threading.Event(), threading.Semaphore(0), []
        def wait(rule, facts):
            arrived.release()
            gate.wait()
            return [Fact("a", 1.0)]
        def work():
            try: results.append(len(engine.run([Fact("a", 1)], wait)))
            except RuleSetLimitError as error:
                assert "1001 sessions at once, but at most 1000" in str(error)
                results.append("refused")
                arrived.release()
        threads = [threading.Thread(target=work) for _ in range(1030)]
        for thread in threads: thread.start()
        for thread in threads: arrived.acquire()
        gate.set()
        for thread in threads: thread.join()
        assert results.count(1) == 1000 and results.count("refused") == 30
        print(len(engine.run([Fact("a", 1)], nothing)))
    """,
    "an engine closed and dropped while it runs": """
        engine = make_engine([InferenceRule("R", (Test("a", "ge", 1),))], "durable")
        def close(rule, facts):
            engine.close()
            make_engine([InferenceRule("S", (Test("a", "le", 1),))], "durable").run([Fact("a", 0)], nothing)
            return [Fact("a", min(facts[0].value + 1, 5))]
        firings = engine.run([Fact("a", 1)], close)
        assert [firing.facts[0].value for firing in firings] == [1, 2, 3, 4, 5]
        try: engine.run([], nothing)
        except RuntimeError as error: print("closed" in str(error) and 1)
    """,
}


def run_apart(code: str, timeout: float = 60) -> str:
    """Run code in a process of its own and return what it prints."""
    environment = {**os.environ, "PYTHONPATH": str(Path(millreason.__file__).parents[1])}
    command = [sys.executable, "-W", "error", "-c", PRELUDE + code]
    done = subprocess.run(command, capture_output=True, text=True, timeout=timeout, env=environment, check=False)
    assert done.returncode == 0, f"ended with {done.returncode}: {done.stderr[-2000:]}"
    return done.stdout.strip()


@needs_durable
@pytest.mark.parametrize("case", DEADLY)
def test_the_process_survives(case):
    code = "\n".join(line.removeprefix("        ") for line in DEADLY[case].splitlines())
    assert run_apart(code) == "1"


def every_kind_of_rule() -> list[InferenceRule]:
    tests = [
        Test("a", "eq", 1.5),
        Test("a", "ne", "x"),
        Test("a", "in", (1, "x", True)),
        Test("a", "not_in", ('"', 2)),
        Test("a", "between", (-1e-05, 1e16)),
        *(Test("a", op, 0.1) for op in ("lt", "le", "gt", "ge")),
        Test("b", "eq", "", "missing"),
        Test("a", "eq", "x", "lacks"),
    ]
    return [InferenceRule(f"R{n}", pair) for n, pair in enumerate(pairwise(tests))]


def walk(node: object, seen: list[tuple[str, object]]) -> list[tuple[str, object]]:
    if isinstance(node, dict):
        for key, value in node.items():
            seen.append((key, value))
            walk(value, seen)
    elif isinstance(node, list):
        for value in node:
            walk(value, seen)
    return seen


def test_rules_are_written_without_anything_that_is_unsafe():
    """No join, arithmetic, regular expression, array match, negation or alternative."""
    rules = compile_rules(every_kind_of_rule())
    written = json.loads(write_rules(rules, Layout(rules)))
    operators = {key for key, _ in walk(written, []) if key.startswith("$")}
    assert operators == {"$and", "$ex", "$neq", "$lt", "$lte", "$gt", "$gte"}
    for rule in written.values():
        assert set(rule) <= {"all", "dist", "pri"}
        assert rule["pri"] == 65_535 if "pri" in rule else rule["dist"] == 0
        assert not any(name.endswith(("$not", "$any", "$all")) for pattern in rule["all"] for name in pattern)
    operands = [value for _, value in walk(written, []) if not isinstance(value, dict | list)]
    assert all(isinstance(value, str) or value in (0, 1, 65_535) for value in operands)


def test_no_number_reaches_the_parser_of_the_extension():
    """So no exponent, no missing point, no decimal comma and no mixing of types can change a comparison."""
    rules = compile_rules(every_kind_of_rule())
    writer = FactWriter(rules, Layout(rules))
    written = [writer.write(Fact("a", value)) for value in (1, 1e-05, 1e16, -0.0, True, "3", 3, "x", '"')]
    values = [json.loads(f"{{{text}}}") for text in written]
    assert all(isinstance(v, str) or v == 1 for properties in values for v in properties.values())
    assert len(set(written)) == len(written)


def test_order_keys_sort_as_the_numbers_do():
    numbers = [
        -1.7e308,
        -1e16,
        -2.5,
        -1e-05,
        -5e-324,
        0.0,
        5e-324,
        1e-05,
        0.25,
        0.5,
        1.0,
        9.0,
        10.0,
        1e16,
        1.7e308,
    ]
    keys = [order_key(number) for number in numbers]
    assert keys == sorted(keys)
    assert len(set(keys)) == len(numbers)
    assert {len(key) for key in keys} == {16}, "one must not begin with another, or '<' is wrong"


def fnv(text: str) -> int:
    """Return the FNV-1a hash of 32 bits, by which the extension tells names and ids apart."""
    value = 0x811C9DC5
    for byte in text.encode():
        value = ((value ^ byte) * 0x01000193) & 0xFFFFFFFF
    return value


def test_no_two_names_or_ids_share_a_hash():
    sessions = [str(number) for number in range(1_000)]
    ids = [str(number) for number in range(MOST_FACTS)] + [f"sid-{sid}" for sid in sessions] + ["open", "close"]
    names = ["id", "sid", "boot", "$s", *(f"g{number}" for number in range(MOST_GROUPS))]
    names += [f"{letter}{number}" for letter in "vns" for number in range(MOST_TESTS)]
    for texts in (sessions, ids, names):
        assert len({fnv(text) for text in texts}) == len(texts)


@pytest.mark.parametrize(
    ("rules", "message"),
    [
        (
            [InferenceRule(str(n), (Test("a", "eq", 1),)) for n in range(MOST_RULES + 1)],
            "4001 rules, .* 4000",
        ),
        (
            [InferenceRule(str(n), (Test(f"a{n // 5}", "eq", n), Test(f"b{n // 5}", "eq", n))) for n in range(2001)],
            "4002 different tests, .* 4000",
        ),
        (
            [InferenceRule("R", tuple(Test(f"a{n}", "eq", 1) for n in range(MOST_TESTS_PER_RULE + 1)))],
            "rule R: 17 tests, .* 16",
        ),
        (
            [InferenceRule(str(n), (Test("a", "eq", n),)) for n in range(MOST_TESTS_PER_ATTRIBUTE + 1)],
            "attribute a: 201 different tests on it, .* 200",
        ),
        (
            [InferenceRule(str(n), (Test("a", "eq", 1), Test("a", "eq", 1))) for n in range(2001)],
            f"test a eq 1.0: 4002 uses, .* {MOST_USES_PER_TEST}",
        ),
    ],
    ids=["rules", "tests", "tests per rule", "tests per attribute", "uses of a test"],
)
@pytest.mark.parametrize("kind", engine_names())
def test_limits_are_refused_with_the_limit_the_found_value_and_a_remedy(kind, rules, message):
    with pytest.raises(RuleSetLimitError, match=message + r" are carried safely\. [A-Z].*\."):
        make_engine(rules, kind)


@pytest.mark.parametrize(
    "rules",
    [
        [InferenceRule(str(n), (Test("a", "ge", n % 200), Test("a", "ge", 0))) for n in range(3_800)],
        [InferenceRule(str(n), (Test(f"a{n // 200}", "ge", n % 200),)) for n in range(4_000)],
        [InferenceRule(str(n), (Test(f"a{n}", "ge", n),)) for n in range(4_000)],
        [InferenceRule(str(n), (Test(f"a{n % 500}", "ge", 1),) * 16) for n in range(4_000)],
    ],
    ids=["one busy attribute", "crowded attributes", "many attributes", "repeated tests"],
)
def test_tests_are_spread_so_that_no_table_overflows(rules):
    rule_set = compile_rules(rules)
    layout = Layout(rule_set)
    subjects: dict[tuple[int, tuple[str, str]], list[int]] = {}
    for (test, _), group in layout.groups.items():
        subjects.setdefault((group, rule_set.tests[test].subject), []).append(test)
    uses: dict[tuple[int, int], int] = {}
    for node in (node for nodes in layout.nodes for node in nodes):
        uses[node] = uses.get(node, 0) + 1
    assert max(uses.values()) <= MOST_USES_OF_A_NODE
    assert max(layout.groups.values()) < MOST_GROUPS
    assert all(len(tests) == len(set(tests)) <= MOST_TESTS_AT_ONCE for tests in subjects.values())
    groups_of_subject = [sum(subject == other for _, other in subjects) for subject in rule_set.subjects]
    assert max(groups_of_subject) + MOST_TESTS_AT_ONCE <= 64
    group_sizes = [list(layout.groups.values()).count(group) for group in set(layout.groups.values())]
    assert max(group_sizes) < 256


@needs_durable
@pytest.mark.parametrize(
    ("rules", "facts", "count"),
    [
        ([Test("a", "ge", n) for n in range(200)], [Fact("a", 500)], 200),
        ([Test("a", "in", (1, n + 5)) for n in range(200)], [Fact("a", 1), Fact("a", 7)], 201),
        ([Test("a", "in", (1, 2, 3)), Test("a", "in", (2, 3, 4))], [Fact("a", 2)], 2),
        ([Test("a", "ne", n) for n in range(200)], [Fact("a", 7)], 199),
        ([Test("a", "eq", "x" * 65_536)], [Fact("a", "y" * 65_536), Fact("a", "x" * 65_536)], 1),
        ([Test("a", "eq", 'a"b'), Test("a", "eq", "a")], [Fact("a", "a"), Fact("a", 'a"b')], 2),
    ],
    ids=[
        "pending tests",
        "properties",
        "overlapping sets",
        "unequal",
        "long texts",
        "texts that begin alike",
    ],
)
def test_all_firings_come_at_the_edge_of_the_tables(rules, facts, count):
    base = [InferenceRule(f"R{n:03}", (test,)) for n, test in enumerate(rules)]
    firings = make_engine(base, "durable").run(facts, lambda rule, chosen: [])
    assert len(firings) == count
    assert firings == make_engine(base, "twin").run(facts, lambda rule, chosen: [])


@needs_durable
def test_sixteen_joined_tests_fire():
    tests = tuple(Test(f"a{n}", "ge", n) for n in range(MOST_TESTS_PER_RULE))
    facts = [Fact(f"a{n}", n + more) for n in range(MOST_TESTS_PER_RULE) for more in range(1 + (n < 6))]
    engine = make_engine([InferenceRule("R", tests)], "durable")
    firings = engine.run(facts, lambda rule, chosen: [])
    assert len(firings) == 64
    assert firings == make_engine([InferenceRule("R", tests)], "twin").run(facts, lambda rule, chosen: [])


@needs_durable
@pytest.mark.parametrize("odd", [1e-05, 1e16, 5e-324, "", "\x00", '"', "\\", "\ud800"], ids=ascii)
def test_an_odd_fact_in_a_batch_loses_none_of_its_neighbours(odd):
    engine = make_engine([InferenceRule("R", (Test("a", "ne", "no"),))], "durable")
    facts = [
        Fact("a", 1),
        Fact("b", 1),
        Fact("a", odd),
        Fact("a", 1.0),
        Fact("a", "no"),
        Fact("a", 2),
        Fact("a", odd),
    ]
    firings = engine.run([*facts, *facts], lambda rule, chosen: [])
    assert {firing.facts[0] for firing in firings} == {Fact("a", 1), Fact("a", odd), Fact("a", 2)}


@needs_durable
def test_made_facts_that_nothing_looks_at_or_that_repeat_do_not_stop_the_rest():
    rules = [InferenceRule("A", (Test("a", "eq", 1),)), InferenceRule("B", (Test("b", "ge", 1),))]
    made = [Fact("unseen", 1), Fact("b", 1), Fact("b", 1.0), Fact("a", 1), Fact("b", 0), Fact("b", 2)]
    firings = make_engine(rules, "durable").run([Fact("a", 1)], lambda rule, chosen: made if rule == "A" else [])
    assert [firing.facts[0] for firing in firings] == [Fact("a", 1), Fact("b", 1), Fact("b", 2)]
    assert firings[0].made == (Fact("unseen", 1), Fact("b", 1), Fact("b", 0), Fact("b", 2))


@needs_durable
def test_a_batch_that_is_not_read_to_its_end_is_noticed(monkeypatch):
    extension = pytest.importorskip("durable_rules_engine")
    engine = make_engine([InferenceRule("R", (Test("a", "ge", 1),))], "durable")
    read = extension.assert_facts
    with monkeypatch.context() as patch:
        patch.setattr(extension, "assert_facts", lambda handle, batch: read(handle, batch[: len(batch) // 2]))
        with pytest.raises(MillreasonError, match="lost facts"):
            engine.run([Fact("a", 1), Fact("a", 2)], lambda rule, chosen: [])
    assert len(engine.run([Fact("a", 1), Fact("a", 2)], lambda rule, chosen: [])) == 2


@needs_durable
def test_an_error_of_the_extension_is_one_of_ours(monkeypatch):
    extension = pytest.importorskip("durable_rules_engine")
    engine = make_engine([InferenceRule("R", (Test("a", "ge", 1),))], "durable")
    with monkeypatch.context() as patch:
        patch.setattr(extension, "assert_facts", lambda handle, batch: extension.delete_ruleset(0))
        with pytest.raises(MillreasonError, match=r"engine failed: .* Use the twin"):
            engine.run([Fact("a", 1)], lambda rule, chosen: [])
    assert len(engine.run([Fact("a", 1)], lambda rule, chosen: [])) == 1


@needs_durable
@pytest.mark.parametrize("interrupted", ["assert_fact", "start_action_for_state"])
def test_a_session_that_did_not_start_is_neither_deleted_nor_used_again(monkeypatch, interrupted):
    extension = pytest.importorskip("durable_rules_engine")
    engine = make_engine([InferenceRule("R", (Test("a", "ge", 1),))], "durable")
    deleted, delete = [], extension.delete_state
    monkeypatch.setattr(extension, "delete_state", lambda handle, sid: deleted.append(sid) or delete(handle, sid))

    def interrupt(*given):
        raise KeyboardInterrupt

    for _ in range(3):
        with monkeypatch.context() as patch:
            patch.setattr(extension, interrupted, interrupt)
            with pytest.raises(KeyboardInterrupt):
                engine.run([Fact("a", 1)], lambda rule, chosen: [])
        assert deleted == []
    for _ in range(3):
        assert len(engine.run([Fact("a", 1)], lambda rule, chosen: [])) == 1
    assert len(deleted) == 3
    engine.close()


@needs_durable
def test_no_fact_of_thousands_is_taken_for_another():
    engine = make_engine([InferenceRule("R", (Test("a", "not_in", ("x",)),))], "durable")
    facts = [Fact("a", value) for n in range(3_000) for value in (n, str(n), n + 0.5)]
    assert len(engine.run(facts, lambda rule, chosen: [])) == 9_000


@needs_durable
@pytest.mark.slow
def test_an_action_may_take_long():
    engine = make_engine([InferenceRule("R", (Test("a", "le", 2),))], "durable")

    def sleep(rule, chosen):
        time.sleep(31 * (chosen[0].value == 1))
        return [Fact("a", chosen[0].value + 1)]

    assert len(engine.run([Fact("a", 1)], sleep)) == 2


GROWTH = """
import gc, pathlib, resource
def used(): return int(pathlib.Path("/proc/self/statm").read_text().split()[1]) * resource.getpagesize()
rules = [InferenceRule(f"R{n}", (Test(f"a{n % 40}", "ge", n), Test("b", "eq", "x"))) for n in range(60)]
engine = make_engine(rules, "durable")
def fail(rule, facts): raise ValueError
def session(n):
    facts = [Fact(f"a{k}", 30 + n % 7 + k / 8) for k in range(30)] + [Fact("b", "x")]
    try: engine.run(facts, fail if n % 3 == 0 else nothing)
    except RuleActionError: pass
def compile(n): make_engine(rules, "durable").run([Fact("b", "x"), Fact("a0", n)], nothing)
for n in range(WARM): WORK(n)
gc.collect()
before = used()
for n in range(MORE): WORK(n)
gc.collect()
print(used() - before)
"""


@needs_durable
@pytest.mark.skipif(sys.platform != "linux", reason="reads the memory in use from /proc")
@pytest.mark.parametrize(
    ("work", "warm", "more"),
    [("session", 500, 3_000), ("compile", 20, 100)],
    ids=["sessions", "dropped engines"],
)
def test_memory_stays_flat(work, warm, more):
    code = GROWTH.replace("WORK", work).replace("WARM", str(warm)).replace("MORE", str(more))
    assert int(run_apart(code)) < 4 * 2**20
