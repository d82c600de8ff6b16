"""The vocabulary: every fact, its meaning, unit, limits and question, read from one file."""

from __future__ import annotations

from functools import cached_property
from pathlib import Path
from typing import Literal

from pydantic import BaseModel, ConfigDict, Field

from millreason.yaml_source import read_model, read_yaml

Kind = Literal["number", "choice", "choices", "flag", "text", "numbers", "curve"]


class FactDefinition(BaseModel):
    """What one fact means and who may set it."""

    model_config = ConfigDict(extra="forbid", frozen=True, strict=True)

    means: str
    kind: Kind
    unit: str = ""
    range: list[float] | None = None
    plausible: list[float] | None = None
    options: list[str | float] = Field(default_factory=list)
    from_: Literal["job", "looked_up", "computed", "rules"] = Field(alias="from")
    key: str | None = None
    ask: str | None = None
    because: str | None = None


class Adjustable(BaseModel):
    """A value of the plan that rules may tune, and how several rules combine."""

    model_config = ConfigDict(extra="forbid", frozen=True, strict=True)

    means: str
    how: Literal["factor", "at_least", "at_most"]


class Vocabulary(BaseModel):
    """All facts and adjustables by name."""

    model_config = ConfigDict(extra="forbid", frozen=True, strict=True)

    facts: dict[str, FactDefinition]
    adjustables: dict[str, Adjustable]

    @cached_property
    def job_keys(self) -> dict[str, str]:
        """Job-file keys ('work.width') and the facts they set ('work.width_mm')."""
        return {
            definition.key or _without_unit(name, definition.unit): name
            for name, definition in self.facts.items()
            if definition.from_ == "job"
        }

    @cached_property
    def picks(self) -> dict[str, FactDefinition]:
        """The picks by bare name ('pitch')."""
        return {name.removeprefix("pick."): fact for name, fact in self.facts.items() if name.startswith("pick.")}

    @cached_property
    def order(self) -> dict[str, int]:
        """Place of every fact in the file, the order in which facts are printed and asked."""
        return {name: place for place, name in enumerate(self.facts)}


_SUFFIXES = {
    "mm": "_mm", "mm2": "_mm2", "um": "_um", "kg": "_kg", "N": "_n", "kW": "_kw", "N.m": "_nm", "rpm": "_rpm",
    "mm/min": "_mm_min", "m/min": "_m_min", "min": "_min", "HB": "_hb", "N/um": "_n_um", "currency/h": "_per_h",
}  # fmt: skip


def _without_unit(name: str, unit: str) -> str:
    return name.removesuffix(_SUFFIXES.get(unit, "\0"))


def load_vocabulary(root: Path) -> Vocabulary:
    """Load the vocabulary below a data root; see `yaml_source.read_model` for errors."""
    return read_model(read_yaml(root / "knowledge" / "vocabulary.yaml", "knowledge/vocabulary.yaml"), Vocabulary)
