"""The argument about an answer as frozen records: why, why not, how far it holds, what the assumptions do."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Literal

from millreason.trace import BasisRecord, Evidence, LimitRecord, Plain, Question

Kind = Literal["conclusion", "rule", "fact", "calculation", "limit", "note"]
Loss = Literal["chosen", "ruled_out", "rejected", "outweighed", "not_made"]


@dataclass(frozen=True)
class Because:
    """One statement of an argument and what it rests on, down to what was given, looked up or assumed."""

    text: str
    kind: Kind
    name: str = ""
    origin: str = ""
    how: str = ""
    basis: BasisRecord | None = None
    because: list[Because] = field(default_factory=list)


@dataclass(frozen=True)
class Result:
    """What one run came to: the verdict, the picks where a cutter stands, what binds or is missing where none does."""

    verdict: str
    picks: dict[str, str]
    stopped_by: list[str]
    cautions: list[str]
    passes_across: float | None = None
    layers: float | None = None
    time_min: float | None = None
    standing: float = 0.0
    contradictions: int = 0

    @property
    def stands(self) -> bool:
        """Whether a cutter stands."""
        return bool(self.picks)


@dataclass(frozen=True)
class Change:
    """A change of the job that was run: the new values, their text, and what came of it."""

    values: dict[str, Plain]
    text: str
    then: str
    picks: dict[str, str]


@dataclass(frozen=True)
class Side:
    """One option in a comparison: its ledger, the best whole tool with it, and what judging took off that."""

    option: str
    balance: float
    evidence: list[Evidence]
    tool: str = ""
    tool_evidence: float = 0.0
    lowered: float = 0.0
    reasons: list[str] = field(default_factory=list)


@dataclass(frozen=True)
class WhyNot:
    """Why an option is not the pick, and the nearest changes that would make it so; each was run."""

    pick: str
    option: str
    outcome: Loss
    text: str
    because: list[Because] = field(default_factory=list)
    sides: list[Side] = field(default_factory=list)
    limits: list[LimitRecord] = field(default_factory=list)
    nearest: list[Change] = field(default_factory=list)
    runs: int = 0


@dataclass(frozen=True)
class End:
    """One end of an interval: the last value that was run with the same picks, the first with others, and those."""

    inside: float
    beyond: float
    then: str
    changed: dict[str, str]
    verdict: str


@dataclass(frozen=True)
class Interval:
    """How far one number may move while the picks stay; an end that is None was not met up to the bound."""

    fact: str
    unit: str
    value: float
    origin: str
    bounds: list[float]
    low: End | None
    high: End | None


@dataclass(frozen=True)
class Alternative:
    """Another value of a word or flag, and what it makes of the picks."""

    value: Plain
    then: str
    changed: dict[str, str]
    verdict: str


@dataclass(frozen=True)
class Options:
    """The other values of a word or flag: those that leave the picks alone, and those that change them."""

    fact: str
    value: Plain
    origin: str
    same: list[Plain]
    other: list[Alternative]


@dataclass(frozen=True)
class Assumption:
    """What one assumed fact does to the answer over its plausible values; effect 0 means it changes no pick."""

    fact: str
    value: Plain
    unit: str
    rule: str
    varied: str
    effect: float
    text: str
    question: Question | None = None


@dataclass(frozen=True)
class Robustness:
    """Whether the picks survive the bands of force, wear and hardness, with the margin, in one line."""

    holds: bool
    line: str
    force_low: float
    force_high: float
    force_margin_low: float | None
    force_margin_high: float | None
    hardness: list[float]
    runs: list[Alternative] = field(default_factory=list)


@dataclass(frozen=True)
class Explanation:
    """The whole argument about one answer; every statement about what would be was run."""

    why: list[Because] = field(default_factory=list)
    why_not: list[WhyNot] = field(default_factory=list)
    intervals: list[Interval] = field(default_factory=list)
    options: list[Options] = field(default_factory=list)
    assumptions: list[Assumption] = field(default_factory=list)
    robustness: Robustness | None = None
    runs: int = 0
    confirmed: int = 0
