"""The inference engine on durable_rules; the only module that imports it.

The extension is fast, but ordinary calls of it can end the process or lose facts without a word. This wrapper
stays inside the part that was shown to be safe (``durable_notation`` says which) and calls the extension
itself, without the Python host around it, whose timer threads, swallowed exceptions and ten-second limit have
no use here. A session starts with an action of its own (the boot rule), which makes it safe to delete at any
time, and ends with another, at the lowest priority, which proves that no fact was dropped and that the agenda
is empty.
"""

from __future__ import annotations

import json
import threading
import weakref
from collections.abc import Iterable

import durable_rules_engine as durable

from millreason.errors import MillreasonError, RuleSetLimitError
from millreason.inference.durable_notation import BOOT, FactWriter, Layout, write_rules
from millreason.inference.matching import Action, Fact, Firing, Ledger, RuleSet

MOST_SESSIONS = 1_000
OPENING, CLOSING = "open", "close"


class DurableEngine:
    """A rule set compiled for durable_rules."""

    name = "durable"

    def __init__(self, rules: RuleSet) -> None:
        layout = Layout(rules)
        self._rules = rules
        self._writer = FactWriter(rules, layout)
        self._handle: int = durable.create_ruleset("rules", write_rules(rules, layout))
        self._free = [str(number) for number in range(MOST_SESSIONS)]
        self._live = 0
        self._lock = threading.Lock()
        self._closed = False
        self._release = weakref.finalize(self, durable.delete_ruleset, self._handle)
        self._release.atexit = False  # the process gives everything back anyway

    def run(self, facts: Iterable[Fact], action: Action) -> list[Firing]:
        """Fire every rule on every choice of facts that meets it."""
        ledger = Ledger(self._rules, facts, action)
        session = _Session(self._handle, self._take(), self._writer)
        try:
            session.start()
            session.fire_all(ledger)
        except durable.error as cause:
            raise MillreasonError(f"The durable engine failed: {cause}. Use the twin, and report this.") from cause
        finally:
            self._give_back(session)
        return ledger.firings()

    def close(self) -> None:
        """Free the compiled rules as soon as no session uses them."""
        with self._lock:
            self._closed = True
            self._release_if_idle()

    def _take(self) -> str:
        with self._lock:
            if self._closed:
                raise RuntimeError("This rule engine is closed. Make a new one.")
            if not self._free:
                raise RuleSetLimitError(
                    f"rule engine: {MOST_SESSIONS + 1} sessions at once, but at most {MOST_SESSIONS} are "
                    "carried safely. Run fewer at a time, and do not run an engine inside its own actions."
                )
            self._live += 1
            return self._free.pop()

    def _give_back(self, session: _Session) -> None:
        with self._lock:
            if session.started:  # to delete one that never started would end the process
                durable.delete_state(self._handle, session.sid)
                self._free.append(session.sid)
            self._live -= 1
            self._release_if_idle()

    def _release_if_idle(self) -> None:
        if self._closed and not self._live:
            self._release()


class _Session:
    """One run: facts go in, started actions come out, the closing fact last."""

    def __init__(self, handle: int, sid: str, writer: FactWriter) -> None:
        self.sid = sid
        self.started = False
        self._handle = handle
        self._writer = writer
        self._facts: list[Fact] = []
        self._state = 0

    def start(self) -> None:
        """Open the session inside the action of the boot rule."""
        _, self._state = durable.assert_fact(self._handle, self._boot(OPENING))
        self.started = durable.start_action_for_state(self._handle, self._state) is not None
        if not self.started:
            raise MillreasonError("The durable engine does not start a session. Use the twin.")

    def fire_all(self, ledger: Ledger) -> None:
        """Assert the opening facts and run actions until none is left."""
        self._assert([*self._written(ledger.opening_facts()), self._boot(CLOSING)])
        last = ""
        while started := durable.complete_and_start_action(self._handle, self._state):
            [(rule, chosen)] = json.loads(started).items()
            if rule == BOOT:
                last = chosen["0"]["id"]
                continue
            last = rule
            facts = tuple(self._facts[int(chosen[str(place)]["id"])] for place in range(len(chosen)))
            if new := ledger.fire(int(rule), facts):
                self._assert(self._written(new))
        if last != CLOSING:
            raise MillreasonError("The durable engine lost facts of a session. Use the twin, and report this.")

    def _boot(self, fact_id: str) -> str:
        return f'{{"id":"{fact_id}","sid":"{self.sid}","{BOOT}":1}}'

    def _written(self, facts: Iterable[Fact]) -> list[str]:
        written = []
        for fact in facts:
            written.append(f'{{"id":"{len(self._facts)}","sid":"{self.sid}",{self._writer.write(fact)}}}')
            self._facts.append(fact)
        return written

    def _assert(self, written: list[str]) -> None:
        durable.assert_facts(self._handle, f"[{','.join(written)}]")
