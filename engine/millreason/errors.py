"""The errors of the program, one base class and one tree.

MillreasonError
├── DataError            something in a job, rule or knowledge file is wrong; carries every finding at once
├── OutOfRangeError      a formula was given a value outside its range (also a ValueError)
├── RuleActionError      the action of a rule failed while rules were running; carries the rule's id
└── RuleSetLimitError    a rule base exceeds what the inference engine can carry safely
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from difflib import get_close_matches


class MillreasonError(Exception):
    """Any error that this program raises on purpose."""


@dataclass(frozen=True, order=True)
class Finding:
    """One thing that is wrong in a file: where, which field, what was found, what to do."""

    file: str
    line: int
    field: str
    message: str

    def __str__(self) -> str:
        return f"{self.file}:{self.line}: {self.field}: {self.message}"


class DataError(MillreasonError):
    """One or more findings in a data file; the message lists them all, one a line."""

    def __init__(self, findings: Iterable[Finding]) -> None:
        self.findings: tuple[Finding, ...] = tuple(sorted(set(findings)))
        super().__init__("\n".join(str(finding) for finding in self.findings))


class OutOfRangeError(MillreasonError, ValueError):
    """A quantity has a value for which a formula does not hold."""

    def __init__(self, quantity: str, value: object, allowed: str) -> None:
        self.quantity = quantity
        self.value = value
        self.allowed = allowed
        super().__init__(f"{quantity} is {value}, but must be {allowed}.")


class RuleActionError(MillreasonError):
    """The action of a rule failed; the cause is chained."""

    def __init__(self, rule_id: str, cause: BaseException) -> None:
        self.rule_id = rule_id
        super().__init__(f"rule {rule_id}: its action failed: {type(cause).__name__}: {cause}")


class RuleSetLimitError(MillreasonError):
    """A rule set is larger or stranger than the inference engine carries safely."""


def did_you_mean(word: str, known: Sequence[str] | Iterable[str]) -> str:
    """Return ' Did you mean …?' for the nearest known words, or the empty string."""
    near = get_close_matches(word, list(known), n=2, cutoff=0.6)
    return f" Did you mean {' or '.join(repr(name) for name in near)}?" if near else ""
