"""Named figures of the trade, cutting fluids, and how much a piece of evidence weighs."""

from __future__ import annotations

from typing import Self

from pydantic import Field, model_validator

from millreason.errors import MillreasonError, did_you_mean
from millreason.provenance import KnowledgeFile, Many, Record, Text


class PracticeValue(Record):
    """A figure of the trade: one value, a span, or one figure per case."""

    says: Text
    unit: str
    basis: Text
    value: float | None = None
    low: float | None = None
    high: float | None = None
    by: dict[str, float] = Field(default_factory=dict)
    basis_of: dict[str, str] = Field(default_factory=dict)
    note: str | None = None

    @model_validator(mode="after")
    def _something_in_order(self) -> Self:
        line = [number for number in (self.low, self.value, self.high) if number is not None]
        if not line and not self.by:
            raise ValueError("give a value, a span (low, high) or figures per case (by)")
        if line != sorted(line):
            raise ValueError(f"low, value and high must rise (found: {line})")
        if unknown := set(self.basis_of) - set(self.by):
            raise ValueError(f"basis_of names cases that 'by' does not have: {', '.join(sorted(unknown))}")
        return self

    @property
    def number(self) -> float:
        """The value itself; the entry must have one."""
        if self.value is None:
            raise MillreasonError(f"'{self.says}' has no single value; use its span or its cases.")
        return self.value

    def of(self, case: str) -> float:
        """Return the figure of one case."""
        if case not in self.by:
            known = ", ".join(self.by) or "none"
            message = f"'{self.says}' has no figure for {case!r}.{did_you_mean(case, self.by)} Cases: {known}."
            raise MillreasonError(message)
        return self.by[case]

    def basis_label(self, case: str | None = None) -> str:
        """Return the label of the basis, of one case if it has its own."""
        return self.basis_of.get(case, self.basis) if case is not None else self.basis


class Fluid(Record):
    """A cutting fluid and what it is for and against."""

    id: Text
    title: Text
    good_for: Text = Field(alias="for")
    bad_for: Text = Field(alias="against")
    extraction: bool
    basis: Text


class PracticeFile(KnowledgeFile):
    """knowledge/practice.yaml."""

    values: dict[str, PracticeValue]
    fluids: Many[Fluid] = ()


class Strength(Record):
    """A level of evidence, its weight in the ledger and its meaning."""

    id: Text
    weight: int = Field(gt=0)
    meaning: Text
    basis: Text


class RuleOut(Record):
    """What it means that an option is ruled out."""

    meaning: Text
    basis: Text


class StrengthsFile(KnowledgeFile):
    """knowledge/strengths.yaml."""

    strengths: Many[Strength]
    rule_out: RuleOut
