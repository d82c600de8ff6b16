"""What a choice finds on its way: the candidates tried, the evidence, the questions, limits and cautions."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Any

from millreason.candidates import Candidate, Ledgers
from millreason.cut_plan import Plan
from millreason.facts import Situation
from millreason.inference import Firing
from millreason.job import Job
from millreason.measures import Meter
from millreason.rulebook import Conclusion
from millreason.spindle import Spindle
from millreason.stages import Tuning
from millreason.trace import FiringRecord, LimitRecord, Question


@dataclass(frozen=True)
class Tried:
    """One candidate with its plan, what the judging rules said and where it stands."""

    candidate: Candidate
    plan: Plan
    facts: Mapping[str, Any]
    limits: tuple[LimitRecord, ...]
    lowered: float
    reasons: tuple[str, ...]
    firings: tuple[Firing, ...]
    situation: Situation

    @property
    def standing(self) -> float:
        """Evidence less what the judging rules took off."""
        return self.candidate.evidence - self.lowered


@dataclass
class Outcome:
    """Everything a choice has found, from which the answer is written."""

    job: Job
    situation: Situation
    tuning: Tuning
    firings: list[FiringRecord] = field(default_factory=list)
    questions: dict[str, Question] = field(default_factory=dict)
    conditions: dict[str, Question] = field(default_factory=dict)
    contradictions: list[str] = field(default_factory=list)
    notes: list[str] = field(default_factory=list)
    unit_doubts: list[str] = field(default_factory=list)
    ledgers: Ledgers | None = None
    separate: dict[str, str] = field(default_factory=dict)
    stands: list[Tried] = field(default_factory=list)
    rejected: list[Tried] = field(default_factory=list)
    limits: list[LimitRecord] = field(default_factory=list)
    excluded: list[LimitRecord] = field(default_factory=list)
    cautions: list[tuple[FiringRecord, Conclusion]] = field(default_factory=list)
    candidates_possible: int = 0
    meter: Meter | None = None
    spindle: Spindle | None = None

    @property
    def must_ask(self) -> bool:
        """Whether a question is open without which nothing can be defended."""
        return any(question.need == "must" for question in self.questions.values())
